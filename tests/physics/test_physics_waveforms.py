"""Currents of switched circuits against waveforms sampled point by point."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad

from drc_power.physics import waveforms

DUTY = st.floats(0.01, 0.99)


@given(st.floats(0, 100), DUTY, st.floats(0, 20))
def test_mean_and_rms_of_a_switched_ramp(i_a, duty, ripple_a):
    ramp = lambda x: i_a + ripple_a * (x - 0.5)  # noqa: E731
    mean_a = duty * quad(ramp, 0, 1)[0]
    rms_a = np.sqrt(duty * quad(lambda x: ramp(x) ** 2, 0, 1)[0])
    assert waveforms.switched_mean_a(i_a, duty) == pytest.approx(mean_a, rel=1e-9, abs=1e-12)
    assert waveforms.switched_rms_a(i_a, duty, ripple_a) == pytest.approx(rms_a, rel=1e-9, abs=1e-12)


@given(st.floats(0.1, 100), DUTY, st.floats(0, 20))
def test_both_switches_together_carry_the_inductors_current(i_a, duty, ripple_a):
    high_a, low_a = (waveforms.switched_rms_a(i_a, share, ripple_a) for share in (duty, 1 - duty))
    assert np.hypot(high_a, low_a) == pytest.approx(np.hypot(i_a, waveforms.ripple_rms_a(ripple_a)), rel=1e-9)


@given(st.floats(5, 60), DUTY, st.floats(1e-6, 1e-3), st.floats(1e4, 1e6))
def test_ripple_up_is_ripple_down(v_v, duty, l_h, f_hz):
    """Volt-seconds of both parts of the period, buck and boost."""
    up_a = (v_v - duty * v_v) / l_h * duty / f_hz
    down_a = duty * v_v / l_h * (1 - duty) / f_hz
    assert up_a == pytest.approx(down_a, rel=1e-9)
    assert waveforms.buck_ripple_a(v_v, duty * v_v, l_h, f_hz) == pytest.approx(up_a, rel=1e-9)
    assert waveforms.boost_ripple_a((1 - duty) * v_v, v_v, l_h, f_hz) == pytest.approx(down_a, rel=1e-9)


@given(DUTY, st.floats(0.1, 50), st.floats(0, 10))
def test_the_input_capacitor_carries_what_the_source_does_not(duty, i_a, ripple_a):
    """Switch current less its mean, squared and averaged over 4,000 points of the period."""
    x = (np.arange(4000) + 0.5) / 4000
    switch_a = i_a + ripple_a * (x - 0.5)
    mean_square = duty * np.mean(switch_a**2) - (duty * i_a) ** 2
    assert waveforms.buck_input_rms_a(i_a, duty, ripple_a) == pytest.approx(np.sqrt(mean_square), rel=1e-4)


@pytest.mark.parametrize("modulation", [0.0, 0.4, 1.0])
@pytest.mark.parametrize("phase", [0.0, 0.5, 1.3, np.pi])
def test_a_sine_bridge_is_its_integral(modulation, phase):
    duty = lambda x: (1 + modulation * np.sin(x + phase)) / 2  # noqa: E731
    mean_a = quad(lambda x: 10 * np.sin(x) * duty(x), 0, np.pi)[0] / (2 * np.pi)
    square = quad(lambda x: (10 * np.sin(x)) ** 2 * duty(x), 0, np.pi)[0] / (2 * np.pi)
    assert waveforms.sine_switch_mean_a(10.0, modulation, phase) == pytest.approx(mean_a, rel=1e-9)
    assert waveforms.sine_switch_rms_a(10.0, modulation, phase) == pytest.approx(np.sqrt(square), rel=1e-9)


def test_ends_of_duty_and_modulation():
    shares = np.array([-1e-9, 0.0, 1.0, np.nextafter(1.0, 2), np.nan])
    outside = [True, False, False, True, True]
    for answer in (
        waveforms.switched_mean_a(1.0, shares),
        waveforms.switched_rms_a(1.0, shares),
        waveforms.buck_duty(1.0, shares),
        waveforms.sine_switch_mean_a(1.0, shares, 0.0),
        waveforms.sine_switch_rms_a(1.0, shares, 0.0),
    ):
        np.testing.assert_array_equal(np.isnan(answer), outside)
    np.testing.assert_array_equal(np.isnan(waveforms.boost_duty([0.0, 5.0, 5.1], 5.0)), [False, False, True])


def test_gaps_begin_under_half_the_ripple():
    np.testing.assert_array_equal(waveforms.continuous([np.nextafter(2.0, 0), 2.0], 4.0), [False, True])
