"""Class-B output stages, textbook formulas (Boylestad; audio IC notes): MEMORY, numbers worked out by hand."""

import math

import pytest

from drc_power.physics import push_pull


def test_30_v_and_16_ohm():
    """P_i = 2 · V²/(π · R) 35.81 W, P_o = V²/(2 · R) 28.125 W, worst 2 · V²/(π² · R) 11.40 W, half of it each."""
    assert 2 * 30**2 / (math.pi * 16) == pytest.approx(35.81, abs=0.005)
    assert push_pull.class_b_supply_w(30.0, 30.0, 16.0) == pytest.approx(35.81, abs=0.005)
    assert push_pull.class_b_output_w(30.0, 16.0) == pytest.approx(28.125, abs=0.5e-3)
    each_w = push_pull.class_b_worst_loss_w(30.0, 16.0)
    assert 2 * each_w == pytest.approx(11.40, abs=0.005)
    assert each_w == pytest.approx(5.70, abs=0.005)
    assert push_pull.class_b_worst_amplitude_v(30.0) == pytest.approx(2 * 30 / math.pi)


def test_35_v_and_8_ohm():
    """±35 V into 8 ohm: 31.03 W at worst, both devices."""
    assert 2 * push_pull.class_b_worst_loss_w(35.0, 8.0) == pytest.approx(31.03, abs=0.005)


def test_one_supply():
    """V_s in total: worst dissipation V_s²/(2 · π² · R), both devices; 60 V, 16 ohm as ±30 V."""
    assert 2 * push_pull.class_b_worst_loss_w(60.0 / 2, 16.0) == pytest.approx(60**2 / (2 * math.pi**2 * 16))


def test_best_efficiency_is_a_quarter_of_pi():
    at_full_swing = push_pull.class_b_output_w(30.0, 16.0) / push_pull.class_b_supply_w(30.0, 30.0, 16.0)
    assert at_full_swing == pytest.approx(math.pi / 4)


@pytest.mark.parametrize(("degrees", "at_least"), [(45, 1.3), (60, 2.0)])
def test_a_reactive_load_raises_the_peak(degrees, at_least):
    """x1.3 to 2 and more at 45 to 60 degrees (MEMORY, a lower bound), against the resistive V²/(4 · R)."""
    peak_w = push_pull.class_b_peak_w(30.0, 30.0, 8.0, math.radians(degrees))
    assert peak_w / (30.0**2 / 4 / 8.0) > at_least
