"""Arithmetic that the trade quotes (common practice, no source), as plain check values."""

import numpy as np
import pytest

from drc_power.physics import envelope, losses


@pytest.mark.parametrize(("i_a", "v_v", "p_w"), [(0, 30, 0), (10, 0.1, 1), (0.1, 10, 1), (5, 5, 25)])
def test_a_switch_off_on_lightly_loaded_and_half_way(i_a, v_v, p_w):
    """As a diode-like drop and as the loss of a pass element."""
    assert losses.diode_loss_w(i_a, i_a, v_v, 0.0) == pytest.approx(p_w)
    assert losses.linear_regulator_loss_w(v_v, 0.0, i_a, 0.0) == pytest.approx(p_w)


@pytest.mark.parametrize(
    ("milliohms", "currents_a", "watts"), [(80, [1, 5, 10], [0.08, 2, 8]), (1000, [1, 5, 8, 10], [1, 25, 64, 100])]
)
def test_i_squared_r(milliohms, currents_a, watts):
    np.testing.assert_allclose(losses.conduction_loss_w(np.array(currents_a), milliohms * 1e-3), watts)


def test_a_100_us_pulse_is_allowed_tens_of_times_the_dc_current():
    """The thermal line of one device at 40 V: Z_th 1.36 K/W at DC, 0.04 K/W at 100 µs (invented, typical of a tab)."""
    dc_a, pulse_a = envelope.power_line_a(40.0, np.array([1.36, 0.04]), 25.0, 175.0)
    assert 1 < dc_a < 5
    assert pulse_a / dc_a > 10


def test_cmos_power_grows_with_the_clock_and_a_stopped_one_leaks_only():
    clocks_hz = np.array([0.0, 1e6, 2e6, 4e6])
    powers_w = losses.cmos_loss_w(50e-12, 100e-12, 3.3, clocks_hz, clocks_hz, i_static_a=1e-6)
    leak_w = 3.3e-6
    assert powers_w[0] == pytest.approx(leak_w)
    np.testing.assert_allclose((powers_w[2:] - leak_w) / (powers_w[1] - leak_w), [2, 4])


def test_a_pass_element_in_series_with_a_resistor_is_worst_at_half_the_supply():
    """P_max = V²/(4 · R), here 24 V and 2 ohm."""
    v_out = np.linspace(0, 24, 2401)
    loss_w = losses.linear_regulator_loss_w(24.0, v_out, v_out / 2.0, 0.0)
    assert v_out[np.argmax(loss_w)] == pytest.approx(12.0)
    assert loss_w.max() == pytest.approx(24**2 / (4 * 2))
