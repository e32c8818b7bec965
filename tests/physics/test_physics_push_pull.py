"""Class B and AB against scipy's quadrature and search, resistive and reactive."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.optimize import minimize_scalar

from drc_power.physics import push_pull

PHASES = [-np.pi / 2, -0.9, 0.0, 0.3, np.pi / 4, 1.2, np.pi / 2]


def device_power(theta, v_supply, v_peak, z, phase):
    return v_peak / z * np.sin(theta) * (v_supply - v_peak * np.sin(theta + phase))


@pytest.mark.parametrize("phase", PHASES)
@pytest.mark.parametrize("v_peak", [0.0, 5.0, 19.1, 30.0])
def test_mean_loss_is_the_integral_over_the_half_wave(v_peak, phase):
    expected = quad(device_power, 0, np.pi, args=(30.0, v_peak, 8.0, phase))[0] / (2 * np.pi)
    assert push_pull.class_b_device_loss_w(30.0, v_peak, 8.0, phase) == pytest.approx(expected, rel=1e-9, abs=1e-12)


@pytest.mark.parametrize("phase", PHASES)
@pytest.mark.parametrize("v_peak", [1.0, 15.0, 22.0, 30.0])
def test_peak_power_is_the_highest_of_a_fine_search(v_peak, phase):
    expected = device_power(np.linspace(0, np.pi, 1_000_001), 30.0, v_peak, 8.0, phase).max()
    assert push_pull.class_b_peak_w(30.0, v_peak, 8.0, phase) == pytest.approx(expected, rel=1e-6)


@pytest.mark.parametrize("phase", PHASES)
@pytest.mark.parametrize("largest_v", [10.0, 25.0, 30.0])
def test_the_worst_amplitude_is_where_a_search_finds_it(phase, largest_v):
    found = minimize_scalar(
        lambda v: -float(push_pull.class_b_device_loss_w(30.0, v, 8.0, phase)), bounds=(0, largest_v), method="bounded"
    )
    worst_w = push_pull.class_b_worst_loss_w(30.0, 8.0, phase, largest_v)
    assert worst_w >= -found.fun * (1 - 1e-12)
    assert worst_w == pytest.approx(-found.fun, rel=1e-5)


@given(st.floats(1, 100), st.floats(0, 1), st.floats(0.5, 100), st.floats(-np.pi / 2, np.pi / 2))
def test_supply_power_is_output_and_both_devices(v_supply, share, z, phase):
    v_peak = share * v_supply
    loss_w = 2 * push_pull.class_b_device_loss_w(v_supply, v_peak, z, phase)
    output_w = push_pull.class_b_output_w(v_peak, z, phase)
    assert push_pull.class_b_supply_w(v_supply, v_peak, z) == pytest.approx(loss_w + output_w, rel=1e-12)


def test_a_reactive_load_is_never_kinder():
    losses = push_pull.class_b_worst_loss_w(30.0, 8.0, np.linspace(0, np.pi / 2, 50))
    assert np.all(np.diff(losses) >= 0)
    assert losses[-1] / losses[0] == pytest.approx(np.pi)


@pytest.mark.parametrize("i_quiescent", [0.001, 0.05, 0.5])
@pytest.mark.parametrize("phase", PHASES)
@pytest.mark.parametrize("v_peak", [0.0, 3.0, 19.0, 30.0])
def test_class_ab_stays_under_its_bound(v_peak, phase, i_quiescent):
    """Translinear bias: i · i′ = I_q², i − i′ = output; averaged over 20,000 angles of the wave."""

    def power(theta):
        out = v_peak / 8.0 * np.sin(theta)
        return (out / 2 + np.hypot(out / 2, i_quiescent)) * (30.0 - v_peak * np.sin(theta + phase))

    exact = power(np.arange(20_000) * np.pi / 10_000).mean()
    bound = push_pull.class_ab_device_loss_bound_w(
        push_pull.class_b_device_loss_w(30.0, v_peak, 8.0, phase), 30.0, i_quiescent
    )
    assert exact <= bound * (1 + 1e-9)
    if v_peak == 0.0:
        assert exact == pytest.approx(bound, rel=1e-9)


def test_ranges_end_at_the_supply_and_at_a_quarter_turn():
    above = np.nextafter(30.0, 40.0)
    np.testing.assert_array_equal(
        np.isnan(push_pull.class_b_device_loss_w(30.0, [-1e-9, 0.0, 30.0, above], 8.0)), [True, False, False, True]
    )
    assert np.isnan(push_pull.class_b_supply_w(30.0, above, 8.0))
    assert np.isnan(push_pull.class_b_peak_w(30.0, 10.0, 8.0, 1.6))


def test_locus_runs_over_corners_and_angles():
    v_v, i_a = push_pull.class_b_locus(np.array([24.0, 30.0]), 20.0, 8.0, 0.5, np.linspace(0, np.pi, 9))
    assert v_v.shape == (2, 9)
    assert i_a.shape == (2, 9)
