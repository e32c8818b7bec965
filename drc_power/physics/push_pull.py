"""Push-pull output stages: class B on resistive and reactive loads, class AB by its bound.

| symbol | name here | unit | meaning |
|---|---|---|---|
| V_CC | v_supply_v | V | supply of one side, ±V_CC; half the rail of a stage with one supply |
| V_p | v_peak_v | V | amplitude of the sinusoidal output |
| Z, φ | z_ohm, phase_rad | ohm, rad | magnitude and angle of the load, current lagging for φ > 0 |
| θ | angle_rad | rad | angle of the output current, which a device carries from 0 to π |

Each device carries one half wave of the current, whatever the phase: i = (V_p/Z) · sin θ, and meanwhile sees
V_CC − V_p · sin(θ + φ). Arrays broadcast; the first axis is the corner or sample.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import nan_where

N_ANGLES = 361
"""Angles at which the peak of a half wave is looked for before it is refined."""


def class_b_supply_w(v_supply_v, v_peak_v, z_ohm):
    """Power from both supplies of a class-B stage: P = 2 · V_CC · V_p/(π · Z).

    v_supply_v: supply of one side [V], shape (corner,).
    v_peak_v: amplitude of the output, 0 to `v_supply_v` [V], shape (corner,).
    z_ohm: magnitude of the load impedance, above 0 [ohm], shape (corner,).
    Returns the mean power [W], shape (corner,), NaN outside the range of the amplitude.
    Source: common practice (textbooks on amplifiers); the mean of a half sine is 1/π of its peak.

    >>> round(float(class_b_supply_w(30.0, 30.0, 16.0)), 2)
    35.81
    """
    supply_w = 2.0 / np.pi * np.multiply(v_supply_v, v_peak_v) / z_ohm
    return nan_where(_outside(v_supply_v, v_peak_v, 0.0), supply_w)


def class_b_output_w(v_peak_v, z_ohm, phase_rad=0.0):
    """Power into the load: P = V_p² · cos φ/(2 · Z).

    v_peak_v: amplitude of the output [V], shape (corner,).
    z_ohm: magnitude of the load impedance, above 0 [ohm], shape (corner,).
    phase_rad: angle of the load [rad].
    Returns the mean power [W], shape (corner,).
    Source: definition of real power.

    >>> round(float(class_b_output_w(30.0, 16.0)), 3)
    28.125
    """
    return np.square(v_peak_v) * np.cos(phase_rad) / (2.0 * np.asarray(z_ohm))


def class_b_device_loss_w(v_supply_v, v_peak_v, z_ohm, phase_rad=0.0):
    """Mean loss of one of the two devices: P = V_p/Z · (V_CC/π − V_p · cos φ/4), exact for ideal class B.

    v_supply_v: supply of one side [V], shape (corner,).
    v_peak_v: amplitude of the output, 0 to `v_supply_v` [V], shape (corner,).
    z_ohm: magnitude of the load impedance, above 0 [ohm], shape (corner,).
    phase_rad: angle of the load, −π/2 to π/2 [rad].
    Returns the mean loss [W], shape (corner,), NaN outside the ranges of amplitude and angle.
    Source: the integral of device voltage times current over the half wave; φ = 0 is the textbooks' formula.

    >>> round(float(class_b_device_loss_w(30.0, 60.0 / np.pi, 16.0)), 2)
    5.7
    """
    mean_v = np.divide(v_supply_v, np.pi) - np.multiply(v_peak_v, np.cos(phase_rad)) / 4.0
    return nan_where(_outside(v_supply_v, v_peak_v, phase_rad), np.divide(v_peak_v, z_ohm) * mean_v)


def class_b_worst_amplitude_v(v_supply_v, phase_rad=0.0, v_peak_max_v=np.inf):
    """Amplitude at which the devices are hottest: V_p = 2 · V_CC/(π · cos φ), or the largest swing if less.

    v_supply_v: supply of one side [V], shape (corner,).
    phase_rad: angle of the load, −π/2 to π/2 [rad].
    v_peak_max_v: largest amplitude that the stage can give [V]; left out, the supply.
    Returns the amplitude [V], shape (corner,).
    Source: derivative of `class_b_device_loss_w` by amplitude; φ = 0 is the textbooks' 2/π of the supply.

    >>> round(float(class_b_worst_amplitude_v(30.0)), 3)
    19.099
    """
    cosine = np.maximum(np.cos(phase_rad), 1e-12)
    swing_v = np.minimum(v_peak_max_v, v_supply_v)
    return np.minimum(2.0 * np.asarray(v_supply_v, dtype=float) / (np.pi * cosine), swing_v)


def class_b_worst_loss_w(v_supply_v, z_ohm, phase_rad=0.0, v_peak_max_v=np.inf):
    """Loss of one device at its worst output: V_CC²/(π² · Z · cos φ) where the swing reaches it.

    v_supply_v: supply of one side [V], shape (corner,).
    z_ohm: magnitude of the load impedance, above 0 [ohm], shape (corner,).
    phase_rad: angle of the load, −π/2 to π/2 [rad].
    v_peak_max_v: largest amplitude that the stage can give [V]; left out, the supply.
    Returns the mean loss [W], shape (corner,).
    Source: as `class_b_worst_amplitude_v`; φ = 0 is half of the textbooks' 2 · V_CC²/(π² · R).

    >>> round(2 * float(class_b_worst_loss_w(35.0, 8.0)), 2)
    31.03
    """
    worst_v = class_b_worst_amplitude_v(v_supply_v, phase_rad, v_peak_max_v)
    return class_b_device_loss_w(v_supply_v, worst_v, z_ohm, phase_rad)


def class_ab_device_loss_bound_w(class_b_loss_w, v_supply_v, i_quiescent_a):
    """Upper bound for one device of a class-AB stage: P ≤ P_B + V_CC · I_q.

    class_b_loss_w: loss of one device in class B at the same output [W], shape (corner,).
    v_supply_v: supply of one side [V], shape (corner,).
    i_quiescent_a: idle current through both devices [A], shape (corner,).
    Returns the bound [W], shape (corner,), exact with no signal. Valid where the two currents i and i′ keep
    i − i′ equal to the output and i · i′ ≤ I_q², as translinear bias does: then i ≤ output + I_q throughout.
    Source: algebra on the translinear relation, common practice in output stages.

    >>> round(class_ab_device_loss_bound_w(5.70, 30.0, 0.05), 2)
    7.2
    """
    return class_b_loss_w + v_supply_v * i_quiescent_a


def class_b_locus(v_supply_v, v_peak_v, z_ohm, phase_rad, angle_rad):
    """Voltage and current of one device along its half wave, for comparison with the safe area.

    v_supply_v: supply of one side [V], shape (corner,).
    v_peak_v: amplitude of the output [V], shape (corner,).
    z_ohm: magnitude of the load impedance, above 0 [ohm], shape (corner,).
    phase_rad: angle of the load [rad], shape (corner,).
    angle_rad: angle of the output current, 0 to π [rad], shape (angle,).
    Returns (voltage [V], current [A]), each of shape (corner, angle).
    Source: Kirchhoff's voltage law.

    >>> v_v, i_a = class_b_locus(30.0, 20.0, 8.0, 0.0, [np.pi / 2])
    >>> v_v.round(6).tolist(), i_a.round(6).tolist()
    ([10.0], [2.5])
    """
    corner = np.broadcast_arrays(v_supply_v, v_peak_v, z_ohm, phase_rad)
    v_supply_v, v_peak_v, z_ohm, phase_rad = (x[..., np.newaxis] for x in corner)
    v_v = v_supply_v - v_peak_v * np.sin(np.add(angle_rad, phase_rad))
    return v_v, v_peak_v / z_ohm * np.sin(angle_rad)


def class_b_peak_w(v_supply_v, v_peak_v, z_ohm, phase_rad=0.0):
    """Highest power in a device within its half wave: max of V_p/Z · sin θ · (V_CC − V_p · sin(θ + φ)).

    v_supply_v: supply of one side [V], shape (corner,).
    v_peak_v: amplitude of the output, 0 to `v_supply_v` [V], shape (corner,).
    z_ohm: magnitude of the load impedance, above 0 [ohm], shape (corner,).
    phase_rad: angle of the load, −π/2 to π/2 [rad].
    Returns the peak power [W], shape (corner,), NaN outside the ranges of amplitude and angle.
    Source: Kirchhoff's voltage law; resistive and at half the supply it is V_CC²/(4 · R).

    >>> round(float(class_b_peak_w(30.0, 30.0, 8.0)), 3)
    28.125
    """
    angles_rad = np.linspace(0.0, np.pi, N_ANGLES)
    power_w = np.prod(class_b_locus(v_supply_v, v_peak_v, z_ohm, phase_rad, angles_rad), axis=0)
    best = np.clip(np.argmax(power_w, axis=-1), 1, N_ANGLES - 2)[..., np.newaxis]
    before_w, at_w, after_w = (np.take_along_axis(power_w, best + step, axis=-1)[..., 0] for step in (-1, 0, 1))
    # The parabola through the three best angles; its error falls with the fourth power of their distance.
    curvature_w = np.maximum(2.0 * at_w - before_w - after_w, np.finfo(float).tiny)
    peak_w = at_w + (after_w - before_w) ** 2 / (8.0 * curvature_w)
    return nan_where(_outside(v_supply_v, v_peak_v, phase_rad), peak_w)


def _outside(v_supply_v, v_peak_v, phase_rad):
    amplitude_fits = np.greater_equal(v_peak_v, 0.0) & np.less_equal(v_peak_v, v_supply_v)
    return ~(amplitude_fits & (np.abs(phase_rad) <= np.pi / 2.0))
