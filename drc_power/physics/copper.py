"""Copper of the board: resistance, heating by current, vias, melting.

| symbol | name here | unit | meaning |
|---|---|---|---|
| ρ | resistivity_ohm_m | ohm·m | resistivity at temperature |
| A | area_m2 | m² | cross-section that carries the current |
| ΔT | rise_k | K | rise of the track over the board without current |
| I | i_a | A | current, rms |

Arrays broadcast; the first axis is the corner, sample or track.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from drc_power.physics.range import nan_where, refuse_unless

RESISTIVITY_20_OHM_M = 1.0 / 58e6
"""Annealed copper at 20 °C, 58 MS/m, 100 % IACS: IEC 60028."""

TEMPCO_20_PER_K = 3.93e-3
"""Temperature coefficient of that copper at 20 °C: IEC 60028, Industrial Power Engineering Handbook table 30.1."""

CONDUCTIVITY_W_PER_M_K = 390.0
"""Thermal conductivity of copper: common practice for plated copper, pure copper has 401."""

MIL2_M2 = (25.4e-6) ** 2
CIRCULAR_MIL_M2 = np.pi / 4.0 * MIL2_M2

IPC_2221_OUTER, IPC_2221_INNER = 0.048, 0.024
"""Constant k of the IPC-2221 relation for conductors on and inside the board."""

MELTING_POINT_C = 1083.0
"""Copper, as the Onderdonk relation takes it."""


class ChartFit(NamedTuple):
    """Constants of one fit I = k0 · ΔT^k1 · (1550 · A)^(m0 · ΔT^m1) with A in mm², and where it holds."""

    k0: float
    k1: float
    m0: float
    m1: float
    max_i_a: float
    max_rise_k: float
    source: str


CHART_FITS = {
    "ipc-2152-vacuum": ChartFit(0.0756, 0.4375, 0.5000, 0.0301, 30.0, 100.0, "ECSS-Q-ST-70-12C (2014), annex D.2"),
    "cnes": ChartFit(
        0.0594, 0.4800, 0.5420, 0.0034, 8.0, 100.0, "ECSS-Q-ST-70-12C (2014), annex D.3, CNES/QFT/IN.0113"
    ),
    "ipc-2221a-inner": ChartFit(0.0240, 0.4393, 0.7252, 0.0002, 17.5, 100.0, "ECSS-Q-ST-70-12C (2014), annex D.4"),
}
"""Fits of measured charts of track heating, seen in a transcription of the standard: verify against the document."""


def resistivity_ohm_m(t_c, conductivity_iacs=1.0):
    """Resistivity of copper: ρ = ρ_20 · (1 + α_20 · (T − 20 °C))/IACS.

    t_c: temperature of the copper [°C], any shape; straight to about 200 °C.
    conductivity_iacs: conductivity over that of annealed copper, 0.97 to 1.01 on boards [-].
    Returns the resistivity [ohm.m], shape of t_c.
    Source: IEC 60028 (0.017241 ohm·mm²/m at 20 °C); Industrial Power Engineering Handbook, table 30.1.

    >>> round(resistivity_ohm_m(20.0) * 1e6, 6)
    0.017241
    """
    return RESISTIVITY_20_OHM_M / conductivity_iacs * (1.0 + TEMPCO_20_PER_K * (t_c - 20.0))


def sheet_resistance_ohm(thickness_m, t_c, conductivity_iacs=1.0):
    """Resistance of a square of copper foil: R = ρ(T)/thickness.

    thickness_m: thickness of the copper, above 0 [m].
    t_c: temperature of the copper [°C].
    conductivity_iacs: conductivity over that of annealed copper [-].
    Returns the resistance per square [ohm].
    Source: definition of resistivity.

    >>> round(sheet_resistance_ohm(35e-6, 20.0) * 1e3, 4)
    0.4926
    """
    return resistivity_ohm_m(t_c, conductivity_iacs) / thickness_m


def track_resistance_ohm(length_m, width_m, thickness_m, t_c, conductivity_iacs=1.0):
    """Resistance of a track: R = ρ(T) · length/(width · thickness).

    length_m: length of the track [m], shape (track,).
    width_m: width of the copper, above 0 [m], shape (track,).
    thickness_m: thickness of the copper, above 0 [m], shape (track,).
    t_c: temperature of the copper [°C], shape (track,).
    conductivity_iacs: conductivity over that of annealed copper [-].
    Returns the resistance [ohm], shape (track,). Valid for direct current, where the section fills evenly.
    Source: definition of resistivity.

    >>> round(track_resistance_ohm(0.1, 1e-3, 35e-6, 20.0) * 1e3, 2)
    49.26
    """
    return sheet_resistance_ohm(thickness_m, t_c, conductivity_iacs) * length_m / width_m


def ipc_2221_current_a(rise_k, area_m2, constant=IPC_2221_OUTER):
    """Current that heats a track by ΔT: I = k · ΔT^0.44 · A^0.725, with A in square mils.

    rise_k: rise of the track, 0 to 100 [K], shape (track,).
    area_m2: cross-section [m2], shape (track,).
    constant: k, 0.048 for outer and 0.024 for inner tracks [-].
    Returns the current [A], shape (track,); NaN above a rise of 100 K, and above 35 A outside or 17.5 A inside,
    where the chart ends. The chart ends at a width of 400 mil (10.16 mm) too, which the caller must watch.
    Source: IPC-2221; equation and range as printed in the documentation of KiCad's track width calculation.

    >>> area_m2 = 100 * 1.378 * 645.16e-12
    >>> round(float(ipc_2221_current_a(10.0, area_m2)), 3)
    4.701
    """
    current_a = constant * np.maximum(rise_k, 0.0) ** 0.44 * (np.asarray(area_m2) / MIL2_M2) ** 0.725
    return nan_where(_outside_ipc_2221(current_a, rise_k, constant), current_a)


def ipc_2221_rise_k(i_a, area_m2, constant=IPC_2221_OUTER):
    """Rise of a track that carries a current: ΔT = (I/(k · A^0.725))^(1/0.44), with A in square mils.

    i_a: rms current [A], shape (track,).
    area_m2: cross-section [m2], shape (track,).
    constant: k, 0.048 for outer and 0.024 for inner tracks [-].
    Returns the rise [K], shape (track,); NaN outside the range of `ipc_2221_current_a`.
    Source: IPC-2221, as `ipc_2221_current_a`, solved for ΔT.

    >>> round(float(ipc_2221_rise_k(4.701, 100 * 1.378 * 645.16e-12)), 2)
    10.0
    """
    at_one_kelvin_a = constant * (np.asarray(area_m2) / MIL2_M2) ** 0.725
    rise_k = (np.maximum(i_a, 0.0) / at_one_kelvin_a) ** (1.0 / 0.44)
    return nan_where(_outside_ipc_2221(i_a, rise_k, constant), rise_k)


def ipc_2221_area_m2(i_a, rise_k, constant=IPC_2221_OUTER):
    """Cross-section that a current needs: A = (I/(k · ΔT^0.44))^(1/0.725), in square mils.

    i_a: rms current [A], shape (track,).
    rise_k: allowed rise, above 0 and up to 100 [K], shape (track,).
    constant: k, 0.048 for outer and 0.024 for inner tracks [-].
    Returns the cross-section [m2], shape (track,); NaN outside the range of `ipc_2221_current_a`.
    Source: IPC-2221, as `ipc_2221_current_a`, solved for A.

    >>> round(float(ipc_2221_area_m2(10.0, 10.0)) / (1.378 * 645.16e-12), 1)
    283.2
    """
    outside = _outside_ipc_2221(i_a, rise_k, constant) | np.less_equal(rise_k, 0.0)
    at_one_mil2_a = constant * np.where(outside, 1.0, rise_k) ** 0.44
    return nan_where(outside, MIL2_M2 * (np.maximum(i_a, 0.0) / at_one_mil2_a) ** (1.0 / 0.725))


def chart_current_a(rise_k, area_m2, fit="ipc-2152-vacuum"):
    """Current that heats a track by ΔT, by a fit of measured charts: I = k0 · ΔT^k1 · (1550 · A)^(m0 · ΔT^m1).

    rise_k: rise of the track, not below 0 [K], shape (track,).
    area_m2: cross-section; the formula takes it in mm² [m2], shape (track,).
    fit: a name of `CHART_FITS` [word].
    Returns the current [A], shape (track,); NaN beyond the fit's current or rise.
    Source: ECSS-Q-ST-70-12C (14 July 2014), annex D.

    >>> round(float(chart_current_a(5.0, 0.925e-3 * 25e-6)), 3)
    1.0
    """
    k0, k1, m0, m1, max_i_a, max_rise_k, _ = CHART_FITS[fit]
    rise_k = nan_where(np.less(rise_k, 0.0), rise_k)
    mils2 = 1550.0 * np.asarray(area_m2) * 1e6
    current_a = k0 * rise_k**k1 * mils2 ** (m0 * rise_k**m1)
    return nan_where(~((current_a <= max_i_a) & (rise_k <= max_rise_k)), current_a)


def chart_rise_k(i_a, area_m2, fit="ipc-2152-vacuum"):
    """Rise of a track that carries a current, the fit of `chart_current_a` solved for ΔT by Newton's method.

    i_a: rms current, not below 0 [A], shape (track,).
    area_m2: cross-section, above 1/1550 mm² [m2], shape (track,).
    fit: a name of `CHART_FITS` [word].
    Returns the rise [K], shape (track,); NaN beyond the fit's current or rise, or for less copper.
    Source: ECSS-Q-ST-70-12C (14 July 2014), annex D.

    >>> round(float(chart_rise_k(1.0002, 0.925e-3 * 25e-6)), 3)
    5.0
    """
    k0, k1, m0, m1, max_i_a, max_rise_k, _ = CHART_FITS[fit]
    i_a, area_m2 = np.asarray(i_a, dtype=float), np.asarray(area_m2, dtype=float)
    outside = ~((i_a >= 0.0) & (i_a <= max_i_a) & (1550e6 * area_m2 > 1.0))
    wanted = np.log(np.where(outside | (i_a == 0.0), k0, i_a) / k0)
    breadth = m0 * np.log(np.where(outside, 2.0, 1550e6 * area_m2))
    log_rise = np.zeros(np.broadcast(wanted, breadth).shape)
    # In ln ΔT the equation is all but straight, so a few steps reach the last digit.
    for _ in range(12):
        share = breadth * np.exp(m1 * log_rise)
        log_rise = log_rise - (k1 * log_rise + share - wanted) / (k1 + m1 * share)
    rise_k = np.where(i_a == 0.0, 0.0, np.exp(log_rise))
    return nan_where(outside | (rise_k > max_rise_k), rise_k)


def via_area_m2(drill_m, plating_m):
    """Cross-section of a plated hole: A = π · (drill − plating) · plating, the plating lying inward of the drill.

    drill_m: drilled diameter [m].
    plating_m: thickness of the plating, up to half the drill [m].
    Returns the cross-section [m2].
    Raises OutsideRange for plating that does not fit in the hole.
    Source: geometry of a tube; common practice.

    >>> round(via_area_m2(0.3e-3, 25e-6) * 1e6, 5)
    0.0216
    """
    fits = np.greater(plating_m, 0.0) & np.less_equal(np.multiply(2.0, plating_m), drill_m)
    refuse_unless(fits, "the plating of a via must be above 0 and at most half the drill")
    return np.pi * (drill_m - plating_m) * plating_m


def via_resistance_ohm(drill_m, plating_m, length_m, t_c, n_vias=1.0):
    """Resistance of vias side by side: R = ρ(T) · length/(A · n).

    drill_m: drilled diameter [m].
    plating_m: thickness of the plating [m].
    length_m: length of the hole that carries current [m].
    t_c: temperature of the copper [°C].
    n_vias: number of vias that share the current evenly [-].
    Returns the resistance [ohm].
    Source: definition of resistivity.

    >>> round(via_resistance_ohm(0.3e-3, 25e-6, 1.6e-3, 20.0) * 1e3, 3)
    1.277
    """
    return resistivity_ohm_m(t_c) * length_m / (via_area_m2(drill_m, plating_m) * n_vias)


def via_rth_k_per_w(drill_m, plating_m, length_m, n_vias=1.0, k_w_per_m_k=CONDUCTIVITY_W_PER_M_K):
    """Thermal resistance of vias side by side: R_th = length/(k · A · n).

    drill_m: drilled diameter [m].
    plating_m: thickness of the plating [m].
    length_m: length of the hole [m].
    n_vias: number of vias side by side [-].
    k_w_per_m_k: thermal conductivity of the plating [W/(m.K)].
    Returns the thermal resistance along the holes [K/W]; the laminate between them is left out.
    Source: Fourier's law.

    >>> round(via_rth_k_per_w(0.3e-3, 25e-6, 1.6e-3))
    190
    """
    return length_m / (k_w_per_m_k * via_area_m2(drill_m, plating_m) * n_vias)


def onderdonk_current_a(area_m2, t_s, t_start_c, t_end_c=MELTING_POINT_C):
    """Current that heats copper to its end in a time: 33 · (I/A)² · t = log10(1 + ΔT/(234 + T_start)), A circular mils.

    area_m2: cross-section [m2], shape (track,).
    t_s: duration, above 0 and up to 10 [s], shape (track,).
    t_start_c: temperature at the start [°C].
    t_end_c: temperature at the end, the melting point for fusing [°C].
    Returns the current [A], shape (track,); NaN beyond 10 s, where the heat lost counts.
    Source: Onderdonk's relation as given in Printed Circuit Design and Fab, articles 10179 and 10293.

    >>> round(float(onderdonk_current_a(10 * 1.378 * 645.16e-12, 1.0, 25.0)), 3)
    2.567
    """
    heating = np.log10(1.0 + np.subtract(t_end_c, t_start_c) / np.add(234.0, t_start_c))
    outside = ~(np.greater(t_s, 0.0) & np.less_equal(t_s, 10.0))
    squared = heating / (33.0 * np.where(outside, 1.0, t_s))
    return nan_where(outside, np.asarray(area_m2) / CIRCULAR_MIL_M2 * np.sqrt(squared))


def onderdonk_time_s(i_a, area_m2, t_start_c, t_end_c=MELTING_POINT_C):
    """Time in which a current heats copper to its end: `onderdonk_current_a` solved for t.

    i_a: rms current, above 0 [A], shape (track,).
    area_m2: cross-section [m2], shape (track,).
    t_start_c: temperature at the start [°C].
    t_end_c: temperature at the end, the melting point for fusing [°C].
    Returns the time [s], shape (track,); NaN beyond 10 s, where the heat lost counts.
    Source: as `onderdonk_current_a`.

    >>> round(float(onderdonk_time_s(8.117, 10 * 1.378 * 645.16e-12, 25.0)), 3)
    0.1
    """
    heating = np.log10(1.0 + np.subtract(t_end_c, t_start_c) / np.add(234.0, t_start_c))
    flowing_a = nan_where(~np.greater(i_a, 0.0), i_a)
    time_s = heating / 33.0 * (np.asarray(area_m2) / CIRCULAR_MIL_M2 / flowing_a) ** 2
    return nan_where(~np.less_equal(time_s, 10.0), time_s)


def preece_current_a(diameter_m):
    """Steady current that melts a bare copper wire in free air: I = 10244 · d^1.5, with d in inches.

    diameter_m: diameter of the wire [m].
    Returns the current [A]. Not for tracks of a board, which the laminate cools.
    Source: Preece's relation as given in Printed Circuit Design and Fab, article 17314.

    >>> round(float(preece_current_a(0.0403 * 25.4e-3)), 1)
    82.9
    """
    return 10244.0 * (np.asarray(diameter_m) / 25.4e-3) ** 1.5


def _outside_ipc_2221(i_a, rise_k, constant):
    # 35 A outside and half of it inside, in proportion to k as the two charts are.
    max_i_a = 35.0 * np.asarray(constant) / IPC_2221_OUTER
    within = np.greater_equal(i_a, 0.0) & np.less_equal(i_a, max_i_a)
    return ~(within & np.greater_equal(rise_k, 0.0) & np.less_equal(rise_k, 100.0))
