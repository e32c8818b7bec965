"""Air: its properties over temperature and altitude.

| symbol | name here | unit | meaning |
|---|---|---|---|
| ρ, ν | density_kg_per_m3, viscosity_m2_per_s | kg/m³, m²/s | density; kinematic viscosity |
| k, c_p | k_w_per_m_k, HEAT_CAPACITY_J_PER_KG_K | W/(m·K), J/(kg·K) | conductivity; heat capacity |
| Pr, β | prandtl, expansion_per_k | -, 1/K | Prandtl number; thermal expansion of an ideal gas |
| z | altitude_m | m | altitude over the sea |

Altitude changes density alone; conductivity and dynamic viscosity follow temperature.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from drc_power.physics.range import nan_where

ZERO_C_K = 273.15
GAS_CONSTANT_J_PER_KG_K = 287.053
"""Of dry air: U.S. Standard Atmosphere, 1976."""

HEAT_CAPACITY_J_PER_KG_K = 1007.0
"""Of air at constant pressure, 250 to 400 K within 1 %: Incropera, table A.4 (from memory)."""

GRAVITY_M_PER_S2 = 9.80665


class Air(NamedTuple):
    """Properties of air at a film temperature and an altitude, each of the shape of those."""

    density_kg_per_m3: np.ndarray
    viscosity_m2_per_s: np.ndarray
    k_w_per_m_k: np.ndarray
    prandtl: np.ndarray
    expansion_per_k: np.ndarray


def pressure_pa(altitude_m):
    """Pressure of the standard atmosphere: p = 101 325 Pa · (1 − 2.25577e-5 · z)^5.25588.

    altitude_m: altitude over the sea, −500 to 11 000 m [m], any shape.
    Returns the pressure [Pa], shape of altitude_m; NaN outside that range.
    Source: U.S. Standard Atmosphere, 1976, troposphere.

    >>> round(float(pressure_pa(3048.0)))
    69682
    """
    altitude_m = np.asarray(altitude_m, dtype=float)
    outside = ~((altitude_m >= -500.0) & (altitude_m <= 11_000.0))
    return nan_where(outside, 101_325.0 * (1.0 - 2.25577e-5 * np.where(outside, 0.0, altitude_m)) ** 5.25588)


def air(t_film_c, altitude_m=0.0):
    """Properties of air at a film temperature, the mean of surface and surroundings.

    Dynamic viscosity μ = 1.458e-6 · T^1.5/(T + 110.4), conductivity k = 2.64638e-3 · T^1.5/(T + 245.4 · 10^(−12/T)),
    ρ = p/(R · T), ν = μ/ρ, Pr = μ · c_p/k, β = 1/T, T in kelvin.

    t_film_c: film temperature, −75 to 230 °C [°C], any shape.
    altitude_m: altitude over the sea [m], broadcasts with t_film_c.
    Returns an `Air`: density [kg/m3], kinematic viscosity [m2/s], conductivity [W/(m.K)], Prandtl number [-],
    expansion [1/K]; NaN outside the ranges.
    Source: U.S. Standard Atmosphere, 1976 (Sutherland's law and its counterpart for conductivity).

    >>> warm = air(55.0)
    >>> round(float(warm.density_kg_per_m3), 3), round(float(warm.k_w_per_m_k), 4), round(float(warm.prandtl), 2)
    (1.076, 0.0284, 0.7)
    """
    t_film_c = np.asarray(t_film_c, dtype=float)
    kelvin = nan_where(~((t_film_c >= -75.0) & (t_film_c <= 230.0)), t_film_c + ZERO_C_K)
    density_kg_per_m3 = pressure_pa(altitude_m) / (GAS_CONSTANT_J_PER_KG_K * kelvin)
    viscosity_pa_s = 1.458e-6 * kelvin**1.5 / (kelvin + 110.4)
    k_w_per_m_k = 2.64638e-3 * kelvin**1.5 / (kelvin + 245.4 * 10.0 ** (-12.0 / kelvin))
    prandtl = viscosity_pa_s * HEAT_CAPACITY_J_PER_KG_K / k_w_per_m_k
    return Air(density_kg_per_m3, viscosity_pa_s / density_kg_per_m3, k_w_per_m_k, prandtl, 1.0 / kelvin)


def density_share(altitude_m):
    """Density of the standard atmosphere over that at the sea: (1 − 2.25577e-5 · z)^4.25588.

    altitude_m: altitude over the sea, −500 to 11 000 m [m], any shape.
    Returns the share [-], shape of altitude_m; NaN outside that range.
    Source: U.S. Standard Atmosphere, 1976, whose air also cools with altitude.

    >>> round(float(density_share(3000.0)), 3)
    0.742
    """
    standard_k_per_sea = 1.0 - 2.25577e-5 * np.asarray(altitude_m, dtype=float)
    return pressure_pa(altitude_m) / 101_325.0 / standard_k_per_sea


def altitude_rise_share(altitude_m, exponent):
    """Growth of a temperature rise with altitude at constant power: (ρ/ρ_0)^−n.

    altitude_m: altitude over the sea [m], any shape.
    exponent: n [-]: 0.4 laminar natural flow, 0.5 laminar and 0.8 turbulent forced flow at constant volume, 1
        heat-up of the air itself.
    Returns the factor on the rise [-], shape of altitude_m.
    Source: ν ~ 1/ρ in the correlations of `convection.py`.

    >>> round(float(altitude_rise_share(3048.0, 0.4)), 3)
    1.129
    """
    return density_share(altitude_m) ** -np.asarray(exponent)
