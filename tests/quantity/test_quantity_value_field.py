"""Schematic value fields: hand-made rows, and text that must give no value at all."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from drc_power.quantity import Span, ValueField, parse_value_field

VALUES = [
    ("1", "resistance", 1.0),
    ("1R0", "resistance", 1.0),
    ("0R", "resistance", 0.0),
    ("0", "resistance", 0.0),
    ("100R", "resistance", 100.0),
    ("4k7", "resistance", 4700.0),
    ("4K7", "resistance", 4700.0),
    ("4.7k", "resistance", 4700.0),
    ("4.7kΩ", "resistance", 4700.0),
    ("470 ohm", "resistance", 470.0),
    ("470 Ohms", "resistance", 470.0),
    ("0R01", "resistance", 0.01),
    ("0R05", "resistance", 0.05),
    ("R005", "resistance", 0.005),
    ("0.08", "resistance", 0.08),
    ("10mΩ", "resistance", 0.01),
    ("5mR", "resistance", 0.005),
    ("2m5", "resistance", 0.0025),
    ("1M", "resistance", 1e6),
    ("1M5", "resistance", 1.5e6),
    ("r=5", "resistance", 5.0),
    ("r=1meg", "resistance", 1e6),
    ("100n", "capacitance", 100e-9),
    ("100nF", "capacitance", 100e-9),
    ("100 nF", "capacitance", 100e-9),
    ("100nf", "capacitance", 100e-9),
    ("4u7", "capacitance", 4.7e-6),
    ("4µ7", "capacitance", 4.7e-6),
    ("2500u", "capacitance", 2500e-6),
    ("c=100u", "capacitance", 100e-6),
    ("10uH", "inductance", 10e-6),
    ("4u7", "inductance", 4.7e-6),
    ("l=100u", "inductance", 100e-6),
    ("600R", "impedance", 600.0),
    ("600R@100MHz", "impedance", 600.0),
    ("3A", "current", 3.0),
    ("500mA", "current", 0.5),
    ("3A15", "current", 3.15),
    ("12V", "voltage", 12.0),
    ("5V1", "voltage", 5.1),
    ("8MHz", "frequency", 8e6),
]

RATED = [
    ("2k2 1%", "resistance", ValueField(Span(2178.0, 2200.0, 2222.0))),
    ("10k ±5 %", "resistance", ValueField(Span(9500.0, 10000.0, 10500.0))),
    ("10k +/-5%", "resistance", ValueField(Span(9500.0, 10000.0, 10500.0))),
    ("10k 1/4W", "resistance", ValueField(Span.exact(10e3), {"power": 0.25})),
    ("10k/0.25W/5%", "resistance", ValueField(Span(9500.0, 10e3, 10500.0), {"power": 0.25})),
    ("10uF/25V", "capacitance", ValueField(Span.exact(10e-6), {"voltage": 25.0})),
    ("1uF 10V", "capacitance", ValueField(Span.exact(1e-6), {"voltage": 10.0})),
    ("10uF 6.3V", "capacitance", ValueField(Span.exact(10e-6), {"voltage": 6.3})),
    ("10uF 6V3", "capacitance", ValueField(Span.exact(10e-6), {"voltage": 6.3})),
    ("100nF X7R 16V 10% 0603", "capacitance", ValueField(Span(90e-9, 100e-9, 110e-9), {"voltage": 16.0})),
    ("1.0uH/4.2A/DCR=35mR", "inductance", ValueField(Span.exact(1e-6), {"current": 4.2}, 0.035)),
    ("1.0uH/4.2A/DCR=35mR/20%", "inductance", ValueField(Span(0.8e-6, 1e-6, 1.2e-6), {"current": 4.2}, 0.035)),
    ("10uH 3A DCR 35mΩ", "inductance", ValueField(Span.exact(10e-6), {"current": 3.0}, 0.035)),
    ("600R/2A", "impedance", ValueField(Span.exact(600.0), {"current": 2.0})),
    ("3A/32V", "current", ValueField(Span.exact(3.0), {"voltage": 32.0})),
    ("12V/500mW", "voltage", ValueField(Span.exact(12.0), {"power": 0.5})),
]

NO_VALUE = [
    ("resistance", ["", " ", "R", "k", "DNP", "NC", "4,7K", "10E", "1e3", "1E3", "k47", "1k 1k", "10k foo", "10k/", "/10k", "10k//1%", "-10k",
                    "010", "0603", "1206", "10k 100%", "10k 5% 1%", "10k 1/0W", "10k 0W", "r=1M", "r=1m", "c=5", "10kV", "10u", "47nF", "10k (1%)",
                    "R1", "10k 1W 2W", "1R0k", "1k0R0", "4.7k7", "1" * 70, "{R}", "10k\n", "\u0661\u0660k"]),
    ("capacitance", ["100", "104", "0.1", "u", "4R7", "10k", "10uH", "c=1M", "r=5", "100n/16", "100n 16 V max", "10F5F", "10uF/0V", "100nF 50"]),
    ("inductance", ["10", "4R7", "100", "10uF", "10uH DCR", "10uH DCR=5", "10uH/35mR", "10uH DCR=35mR DCR=35mR"]),
    ("impedance", ["600", "BEAD", "600R@1GHz", "1M"]),
    ("current", ["3", "3V", "T3A", "3A/4A", "A3", "A5"]),
    ("voltage", ["12", "3A", "12V 5V", "V5", "12V max"]),
    ("colour", ["4k7"]),
]  # fmt: skip


@pytest.mark.parametrize(("text", "dimension", "value"), VALUES)
def test_the_symbol_implies_the_unit(text, dimension, value):
    assert parse_value_field(text, dimension) == ValueField(Span.exact(value))


@pytest.mark.parametrize(("text", "dimension", "expected"), RATED)
def test_ratings_and_tolerance(text, dimension, expected):
    found = parse_value_field(text, dimension)
    assert (found.ratings, found.winding_ohm) == (expected.ratings, expected.winding_ohm)
    assert (found.span.min, found.span.typ, found.span.max) == pytest.approx(
        (expected.span.min, expected.span.typ, expected.span.max), rel=1e-15
    )


@pytest.mark.parametrize(("dimension", "text"), [(dimension, text) for dimension, texts in NO_VALUE for text in texts])
def test_no_value_unless_understood_in_full(dimension, text):
    assert parse_value_field(text, dimension) is None


@given(whole=st.integers(0, 999), part=st.integers(0, 99), letter=st.sampled_from("RkKM"))
def test_the_letter_stands_for_the_point(whole, part, letter):
    scale = {"R": 1, "k": 1e3, "K": 1e3, "M": 1e6}[letter]
    found = parse_value_field(f"{whole}{letter}{part}", "resistance")
    assert found.span.typ == pytest.approx(float(f"{whole}.{part}") * scale, rel=1e-12)


PIECES = st.sampled_from(["4", "7", "0", ".", "R", "k", "M", "m", "u", "n", "F", "H", "V", "A", "W", "%", "/", " ", "±", "DCR=", "r=", "1/4W", "X7R", "x"])


@given(text=st.one_of(st.lists(PIECES, max_size=8).map("".join), st.text(max_size=20)), dimension=st.sampled_from(["resistance", "capacitance", "inductance", "current", "voltage", "impedance"]))
def test_garbage_gives_none_or_a_finite_value(text, dimension):
    found = parse_value_field(text, dimension)
    if found is not None:
        assert math.isfinite(found.span.max) and 0 <= found.span.min <= found.span.typ <= found.span.max
        assert parse_value_field(text + " x", dimension) is None
