"""Surge ratings: MIL-PRF-19500/500 and P4KE data sheet FOUND; ST SM15T notes FOUND-2nd; root law MEMORY."""

import pytest

from drc_power.physics import surge


def test_rating_and_its_root_law():
    """1500 W at 1.0 ms; a hundredth of a second takes 1/√10 of it under the root law."""
    assert surge.pulse_power_w(1e-3, [1e-3], [1500.0]) == pytest.approx(1500)
    assert surge.pulse_power_w(10e-3, [1e-3], [1500.0]) == pytest.approx(1500 / 10**0.5)


@pytest.mark.parametrize(("t_c", "percent"), [(0.0, 100), (25.0, 100), (100.0, 50), (175.0, 0)])
def test_derating_of_the_p4ke(t_c, percent):
    """Straight from 100 % at 25 °C to nothing at 175 °C."""
    assert surge.temperature_share(t_c, 175.0) * 100 == pytest.approx(percent)


def test_clamping_line():
    """V(I) = V_C − R_d · (I_PP − I), I_PP = (V_s − V_C)/R_s, ΔV_BR = α_T · (T − 25) · V_BR; numbers by hand."""
    assert surge.clamp_v(28.0, 53.3, 28.0, 0.4) == pytest.approx(53.3)
    assert surge.clamp_v(10.0, 53.3, 28.0, 0.4) == pytest.approx(53.3 - 0.4 * 18)
    assert surge.surge_current_a(53.3 + 2 * 28.0, 2.0, 53.3, 28.0, 0.4) == pytest.approx(28.0)
    assert surge.breakdown_v(125.0, 40.0, 1e-3) - 40.0 == pytest.approx(1e-3 * 100 * 40)
