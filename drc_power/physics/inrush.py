"""Charging a capacitor bank through a pass element: how long, how hot, along which path of voltage and current.

| symbol | name here | unit | meaning |
|---|---|---|---|
| C | c_f | F | capacitance behind the pass element |
| ΔV | v_step_v | V | voltage across the pass element at the start: source less what the bank already holds |
| I_C, I_L | i_charge_a, i_load_a | A | current into the bank; load current drawn meanwhile |
| v, i | v_v, i_a | V, A | voltage across and current through the pass element |

The pass element carries I_C + I_L and sees v falling from ΔV. Arrays broadcast; corners first, time last.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import nan_where

N_SAMPLES = 65
"""Samples of a path that is not straight."""


def slew_current_a(c_f, slew_v_per_s):
    """Current into a bank whose voltage is made to rise evenly: I = C · dv/dt.

    c_f: capacitance [F], shape (corner,).
    slew_v_per_s: rate of the output's rise [V/s], shape (corner,).
    Returns the charging current [A], shape (corner,).
    Source: definition of capacitance.

    >>> round(slew_current_a(1000e-6, 1000.0), 6)
    1.0
    """
    return c_f * slew_v_per_s


def charge_time_s(c_f, v_step_v, i_charge_a):
    """Time that a constant current takes: t = C · ΔV/I_C.

    c_f: capacitance [F], shape (corner,).
    v_step_v: voltage across the pass element at the start [V], shape (corner,).
    i_charge_a: current into the bank: a limit less the load current [A], shape (corner,).
    Returns the time [s], shape (corner,), infinite where the load leaves nothing to charge with.
    Source: definition of capacitance.

    >>> round(float(charge_time_s(1000e-6, 24.0, 1.0)), 6)
    0.024
    """
    charging = np.greater(i_charge_a, 0.0)
    time_s = np.multiply(c_f, v_step_v) / np.where(charging, i_charge_a, 1.0)
    return nan_where(np.isnan(i_charge_a), np.where(charging, time_s, np.inf))


def charge_energy_j(c_f, v_step_v, i_charge_a, i_load_a=0.0):
    """Heat in the pass element at constant current: E = C · ΔV²/2 · (1 + I_L/I_C).

    c_f: capacitance [F], shape (corner,).
    v_step_v: voltage across the pass element at the start [V], shape (corner,).
    i_charge_a: current into the bank [A], shape (corner,).
    i_load_a: load current drawn meanwhile [A], shape (corner,).
    Returns the energy [J], shape (corner,), infinite where the load leaves nothing to charge with.
    Source: half the energy is lost in any series charge from 0 V, the load's share by time; SLVA673A, figure 7.

    >>> round(float(charge_energy_j(1000e-6, 24.0, 1.0)), 6)
    0.288
    """
    mean_w = np.multiply(v_step_v, np.add(i_charge_a, i_load_a)) / 2.0
    return mean_w * charge_time_s(c_f, v_step_v, i_charge_a)


def charge_path(c_f, v_step_v, i_charge_a, i_load_a=0.0):
    """Path of the pass element at constant current: v falls evenly from ΔV to 0.

    c_f: capacitance [F], shape (corner,).
    v_step_v: voltage across the pass element at the start [V], shape (corner,).
    i_charge_a: current into the bank [A], shape (corner,).
    i_load_a: load current drawn meanwhile [A], shape (corner,).
    Returns (times [s], voltages [V], currents [A]), each of shape (corner, 2): power is straight between.
    Source: Kirchhoff's laws; slew- and current-limited switches alike.

    >>> [x.round(6).tolist() for x in charge_path(1000e-6, 24.0, 1.0, 0.2)]
    [[0.0, 0.024], [24.0, 0.0], [1.2, 1.2]]
    """
    time_s = charge_time_s(c_f, v_step_v, i_charge_a)
    start_v, total_a, time_s = np.broadcast_arrays(v_step_v, np.add(i_charge_a, i_load_a), time_s)
    nothing = np.zeros_like(time_s)
    ends = (nothing, time_s), (start_v, nothing), (total_a, total_a)
    return tuple(np.stack(pair, axis=-1) for pair in ends)


def power_limited_time_s(c_f, v_step_v, p_limit_w, i_limit_a=np.inf, i_load_a=0.0):
    """Time under a power limit that gives way to a current limit: the path of `power_limited_path`.

    Without load t = C/2 · (ΔV²/P + P/I²) for a start above P/I, C · ΔV/I below it.

    c_f: capacitance [F], shape (corner,).
    v_step_v: voltage across the pass element at the start [V], shape (corner,).
    p_limit_w: power limit, above 0 [W], shape (corner,).
    i_limit_a: limit of the total current [A], shape (corner,).
    i_load_a: load current drawn meanwhile [A], shape (corner,).
    Returns the time [s], shape (corner,), infinite where the load takes all that a limit lets through.
    Source: Texas Instruments LM5069 data sheet, method of start-up time (from memory), re-derived.

    >>> round(float(power_limited_time_s(1000e-6, 24.0, 48.0, 10.0)), 6)
    0.00624
    """
    knee_v = np.minimum(np.divide(p_limit_w, i_limit_a), v_step_v)
    limited_s = _power_limited_from_v_to_v(c_f, v_step_v, knee_v, p_limit_w, i_load_a)
    last_s = charge_time_s(c_f, knee_v, np.where(np.isinf(i_limit_a), 1.0, np.subtract(i_limit_a, i_load_a)))
    return limited_s + last_s


def power_limited_path(c_f, v_step_v, p_limit_w, i_limit_a=np.inf, i_load_a=0.0):
    """Path of the pass element under a power limit, i = P/v, then under a current limit.

    c_f: capacitance [F], shape (corner,).
    v_step_v: voltage across the pass element at the start [V], shape (corner,).
    p_limit_w: power limit, above 0 [W], shape (corner,).
    i_limit_a: limit of the total current [A], shape (corner,).
    i_load_a: load current drawn meanwhile [A], shape (corner,).
    Returns (times [s], voltages [V], currents [A]), each of shape (corner, sample); voltages fall evenly from
    sample to sample. Without a current limit the path ends where the voltage is 1/65 of its start.
    Source: Kirchhoff's laws; C · dv/dt = −(P/v − I_L).

    >>> t_s, v_v, i_a = power_limited_path(1000e-6, 24.0, 48.0, 10.0)
    >>> round(float(t_s[-1]), 6), round(float(i_a[0]), 3), round(float(i_a[-1]), 3)
    (0.00624, 2.0, 10.0)
    """
    corner = np.broadcast_arrays(c_f, v_step_v, p_limit_w, i_limit_a, i_load_a)
    c_f, v_step_v, p_limit_w, i_limit_a, i_load_a = (x[..., np.newaxis] for x in corner)
    falling = np.linspace(1.0, 0.0, N_SAMPLES + 1)
    knee_v = np.minimum(p_limit_w / i_limit_a, v_step_v)
    v_v = np.where(np.isinf(i_limit_a), v_step_v * np.append(falling[:-1], falling[-2]), v_step_v * falling)
    # The knee itself is a sample, so that power stays straight between samples.
    v_v = -np.sort(-np.concatenate([v_v, np.maximum(knee_v, v_v[..., -1:])], axis=-1), axis=-1)
    above_v = np.maximum(v_v, knee_v)
    limited_s = _power_limited_from_v_to_v(c_f, v_step_v, above_v, p_limit_w, i_load_a)
    last_a = np.where(np.isinf(i_limit_a), 1.0, i_limit_a - i_load_a)
    last_s = np.where(above_v > v_v, charge_time_s(c_f, above_v - v_v, last_a), 0.0)
    i_a = np.minimum(p_limit_w / np.maximum(v_v, 1e-300), i_limit_a)
    return limited_s + last_s, v_v, i_a


def resistor_path(c_f, v_step_v, r_ohm, i_load_a=0.0, n_time_constants=5.0):
    """Path of a precharge resistor: v = I_L · R + (ΔV − I_L · R) · e^(−t/(R · C)), i = v/R.

    c_f: capacitance [F], shape (corner,).
    v_step_v: voltage across the resistor at the start [V], shape (corner,).
    r_ohm: resistance, above 0 [ohm], shape (corner,).
    i_load_a: load current drawn meanwhile [A], shape (corner,).
    n_time_constants: length of the path in units of R · C [-].
    Returns (times [s], voltages [V], currents [A]), each of shape (corner, sample). With a load the resistor
    settles at I_L · R and its heat has no end: judge it as steady power too.
    Source: Kirchhoff's laws.

    >>> t_s, v_v, i_a = resistor_path(1000e-6, 24.0, 10.0)
    >>> round(float(t_s[-1]), 6), round(float(i_a[0]), 6), round(float(v_v[-1]), 4)
    (0.05, 2.4, 0.1617)
    """
    corner = np.broadcast_arrays(c_f, v_step_v, r_ohm, i_load_a, n_time_constants)
    c_f, v_step_v, r_ohm, i_load_a, n_time_constants = (x[..., np.newaxis] for x in corner)
    x = n_time_constants * np.linspace(0.0, 1.0, N_SAMPLES) ** 2
    v_v = i_load_a * r_ohm + (v_step_v - i_load_a * r_ohm) * np.exp(-x)
    return x * r_ohm * c_f, v_v, v_v / r_ohm


def lost_share(v_from_v, v_to_v):
    """Share of the source's energy that a series charge turns into heat: (V_s − V_mean)/V_s, whatever the path.

    v_from_v: voltage of the bank at the start [V], shape (corner,).
    v_to_v: voltage of source, and of the bank at the end, above 0 [V], shape (corner,).
    Returns the share [-], shape (corner,).
    Source: energy balance of a capacitor; half from 0 V.

    >>> round(lost_share(40.0, 48.0), 4)
    0.0833
    """
    return (v_to_v - (v_from_v + v_to_v) / 2.0) / v_to_v


def path_energy_j(t_s, v_v, i_a):
    """Energy along a path whose voltage and current are straight between samples, exactly.

    t_s: times, not falling [s], shape (time,) or (corner, time).
    v_v: voltages [V], shape (time,) or (corner, time).
    i_a: currents [A], shape (time,) or (corner, time).
    Returns the energy [J], shape () or (corner,).
    Source: integral of the product of two straight lines: h/6 · (2 · v₀i₀ + 2 · v₁i₁ + v₀i₁ + v₁i₀).

    >>> round(float(path_energy_j([0.0, 0.024], [24.0, 0.0], [1.0, 1.0])), 6)
    0.288
    """
    h_s, v_v, i_a = np.diff(t_s), np.asarray(v_v, dtype=float), np.asarray(i_a, dtype=float)
    crossed_w = v_v[..., :-1] * i_a[..., 1:] + v_v[..., 1:] * i_a[..., :-1]
    straight_w = v_v[..., :-1] * i_a[..., :-1] + v_v[..., 1:] * i_a[..., 1:]
    return np.sum(h_s * (2.0 * straight_w + crossed_w) / 6.0, axis=-1)


def _power_limited_from_v_to_v(c_f, from_v, to_v, p_limit_w, i_load_a):
    """Time from one voltage to a lower one under C · dv/dt = −(P − I_L · v)/v, infinite where the load takes it all."""
    load = np.asarray(i_load_a, dtype=float) * np.asarray(from_v, dtype=float) / p_limit_w
    ends = np.divide(to_v, from_v)
    stalls = load >= 1.0
    load = np.where(stalls, 0.0, load)
    # C · ∫ v/(P − I_L · v) dv; its two halves cancel for a light load, where a short series takes over.
    light = load < 1e-4
    divisor = np.where(light, 1.0, load)
    series = (1 - ends**2) / 2 + load * (1 - ends**3) / 3 + load**2 * (1 - ends**4) / 4
    exact = (ends - 1.0 - (np.log1p(-load) - np.log1p(-load * ends)) / divisor) / divisor
    share = np.where(light, series, exact)
    time_s = np.multiply(c_f, np.square(from_v)) / p_limit_w * share
    return np.where(stalls & (ends < 1.0), np.inf, nan_where(np.isnan(load), time_s))
