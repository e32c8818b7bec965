"""IEC 60062, marking codes for resistors and capacitors: the letter stands where the point is.

Rows of the standard's tables of examples, from memory; 3.3 in every decade. Codes that begin with a letter other than R
(p33, n33) are left out on purpose: a schematic field of that form may as well be a name.
"""

import pytest

from drc_power.quantity import parse_value_field

RESISTORS = [
    ("R33", 0.33), ("3R3", 3.3), ("33R", 33.0), ("330R", 330.0), ("3K3", 3.3e3), ("33K", 33e3), ("330K", 330e3),
    ("3M3", 3.3e6), ("33M", 33e6), ("330M", 330e6), ("59R04", 59.04), ("590R4", 590.4), ("5K904", 5904.0), ("59K04", 59040.0),
]  # fmt: skip

CAPACITORS = [
    ("3p3", 3.3e-12), ("33p", 33e-12), ("330p", 330e-12), ("3n3", 3.3e-9), ("33n", 33e-9), ("330n", 330e-9),
    ("3\u00b53", 3.3e-6), ("33\u00b5", 33e-6), ("330\u00b5", 330e-6), ("3m3", 3.3e-3), ("33m", 33e-3),
]  # fmt: skip


@pytest.mark.parametrize(("code", "ohm"), RESISTORS)
def test_resistance(code, ohm):
    assert parse_value_field(code, "resistance").span.typ == pytest.approx(ohm, rel=1e-15)


@pytest.mark.parametrize(("code", "farad"), CAPACITORS)
def test_capacitance(code, farad):
    assert parse_value_field(code, "capacitance").span.typ == pytest.approx(farad, rel=1e-15)
