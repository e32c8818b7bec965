"""The safe operating area of a transistor: digitised curves over voltage, pulse length and case temperature.

| symbol | name here | unit | meaning |
|---|---|---|---|
| V, I | v_v, currents_a | V, A | drain-source or collector-emitter voltage; drain or collector current |
| t | t_pulse_s | s | length of a rectangular pulse |
| T_C, T_j,max | t_case_c, tj_max_c | °C | case temperature; rated junction temperature |

A curve is a pair (voltages [V], currents [A]) drawn for a case at 25 °C, voltages rising; two points at one
voltage draw a vertical line, on which the later one counts. `pulses` are pairs (length [s], curve), lengths
rising; `dc` is the curve for any length, or None. Every function works on arrays of any shape that broadcast.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import OutsideRange, nan_where, refuse_unless

T_DATA_SHEET_C = 25.0
"""Case temperature for which data sheets draw the safe area."""


def curve_current_a(v_v, voltages_v, currents_a):
    """One curve, straight in log-log: I = I_k · (V/V_k)^n, n = ln(I_k+1/I_k)/ln(V_k+1/V_k).

    v_v: voltage across the device, a magnitude [V], any shape.
    voltages_v: abscissae, above 0 and not falling [V], shape (point,).
    currents_a: ordinates, above 0 [A], shape (point,).
    Returns the allowed current with the case at 25 °C [A], shape of v_v: the first point's left of it, 0
    right of the last, NaN where the voltage is NaN.
    Raises OutsideRange for a curve that cannot be drawn on logarithmic paper.
    Source: formats contract, envelope: straight lines in log-log.

    >>> curve = [2.2, 10.0, 60.0], [50.0, 8.0, 0.6]
    >>> [round(float(i), 4) for i in curve_current_a([1.0, 10.0, 24.0, 60.0, 60.1], *curve)]
    [50.0, 8.0, 2.2565, 0.6, 0.0]
    """
    voltages_v, currents_a = _checked_curve(voltages_v, currents_a)
    v_v = np.asarray(v_v, dtype=float)
    k = np.clip(np.searchsorted(voltages_v, v_v, side="right") - 1, 0, voltages_v.size - 1)
    exponent = np.append(_slopes(voltages_v, currents_a), 0.0)[k]
    current_a = currents_a[k] * (np.maximum(v_v, voltages_v[0]) / voltages_v[k]) ** exponent
    return nan_where(np.isnan(v_v), np.where(v_v > voltages_v[-1], 0.0, current_a))


def pulse_current_a(v_v, t_pulse_s, pulses, dc=None):
    """All curves: between two pulse lengths I = a · t^m at each voltage, straight in log-log over time.

    v_v: voltage across the device, a magnitude [V], any shape.
    t_pulse_s: length of the pulse, infinity for steady state [s], broadcasts with v_v.
    pulses: pairs (length [s], (voltages [V], currents [A])), lengths rising; may be empty.
    dc: (voltages [V], currents [A]) of the curve for any length, or None.
    Returns the allowed current with the case at 25 °C [A]. Shorter than the shortest uses the shortest;
    longer than the longest uses `dc`, NaN without one: m is never carried on. NaN for a negative length.
    Source: Texas Instruments SLVA673A, Robust Hot Swap Design, section 2.3.2.

    >>> pulses = [(1e-3, ([60.0], [30.0])), (10e-3, ([60.0], [6.0]))]
    >>> round(float(pulse_current_a(60.0, 2e-3, pulses)), 4)
    18.4804
    """
    at_length = lambda curve: curve_current_a(v_v, *curve)  # noqa: E731
    return _between_lengths(np.asarray(v_v, dtype=float), t_pulse_s, pulses, dc, at_length)


def case_factor(t_case_c, tj_max_c, *, at_most=np.inf):
    """Share of the 25 °C safe area that is left at another case: k = (T_j,max − T_C)/(T_j,max − 25 °C).

    t_case_c: case temperature [°C], any shape.
    tj_max_c: rated junction temperature, above 25 °C [°C].
    at_most: ceiling of the factor [-]. The formula gives more than 1 for a case below 25 °C and is applied as
        it stands; 1 is the cautious choice, since bond wires and thermal instability do not profit from cold.
    Returns the factor [-], shape of t_case_c, 0 for a case above the rating.
    Raises OutsideRange for a rated temperature of 25 °C or less.
    Source: Texas Instruments SLVA673A, eq. 5.

    >>> float(case_factor(85.0, 175.0))
    0.6
    """
    refuse_unless(np.greater(tj_max_c, T_DATA_SHEET_C), "the rated junction temperature must lie above 25 °C")
    return np.clip(np.subtract(tj_max_c, t_case_c) / np.subtract(tj_max_c, T_DATA_SHEET_C), 0.0, at_most)


def safe_current_a(v_v, t_pulse_s, t_case_c, tj_max_c, pulses, dc=None, *, scaling="current", factor_at_most=np.inf):
    """The safe area at the actual case temperature, by one of two rules.

    Current scaling multiplies the whole 25 °C curve by `case_factor`. Power scaling does so only where power
    limits: the level stretch of a curve, which the package limits, stays, and left of its end the reduced
    power goes on along I ~ 1/V until it meets that level. Power scaling therefore never allows less.

    v_v: voltage across the device, a magnitude [V], any shape.
    t_pulse_s: length of the pulse, infinity for steady state [s], broadcasts with v_v.
    t_case_c: case temperature [°C], broadcasts with v_v.
    tj_max_c: rated junction temperature, above 25 °C [°C].
    pulses: pairs (length [s], (voltages [V], currents [A])), lengths rising; may be empty.
    dc: (voltages [V], currents [A]) of the curve for any length, or None.
    scaling: "current" or "power" [word].
    factor_at_most: ceiling of the factor, see `case_factor` [-].
    Returns the allowed current [A], NaN where no curve answers.
    Source: Texas Instruments SLVA673A, eq. 5; formats contract, envelope; power scaling is common practice.

    >>> pulses = [(1e-3, ([60.0], [30.0])), (10e-3, ([60.0], [6.0]))]
    >>> round(float(safe_current_a(60.0, 2e-3, 85.0, 175.0, pulses)), 4)
    11.0882
    """
    factor = case_factor(t_case_c, tj_max_c, at_most=factor_at_most)
    if scaling == "current":
        return factor * pulse_current_a(v_v, t_pulse_s, pulses, dc)
    if scaling != "power":
        raise OutsideRange(f"the safe area is scaled by current or by power, not by {scaling}")
    shape_v = np.asarray(v_v, dtype=float) + np.zeros_like(factor)
    at_length = lambda curve: _power_scaled_a(shape_v, factor, *curve)  # noqa: E731
    return _between_lengths(shape_v, t_pulse_s, pulses, dc, at_length)


def power_line_a(v_v, zth_k_per_w, t_case_c, tj_max_c):
    """Current that just heats the junction to its rating: I = (T_j,max − T_C)/(Z_th(t) · V).

    v_v: voltage across the device, a magnitude [V], any shape.
    zth_k_per_w: transient thermal impedance, junction to case, for the length of the pulse [K/W].
    t_case_c: case temperature [°C].
    tj_max_c: rated junction temperature [°C].
    Returns the current [A], infinite at 0 V, 0 for a case at the rating or above. It knows nothing of package
    current, breakdown or thermal instability, and may lie far above a real safe area at high voltage.
    Source: Infineon, Linear Mode Operation and Safe Operating Diagram of Power-MOSFETs, V1.1, 2017, section 2.1.

    >>> round(float(power_line_a(40.0, 1.5209, 25.0, 200.0)), 3)
    2.877
    """
    rise_k = np.maximum(np.subtract(tj_max_c, t_case_c), 0.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        current_a = rise_k / np.multiply(zth_k_per_w, v_v)
    return np.where(rise_k == 0.0, 0.0, current_a)[()]


def instability_gain(v_v, zth_k_per_w, alpha_a_per_k):
    """Electrothermal loop gain of a transistor in linear mode: S = V · Z_th(t) · dI/dT; unstable above 1.

    v_v: voltage across the device, a magnitude [V], any shape.
    zth_k_per_w: transient thermal impedance for the length of the operation [K/W].
    alpha_a_per_k: temperature coefficient of the current at constant gate voltage, at this current [A/K].
    Returns the loop gain [-]; at or below 0 past the zero-tempco point, where heat lowers the current.
    Valid for a chip at one temperature; hot spots set in earlier.
    Source: Infineon, Linear Mode Operation and Safe Operating Diagram of Power-MOSFETs, V1.1, 2017, section 2.1;
    Spirito et al., ISPS 2002.

    >>> round(instability_gain(24.0, 1.2, 0.02), 6)
    0.576
    """
    return v_v * zth_k_per_w * alpha_a_per_k


def second_breakdown_factor(t_case_c, tj_max_c, share_at_max):
    """Share of the 25 °C second-breakdown current left at another case: k = 1 − (1 − s) · (T_C − 25)/(T_j,max − 25).

    t_case_c: case temperature [°C], any shape.
    tj_max_c: rated junction temperature, above 25 °C [°C].
    share_at_max: s, what is left at the rated temperature [-]. Sheets drawn for a case at 25 °C give it by a
        derating curve, commonly 0.4 to 0.5; sheets drawn for the peak junction temperature do not derate: 1.
    Returns the factor [-], 1 below 25 °C and 0 for a case above the rating.
    Source: onsemi 2N3055 (case at 25 °C) and 2N6052 (peak junction) data sheets, notes to the safe-area figures.

    >>> [round(float(k), 6) for k in second_breakdown_factor([25.0, 112.5, 200.0], 200.0, 0.4)]
    [1.0, 0.7, 0.4]
    """
    refuse_unless(np.greater(tj_max_c, T_DATA_SHEET_C), "the rated junction temperature must lie above 25 °C")
    warmth = np.maximum(np.subtract(t_case_c, T_DATA_SHEET_C), 0.0) / np.subtract(tj_max_c, T_DATA_SHEET_C)
    return np.where(np.greater(t_case_c, tj_max_c), 0.0, 1.0 - (1.0 - share_at_max) * warmth)


def bjt_safe_current_a(second_breakdown_a, factor, thermal_a):
    """Safe current of a bipolar transistor, the lower of second breakdown and heat: I = min(k · I_s/b, I_th).

    second_breakdown_a: current of the drawn curve at this voltage and length [A], any shape.
    factor: `second_breakdown_factor` of the case [-].
    thermal_a: `power_line_a` at the actual case temperature [A].
    Returns the allowed current [A], NaN where either is unknown. Pulse curves hold to 10 % duty.
    Source: onsemi 2N3055, MJ2955 data sheet: of two limits at each point the lower applies.

    >>> float(bjt_safe_current_a(2.87, 0.7, 1.44))
    1.44
    """
    return np.minimum(np.multiply(second_breakdown_a, factor), thermal_a)


def _checked_curve(voltages_v, currents_a):
    voltages_v, currents_a = np.asarray(voltages_v, dtype=float), np.asarray(currents_a, dtype=float)
    refuse_unless(voltages_v.ndim == 1 and voltages_v.shape == currents_a.shape, "a curve needs a current per voltage")
    positive = (voltages_v > 0) & (currents_a > 0) & np.isfinite(voltages_v) & np.isfinite(currents_a)
    refuse_unless(voltages_v.size and positive.all(), "a curve needs voltages and currents above 0")
    refuse_unless(np.diff(voltages_v) >= 0, "the voltages of a curve must rise from point to point")
    return voltages_v, currents_a


def _slopes(voltages_v, currents_a):
    """Exponents between neighbours; a vertical line is never read by its slope and gets 0."""
    decades = np.diff(np.log(voltages_v))
    return np.divide(np.diff(np.log(currents_a)), decades, out=np.zeros_like(decades), where=decades > 0)


def _between_lengths(v_v, t_pulse_s, pulses, dc, at_length):
    """Currents of each length's curve, blended over the length of the pulse."""
    refuse_unless(len(pulses) or dc is not None, "a safe area needs at least one curve")
    t_pulse_s = np.asarray(t_pulse_s, dtype=float)
    beyond_a = at_length(dc) if dc is not None else np.nan
    unanswered = np.isnan(v_v) | ~(t_pulse_s >= 0)
    if not len(pulses):
        return nan_where(unanswered, beyond_a)
    lengths_s = np.array([length_s for length_s, _ in pulses], dtype=float)
    refuse_unless((lengths_s > 0) & np.isfinite(lengths_s), "a pulse length must be above 0 s")
    refuse_unless(np.diff(lengths_s) > 0, "pulse lengths must rise from curve to curve")
    within_a = _power_law(t_pulse_s, lengths_s, [at_length(curve) for _, curve in pulses])
    return nan_where(unanswered, np.where(t_pulse_s > lengths_s[-1], beyond_a, within_a))


def _power_law(t_pulse_s, lengths_s, rows_a):
    """I_k^(1−w) · I_k+1^w with w the share of the way in ln t; 0 on either side of a gap gives 0 within it."""
    if lengths_s.size == 1:
        return rows_a[0]
    t_s = np.clip(np.nan_to_num(t_pulse_s, nan=lengths_s[0], posinf=lengths_s[-1]), lengths_s[0], lengths_s[-1])
    k = np.minimum(np.searchsorted(lengths_s, t_s, side="right") - 1, lengths_s.size - 2)
    share = np.log(t_s / lengths_s[k]) / np.log(lengths_s[k + 1] / lengths_s[k])
    rows_a = np.array(np.broadcast_arrays(*rows_a, share)[:-1])
    k = np.broadcast_to(k, rows_a.shape[1:])[np.newaxis]
    shorter_a, longer_a = (np.take_along_axis(rows_a, k + step, axis=0)[0] for step in (0, 1))
    return shorter_a ** (1.0 - share) * longer_a**share


def _power_scaled_a(v_v, factor, voltages_v, currents_a):
    """One curve under power scaling: level where the package limits, the rest times `factor`."""
    drawn_a = curve_current_a(v_v, voltages_v, currents_a)
    level_a = np.max(currents_a)
    corner_v = np.asarray(voltages_v, dtype=float)[np.flatnonzero(np.asarray(currents_a) == level_a)[-1]]
    on_level = v_v < corner_v
    with np.errstate(divide="ignore"):
        power_limited_a = np.where(on_level, level_a * corner_v / np.where(on_level, v_v, 1.0), drawn_a)
    hot_a = np.where(factor == 0.0, 0.0, factor * power_limited_a)
    return np.minimum(hot_a, np.where(on_level, drawn_a, level_a))
