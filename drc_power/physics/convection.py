"""Heat from surfaces to air and surroundings: natural and forced flow over plates, radiation.

| symbol | name here | unit | meaning |
|---|---|---|---|
| Ra, Pr, Re | rayleigh, prandtl, reynolds | - | Rayleigh, Prandtl and Reynolds numbers |
| Nu | the results | - | Nusselt number, h · length/k |
| h | h_w_per_m2_k | W/(m²·K) | heat transfer coefficient |
| ε | emissivity | - | emissivity of the surface |

Properties at the film temperature, from `air.py`. Arrays broadcast; corners first.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.air import GRAVITY_M_PER_S2, ZERO_C_K, air
from drc_power.physics.range import nan_where

STEFAN_BOLTZMANN_W_PER_M2_K4 = 5.670374419e-8
"""CODATA 2018."""

TRANSITION_REYNOLDS = 5e5
"""Where flow along a plate becomes turbulent: common practice."""


def rayleigh(length_m, rise_k, medium):
    """Rayleigh number: Ra = g · β · ΔT · L³/(ν · α), α = ν/Pr.

    length_m: characteristic length [m].
    rise_k: surface over air, its magnitude [K].
    medium: an `Air` at the film temperature [record].
    Returns the number [-].
    Source: definition.

    >>> round(float(rayleigh(0.1, 40.0, air(45.0))) / 1e6, 2)
    2.86
    """
    buoyancy = GRAVITY_M_PER_S2 * medium.expansion_per_k * np.abs(rise_k)
    return buoyancy * np.asarray(length_m) ** 3 * medium.prandtl / medium.viscosity_m2_per_s**2


def vertical_plate_nusselt(ra, prandtl):
    """Natural flow on a vertical plate, laminar and turbulent in one: Churchill and Chu 1975.

    Nu = {0.825 + 0.387 · Ra^(1/6)/[1 + (0.492/Pr)^(9/16)]^(8/27)}².

    ra: Rayleigh number on the height, up to 1e12 [-].
    prandtl: Prandtl number [-].
    Returns the mean Nusselt number [-]; NaN above 1e12.
    Source: S. W. Churchill and H. H. S. Chu, Int. J. Heat Mass Transfer 18, 1975, eq. as in Incropera, 9.26.

    >>> round(float(vertical_plate_nusselt(1.813e9, 0.69)), 1)
    147.1
    """
    shape = (1.0 + (0.492 / np.asarray(prandtl)) ** (9.0 / 16.0)) ** (8.0 / 27.0)
    return nan_where(~_within(ra, 1e12), (0.825 + 0.387 * np.asarray(ra) ** (1.0 / 6.0) / shape) ** 2)


def vertical_plate_laminar_nusselt(ra, prandtl):
    """Natural flow on a vertical plate while laminar: Churchill and Chu 1975.

    Nu = 0.68 + 0.670 · Ra^(1/4)/[1 + (0.492/Pr)^(9/16)]^(4/9).

    ra: Rayleigh number on the height, up to 1e9 [-].
    prandtl: Prandtl number [-].
    Returns the mean Nusselt number [-]; NaN above 1e9.
    Source: as `vertical_plate_nusselt`, Incropera, 9.27.

    >>> round(float(vertical_plate_laminar_nusselt(1e6, 0.71)), 2)
    16.94
    """
    shape = (1.0 + (0.492 / np.asarray(prandtl)) ** (9.0 / 16.0)) ** (4.0 / 9.0)
    return nan_where(~_within(ra, 1e9), 0.68 + 0.670 * np.asarray(ra) ** 0.25 / shape)


def horizontal_plate_up_nusselt(ra):
    """Natural flow over a hot plate facing up: the larger of 0.54 · Ra^(1/4) and 0.15 · Ra^(1/3).

    ra: Rayleigh number on area over perimeter, up to 1e11 [-].
    Returns the mean Nusselt number [-], without a step where the law changes; NaN above 1e11. Below 1e4 it
    reads low, since small plates keep some heat flow by conduction.
    Source: W. H. McAdams, Heat Transmission, as in Incropera, 9.30 and 9.31.

    >>> round(float(horizontal_plate_up_nusselt(1e6)), 3)
    17.076
    """
    laminar = 0.54 * np.asarray(ra, dtype=float) ** 0.25
    return nan_where(~_within(ra, 1e11), np.maximum(laminar, 0.15 * np.cbrt(ra)))


def horizontal_plate_down_nusselt(ra):
    """Natural flow under a hot plate facing down: Nu = 0.27 · Ra^(1/4).

    ra: Rayleigh number on area over perimeter, up to 1e10 [-].
    Returns the mean Nusselt number [-]; NaN above 1e10. Below 1e5 it reads low.
    Source: W. H. McAdams, Heat Transmission, as in Incropera, 9.32.

    >>> round(float(horizontal_plate_down_nusselt(1e6)), 3)
    8.538
    """
    return nan_where(~_within(ra, 1e10), 0.27 * np.asarray(ra, dtype=float) ** 0.25)


def flat_plate_nusselt(reynolds, prandtl):
    """Forced flow along a plate: 0.664 · Re^(1/2) · Pr^(1/3), past transition (0.037 · Re^(4/5) − 871) · Pr^(1/3).

    reynolds: Reynolds number on the length along the flow, up to 1e8 [-].
    prandtl: Prandtl number, 0.6 to 60 [-].
    Returns the mean Nusselt number [-]; NaN above 1e8.
    Source: Incropera, 7.30 and 7.38, with transition at Re 5e5.

    >>> round(float(flat_plate_nusselt(1e4, 0.7)), 3)
    58.957
    """
    reynolds = np.asarray(reynolds, dtype=float)
    turbulent = 0.037 * reynolds**0.8 - 871.0
    flow = np.where(reynolds > TRANSITION_REYNOLDS, np.maximum(turbulent, 0.664 * np.sqrt(TRANSITION_REYNOLDS)), 0.0)
    return nan_where(~_within(reynolds, 1e8), np.cbrt(prandtl) * np.where(flow > 0.0, flow, 0.664 * np.sqrt(reynolds)))


def natural_h_w_per_m2_k(length_m, t_surface_c, t_air_c, facing="vertical", altitude_m=0.0):
    """Heat transfer of a plate in still air, by the law of its facing: h = Nu · k/L.

    length_m: height of a vertical plate; area over perimeter of a horizontal one [m].
    t_surface_c: temperature of the surface [°C].
    t_air_c: temperature of the air [°C].
    facing: "vertical", "up" or "down", the side that is hot [word].
    altitude_m: altitude over the sea [m].
    Returns the coefficient [W/(m2.K)]; NaN outside the laws' ranges.
    Source: `vertical_plate_nusselt`, `horizontal_plate_up_nusselt`, `horizontal_plate_down_nusselt`.

    >>> [round(float(natural_h_w_per_m2_k(0.1, 85.0, 25.0, facing)), 2) for facing in ("vertical", "up", "down")]
    [6.71, 6.74, 3.37]
    """
    medium = air(np.add(t_surface_c, t_air_c) / 2.0, altitude_m)
    ra = rayleigh(length_m, np.subtract(t_surface_c, t_air_c), medium)
    laws = {
        "vertical": lambda: vertical_plate_nusselt(ra, medium.prandtl),
        "up": lambda: horizontal_plate_up_nusselt(ra),
        "down": lambda: horizontal_plate_down_nusselt(ra),
    }
    return laws[facing]() * medium.k_w_per_m_k / length_m


def forced_h_w_per_m2_k(length_m, speed_m_per_s, t_surface_c, t_air_c, altitude_m=0.0):
    """Heat transfer of a plate in moving air: h = Nu · k/L.

    length_m: length of the plate along the flow [m].
    speed_m_per_s: speed of the air, 0 in still air [m/s].
    t_surface_c: temperature of the surface [°C].
    t_air_c: temperature of the air [°C].
    altitude_m: altitude over the sea [m].
    Returns the coefficient [W/(m2.K)], 0 in still air; NaN outside the law's range.
    Source: `flat_plate_nusselt`.

    >>> round(float(forced_h_w_per_m2_k(0.1, 2.0, 85.0, 25.0)), 2)
    17.48
    """
    medium = air(np.add(t_surface_c, t_air_c) / 2.0, altitude_m)
    reynolds = np.multiply(speed_m_per_s, length_m) / medium.viscosity_m2_per_s
    return flat_plate_nusselt(reynolds, medium.prandtl) * medium.k_w_per_m_k / length_m


def blended_h_w_per_m2_k(natural_w_per_m2_k, forced_w_per_m2_k):
    """Natural and forced flow together, without a step: h = (h_n³ + h_f³)^(1/3).

    natural_w_per_m2_k: coefficient in still air [W/(m2.K)].
    forced_w_per_m2_k: coefficient by the flow alone [W/(m2.K)].
    Returns the coefficient [W/(m2.K)]. Valid for flows that help or cross each other.
    Source: S. W. Churchill, AIChE Journal 23, 1977; Incropera, 9.64 with n = 3.

    >>> round(float(blended_h_w_per_m2_k(6.0, 6.0)), 3)
    7.56
    """
    return np.cbrt(np.power(natural_w_per_m2_k, 3.0) + np.power(forced_w_per_m2_k, 3.0))


def radiated_w_per_m2(emissivity, t_surface_c, t_surroundings_c):
    """Heat radiated to large surroundings: q = ε · σ · (T_1⁴ − T_2⁴), in kelvin.

    emissivity: of the surface, 0 to 1 [-].
    t_surface_c: temperature of the surface [°C].
    t_surroundings_c: temperature of the walls that it sees [°C].
    Returns the flux [W/m2].
    Source: Stefan and Boltzmann.

    >>> round(float(radiated_w_per_m2(0.8, 85.0, 25.0)), 2)
    387.92
    """
    fourth = np.add(t_surface_c, ZERO_C_K) ** 4 - np.add(t_surroundings_c, ZERO_C_K) ** 4
    return emissivity * STEFAN_BOLTZMANN_W_PER_M2_K4 * fourth


def radiation_h_w_per_m2_k(emissivity, t_surface_c, t_surroundings_c):
    """Radiation as a heat transfer coefficient: h = ε · σ · (T_1² + T_2²) · (T_1 + T_2), in kelvin.

    emissivity: of the surface, 0 to 1 [-].
    t_surface_c: temperature of the surface [°C].
    t_surroundings_c: temperature of the walls that it sees [°C].
    Returns the coefficient [W/(m2.K)], at no difference too.
    Source: `radiated_w_per_m2` over the difference of temperature.

    >>> round(float(radiation_h_w_per_m2_k(0.8, 85.0, 25.0)), 3)
    6.465
    """
    surface_k, surroundings_k = np.add(t_surface_c, ZERO_C_K), np.add(t_surroundings_c, ZERO_C_K)
    return emissivity * STEFAN_BOLTZMANN_W_PER_M2_K4 * (surface_k**2 + surroundings_k**2) * (surface_k + surroundings_k)


def _within(number, end):
    return np.greater_equal(number, 0.0) & np.less_equal(number, end)
