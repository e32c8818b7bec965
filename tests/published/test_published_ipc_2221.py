"""IPC-2221: I = k · ΔT^0.44 · A^0.725 with A in square mils, k 0.048 outside and 0.024 inside.

Equation, constants and range FOUND as reprinted in KiCad's documentation of track widths. No worked example of
the standard is to hand, so the values are worked out here in mils, with logarithms, apart from the code.
"""

import math

import pytest

from drc_power.physics import copper

MIL_M = 25.4e-6


def by_hand_a(width_mil, thickness_mil, rise_k, k):
    return 10 ** (math.log10(k) + 0.44 * math.log10(rise_k) + 0.725 * math.log10(width_mil * thickness_mil))


@pytest.mark.parametrize(
    ("width_mil", "thickness_mil", "rise_k", "outer_a"),
    [(10, 1.378, 10, 0.886), (100, 1.378, 10, 4.701), (100, 1.378, 20, 6.377), (300, 2.756, 20, 23.378)],
)
def test_current(width_mil, thickness_mil, rise_k, outer_a):
    area_m2 = width_mil * thickness_mil * MIL_M**2
    assert by_hand_a(width_mil, thickness_mil, rise_k, 0.048) == pytest.approx(outer_a, abs=0.5e-3)
    for k, share in ((copper.IPC_2221_OUTER, 1.0), (copper.IPC_2221_INNER, 0.5)):
        expected_a = share * by_hand_a(width_mil, thickness_mil, rise_k, 0.048)
        if expected_a <= 35.0 * share:
            assert copper.ipc_2221_current_a(rise_k, area_m2, k) == pytest.approx(expected_a, rel=1e-9)


@pytest.mark.parametrize(("k", "width_mil"), [(copper.IPC_2221_OUTER, 283.2), (copper.IPC_2221_INNER, 736.8)])
def test_width_for_10_a(k, width_mil):
    """10 A at 10 K in 1.378 mil; the inner track lies past the 400 mil of the chart, which the caller must say."""
    area_m2 = copper.ipc_2221_area_m2(10.0, 10.0, k)
    found_mil = area_m2 / (1.378 * MIL_M**2)
    assert found_mil == pytest.approx(width_mil, abs=0.05)
    assert by_hand_a(found_mil, 1.378, 10, k) == pytest.approx(10.0, rel=1e-9)


def test_a_via_barrel_taken_as_an_inner_track():
    """0.3 mm drill, 25 µm plating, 10 K (common practice): 0.02160 mm² is 33.48 mil², hence 0.843 A."""
    area_m2 = copper.via_area_m2(0.3e-3, 25e-6)
    assert area_m2 * 1e6 == pytest.approx(math.pi * 0.275 * 0.025, rel=1e-12)
    expected_a = by_hand_a(area_m2 / MIL_M**2, 1.0, 10, 0.024)
    assert expected_a == pytest.approx(0.843, abs=0.5e-3)
    assert copper.ipc_2221_current_a(10.0, area_m2, copper.IPC_2221_INNER) == pytest.approx(expected_a, rel=1e-9)
