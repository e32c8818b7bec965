"""Worked examples of heat transfer: Incropera, Holman, Som, Cengel; marks beside each.

Companion files (Scilab Textbook Companion) hold inputs and method, no printed answers.
"""

import numpy as np
import pytest

from drc_power.physics import convection, fins


def test_incropera_9_2_glass_door_firescreen():
    """0.71 x 1.02 m, 232 °C in 23 °C, k 0.0338, ν 26.4e-6, α 38.3e-6, β 0.0025, Pr 0.69: Ra 1.813e9 and Nu 147 FOUND;
    geometry and 1060 W MEMORY."""
    ra = 9.8 * 0.0025 * (232 - 23) * 0.71**3 / (26.4e-6 * 38.3e-6)
    assert ra == pytest.approx(1.813e9, rel=0.5e-3)
    nusselt = convection.vertical_plate_nusselt(ra, 0.69)
    assert nusselt == pytest.approx(147.1, abs=0.1)
    h = nusselt * 0.0338 / 0.71
    assert h == pytest.approx(7.0, abs=0.05)
    assert h * 0.71 * 1.02 * (232 - 23) == pytest.approx(1060, abs=5)


def test_churchill_chu_as_documented_by_ht():
    """The docstring of ht 1.2 states that it matches Incropera's example 9.2: 147.12 (147.16 by the printed Ra)."""
    ht = pytest.importorskip("ht")
    theirs = ht.Nu_vertical_plate_Churchill(0.69, 2.63e9)
    assert theirs == pytest.approx(147.16185223770603, rel=1e-12)
    assert convection.vertical_plate_nusselt(0.69 * 2.63e9, 0.69) == pytest.approx(theirs, rel=1e-9)


def test_som_5_7_nitrogen_wall_is_turbulent():
    """Nu = 0.13 · (Gr Pr)^(1/3), 56/4 °C, 2 m, k 0.026, ν 15.63e-6, Pr 0.713 (inputs FOUND): Churchill and Chu
    give the same within the 20 % that such laws differ by."""
    ra = 9.81 / 303 * (56 - 4) * 2**3 / 15.63e-6**2 * 0.713
    assert convection.vertical_plate_nusselt(ra, 0.713) == pytest.approx(0.13 * ra ** (1 / 3), rel=0.2)


@pytest.mark.parametrize(("height_m", "efficiency"), [(30e-3, 0.9710), (30.5e-3, 0.9701)])
def test_straight_fin(height_m, efficiency):
    """h 10, k 200, t 1 mm, L 30 mm: mL 0.3 and tanh(0.3)/0.3; with L + t/2 (MEMORY, by hand)."""
    x = np.sqrt(2 * 10 / (200 * 1e-3)) * height_m
    assert np.tanh(x) / x == pytest.approx(efficiency, abs=0.5e-4)
    assert fins.straight_fin_efficiency(height_m, 1e-3, 200.0, 10.0) == pytest.approx(efficiency, abs=0.5e-4)


def test_holman_2_9_annular_fin():
    """Tube 25 mm, fin 15 mm x 1 mm, k 200, h 130, 170/25 °C (inputs and the chart's η 0.82 FOUND): q_max 74.35 W.
    Bessel gives 0.867: the chart was read 6 % low, so 61.0 W of the text against 64.45 W."""
    r_1, r_2 = 12.5e-3, 12.5e-3 + 15e-3 + 0.5e-3
    most_w = 2 * np.pi * (r_2**2 - r_1**2) * 130 * (170 - 25)
    assert most_w == pytest.approx(74.35, abs=0.05)
    efficiency = fins.annular_fin_efficiency(r_1, r_2, 1e-3, 200.0, 130.0)
    assert efficiency == pytest.approx(0.8669, abs=0.5e-4)
    assert efficiency == pytest.approx(0.82, rel=0.06)
    assert efficiency * most_w == pytest.approx(64.45, abs=0.05)


def test_incropera_3_10_motorcycle_cylinder():
    """H 0.15, D 0.05, five fins 6 mm x 20 mm, k 186, h 50, 500/300 K: about 690 W with the chart's η 0.95 and
    235.6 W bare (part inputs FOUND, rest MEMORY). Bessel: η 0.9786, 704.7 W."""
    r_1, r_2 = 25e-3, 45e-3 + 3e-3
    efficiency = fins.annular_fin_efficiency(r_1, r_2, 6e-3, 186.0, 50.0)
    assert efficiency == pytest.approx(0.9786, abs=0.5e-4)
    finned_m2, bare_m2 = 5 * 2 * np.pi * (r_2**2 - r_1**2), 2 * np.pi * r_1 * (0.15 - 5 * 6e-3)
    heat = lambda eta: 50 * (finned_m2 * eta + bare_m2) * 200  # noqa: E731
    assert heat(efficiency) == pytest.approx(704.7, abs=0.05)
    assert heat(0.95) == pytest.approx(690, abs=5)
    assert 50 * 2 * np.pi * r_1 * 0.15 * 200 == pytest.approx(235.6, abs=0.05)


def test_cengel_optimum_spacing():
    """12 cm wide, 18 cm high, fins 1 mm x 24 mm, 80/30 °C, k 0.02772, ν 1.847e-5, Pr 0.7215 (MEMORY): Ra_L 1.844e7,
    S 7.45 mm, Nu 1.307, h 4.86, 14 to 15 fins, 29.4 and 31.5 W."""
    ra_length = 9.81 / (55 + 273) * 50 * 0.18**3 / 1.847e-5**2 * 0.7215
    assert ra_length == pytest.approx(1.844e7, rel=0.5e-3)
    spacing_m = fins.optimum_spacing_m(0.18, ra_length)
    assert spacing_m * 1e3 == pytest.approx(7.45, abs=0.01)
    nusselt = fins.channel_natural_nusselt(ra_length * (spacing_m / 0.18) ** 4)
    assert nusselt == pytest.approx(1.307, abs=0.5e-3)
    h = 1.307 * 0.02772 / spacing_m
    assert h == pytest.approx(4.86, abs=0.005)
    assert 0.12 / (spacing_m + 1e-3) == pytest.approx(14.2, abs=0.05)
    for n_fins, watts in ((14, 29.4), (15, 31.5)):
        assert h * 2 * n_fins * 0.18 * 0.024 * 50 == pytest.approx(watts, abs=0.05)
