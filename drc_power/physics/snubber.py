"""RC snubbers across a diode or switch: how they are chosen and what voltage they leave.

| symbol | name here | unit | meaning |
|---|---|---|---|
| L | l_h | H | inductance that the current is trapped in |
| C, R | c_f, r_ohm | F, ohm | snubber capacitor and resistor, in series |
| I_R | i_trapped_a | A | current in L when the diode or switch stops conducting |
| V_s | v_supply_v | V | voltage that drives the circuit |

Arrays broadcast; the first axis is the corner or sample.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import nan_where


def critical_resistance_ohm(l_h, c_f):
    """Series resistance that just keeps an L-C circuit from ringing: R = 2 · √(L/C).

    l_h: inductance [H].
    c_f: capacitance [F].
    Returns the resistance [ohm].
    Source: Rashid, Power Electronics, 4th edition, example 4.5.

    >>> round(float(critical_resistance_ohm(6.6e-6, 0.5454545e-6)), 3)
    6.957
    """
    return 2.0 * np.sqrt(np.divide(l_h, c_f))


def resonance_rad_per_s(l_h, c_f):
    """Undamped resonance of an L-C circuit: ω_0 = 1/√(L · C).

    l_h: inductance [H].
    c_f: capacitance [F].
    Returns the angular frequency [rad/s].
    Source: Rashid, Power Electronics, 4th edition, example 17.3.

    >>> round(float(resonance_rad_per_s(50e-6, 0.7346e-6)) / 1e3)
    165
    """
    return 1.0 / np.sqrt(np.multiply(l_h, c_f))


def snubber_capacitance_f(l_h, i_trapped_a, v_supply_v, current_factor):
    """Capacitor for a chosen current factor d_0 = I_R/V_s · √(L/C): C = L · (I_R/(V_s · d_0))².

    l_h: inductance [H].
    i_trapped_a: current in L at the start [A].
    v_supply_v: driving voltage [V].
    current_factor: d_0, initial energy of L against that of C at V_s, as a root [-].
    Returns the capacitance [F].
    Source: Rashid, Power Electronics, 4th edition, example 17.3.

    >>> round(snubber_capacitance_f(50e-6, 20.0, 220.0, 0.75) * 1e6, 4)
    0.7346
    """
    return l_h * (i_trapped_a / (v_supply_v * current_factor)) ** 2


def snubber_resistance_ohm(l_h, c_f, damping):
    """Resistor for a chosen damping δ = R/2 · √(C/L): R = 2 · δ · √(L/C).

    l_h: inductance [H].
    c_f: capacitance [F].
    damping: δ, 1 for critical damping [-].
    Returns the resistance [ohm].
    Source: Rashid, Power Electronics, 4th edition, example 17.3.

    >>> round(float(snubber_resistance_ohm(50e-6, 0.7346e-6, 0.4)), 2)
    6.6
    """
    return damping * critical_resistance_ohm(l_h, c_f)


def recovery_peak_v(v_supply_v, i_trapped_a, l_h, c_f, r_ohm):
    """Highest voltage across a snubber that takes over a trapped current, exact for an underdamped circuit.

    v = V_s + e^(−αt) · (p · cos ωt + q · sin ωt), p = R · I_R − V_s, q = (I_R/C − α · p)/ω, α = R/(2 · L),
    ω² = 1/(L · C) − α²; its first extreme, or the step R · I_R at the start if that is higher.

    v_supply_v: driving voltage [V], shape (corner,).
    i_trapped_a: current in L at the start [A], shape (corner,).
    l_h: inductance [H].
    c_f: capacitance [F].
    r_ohm: resistance [ohm].
    Returns the peak voltage [V], shape (corner,); NaN for critical damping and more.
    Source: Kirchhoff's laws; Rashid, Power Electronics, 4th edition, chapter 17, draws it as a chart.

    >>> round(float(recovery_peak_v(220.0, 20.0, 50e-6, 0.7346e-6, 6.6)), 1)
    330.1
    """
    damping_per_s = np.divide(r_ohm, np.multiply(2.0, l_h))
    squared = resonance_rad_per_s(l_h, c_f) ** 2 - damping_per_s**2
    omega_per_s = np.sqrt(np.where(squared > 0.0, squared, 1.0))
    start_v = np.multiply(r_ohm, i_trapped_a)
    p_v = start_v - v_supply_v
    q_v = (np.divide(i_trapped_a, c_f) - damping_per_s * p_v) / omega_per_s
    slope = omega_per_s * q_v - damping_per_s * p_v, damping_per_s * q_v + omega_per_s * p_v
    angle = np.mod(np.arctan2(*slope), np.pi)
    extreme_v = v_supply_v + np.exp(-damping_per_s * angle / omega_per_s) * (p_v * np.cos(angle) + q_v * np.sin(angle))
    return nan_where(~(squared > 0.0), np.maximum(extreme_v, start_v))
