"""Texas Instruments SLVA673A, Robust Hot Swap Design, November 2014: FOUND-2nd throughout."""

import math

import pytest

from drc_power.physics import envelope

TABLE_1 = [(0.1e-3, 6000), (1e-3, 1800), (10e-3, 360), (100e-3, 120)]
"""Power at 60 V of the MOSFET of table 1, by pulse length."""

PULSES = [(t_s, ([60.0], [watts / 60.0])) for t_s, watts in TABLE_1]


@pytest.mark.parametrize(("t_s", "watts"), TABLE_1)
def test_table_1_is_met_at_its_own_lengths(t_s, watts):
    assert envelope.pulse_current_a(60.0, t_s, PULSES) * 60.0 == pytest.approx(watts, rel=1e-12)


@pytest.mark.parametrize(
    ("t_ms", "between", "m", "watts", "amperes", "hot_watts"),
    [
        (0.3, (0, 1), -0.5229, 3378, 56.30, 2027),
        (2, (1, 2), -0.6990, 1108.8, 18.48, 665.3),
        (3, (1, 2), -0.6990, 835.2, 13.92, 501.1),
        (5, (1, 2), -0.6990, 584.4, 9.740, 350.6),
        (20, (2, 3), -0.4771, 258.6, 4.310, 155.2),
    ],
)
def test_section_2_3_2_and_eq_5(t_ms, between, m, watts, amperes, hot_watts):
    """SOA(t) = a · t^m from two rows of table 1, worked out here; 85 °C case with 175 °C assumed as the rating."""
    (t_1, s_1), (t_2, s_2) = (TABLE_1[row] for row in between)
    exponent = math.log(s_1 / s_2) / math.log(t_1 / t_2)
    assert exponent == pytest.approx(m, abs=0.5e-4)
    by_hand_w = s_1 / t_1**exponent * (t_ms * 1e-3) ** exponent
    assert by_hand_w == pytest.approx(watts, rel=0.5e-3)
    current_a = envelope.pulse_current_a(60.0, t_ms * 1e-3, PULSES)
    assert current_a == pytest.approx(by_hand_w / 60.0, rel=1e-9)
    assert current_a == pytest.approx(amperes, rel=0.5e-3)
    hot_a = envelope.safe_current_a(60.0, t_ms * 1e-3, 85.0, 175.0, PULSES)
    assert hot_a * 60.0 == pytest.approx(by_hand_w * (175 - 85) / (175 - 25), rel=1e-9)
    assert hot_a * 60.0 == pytest.approx(hot_watts, rel=0.5e-3)
