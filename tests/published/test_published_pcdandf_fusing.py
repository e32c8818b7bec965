"""Printed Circuit Design and Fab, articles 10179, 10293 (Onderdonk) and 17314 (Preece).

Variables, 1083 °C and Preece's constant FOUND; Onderdonk's full equation MEMORY (a picture in the articles).
"""

import math

import pytest

from drc_power.physics import copper

MIL_M = 25.4e-6


@pytest.mark.parametrize(("width_mil", "t_s", "i_a"), [(10, 1.0, 2.567), (10, 0.1, 8.117), (100, 1.0, 25.67)])
def test_onderdonk(width_mil, t_s, i_a):
    """Worked out in circular mils: 10 x 1.378 mil is 17.545 of them."""
    circular_mils = width_mil * 1.378 * 4 / math.pi
    by_hand_a = circular_mils * math.sqrt(math.log10(1 + (1083 - 25) / (234 + 25)) / 33 / t_s)
    assert by_hand_a == pytest.approx(i_a, rel=0.5e-3 / 2.567)
    assert copper.onderdonk_current_a(width_mil * 1.378 * MIL_M**2, t_s, 25.0) == pytest.approx(by_hand_a, rel=1e-9)


@pytest.mark.parametrize(("diameter_in", "i_a", "half_digit"), [(0.0403, 82.9, 0.05), (0.010, 10.24, 0.005)])
def test_preece(diameter_in, i_a, half_digit):
    """I = 10244 · d^1.5, d in inches."""
    assert 10244 * diameter_in * math.sqrt(diameter_in) == pytest.approx(i_a, abs=half_digit)
    assert copper.preece_current_a(diameter_in * 0.0254) == pytest.approx(i_a, abs=half_digit)
