"""Inrush, turn-off and surge: against scipy's quadrature and circuit solutions, at every end of range."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad, solve_ivp

from drc_power.physics import OutsideRange, avalanche, inrush, surge

POSITIVE = st.floats(0.1, 100)


@given(st.floats(1e-6, 1e-2), st.floats(0.1, 100), POSITIVE, st.floats(0, 10))
def test_constant_current_keeps_energy(c_f, v_step_v, i_charge_a, i_load_a):
    """Path, closed form and the capacitor's own balance agree."""
    path = inrush.charge_path(c_f, v_step_v, i_charge_a, i_load_a)
    energy_j = inrush.charge_energy_j(c_f, v_step_v, i_charge_a, i_load_a)
    assert inrush.path_energy_j(*path) == pytest.approx(energy_j, rel=1e-12)
    assert energy_j == pytest.approx(c_f * v_step_v**2 / 2 * (1 + i_load_a / i_charge_a), rel=1e-9)


def test_half_the_energy_is_lost_whatever_the_path():
    c_f, v_step_v = 1e-3, 24.0
    resistor = inrush.path_energy_j(*inrush.resistor_path(c_f, v_step_v, 10.0, n_time_constants=20.0))
    power_limited = inrush.path_energy_j(*inrush.power_limited_path(c_f, v_step_v, 48.0, 10.0))
    half_j = c_f * v_step_v**2 / 2
    assert inrush.charge_energy_j(c_f, v_step_v, 3.0) == pytest.approx(half_j)
    # Straight lines between 65 samples of a curve read high by less than 0.2 %.
    assert resistor == pytest.approx(half_j, rel=2e-3)
    assert power_limited == pytest.approx(half_j, rel=2e-3)
    assert inrush.lost_share(0.0, v_step_v) == 0.5


def test_a_load_that_takes_the_whole_limit_never_lets_the_bank_charge():
    np.testing.assert_array_equal(inrush.charge_time_s(1e-3, 24.0, [1.0, 0.0, -0.5]), [0.024, np.inf, np.inf])
    assert np.isnan(inrush.charge_time_s(1e-3, 24.0, np.nan))
    times = inrush.power_limited_time_s(1e-3, 24.0, 48.0, 10.0, [1.9, 2.0, 2.1])
    np.testing.assert_array_equal(np.isinf(times), [False, True, True])
    np.testing.assert_allclose(inrush.charge_energy_j(1e-3, 24.0, [1.0, 0.0], 1.0), [0.576, np.inf])


@pytest.mark.parametrize("i_load_a", [0.0, 1e-6, 1e-3, 0.1, 1.0, 1.9])
@pytest.mark.parametrize("i_limit_a", [3.0, 10.0, 1e3])
def test_power_limit_is_the_integral(i_load_a, i_limit_a):
    c_f, v_step_v, p_w = 1e-3, 24.0, 48.0
    knee_v = p_w / i_limit_a
    expected_s = c_f * quad(lambda v: 1 / (p_w / v - i_load_a), knee_v, v_step_v, epsrel=1e-12)[0]
    expected_s += c_f * knee_v / (i_limit_a - i_load_a)
    assert inrush.power_limited_time_s(c_f, v_step_v, p_w, i_limit_a, i_load_a) == pytest.approx(expected_s, rel=1e-9)
    t_s, v_v, i_a = inrush.power_limited_path(c_f, v_step_v, p_w, i_limit_a, i_load_a)
    assert t_s[-1] == pytest.approx(expected_s, rel=1e-9)
    assert np.all(np.diff(t_s) >= 0)
    assert np.all(np.diff(v_v) <= 0)
    assert v_v[-1] == 0.0
    assert (v_v * i_a).max() <= p_w * (1 + 1e-12)
    assert i_a.max() == pytest.approx(i_limit_a)


def test_a_power_limit_that_never_bites_is_a_current_limit():
    assert inrush.power_limited_time_s(1e-3, 24.0, 300.0, 10.0) == pytest.approx(inrush.charge_time_s(1e-3, 24.0, 10.0))


def test_a_power_limit_alone_ends_in_time():
    """t = C · ΔV²/(2 · P)."""
    assert inrush.power_limited_time_s(1e-3, 24.0, 48.0) == pytest.approx(1e-3 * 24**2 / 2 / 48)
    t_s, v_v, i_a = inrush.power_limited_path(1e-3, 24.0, 48.0)
    assert t_s[-1] == pytest.approx(0.006, rel=1e-3)
    assert np.isfinite(i_a).all()


@pytest.mark.parametrize("i_load_a", [0.0, 0.5])
def test_a_precharge_resistor_is_its_circuit(i_load_a):
    c_f, v_step_v, r_ohm = 1e-3, 24.0, 10.0
    t_s, v_v, i_a = inrush.resistor_path(c_f, v_step_v, r_ohm, i_load_a)
    solved = solve_ivp(
        lambda _, v: -(v / r_ohm - i_load_a) / c_f, [0, t_s[-1]], [v_step_v], t_eval=t_s, rtol=1e-9, atol=1e-9
    )
    np.testing.assert_allclose(v_v, solved.y[0], rtol=1e-6)
    np.testing.assert_allclose(i_a, v_v / r_ohm)


def test_paths_run_over_corners():
    v_step_v, load_a = np.array([21.0, 24.0, 29.0]), np.array([0.0, 0.1, 0.2])
    for path in (
        inrush.charge_path(1e-3, v_step_v, 1.0, load_a),
        inrush.power_limited_path(1e-3, v_step_v, 40.0, 8.0, load_a),
        inrush.resistor_path(1e-3, v_step_v, 10.0, load_a),
    ):
        assert len({x.shape for x in path}) == 1
        assert path[0].shape[0] == 3
        assert inrush.path_energy_j(*path).shape == (3,)


@given(st.floats(1e-6, 1e-1), POSITIVE, st.floats(10, 100), st.floats(0, 9))
def test_turn_off_keeps_energy(l_h, i_a, v_clamp_v, v_supply_v):
    """What the part takes is what the coil held and what the supply gave meanwhile."""
    time_s = avalanche.turn_off_time_s(l_h, i_a, v_clamp_v, v_supply_v)
    energy_j = avalanche.turn_off_energy_j(l_h, i_a, v_clamp_v, v_supply_v)
    from_supply_j = v_supply_v * i_a * time_s / 2
    assert energy_j == pytest.approx(avalanche.stored_energy_j(l_h, i_a) + from_supply_j, rel=1e-9)
    assert energy_j == pytest.approx(v_clamp_v * i_a * time_s / 2, rel=1e-9)


def test_a_clamp_at_or_under_the_supply_never_ends():
    energies_j = avalanche.turn_off_energy_j(1e-3, 5.0, [24.0, np.nextafter(24.0, 99), 60.0], 24.0)
    np.testing.assert_array_equal(np.isnan(energies_j), [True, False, False])
    assert np.isnan(avalanche.turn_off_time_s(1e-3, 5.0, 12.0, 24.0))


def test_repetitive_avalanche_reads_the_same_both_ways():
    i_a = avalanche.repetitive_current_a(50.0, 40.0, 0.033)
    assert avalanche.repetitive_pulse_w(i_a, 40.0) * 0.033 == pytest.approx(50.0)
    assert avalanche.repetitive_loss_w(0.1, 50.0) == pytest.approx(5.0)


def test_surge_current_lies_on_both_lines():
    i_a = surge.surge_current_a(87.0, 2.0, 53.3, 28.0, 0.4)
    assert 87.0 - 2.0 * i_a == pytest.approx(surge.clamp_v(i_a, 53.3, 28.0, 0.4))
    np.testing.assert_array_equal(surge.surge_current_a([0.0, 42.1], 2.0, 53.3, 28.0, 0.4).round(9), [0.0, 0.0])


@pytest.mark.parametrize(
    ("t_s", "expected_w"),
    [
        (1e-6, 5000.0),
        (np.nextafter(1e-5, 0), 5000.0),
        (1e-5, 5000.0),
        (1e-4, float(np.sqrt(5000.0 * 600.0))),
        (1e-3, 600.0),
        (np.nextafter(1e-3, 1), 600.0),
        (10e-3, 600.0 / np.sqrt(10)),
        (0.05, 600.0 / np.sqrt(50)),
        (np.nextafter(0.05, 1), np.nan),
        (0.0, np.nan),
        (np.nan, np.nan),
    ],
)
def test_pulse_rating(t_s, expected_w):
    assert surge.pulse_power_w(t_s, [1e-5, 1e-3], [5000.0, 600.0]) == pytest.approx(expected_w, rel=1e-12, nan_ok=True)


@pytest.mark.parametrize("table", [([], []), ([1e-3, 1e-4], [600, 900]), ([1e-4, 1e-3], [600, 900]), ([1e-3], [0.0])])
def test_a_pulse_rating_that_is_none_is_refused(table):
    with pytest.raises(OutsideRange):
        surge.pulse_power_w(1e-3, *table)


@pytest.mark.parametrize(("t_c", "share"), [(-40.0, 1.0), (25.0, 1.0), (100.0, 0.5), (175.0, 0.0), (200.0, 0.0)])
def test_a_warm_clamp_takes_less(t_c, share):
    assert surge.temperature_share(t_c, 175.0) == share
