"""Air of enclosures: walls against the common figure, vents against the common rule of thumb, both monotone."""

import numpy as np
import pytest

from drc_power.physics.air import air
from drc_power.physics.enclosure import vent_conductance_w_per_k, wall_conductance_w_per_k


@pytest.mark.parametrize("rise_k", [10.0, 20.0, 30.0])
def test_walls_are_near_the_common_figure(rise_k):
    """Painted sheet steel 5.5 W/(m²·K) (common practice of enclosure makers): ours is that or less, so hotter."""
    assert 0.75 * 5.5 < wall_conductance_w_per_k(1.0, rise_k, 25.0) <= 5.5


def test_vents_by_bernoulli_written_out():
    """20 cm² each, 0.1 m, 20 K: speed √(g · H · ΔT/T) in the openings, half of the head in each."""
    t_out_k, t_in_k = 298.15, 318.15
    drive_pa = (101325 / (287.05 * t_out_k) - 101325 / (287.05 * t_in_k)) * 9.81 * 0.1
    speed = np.sqrt(2 * (drive_pa / 2) / (101325 / (287.05 * t_in_k)))
    carried = 101325 / (287.05 * t_in_k) * 0.6 * 20e-4 * speed * 1007
    assert vent_conductance_w_per_k(20e-4, 20.0, 25.0, 0.1) == pytest.approx(carried, rel=0.05)


def test_vents_against_the_rule_of_thumb():
    """A[cm²] = 145 · P[W]/(√H[m] · ΔT^1.5): common practice of cooling design (from memory); within a third."""
    p_w = float(vent_conductance_w_per_k(20e-4, 20.0, 25.0, 0.1) * 20.0)
    assert 145 * p_w / (np.sqrt(0.1) * 20**1.5) == pytest.approx(20.0, rel=0.75)


def test_more_faces_vents_rise_or_pressure_carry_more():
    rises = np.linspace(0.5, 60.0, 40)
    for law in (lambda r: wall_conductance_w_per_k(0.1, r, 25.0), lambda r: vent_conductance_w_per_k(1e-3, r, 25.0, 0.05)):
        assert (np.diff(law(rises)) > 0).all()
    assert wall_conductance_w_per_k(0.1, 20.0, 25.0, altitude_m=3000.0) < wall_conductance_w_per_k(0.1, 20.0, 25.0)
    assert vent_conductance_w_per_k(1e-3, 20.0, 25.0, 0.05, 3000.0) < vent_conductance_w_per_k(1e-3, 20.0, 25.0, 0.05)
    assert air(45.0).density_kg_per_m3 < air(25.0).density_kg_per_m3
