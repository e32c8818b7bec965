"""Unclamped and clamped turn-off of an inductance: energy, time and heat in the switch or clamp.

| symbol | name here | unit | meaning |
|---|---|---|---|
| L, I | l_h, i_a | H, A | inductance, current at turn-off |
| V, V_s | v_clamp_v, v_supply_v | V | breakdown or clamp voltage; supply in series with the inductance |

The current falls straight to 0 in t = L · I/(V − V_s); meanwhile the part sees V. Arrays broadcast, corners first.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import nan_where

BREAKDOWN_OVER_RATING = 1.3
"""Breakdown voltage of a hot avalanche over the rated one: IRF AN-1005."""


def stored_energy_j(l_h, i_a):
    """Energy of an inductance: E = L · I²/2.

    l_h: inductance [H], shape (corner,).
    i_a: current [A], shape (corner,).
    Returns the energy [J], shape (corner,).
    Source: definition of inductance.

    >>> round(stored_energy_j(0.1e-3, 95.0), 6)
    0.45125
    """
    return l_h * i_a**2 / 2.0


def turn_off_energy_j(l_h, i_a, v_clamp_v, v_supply_v=0.0):
    """Heat in the part that takes over the current, supply included: E = L · I²/2 · V/(V − V_s).

    l_h: inductance [H], shape (corner,).
    i_a: current at turn-off [A], shape (corner,).
    v_clamp_v: breakdown or clamp voltage [V], shape (corner,).
    v_supply_v: supply in series with the inductance [V], shape (corner,).
    Returns the energy [J], shape (corner,); NaN where the clamp does not lie above the supply.
    Source: Toshiba, FAQ on avalanche energy; makers differ on the supply's part, `stored_energy_j` is without.

    >>> round(float(turn_off_energy_j(4.8e-3, 5.6, 100.0, 25.0)), 4)
    0.1004
    """
    over_v = np.subtract(v_clamp_v, v_supply_v)
    share = v_clamp_v / np.where(over_v > 0.0, over_v, 1.0)
    return nan_where(~(over_v > 0.0), stored_energy_j(l_h, i_a) * share)


def turn_off_time_s(l_h, i_a, v_clamp_v, v_supply_v=0.0):
    """Time in which the current falls to 0: t = L · I/(V − V_s).

    l_h: inductance [H], shape (corner,).
    i_a: current at turn-off [A], shape (corner,).
    v_clamp_v: breakdown or clamp voltage [V], shape (corner,).
    v_supply_v: supply in series with the inductance [V], shape (corner,).
    Returns the time [s], shape (corner,); NaN where the clamp does not lie above the supply.
    Source: definition of inductance.

    >>> round(float(turn_off_time_s(4.8e-3, 5.6, 100.0, 25.0)) * 1e6, 1)
    358.4
    """
    over_v = np.subtract(v_clamp_v, v_supply_v)
    time_s = np.multiply(l_h, i_a) / np.where(over_v > 0.0, over_v, 1.0)
    return nan_where(~(over_v > 0.0), time_s)


def repetitive_loss_w(energy_j, f_hz):
    """Mean loss of a pulse that comes again and again: P = E · f.

    energy_j: energy of one pulse [J], shape (corner,).
    f_hz: frequency [Hz], shape (corner,).
    Returns the mean loss [W], shape (corner,).
    Source: definition of power; IRF AN-1005 limits it by ΔT/Z_thJC.

    >>> round(repetitive_loss_w(0.1004, 10.0), 4)
    1.004
    """
    return energy_j * f_hz


def repetitive_pulse_w(i_a, v_breakdown_v):
    """Mean power within an avalanche pulse: P = 1.3 · V_BR · I/2 with V_BR as rated.

    i_a: current at turn-off [A], shape (corner,).
    v_breakdown_v: rated breakdown voltage [V].
    Returns the mean power during the pulse [W], shape (corner,); times its length, the energy E_AR.
    Source: IRF AN-1005, notes on repetitive avalanche.

    >>> round(repetitive_pulse_w(58.0, 40.0), 1)
    1508.0
    """
    return BREAKDOWN_OVER_RATING * v_breakdown_v * i_a / 2.0


def repetitive_current_a(rise_k, v_breakdown_v, zth_k_per_w):
    """Current whose avalanche pulse heats the junction by a rise: I = 2 · ΔT/(1.3 · V_BR · Z_th).

    rise_k: allowed rise of the junction over its start [K], shape (corner,).
    v_breakdown_v: rated breakdown voltage [V].
    zth_k_per_w: impedance at the length and duty of the pulse [K/W].
    Returns the current [A], shape (corner,).
    Source: IRF AN-1005, notes on repetitive avalanche.

    >>> round(repetitive_current_a(50.0, 40.0, 0.033), 2)
    58.28
    """
    return 2.0 * rise_k / (BREAKDOWN_OVER_RATING * v_breakdown_v * zth_k_per_w)


def peak_rise_k(v_clamp_v, i_a, zth_half_k_per_w):
    """Peak rise of the junction in one triangular pulse under the root law: ΔT = 2/3 · V · I · Z_th(t/2), at t/2.

    v_clamp_v: breakdown or clamp voltage [V], shape (corner,).
    i_a: current at turn-off [A], shape (corner,).
    zth_half_k_per_w: impedance at half the pulse's length [K/W].
    Returns the rise over the start [K], shape (corner,). Valid while Z_th goes with √t.
    Source: Nexperia AN10273 (from memory); the exact integral is 2/3 · √(1/2) of V · I · Z_th(t).

    >>> round(peak_rise_k(50.0, 20.0, 0.05), 4)
    33.3333
    """
    return 2.0 / 3.0 * v_clamp_v * i_a * zth_half_k_per_w
