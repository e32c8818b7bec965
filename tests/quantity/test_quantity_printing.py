"""Floats to text: four significant digits, a prefix, and back again."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from drc_power.quantity import DIMENSIONS, format_quantity, parse_span

ROWS = [
    (4.985, "voltage", "4.985 V"),
    (4.98549, "voltage", "4.985 V"),
    (0.008, "resistance", "8 mohm"),
    (0.008, "ohm", "8 mohm"),
    (163.2, "temperature", "163.2 °C"),
    (163.249, "°C", "163.2 °C"),
    (-30.0, "°C", "-30 °C"),
    (999.96, "V", "1 kV"),
    (0.0, "A", "0 A"),
    (-0.0, "A", "0 A"),
    (-0.0021, "voltage_tempco", "-2.1 mV/K"),
    (5400.0, "time", "5400 s"),
    (0.0105, "s", "10.5 ms"),
    (0.0123, "K/W", "0.0123 K/W"),
    (4e-4, "area", "4 cm²"),
    (2000.0, "slew", "2 V/ms"),
    (0.8, "ratio", "80 %"),
    (3.93e-3, "tempco", "3930 ppm/K"),
    (0.75, "", "0.75"),
    (12345.6, "number", "12350"),
    (1e-20, "A", "1e-20 A"),
    (float("inf"), "°C", "inf °C"),
]


@pytest.mark.parametrize(("value", "unit", "text"), ROWS)
def test_printed(value, unit, text):
    assert format_quantity(value, unit) == text


@given(
    dimension=st.sampled_from(sorted(set(DIMENSIONS) - {"count"})),
    sign=st.sampled_from([1.0, -1.0]),
    digits=st.integers(1000, 9999),
    power=st.integers(-13, 7),
)
def test_what_is_printed_reads_back(dimension, sign, digits, power):
    """Four digits are kept exactly enough: the round trip is within half of the last one."""
    value = sign * digits * 10.0**power
    if dimension == "temperature" and value < -273.15:
        value = -value
    assert parse_span(format_quantity(value, dimension), dimension).typ == pytest.approx(value, rel=5.1e-4)
