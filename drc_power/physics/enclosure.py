"""The air of an enclosure: heat through its walls, and what a draught through its vents carries away.

| symbol | name here | unit | meaning |
|---|---|---|---|
| A | faces_m2 | m² | outer faces that give off heat |
| A_v | vent_m2 | m² | free area of the openings where air enters, and of those where it leaves |
| H | height_m | m | from the openings below to those above |
| ΔT | rise_k | K | air inside over air outside |
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.air import GRAVITY_M_PER_S2, HEAT_CAPACITY_J_PER_KG_K, air
from drc_power.physics.convection import natural_h_w_per_m2_k, radiation_h_w_per_m2_k

DISCHARGE = 0.6
"""Contraction of the flow through a sharp opening: common practice, orifice plates."""

WALL_EMISSIVITY = 0.9
"""Paint, plastic and anodised metal, inside and out: common practice."""


def wall_conductance_w_per_k(faces_m2, rise_k, t_air_c, height_m=0.1, altitude_m=0.0):
    """Heat from the air of a closed box to the air outside per kelvin: film, wall, film, the wall itself left out.

    faces_m2: outer faces that air can reach [m2].
    rise_k: air inside over air outside, above 0 [K].
    t_air_c: air outside [°C].
    height_m: height of the faces [m].
    altitude_m: altitude over the sea [m].
    Returns the conductance [W/K]. Each film has half of the rise, natural flow over a vertical plate and radiation;
    inside that is the radiation of the board, which is as warm as its air or warmer.
    Source: `convection.natural_h_w_per_m2_k`, `convection.radiation_h_w_per_m2_k`; painted steel boxes are commonly
    counted with 5.5 W/(m²·K).

    >>> round(float(wall_conductance_w_per_k(1.0, 20.0, 25.0)), 2)
    5.1
    """
    wall_c, inside_c = np.add(t_air_c, np.divide(rise_k, 2.0)), np.add(t_air_c, rise_k)
    films = [natural_h_w_per_m2_k(height_m, warm, cool, "vertical", altitude_m)
             + radiation_h_w_per_m2_k(WALL_EMISSIVITY, warm, cool) for warm, cool in ((inside_c, wall_c), (wall_c, t_air_c))]
    return faces_m2 / (1.0 / films[0] + 1.0 / films[1])


def vent_conductance_w_per_k(vent_m2, rise_k, t_air_c, height_m, altitude_m=0.0):
    """Heat that rising air carries out of a box per kelvin: G = ρ · c_p · C_d · A_v · √(g · H · ΔT/T).

    vent_m2: free area of the openings below, and likewise of those above [m2].
    rise_k: air inside over air outside, not below 0 [K].
    t_air_c: air outside [°C].
    height_m: from the openings below to those above [m].
    altitude_m: altitude over the sea [m].
    Returns the conductance [W/K].
    Source: Bernoulli's equation with the weight of the warm column, two equal openings in series, which take half of
    the head each; ρ of the air that leaves.

    >>> round(float(vent_conductance_w_per_k(20e-4, 20.0, 25.0, 0.1)), 3)
    0.333
    """
    leaving = air(np.add(t_air_c, rise_k), altitude_m)
    head = GRAVITY_M_PER_S2 * height_m * np.maximum(rise_k, 0.0) * leaving.expansion_per_k
    return leaving.density_kg_per_m3 * HEAT_CAPACITY_J_PER_KG_K * DISCHARGE * vent_m2 * np.sqrt(head)
