"""Finned heat sinks from their geometry: efficiency of one fin, natural and forced flow between plates.

| symbol | name here | unit | meaning |
|---|---|---|---|
| H, L | height_m, length_m | m | height over the base, length along the flow |
| t, S | thickness_m, spacing_m | m | thickness of a fin, gap between two |
| k | k_w_per_m_k | W/(m·K) | conductivity of the fins |
| η | the efficiencies | - | heat of a fin over that of one at base temperature throughout |

The air properties are those of the film temperature; resistances are from the base to the air and lack the
spreading of `spreading.py`.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from drc_power.physics.air import air
from drc_power.physics.convection import (
    blended_h_w_per_m2_k,
    forced_h_w_per_m2_k,
    natural_h_w_per_m2_k,
    radiated_w_per_m2,
    rayleigh,
)
from drc_power.physics.range import refuse_unless


class PlateFins(NamedTuple):
    """A plate-fin sink: `n_fins` straight fins on a base of length × width."""

    n_fins: int
    height_m: float
    length_m: float
    thickness_m: float
    spacing_m: float
    k_w_per_m_k: float = 200.0
    emissivity: float = 0.0


def straight_fin_efficiency(height_m, thickness_m, k_w_per_m_k, h_w_per_m2_k):
    """Efficiency of a straight fin: η = tanh(mL)/(mL), m = √(2h/(k · t)), L the height.

    height_m: height of the fin; height + t/2 takes a convecting tip in [m].
    thickness_m: thickness t [m].
    k_w_per_m_k: conductivity of the fin [W/(m.K)].
    h_w_per_m2_k: coefficient on both faces [W/(m2.K)].
    Returns the efficiency [-].
    Source: Incropera, 3.94 (from memory); one-dimensional conduction, insulated tip.

    >>> round(float(straight_fin_efficiency(30e-3, 1e-3, 200.0, 10.0)), 4)
    0.971
    """
    x = np.sqrt(2.0 * np.asarray(h_w_per_m2_k) / (k_w_per_m_k * np.asarray(thickness_m))) * height_m
    return np.where(x > 1e-6, np.tanh(x) / np.maximum(x, 1e-6), 1.0)[()]


def annular_fin_efficiency(inner_radius_m, outer_radius_m, thickness_m, k_w_per_m_k, h_w_per_m2_k):
    """Efficiency of a round fin of even thickness, exact with an insulated rim, by Bessel functions.

    η = 2 · r_1/(m · (r_2² − r_1²)) · [K_1(a) · I_1(b) − I_1(a) · K_1(b)]/[I_0(a) · K_1(b) + K_0(a) · I_1(b)],
    m = √(2h/(k · t)), a = m · r_1, b = m · r_2.

    inner_radius_m: radius r_1 of the tube [m].
    outer_radius_m: radius r_2 of the rim; r_2 + t/2 takes a convecting rim in [m].
    thickness_m: thickness t [m].
    k_w_per_m_k: conductivity of the fin [W/(m.K)].
    h_w_per_m2_k: coefficient on both faces [W/(m2.K)].
    Returns the efficiency [-].
    Raises OutsideRange for a rim inside the tube.
    Source: Kern and Kraus, Extended Surface Heat Transfer, 1972; Incropera, 3.96.

    >>> round(float(annular_fin_efficiency(0.0127, 0.028575, 3.8e-4, 200.0, 58.0)), 4)
    0.8413
    """
    from scipy.special import i0e, i1e, k0e, k1e

    refuse_unless(np.greater(outer_radius_m, inner_radius_m), "the rim of a round fin must lie outside its tube")
    m_per_m = np.sqrt(2.0 * np.asarray(h_w_per_m2_k) / (k_w_per_m_k * np.asarray(thickness_m)))
    inner, outer = m_per_m * inner_radius_m, m_per_m * outer_radius_m
    # Scaled functions, so that wide fins do not overflow: e^(−2 · (outer − inner)) is what the scales leave.
    fading = np.exp(-2.0 * (outer - inner))
    gained = k1e(inner) * i1e(outer) - fading * i1e(inner) * k1e(outer)
    driven = fading * i0e(inner) * k1e(outer) + k0e(inner) * i1e(outer)
    return 2.0 * inner_radius_m / (m_per_m * (np.square(outer_radius_m) - np.square(inner_radius_m))) * gained / driven


def channel_natural_nusselt(ra_channel):
    """Natural flow between vertical plates of one temperature: Nu = [576/Ra′² + 2.873/√Ra′]^(−1/2), on the gap.

    ra_channel: Ra′ = Ra_S · S/L, Rayleigh number on the gap times gap over length [-].
    Returns the Nusselt number of h on the gap, air at the entrance as reference [-].
    Source: Elenbaas 1942; Bar-Cohen and Rohsenow, J. Heat Transfer 106, 1984 (from memory).

    >>> round(float(channel_natural_nusselt(54.3)), 2)
    1.31
    """
    ra_channel = np.maximum(ra_channel, 1e-12)
    return (576.0 / ra_channel**2 + 2.873 / np.sqrt(ra_channel)) ** -0.5


def optimum_spacing_m(length_m, ra_length):
    """Gap between vertical plates that gives an array its most heat: S = 2.714 · L/Ra_L^(1/4).

    length_m: length of the plates along the flow [m].
    ra_length: Rayleigh number on that length [-].
    Returns the gap [m], for plates much thinner than it.
    Source: Bar-Cohen and Rohsenow, J. Heat Transfer 106, 1984 (from memory).

    >>> round(float(optimum_spacing_m(0.18, 1.844e7)) * 1e3, 2)
    7.45
    """
    return 2.714 * length_m / np.asarray(ra_length) ** 0.25


def channel_forced_nusselt(reynolds_channel, prandtl):
    """Forced laminar flow between plates, developing and developed in one.

    Nu = {(Re* · Pr/2)⁻³ + [0.664 · √Re* · Pr^(1/3) · √(1 + 3.65/√Re*)]⁻³}^(−1/3), Re* = (U · S/ν) · (S/L).

    reynolds_channel: Re* with the speed in the gap, 0.1 to 100 as measured [-].
    prandtl: Prandtl number [-].
    Returns the Nusselt number of h on the gap, air at the entrance as reference: its heat-up is in it [-].
    Source: Teertstra, Yovanovich, Culham and Lemczyk, IEEE SEMI-THERM 15, 1999 (from memory).

    >>> round(float(channel_forced_nusselt(11.25, 0.71)), 3)
    2.584
    """
    reynolds = np.maximum(reynolds_channel, 1e-12)
    developed = reynolds * prandtl / 2.0
    developing = 0.664 * np.sqrt(reynolds) * np.cbrt(prandtl) * np.sqrt(1.0 + 3.65 / np.sqrt(reynolds))
    return (developed**-3.0 + developing**-3.0) ** (-1.0 / 3.0)


def channel_h_w_per_m2_k(fins, t_fins_c, t_air_c, speed_m_per_s=0.0, altitude_m=0.0):
    """Coefficient in the gaps of a sink whose fins stand along the flow: natural and forced, blended by cubes.

    fins: a `PlateFins` [record].
    t_fins_c: temperature of the fins [°C].
    t_air_c: temperature of the air that enters [°C].
    speed_m_per_s: speed of the air in the gaps, 0 in still air [m/s].
    altitude_m: altitude over the sea [m].
    Returns the coefficient [W/(m2.K)] with the entering air as reference.
    Source: `channel_natural_nusselt`, `channel_forced_nusselt`, `convection.blended_h_w_per_m2_k`.

    >>> fins = PlateFins(9, 25e-3, 60e-3, 1.2e-3, 5e-3)
    >>> [round(float(channel_h_w_per_m2_k(fins, 75.0, 25.0, speed)), 1) for speed in (0.0, 2.0)]
    [5.7, 27.8]
    """
    medium = air(np.add(t_fins_c, t_air_c) / 2.0, altitude_m)
    slenderness = fins.spacing_m / fins.length_m
    ra_channel = rayleigh(fins.spacing_m, np.subtract(t_fins_c, t_air_c), medium) * slenderness
    reynolds = np.multiply(speed_m_per_s, fins.spacing_m) / medium.viscosity_m2_per_s * slenderness
    natural = channel_natural_nusselt(ra_channel)
    forced = channel_forced_nusselt(reynolds, medium.prandtl)
    return blended_h_w_per_m2_k(natural, forced) * medium.k_w_per_m_k / fins.spacing_m


def speed_in_gaps_m_per_s(fins, speed_m_per_s, bypass=0.0):
    """Speed of the air between the fins of a sink in a duct: U · (S + t)/S, less what goes round the sink.

    fins: a `PlateFins` [record].
    speed_m_per_s: speed of the air before the sink [m/s].
    bypass: share of the air in front of the sink that passes it by, 0 in a tight duct [-].
    Returns the speed [m/s].
    Raises OutsideRange for a share outside 0 to 1.
    Source: continuity.

    >>> round(float(speed_in_gaps_m_per_s(PlateFins(9, 25e-3, 60e-3, 1e-3, 4e-3), 2.0, 0.2)), 6)
    2.0
    """
    refuse_unless(np.greater_equal(bypass, 0.0) & np.less_equal(bypass, 1.0), "a bypass is a share from 0 to 1")
    return np.multiply(speed_m_per_s, 1.0 - np.asarray(bypass)) * (fins.spacing_m + fins.thickness_m) / fins.spacing_m


def channel_emittance(fins):
    """Radiation of a gap between fins as if from its openings: 1/(1 + (1 − ε)/ε · A_open/A_walls).

    The openings are the front and both ends; the walls two fins and the base between them, at one temperature.

    fins: a `PlateFins` [record].
    Returns the share of black radiation from the openings [-]; 0 for fins of no emissivity.
    Source: radiation of a grey cavity with even radiosity; the view of the gap to outside is its openings.

    >>> round(channel_emittance(PlateFins(9, 25e-3, 60e-3, 1.2e-3, 5e-3, 200.0, 0.85)), 3)
    0.971
    """
    if fins.emissivity <= 0.0:
        return 0.0
    walls_m2 = fins.length_m * (2.0 * fins.height_m + fins.spacing_m)
    return 1.0 / (1.0 + (1.0 - fins.emissivity) / fins.emissivity * _openings_m2(fins) / walls_m2)


def sink_heat_w(fins, t_base_c, t_air_c, faces="vertical", speed_m_per_s=0.0, altitude_m=0.0):
    """Heat of a plate-fin sink at a base temperature: gaps, outer faces, fin efficiency and radiation.

    fins: a `PlateFins` [record].
    t_base_c: temperature of the base, not below the air [°C].
    t_air_c: temperature of air and surroundings [°C].
    faces: "vertical" for gaps that air can rise through, "up" or "down" for a base that lies flat [word]. Flat,
        in still air, only the area of the base, the outer faces of a sink facing up, and radiation count: a
        lower bound, since the flow into the gaps from above or below is left out.
    speed_m_per_s: speed of the air in the gaps, 0 in still air [m/s].
    altitude_m: altitude over the sea [m].
    Returns the heat to the air and surroundings [W]. The back of the base is taken as covered.
    Source: the equations of this file, added up.

    >>> fins = PlateFins(9, 25e-3, 60e-3, 1.2e-3, 5e-3, 200.0, 0.85)
    >>> [round(float(sink_heat_w(fins, 75.0, 25.0, faces)), 1) for faces in ("vertical", "up", "down")]
    [11.1, 5.6, 3.4]
    """
    rise_k = np.subtract(t_base_c, t_air_c)
    outer_m2 = 2.0 * fins.height_m * fins.length_m
    if faces == "vertical":
        gaps_w_per_m2_k = channel_h_w_per_m2_k(fins, t_base_c, t_air_c, speed_m_per_s, altitude_m)
        still_w_per_m2_k = natural_h_w_per_m2_k(fins.length_m, t_base_c, t_air_c, "vertical", altitude_m)
        moving_w_per_m2_k = forced_h_w_per_m2_k(fins.length_m, speed_m_per_s, t_base_c, t_air_c, altitude_m)
        outer_w_per_m2_k = blended_h_w_per_m2_k(still_w_per_m2_k, moving_w_per_m2_k)
        convected_w = _finned_w_per_k(fins, gaps_w_per_m2_k, outer_w_per_m2_k) * rise_k
    else:
        convected_w = _flat_w_per_k(fins, t_base_c, t_air_c, faces, speed_m_per_s, altitude_m) * rise_k
    seen_m2 = channel_emittance(fins) * _openings_m2(fins) * (fins.n_fins - 1) + fins.emissivity * outer_m2
    return convected_w + seen_m2 * radiated_w_per_m2(1.0, t_base_c, t_air_c)


def sink_rth_k_per_w(fins, p_w, t_air_c, faces="vertical", speed_m_per_s=0.0, altitude_m=0.0):
    """Resistance of a plate-fin sink at the heat that it is to carry, its base temperature found by halving.

    fins: a `PlateFins` [record].
    p_w: heat to carry, above 0 [W], any shape.
    t_air_c: temperature of air and surroundings [°C], broadcasts with p_w.
    faces: "vertical", "up" or "down", see `sink_heat_w` [word].
    speed_m_per_s: speed of the air in the gaps, 0 in still air [m/s].
    altitude_m: altitude over the sea [m].
    Returns the resistance from base to air [K/W]; NaN where the base would be hotter than 200 °C.
    Source: `sink_heat_w`, which rises with the base temperature.

    >>> fins = PlateFins(9, 25e-3, 60e-3, 1.2e-3, 5e-3, 200.0, 0.85)
    >>> round(float(sink_rth_k_per_w(fins, 9.4, 25.0)), 2)
    4.71
    """
    p_w, t_air_c = np.broadcast_arrays(np.asarray(p_w, dtype=float), np.asarray(t_air_c, dtype=float))
    low_c, high_c = t_air_c + 1e-6, np.full(p_w.shape, 200.0)
    reached = sink_heat_w(fins, high_c, t_air_c, faces, speed_m_per_s, altitude_m) >= p_w
    for _ in range(50):
        middle_c = (low_c + high_c) / 2.0
        cooler = sink_heat_w(fins, middle_c, t_air_c, faces, speed_m_per_s, altitude_m) < p_w
        low_c, high_c = np.where(cooler, middle_c, low_c), np.where(cooler, high_c, middle_c)
    return np.where(reached & (p_w > 0.0), (high_c - t_air_c) / np.where(p_w > 0.0, p_w, 1.0), np.nan)[()]


def _openings_m2(fins):
    """Front and both ends of one gap."""
    return fins.spacing_m * (fins.length_m + 2.0 * fins.height_m)


def _finned_w_per_k(fins, gaps_w_per_m2_k, outer_w_per_m2_k):
    """Gaps and outer faces by the efficiency of the fins between them; half of an end fin works for its outer face."""
    tipped_m = fins.height_m + fins.thickness_m / 2.0
    n_gaps = fins.n_fins - 1
    efficiency = straight_fin_efficiency(tipped_m, fins.thickness_m, fins.k_w_per_m_k, gaps_w_per_m2_k)
    outer_efficiency = straight_fin_efficiency(tipped_m, fins.thickness_m, fins.k_w_per_m_k, outer_w_per_m2_k)
    gaps_m2 = n_gaps * fins.length_m * (2.0 * fins.height_m * efficiency + fins.spacing_m)
    return gaps_w_per_m2_k * gaps_m2 + outer_w_per_m2_k * 2.0 * fins.height_m * fins.length_m * outer_efficiency


def _flat_w_per_k(fins, t_base_c, t_air_c, facing, speed_m_per_s, altitude_m):
    width_m = fins.n_fins * fins.thickness_m + (fins.n_fins - 1) * fins.spacing_m
    base_m2 = fins.length_m * width_m
    over_perimeter_m = base_m2 / (2.0 * (fins.length_m + width_m))
    still_w_per_m2_k = natural_h_w_per_m2_k(over_perimeter_m, t_base_c, t_air_c, facing, altitude_m)
    gaps_w_per_m2_k = channel_h_w_per_m2_k(fins, t_air_c, t_air_c, speed_m_per_s, altitude_m)
    side_w_per_m2_k = natural_h_w_per_m2_k(fins.height_m, t_base_c, t_air_c, "vertical", altitude_m)
    sides = side_w_per_m2_k * 2.0 * fins.height_m * fins.length_m if facing == "up" else 0.0
    return np.cbrt((still_w_per_m2_k * base_m2 + sides) ** 3 + _finned_w_per_k(fins, gaps_w_per_m2_k, 0.0) ** 3)
