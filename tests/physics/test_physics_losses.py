"""Losses: quadrature of waveforms, breakpoints and ranges, monotone in current and temperature."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad

from drc_power.physics import OutsideRange, losses, switching

CURVES = [(25.0, ([1.0, 10.0], [0.42, 0.60])), (125.0, ([1.0, 5.0, 10.0], [0.32, 0.42, 0.54]))]


def test_diode_loss_is_the_mean_of_voltage_times_current():
    """A half sine of 8 A peak, integrated by scipy."""
    knee_v, slope_ohm = 0.7, 0.02
    current = lambda x: 8.0 * np.sin(np.pi * x) if x < 1 else 0.0  # noqa: E731
    mean = quad(current, 0, 1)[0] / 2
    square = quad(lambda x: current(x) ** 2, 0, 1)[0] / 2
    expected = quad(lambda x: (knee_v + slope_ohm * current(x)) * current(x), 0, 1)[0] / 2
    assert losses.diode_loss_w(mean, np.sqrt(square), knee_v, slope_ohm) == pytest.approx(expected, rel=1e-9)


@given(st.floats(1e-3, 1e3), st.floats(0.1, 2.0), st.floats(1e-4, 1.0))
def test_the_diode_line_reads_the_same_both_ways(i_a, knee_v, slope_ohm):
    forward_v = losses.diode_forward_v(i_a, knee_v, slope_ohm)
    assert losses.diode_current_a(forward_v, knee_v, slope_ohm) == pytest.approx(i_a, rel=1e-6, abs=1e-9)


def test_no_current_below_the_knee_and_no_voltage_for_reverse_current():
    np.testing.assert_array_equal(losses.diode_current_a([-5.0, 0.0, 0.7], 0.7, 0.01), [0.0, 0.0, 0.0])
    assert losses.diode_current_a(np.nextafter(0.7, 1), 0.7, 0.01) > 0
    np.testing.assert_array_equal(np.isnan(losses.diode_forward_v([-1e-9, 0.0, 1.0], 0.7, 0.01)), [True, False, False])


@pytest.mark.parametrize(
    ("i_a", "t_c", "expected"),
    [
        (1.0, 25.0, 0.42),
        (10.0, 125.0, 0.54),
        (5.5, 25.0, 0.51),
        (5.0, 75.0, (0.50 + 0.42) / 2),
        (0.1, 25.0, 0.42),  # held below the first point
        (19.0, 25.0, 0.78),  # last slope carried on
        (1.0, 175.0, 0.27),  # and in temperature
        (1.0, -25.0, 0.47),
    ],
)
def test_forward_table(i_a, t_c, expected):
    assert losses.diode_forward_table_v(i_a, t_c, CURVES) == pytest.approx(expected, rel=1e-12)


def test_forward_table_can_hold_or_refuse_other_temperatures():
    assert losses.diode_forward_table_v(1.0, 175.0, CURVES, t_outside="hold") == pytest.approx(0.32)
    assert np.isnan(losses.diode_forward_table_v(1.0, 175.0, CURVES, t_outside="nan"))


def test_regulators_say_where_they_do_not_hold():
    loss_w = losses.linear_regulator_loss_w([12.0, 5.0, 4.99, 12.0], 5.0, [1.0, 1.0, 1.0, -0.1], 0.0)
    np.testing.assert_array_equal(loss_w, [7.0, 0.0, np.nan, np.nan])
    loss_w = losses.switching_regulator_loss_w(10.0, [1.0, 0.5, 0.0, 1.01, np.nan, -0.5])
    np.testing.assert_array_equal(loss_w, [0.0, 10.0, np.nan, np.nan, np.nan, np.nan])


@given(st.floats(0, 60), st.floats(0, 60), st.floats(0, 5), st.floats(0, 0.1))
def test_linear_regulator_keeps_energy(v_1, v_2, i_out_a, i_q_a):
    v_out_v, v_in_v = sorted((v_1, v_2))
    in_w = v_in_v * losses.linear_regulator_input_a(i_out_a, i_q_a)
    loss_w = losses.linear_regulator_loss_w(v_in_v, v_out_v, i_out_a, i_q_a)
    assert in_w == pytest.approx(v_out_v * i_out_a + loss_w, rel=1e-12, abs=1e-12)


@given(st.lists(st.floats(0, 500), min_size=2, max_size=2), st.lists(st.floats(-55, 200), min_size=2, max_size=2))
def test_conduction_loss_grows_with_current_and_temperature(currents, temps):
    (low_a, high_a), (cold_c, hot_c) = sorted(currents), sorted(temps)
    table = [25.0, 100.0, 150.0], [1.0, 1.45, 1.85]
    cool = losses.conduction_loss_w(low_a, losses.rds_on_ohm(cold_c, 5e-3, *table))
    warm = losses.conduction_loss_w(high_a, losses.rds_on_ohm(hot_c, 5e-3, *table))
    assert warm >= cool


def test_a_stopped_clock_leaves_the_static_current():
    assert losses.cmos_loss_w(20e-12, 50e-12, 5.0, 0.0, 0.0, i_static_a=2e-6) == pytest.approx(1e-5)
    slow, fast = losses.cmos_loss_w(20e-12, 50e-12, 5.0, np.array([1e6, 3e6]), np.array([1e6, 3e6]))
    assert fast == pytest.approx(3 * slow)


@pytest.mark.parametrize(("v_off", "v_on", "i_on", "edge_s"), [(250.0, 2.0, 100.0, 1e-6), (24.0, 12.0, 3.0, 1e-3)])
def test_a_resistive_edge_is_its_integral(v_off, v_on, i_on, edge_s):
    power = lambda x: (v_off + (v_on - v_off) * x) * i_on * x  # noqa: E731
    expected_j = quad(power, 0, 1)[0] * edge_s
    assert switching.resistive_edge_energy_j(v_off, v_on, i_on, edge_s) == pytest.approx(expected_j, rel=1e-9)
    peak_w = max(power(x) for x in np.linspace(0, 1, 20_001))
    assert switching.resistive_edge_peak_w(v_off, v_on, i_on) == pytest.approx(peak_w, rel=1e-8)


def test_a_resistive_edge_without_an_inner_peak_is_refused():
    with pytest.raises(OutsideRange):
        switching.resistive_edge_peak_w(24.0, 12.1, 3.0)


def test_snubber_resistor_takes_half_at_each_edge():
    whole_w, edge_w = switching.rc_snubber_loss_w(1e-9, 48.0, 2e5), switching.rc_snubber_edge_loss_w(1e-9, 48.0, 2e5)
    assert whole_w == 2 * edge_w
    r_ohm, c_f, v_v = 10.0, 1e-9, 48.0
    heat_j = quad(lambda x: (v_v * np.exp(-x)) ** 2 / r_ohm * r_ohm * c_f, 0, 50)[0]
    assert edge_w == pytest.approx(heat_j * 2e5, rel=1e-9)


def test_overlap_of_unequal_currents_is_the_sum_of_its_edges():
    total_w = switching.overlap_loss_w(24.0, 8.0, 12.0, 20e-9, 30e-9, 1e5)
    assert total_w == pytest.approx(24 * (8 * 20e-9 + 12 * 30e-9) / 2 * 1e5)


def test_arrays_run_over_corners():
    i_a = np.array([1.0, 5.0, 10.0])
    np.testing.assert_allclose(losses.conduction_loss_w(i_a, 0.08), [0.08, 2.0, 8.0])
    assert switching.overlap_loss_w(24.0, i_a, i_a, 20e-9, 15e-9, 2e5).shape == (3,)
