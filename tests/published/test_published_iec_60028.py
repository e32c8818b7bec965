"""IEC 60028, international standard of resistance for copper: resistivity and temperature coefficient.

Seen as reproduced at tnlab.org and in the Industrial Power Engineering Handbook, table 30.1 (FOUND).
Tolerances are half the last printed digit.
"""

import pytest

from drc_power.physics import copper


def test_resistivity_at_20_degrees():
    """0.017241 ohm·mm²/m, 58 MS/m. FOUND."""
    assert copper.resistivity_ohm_m(20.0) * 1e6 == pytest.approx(0.017241, abs=0.5e-6)
    assert 1e-6 / copper.resistivity_ohm_m(20.0) == pytest.approx(58, abs=0.5)


def test_temperature_coefficient():
    """3.93e-3 /K at 20 °C. FOUND, handbook pages 967 to 970."""
    per_kelvin = copper.resistivity_ohm_m(21.0) / copper.resistivity_ohm_m(20.0) - 1.0
    assert per_kelvin == pytest.approx(3.93e-3, abs=0.005e-3)


@pytest.mark.parametrize(("t_c", "milliohms"), [(20.0, 0.4926), (100.0, 0.6475)])
def test_sheet_resistance_of_35_um(t_c, milliohms):
    """Recomputed here from the two printed numbers: 0.017241/0.035 mm · (1 + 3.93e-3 · ΔT)."""
    printed = 0.017241 / 0.035 * (1 + 3.93e-3 * (t_c - 20.0))
    assert printed == pytest.approx(milliohms, abs=0.5e-4)
    assert copper.sheet_resistance_ohm(35e-6, t_c) * 1e3 == pytest.approx(printed, rel=0.5e-6 / 0.017241)


def test_a_track_of_100_squares():
    """100 mm x 1 mm x 35 µm at 20 °C: 100 squares, from the printed resistivity 49.26 mohm."""
    assert copper.track_resistance_ohm(0.1, 1e-3, 35e-6, 20.0) * 1e3 == pytest.approx(100 * 0.017241 / 0.035, abs=0.005)
