"""Mean and rms currents of switched circuits: PWM with ripple, buck, boost, sinusoidal bridges.

| symbol | name here | unit | meaning |
|---|---|---|---|
| D | duty | - | share of the period that a switch conducts |
| I, ΔI | i_a, ripple_a | A | mean current while conducting; its ripple, peak to peak |
| L, f | l_h, f_switch_hz | H, Hz | inductance, switching frequency |
| M, φ | modulation, phase_rad | -, rad | depth of sinusoidal modulation; angle of the load |

Valid for continuous current, straight ripple and ideal edges. Arrays broadcast, corners first.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import nan_where


def switched_mean_a(i_a, duty):
    """Mean of a current that flows for a share of the period: I_av = D · I.

    i_a: mean current while it flows [A], shape (corner,).
    duty: share of the period, 0 to 1 [-], shape (corner,).
    Returns the mean [A], shape (corner,); NaN for a duty outside its range.
    Source: definition of the mean.

    >>> float(switched_mean_a(10.0, 0.25))
    2.5
    """
    return nan_where(_no_duty(duty), np.multiply(i_a, duty))


def switched_rms_a(i_a, duty, ripple_a=0.0):
    """Rms of a current that flows for a share of the period, with triangular ripple: √(D · (I² + ΔI²/12)).

    i_a: mean current while it flows [A], shape (corner,).
    duty: share of the period, 0 to 1 [-], shape (corner,).
    ripple_a: ripple, peak to peak [A], shape (corner,).
    Returns the rms [A], shape (corner,); NaN for a duty outside its range.
    Source: definition of the rms; a straight ramp of height ΔI has the variance ΔI²/12.

    >>> round(float(switched_rms_a(10.0, 0.25, 4.0)), 4)
    5.0332
    """
    squared = np.square(i_a) + np.square(ripple_a) / 12.0
    no_duty = _no_duty(duty)
    return nan_where(no_duty, np.sqrt(np.where(no_duty, 0.0, duty) * squared))


def ripple_rms_a(ripple_a):
    """Rms of a triangular ripple by itself, as an output capacitor carries it: ΔI/√12.

    ripple_a: ripple, peak to peak [A], shape (corner,).
    Returns the rms [A], shape (corner,).
    Source: variance of a straight ramp.

    >>> round(float(ripple_rms_a(3.4641)), 4)
    1.0
    """
    return np.divide(ripple_a, np.sqrt(12.0))


def buck_duty(v_in_v, v_out_v):
    """Duty of the high side of an ideal buck converter: D = V_out/V_in.

    v_in_v: input voltage, above 0 [V], shape (corner,).
    v_out_v: output voltage [V], shape (corner,).
    Returns the duty [-], shape (corner,); NaN for an output above the input.
    Source: volt-second balance of the inductor.

    >>> float(buck_duty(24.0, 6.0))
    0.25
    """
    duty = np.divide(v_out_v, v_in_v)
    return nan_where(_no_duty(duty), duty)


def boost_duty(v_in_v, v_out_v):
    """Duty of the low side of an ideal boost converter: D = 1 − V_in/V_out.

    v_in_v: input voltage [V], shape (corner,).
    v_out_v: output voltage, above 0 [V], shape (corner,).
    Returns the duty [-], shape (corner,); NaN for an output below the input.
    Source: volt-second balance of the inductor.

    >>> float(boost_duty(6.0, 24.0))
    0.75
    """
    duty = 1.0 - np.divide(v_in_v, v_out_v)
    return nan_where(_no_duty(duty), duty)


def buck_ripple_a(v_in_v, v_out_v, l_h, f_switch_hz):
    """Ripple of a buck's inductor: ΔI = V_out · (1 − D)/(L · f).

    v_in_v: input voltage, above 0 [V], shape (corner,).
    v_out_v: output voltage [V], shape (corner,).
    l_h: inductance at this current [H].
    f_switch_hz: switching frequency [Hz].
    Returns the ripple, peak to peak [A], shape (corner,); largest at the highest input.
    Source: v = L · di/dt.

    >>> round(float(buck_ripple_a(24.0, 6.0, 15e-6, 300e3)), 4)
    1.0
    """
    return np.multiply(v_out_v, 1.0 - buck_duty(v_in_v, v_out_v)) / (l_h * f_switch_hz)


def boost_ripple_a(v_in_v, v_out_v, l_h, f_switch_hz):
    """Ripple of a boost's inductor: ΔI = V_in · D/(L · f).

    v_in_v: input voltage [V], shape (corner,).
    v_out_v: output voltage, above 0 [V], shape (corner,).
    l_h: inductance at this current [H].
    f_switch_hz: switching frequency [Hz].
    Returns the ripple, peak to peak [A], shape (corner,); largest at an input of half the output.
    Source: v = L · di/dt.

    >>> round(float(boost_ripple_a(6.0, 24.0, 15e-6, 300e3)), 4)
    1.0
    """
    return np.multiply(v_in_v, boost_duty(v_in_v, v_out_v)) / (l_h * f_switch_hz)


def buck_input_rms_a(i_out_a, duty, ripple_a=0.0):
    """Ripple current of a buck's input capacitor: √(I² · D · (1 − D) + D · ΔI²/12).

    i_out_a: output current [A], shape (corner,).
    duty: duty of the high side [-], shape (corner,).
    ripple_a: ripple of the inductor, peak to peak [A], shape (corner,).
    Returns the rms of what the capacitor carries [A], shape (corner,); largest near a duty of one half. The
    output capacitor of a boost carries the same with the inductor's current for I.
    Source: rms² of the switch current less the square of its mean, which the source supplies.

    >>> round(float(buck_input_rms_a(10.0, 0.5)), 4)
    5.0
    """
    rms_a, mean_a = switched_rms_a(i_out_a, duty, ripple_a), switched_mean_a(i_out_a, duty)
    return np.sqrt(np.maximum(rms_a**2 - mean_a**2, 0.0))


def continuous(i_a, ripple_a):
    """Whether a converter with a diode conducts without gaps: I ≥ ΔI/2.

    i_a: mean current of the inductor [A], shape (corner,).
    ripple_a: ripple of the inductor, peak to peak [A], shape (corner,).
    Returns true where it does [-], shape (corner,). With a synchronous switch the formulas hold regardless.
    Source: the lowest point of a triangular ripple lies ΔI/2 under its mean.

    >>> continuous([1.0, 3.0], 4.0).tolist()
    [False, True]
    """
    return np.greater_equal(i_a, np.divide(ripple_a, 2.0))


def sine_switch_mean_a(i_peak_a, modulation, phase_rad):
    """Mean current of one switch of a bridge that makes a sine: Î · (1/(2π) + M · cos φ/8).

    i_peak_a: amplitude of the load current [A], shape (corner,).
    modulation: depth of modulation, 0 to 1 [-], shape (corner,).
    phase_rad: angle of the load; π more gives the diode beside the switch [rad], shape (corner,).
    Returns the mean [A], shape (corner,); NaN for a modulation outside its range.
    Source: mean of Î · sin θ · (1 + M · sin(θ + φ))/2 over the half wave; common practice for drives.

    >>> round(float(sine_switch_mean_a(10.0, 0.8, 0.0)), 4)
    2.5915
    """
    mean_a = np.multiply(i_peak_a, 1.0 / (2.0 * np.pi) + np.multiply(modulation, np.cos(phase_rad)) / 8.0)
    return nan_where(_no_duty(modulation), mean_a)


def sine_switch_rms_a(i_peak_a, modulation, phase_rad):
    """Rms current of one switch of a bridge that makes a sine: Î · √(1/8 + M · cos φ/(3π)).

    i_peak_a: amplitude of the load current [A], shape (corner,).
    modulation: depth of modulation, 0 to 1 [-], shape (corner,).
    phase_rad: angle of the load; π more gives the diode beside the switch [rad], shape (corner,).
    Returns the rms [A], shape (corner,); NaN for a modulation outside its range.
    Source: mean square of Î · sin θ, weighted with the duty, over the half wave; common practice for drives.

    >>> round(float(sine_switch_rms_a(10.0, 0.8, 0.0)), 4)
    4.5813
    """
    no_modulation = _no_duty(modulation)
    depth = np.where(no_modulation, 0.0, modulation) * np.cos(phase_rad)
    return nan_where(no_modulation, i_peak_a * np.sqrt(1.0 / 8.0 + depth / (3.0 * np.pi)))



def three_phase_input_mean_a(i_peak_a, modulation, phase_rad):
    """Mean current from the supply of a three-phase bridge: I = 3/4 · M · Î · cos φ.

    i_peak_a: amplitude of the load currents [A], shape (corner,).
    modulation: amplitude of the phase voltage over half the supply, 0 to 1 [-], shape (corner,).
    phase_rad: angle of the load [rad], shape (corner,).
    Returns the mean [A], shape (corner,); NaN for a modulation outside its range.
    Source: power balance, 3/2 · Û · Î · cos φ over the supply with Û = M · V/2.

    >>> float(three_phase_input_mean_a(10.0, 0.8, 0.0))
    6.0
    """
    return nan_where(_no_duty(modulation), 0.75 * np.multiply(modulation, i_peak_a) * np.cos(phase_rad))


def three_phase_input_rms_a(i_peak_a, modulation, phase_rad):
    """Rms current of the supply's return under a three-phase bridge: Î · √(√3 · M/π · (1/4 + cos² φ)).

    i_peak_a: amplitude of the load currents [A], shape (corner,).
    modulation: amplitude of the phase voltage over half the supply, 0 to 1 [-], shape (corner,).
    phase_rad: angle of the load [rad], shape (corner,).
    Returns the rms with the mean in it [A], shape (corner,); NaN for a modulation outside its range. Valid for a
    switching frequency far above the output's and load currents without ripple.
    Source: Kolar and Round, Analytical calculation of the RMS current stress on the DC-link capacitor of
    voltage-PWM converter systems, IEE Proceedings 153(4), 2006 (from memory; held against quadrature in the tests).

    >>> round(float(three_phase_input_rms_a(10.0, 0.8, 0.0)), 4)
    7.4252
    """
    no_modulation = _no_duty(modulation)
    depth = np.where(no_modulation, 0.0, modulation)
    squared = np.sqrt(3.0) * depth / np.pi * (0.25 + np.cos(phase_rad) ** 2)
    return nan_where(no_modulation, i_peak_a * np.sqrt(squared))


def _no_duty(duty):
    return ~(np.greater_equal(duty, 0.0) & np.less_equal(duty, 1.0))
