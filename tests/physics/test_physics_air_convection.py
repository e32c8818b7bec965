"""Air and flow over surfaces: against `fluids` and `ht` (general-purpose libraries, compiled handbooks), and ends."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from drc_power.physics import air as room
from drc_power.physics import convection
from drc_power.physics.air import air


@pytest.mark.parametrize("altitude_m", [-100.0, 0.0, 1524.0, 3048.0, 8000.0])
def test_standard_atmosphere_is_that_of_fluids(altitude_m):
    """1976 atmosphere; ours takes height as geopotential, which differs by z/6357 km."""
    standard = pytest.importorskip("fluids").ATMOSPHERE_1976(altitude_m)
    ours = air(standard.T - 273.15, altitude_m)
    assert room.pressure_pa(altitude_m) == pytest.approx(standard.P, rel=2e-3)
    assert ours.density_kg_per_m3 == pytest.approx(standard.rho, rel=2e-3)
    assert ours.viscosity_m2_per_s * ours.density_kg_per_m3 == pytest.approx(standard.mu, rel=1e-6)
    assert ours.k_w_per_m_k == pytest.approx(standard.k, rel=1e-6)
    assert room.density_share(altitude_m) == pytest.approx(standard.rho / 1.225, rel=2e-3)


def test_a_surface_colder_than_the_air_takes_heat_as_a_hot_one_gives_it():
    hot, cold = (convection.natural_h_w_per_m2_k(0.1, *pair) for pair in ((60.0, 20.0), (20.0, 60.0)))
    assert cold == pytest.approx(hot, rel=1e-12)


def test_air_ends():
    np.testing.assert_array_equal(np.isnan(air([-75.0, 230.0, -75.1, 230.1]).k_w_per_m_k), [False, False, True, True])
    np.testing.assert_array_equal(np.isnan(room.pressure_pa([-500.0, 11_000.0, -501.0, 11_001.0])), [0, 0, 1, 1])
    assert np.isnan(air(25.0, 12_000.0).viscosity_m2_per_s)


@pytest.mark.parametrize("ra", [1e2, 1e4, 1e6, 1.813e9, 1e11])
@pytest.mark.parametrize("prandtl", [0.69, 0.71])
def test_natural_flow_is_that_of_ht(ra, prandtl):
    ht = pytest.importorskip("ht")
    grashof = ra / prandtl
    plate = ht.Nu_vertical_plate_Churchill(prandtl, grashof)
    assert convection.vertical_plate_nusselt(ra, prandtl) == pytest.approx(plate, rel=1e-9)
    if 1e4 < ra < 1e7:
        up, down = (ht.Nu_horizontal_plate_McAdams(prandtl, grashof, buoyancy) for buoyancy in (True, False))
        assert convection.horizontal_plate_up_nusselt(ra) == pytest.approx(up, rel=1e-9)
        assert convection.horizontal_plate_down_nusselt(ra) == pytest.approx(down, rel=1e-9)


@pytest.mark.parametrize("reynolds", [1e2, 1e4, 4e5])
def test_forced_flow_is_that_of_ht(reynolds):
    ht = pytest.importorskip("ht")
    expected = ht.Nu_horizontal_plate_laminar_Baehr(reynolds, 0.7)
    assert convection.flat_plate_nusselt(reynolds, 0.7) == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize("pair", [(85.0, 25.0), (126.85, 31.85), (-20.0, 40.0)])
def test_radiation_is_that_of_ht(pair):
    ht = pytest.importorskip("ht")
    hot_c, cold_c = pair
    expected = ht.q_rad(0.8, hot_c + 273.15, cold_c + 273.15)
    # ht keeps an older value of the constant.
    assert convection.radiated_w_per_m2(0.8, hot_c, cold_c) == pytest.approx(expected, rel=3e-6)
    h = convection.radiation_h_w_per_m2_k(0.8, hot_c, cold_c)
    assert h * (hot_c - cold_c) == pytest.approx(expected, rel=3e-6)


@pytest.mark.parametrize(
    ("law", "change"),
    [
        (convection.horizontal_plate_up_nusselt, (0.54 / 0.15) ** 12),
        (lambda re: convection.flat_plate_nusselt(re, 0.7), 5e5),
    ],
)
def test_no_step_and_no_fall_where_a_law_changes(law, change):
    numbers = change * np.linspace(0.9, 1.1, 2001)
    values = law(numbers)
    assert np.all(np.diff(values) >= 0)
    assert np.max(np.diff(values)) < 2e-3 * values[0]


@pytest.mark.parametrize(
    ("law", "end"),
    [
        (lambda x: convection.vertical_plate_nusselt(x, 0.7), 1e12),
        (lambda x: convection.vertical_plate_laminar_nusselt(x, 0.7), 1e9),
        (convection.horizontal_plate_up_nusselt, 1e11),
        (convection.horizontal_plate_down_nusselt, 1e10),
        (lambda x: convection.flat_plate_nusselt(x, 0.7), 1e8),
    ],
)
def test_laws_end(law, end):
    np.testing.assert_array_equal(np.isnan(law(np.array([0.0, end, np.nextafter(end, np.inf)]))), [False, False, True])


@given(st.floats(0.001, 50), st.floats(0.001, 50))
def test_blend_is_never_below_either_and_never_above_both(natural, forced):
    h = convection.blended_h_w_per_m2_k(natural, forced)
    assert max(natural, forced) * (1 - 1e-12) <= h <= (natural + forced) * (1 + 1e-12)


@given(st.floats(0, 10), st.floats(0, 10), st.sampled_from(["vertical", "up", "down"]), st.floats(0, 5000))
def test_more_wind_cools_more_and_altitude_less(one, other, facing, altitude_m):
    slow, fast = sorted((one, other))
    h = lambda speed, z: convection.blended_h_w_per_m2_k(  # noqa: E731
        convection.natural_h_w_per_m2_k(0.05, 80.0, 30.0, facing, z),
        convection.forced_h_w_per_m2_k(0.05, speed, 80.0, 30.0, z),
    )
    assert h(slow, altitude_m) <= h(fast, altitude_m) * (1 + 1e-12)
    assert h(fast, altitude_m) <= h(fast, 0.0) * (1 + 1e-12)
