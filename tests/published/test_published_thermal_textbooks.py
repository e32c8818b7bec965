"""Worked examples of steady heat from textbooks, as kept in the Scilab Textbook Companion.

Inputs and method FOUND; answers are that method evaluated, to the digits given.
"""

import pytest

from drc_power.physics import thermal


def test_neamen_example_8_3_power_transistor():
    """Companion 1223: rated 20 W at 25 °C case and 175 °C junction; 1 and 5 K/W from case to sink to ambient."""
    device_k_per_w = (175.0 - 25.0) / 20.0
    assert device_k_per_w == pytest.approx(7.50, abs=0.005)
    assert thermal.allowed_power_w(175.0, 25.0, device_k_per_w) == pytest.approx(20, abs=0.5)
    assert thermal.allowed_power_w(175.0, 25.0, device_k_per_w + 1 + 5) == pytest.approx(11.11, abs=0.005)


@pytest.mark.parametrize(("t_ambient_c", "milliwatts"), [(25.0, 1500), (75.0, 1000)])
def test_companion_2561_example_3_11(t_ambient_c, milliwatts):
    """0.1 K/mW, 175 °C."""
    assert thermal.allowed_power_w(175.0, t_ambient_c, 100.0) * 1e3 == pytest.approx(milliwatts, abs=0.5)


def test_companion_371_example_3_4():
    """T_j 120 °C, T_a 45 °C, 0.1 + 0.08 K/W: 416.7 W."""
    assert thermal.allowed_power_w(120.0, 45.0, 0.18) == pytest.approx(416.7, abs=0.05)
