"""Numbers that data sheets print side by side and that physics ties together. FOUND.

Texas Instruments CSD19535KTT; onsemi 2N3055; MIL-PRF-19500/379 and /500; NDS331N.
"""

import math

import pytest

from drc_power.physics import envelope, thermal


def test_power_from_thermal_resistance():
    """CSD19535KTT: 300 W printed, 175 °C, 0.5 K/W."""
    assert thermal.allowed_power_w(175.0, 25.0, 0.5) == pytest.approx(300, abs=0.5)


def test_current_over_temperature_follows_the_root_of_the_power():
    """CSD19535KTT prints 197 A at 25 °C and 139 A at 100 °C: their ratio to the last printed ampere."""
    share = math.sqrt(thermal.allowed_power_w(175.0, 100.0, 0.5) / thermal.allowed_power_w(175.0, 25.0, 0.5))
    assert share * 197 == pytest.approx(139, abs=0.5)


@pytest.mark.parametrize(("watts", "tj_max_c", "mw_per_k"), [(5.0, 200.0, 28.57), (1.0, 175.0, 6.67)])
def test_linear_derating(watts, tj_max_c, mw_per_k):
    """MIL-PRF-19500/379 and /500 print the slope from the rated power at 25 °C to nothing at the rated junction."""
    slope_w_per_k = (envelope.case_factor(25.0, tj_max_c) - envelope.case_factor(26.0, tj_max_c)) * watts
    assert slope_w_per_k * 1e3 == pytest.approx(mw_per_k, abs=0.005)


@pytest.mark.parametrize(("rth_ja_k_per_w", "watts"), [(250.0, 0.5), (270.0, 0.46)])
def test_small_package_power(rth_ja_k_per_w, watts):
    """NDS331N: (150 − 25)/R_thJA."""
    assert thermal.allowed_power_w(150.0, 25.0, rth_ja_k_per_w) == pytest.approx(watts, abs=0.005)


def test_bipolar_thermal_line():
    """2N3055: 1.52 K/W and 200 °C give 115.1 W (115 W printed); 2.87 A at 40 V for 1 s is 114.8 W, on that line."""
    line_a = envelope.power_line_a(40.0, 1.52, 25.0, 200.0)
    assert line_a * 40.0 == pytest.approx(115.1, abs=0.05)
    assert line_a == pytest.approx(2.87, abs=0.01)
