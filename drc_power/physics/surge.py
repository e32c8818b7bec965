"""Clamps under surge: voltage at the surge current, rated power over pulse length and temperature.

| symbol | name here | unit | meaning |
|---|---|---|---|
| V_C, I_PP | v_rated_v, i_rated_a | V, A | clamping voltage and the peak current that it is rated at |
| R_d | r_dynamic_ohm | ohm | slope of the clamping line |
| P(t) | powers_w | W | rated pulse power over the length of the pulse |
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import nan_where, refuse_unless

LONGEST_S = 0.05
"""Length to which the root law of pulse power is believed: a few 10 ms, common practice."""


def clamp_v(i_a, v_rated_v, i_rated_a, r_dynamic_ohm):
    """Clamping voltage at another current: V(I) = V_C − R_d · (I_PP − I).

    i_a: surge current [A], shape (corner,).
    v_rated_v: clamping voltage at the rated peak current [V].
    i_rated_a: rated peak current [A].
    r_dynamic_ohm: slope of the line [ohm].
    Returns the voltage [V], shape (corner,).
    Source: ST SM15T data sheet, application notes on the clamping line.

    >>> round(clamp_v(20.0, 53.3, 28.0, 0.4), 6)
    50.1
    """
    return v_rated_v - r_dynamic_ohm * (i_rated_a - i_a)


def surge_current_a(v_surge_v, r_source_ohm, v_rated_v, i_rated_a, r_dynamic_ohm):
    """Current of a surge through its source resistance into a clamp: I = (V_s − V(I))/R_s, solved for I.

    v_surge_v: open-circuit voltage of the surge [V], shape (corner,).
    r_source_ohm: resistance of its source, above 0 [ohm].
    v_rated_v: clamping voltage at the rated peak current [V].
    i_rated_a: rated peak current [A].
    r_dynamic_ohm: slope of the clamping line [ohm].
    Returns the current [A], shape (corner,), 0 for a surge that does not reach the clamp.
    Source: Ohm's law; makers' notes give I_PP = (V_s − V_C)/R_s.

    >>> round(float(surge_current_a(87.0, 2.0, 53.3, 28.0, 0.4)), 4)
    18.7083
    """
    onset_v = clamp_v(0.0, v_rated_v, i_rated_a, r_dynamic_ohm)
    return np.maximum(np.subtract(v_surge_v, onset_v), 0.0) / (r_source_ohm + r_dynamic_ohm)


def breakdown_v(t_c, v_25_v, tempco_per_k):
    """Breakdown voltage at temperature: V(T) = V_25 · (1 + α · (T − 25 °C)).

    t_c: junction temperature [°C], shape (corner,).
    v_25_v: breakdown voltage at 25 °C [V].
    tempco_per_k: temperature coefficient, about 1e-3 for 30 V and more [1/K].
    Returns the voltage [V], shape (corner,).
    Source: ST SM15T data sheet: ΔV_BR = α_T · (T − 25) · V_BR.

    >>> round(breakdown_v(125.0, 40.0, 1e-3), 6)
    44.0
    """
    return v_25_v * (1.0 + tempco_per_k * (t_c - 25.0))


def pulse_power_w(t_s, lengths_s, powers_w, exponent=0.5):
    """Rated pulse power over the length of the pulse, straight in log-log; from one point on P ~ t^−n.

    t_s: length of the pulse, above 0 [s], any shape.
    lengths_s: lengths of the rated points, rising [s], shape (point,).
    powers_w: rated powers, above 0 and not rising [W], shape (point,).
    exponent: n past the last point [-]; 0.45 to 0.5, the larger allows less.
    Returns the rated power with the clamp at 25 °C [W], shape of t_s: before the first point its own, which
    reads low; NaN past 50 ms or the last point, whichever is longer, where steady heat decides.
    Raises OutsideRange for points that cannot be drawn.
    Source: MIL-PRF-19500/500 (1500 W at 1.0 ms) for the form of the rating; root law from memory.

    >>> [round(float(p), 1) for p in pulse_power_w([20e-6, 1e-3, 10e-3, 0.1], [1e-3], [600.0])]
    [600.0, 600.0, 189.7, nan]
    """
    lengths_s, powers_w = np.asarray(lengths_s, dtype=float), np.asarray(powers_w, dtype=float)
    refuse_unless(lengths_s.size and np.all((lengths_s > 0.0) & (powers_w > 0.0)), "pulse ratings must be above 0")
    refuse_unless(
        (np.diff(lengths_s) > 0.0) & (np.diff(powers_w) <= 0.0), "longer pulses must be rated for no more power"
    )
    t_s = np.asarray(t_s, dtype=float)
    within_s = np.clip(t_s, lengths_s[0], lengths_s[-1])
    rated_w = np.exp(np.interp(np.log(within_s), np.log(lengths_s), np.log(powers_w)))
    longest_s = max(LONGEST_S, lengths_s[-1])
    outside = ~((t_s > 0.0) & (t_s <= longest_s))
    past = np.maximum(np.where(outside, 1.0, t_s) / lengths_s[-1], 1.0)
    return nan_where(outside, rated_w * past**-exponent)


def temperature_share(t_c, tj_max_c):
    """Share of the pulse rating that is left at temperature: 1 at 25 °C, straight to 0 at the rated junction.

    t_c: temperature of the clamp before the pulse [°C], any shape.
    tj_max_c: rated junction temperature, above 25 °C [°C].
    Returns the share [-], shape of t_c, never above 1.
    Source: P4KE data sheet, derating figure from 25 °C to 175 °C.

    >>> [float(k) for k in temperature_share([-40.0, 100.0, 200.0], 175.0)]
    [1.0, 0.5, 0.0]
    """
    refuse_unless(np.greater(tj_max_c, 25.0), "the rated junction temperature must lie above 25 °C")
    return np.clip(np.subtract(tj_max_c, t_c) / np.subtract(tj_max_c, 25.0), 0.0, 1.0)
