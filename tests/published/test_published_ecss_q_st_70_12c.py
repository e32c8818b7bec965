"""ECSS-Q-ST-70-12C (14 July 2014), annex D: fits of track heating charts, I = k0 · ΔT^k1 · (1550 A)^(m0 · ΔT^m1).

FOUND-2nd: constants and the clause's example seen in a transcription of the standard.
"""

import math

import pytest

from drc_power.physics import copper

CONSTANTS = {
    "ipc-2152-vacuum": (0.0756, 0.4375, 0.5000, 0.0301),
    "cnes": (0.0594, 0.4800, 0.5420, 0.0034),
    "ipc-2221a-inner": (0.0240, 0.4393, 0.7252, 0.0002),
}


@pytest.mark.parametrize(("fit", "printed"), CONSTANTS.items())
def test_constants(fit, printed):
    """D.2, D.3 and D.4 as printed."""
    assert copper.CHART_FITS[fit][:4] == printed


def test_example_of_the_clause():
    """0.925 mm x 25 µm at 5 K carries 1 A by D.2, printed as 1 A: within half a unit of the last digit of 0.925."""
    area_m2 = 0.925e-3 * 25e-6
    assert copper.chart_current_a(5.0, area_m2) == pytest.approx(1.0, rel=0.0005)
    assert copper.chart_rise_k(1.0, area_m2) == pytest.approx(5.0, rel=0.002)


@pytest.mark.parametrize(
    ("fit", "area_mm2", "rise_k", "i_a"),
    [
        ("ipc-2152-vacuum", 0.035, 10, 1.760),
        ("cnes", 0.035, 10, 1.589),
        ("ipc-2221a-inner", 0.035, 10, 1.196),
        ("ipc-2152-vacuum", 0.070, 20, 3.643),
        ("cnes", 0.070, 20, 3.257),
        ("ipc-2221a-inner", 0.070, 20, 2.684),
    ],
)
def test_values_worked_out_with_logarithms(fit, area_mm2, rise_k, i_a):
    k0, k1, m0, m1 = CONSTANTS[fit]
    exponent = m0 * math.exp(m1 * math.log(rise_k))
    by_hand_a = math.exp(math.log(k0) + k1 * math.log(rise_k) + exponent * math.log(1550 * area_mm2))
    assert by_hand_a == pytest.approx(i_a, abs=0.5e-3)
    assert copper.chart_current_a(rise_k, area_mm2 * 1e-6, fit) == pytest.approx(by_hand_a, rel=1e-9)
