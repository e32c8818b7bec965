"""Text to spans: the forms of the contract by hand, then properties, then a general-purpose library of units."""

import decimal
import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from drc_power.quantity import DIMENSIONS, QuantityError, Span, parse_any, parse_span, span_from_ends

EXACT = [
    ("24 V", "voltage", 24.0),
    ("24V", "voltage", 24.0),
    ("+24 V", "voltage", 24.0),
    ("-12 V", "voltage", -12.0),
    ("\u221212 V", "voltage", -12.0),
    (".5 V", "voltage", 0.5),
    ("1e-3 V", "voltage", 1e-3),
    ("010 V", "voltage", 10.0),
    ("0 V", "voltage", 0.0),
    ("-0 V", "voltage", 0.0),
    ("24\u00a0V", "voltage", 24.0),
    ("350 mA", "current", 0.35),
    ("14 A rms", "current", 14.0),
    ("230 V rms", "voltage", 230.0),
    ("2200 uF", "capacitance", 2.2e-3),
    ("2200 \u00b5F", "capacitance", 2.2e-3),
    ("2200 \u03bcF", "capacitance", 2.2e-3),
    ("8 mohm", "resistance", 8e-3),
    ("8 m\u2126", "resistance", 8e-3),
    ("8 m\u03a9", "resistance", 8e-3),
    ("8 mR", "resistance", 8e-3),
    ("1.5 Mohm", "resistance", 1.5e6),
    ("2 mS", "conductance", 2e-3),
    ("0.4 W", "power", 0.4),
    ("2 V A", "power", 2.0),
    ("120 mJ", "energy", 0.12),
    ("3 W h", "energy", 10800.0),
    ("62 nC", "charge", 62e-9),
    ("10 uH", "inductance", 10e-6),
    ("20 kHz", "frequency", 20e3),
    ("20 1/s", "frequency", 20.0),
    ("18 ns", "time", 18e-9),
    ("100 us", "time", 100e-6),
    ("1 ms", "time", 1e-3),
    ("1.5 min", "time", 90.0),
    ("2 h", "time", 7200.0),
    ("55 °C", "temperature", 55.0),
    ("55°C", "temperature", 55.0),
    ("55 \u2103", "temperature", 55.0),
    ("55 degC", "temperature", 55.0),
    ("-273.15 °C", "temperature", -273.15),
    ("25 K", "temperature_difference", 25.0),
    ("25 °C", "temperature_difference", 25.0),
    ("0.5 K/W", "thermal_resistance", 0.5),
    ("0.5 °C/W", "thermal_resistance", 0.5),
    ("40 K/kW", "thermal_resistance", 0.04),
    ("60 J/K", "thermal_capacity", 60.0),
    ("5 mJ/K", "thermal_capacity", 5e-3),
    ("0.3 K cm²/W", "thermal_resistance_area", 0.3e-4),
    ("0.3 K·cm²/W", "thermal_resistance_area", 0.3e-4),
    ("1.1 W/(m K)", "conductivity", 1.1),
    ("1.1 W/m/K", "conductivity", 1.1),
    ("390 W/m K", "conductivity", 390.0),
    ("10 W/(m² K)", "heat_transfer", 10.0),
    ("1.2 mm", "length", 1.2e-3),
    ("4 cm", "length", 0.04),
    ("40 mil", "length", 40 * 25.4e-6),
    ("1 in", "length", 25.4e-3),
    ("35 um", "length", 35e-6),
    ("2 oz", "length", 2 * 34.8e-6),
    ("800 m", "length", 800.0),
    ("4 cm²", "area", 4e-4),
    ("4 cm^2", "area", 4e-4),
    ("600 mm²", "area", 6e-4),
    ("2 m/s", "speed", 2.0),
    ("2 V/ms", "slew", 2000.0),
    ("80 %", "ratio", 0.8),
    ("400 ppm", "ratio", 4e-4),
    ("400 ppm/K", "tempco", 4e-4),
    ("0.393 %/K", "tempco", 3.93e-3),
    ("0.00393 1/K", "tempco", 3.93e-3),
    ("0.00393 /K", "tempco", 3.93e-3),
    ("-2 mV/K", "voltage_tempco", -2e-3),
    ("20 mA/K", "current_tempco", 0.02),
    ("12 A²s", "i2t", 12.0),
    ("12 A² s", "i2t", 12.0),
    ("90 deg", "angle", math.pi / 2),
    ("1.45", "number", 1.45),
    ("9", "count", 9.0),
]

SPANS = [
    ("5 V ± 2 %", "voltage", (4.9, 5.0, 5.1)),
    ("5V±2%", "voltage", (4.9, 5.0, 5.1)),
    ("5 V +/- 2 %", "voltage", (4.9, 5.0, 5.1)),
    ("5 V +/- 100 mV", "voltage", (4.9, 5.0, 5.1)),
    ("-12 V ± 5 %", "voltage", (-12.6, -12.0, -11.4)),
    ("24 V +10 % / -20 %", "voltage", (19.2, 24.0, 26.4)),
    ("24 V -20 % / +10 %", "voltage", (19.2, 24.0, 26.4)),
    ("24 V +1 V / -2 V", "voltage", (22.0, 24.0, 25.0)),
    ("1e+1 V +10 % / -20 %", "voltage", (8.0, 10.0, 11.0)),
    ("21 V .. 29 V", "voltage", (21.0, 25.0, 29.0)),
    ("21V..29V", "voltage", (21.0, 25.0, 29.0)),
    ("21 V .. 24 V .. 29 V", "voltage", (21.0, 24.0, 29.0)),
    ("90 mA .. 0.18 A", "current", (0.09, 0.135, 0.18)),
    ("3 A rms .. 9 A rms", "current", (3.0, 6.0, 9.0)),
    ("-30 °C .. 55 °C", "temperature", (-30.0, 12.5, 55.0)),
    ("55 °C ± 5 K", "temperature", (50.0, 55.0, 60.0)),
    ("55 °C ± 5 °C", "temperature", (50.0, 55.0, 60.0)),
    ("20 % .. 95 %", "ratio", (0.2, 0.575, 0.95)),
    ("400 ppm/K ± 10 %", "tempco", (3.6e-4, 4e-4, 4.4e-4)),
    ("12 ohm ± 5 %", "resistance", (11.4, 12.0, 12.6)),
    ("0.9 .. 1.1", "number", (0.9, 1.0, 1.1)),
]

REFUSED = [
    ("24", "voltage", "'24' has no unit, a voltage is due; write for example 24 V"),
    ("21 .. 29 V", "voltage", "'21' has no unit, a voltage is due; write for example 24 V"),
    ("5 V ± 2", "voltage", "'2' has no unit, a voltage is due; write for example 24 V"),
    ("0.8", "ratio", "'0.8' has no unit, a ratio is due; write for example 80 %"),
    ("24 A", "voltage", "'24 A' is a current, a voltage is due; write for example 24 V"),
    ("5 V ± 1 A", "voltage", "'1 A' is a current, a voltage is due; write for example 24 V"),
    ("5 V .. 6 A", "voltage", "'6 A' is a current, a voltage is due; write for example 24 V"),
    ("1 V V", "voltage", "'1 V V' is something else, a voltage is due; write for example 24 V"),
    ("328 K", "temperature", "'328 K' is a temperature difference, a temperature is due; write for example 55 °C"),
    ("55 C", "temperature", "'55 C' is a charge, a temperature is due; write for example 55 °C"),
    ("1.1 W/mK", "conductivity", "'1.1 W/mK' is something else, a thermal conductivity is due; write for example 1.1 W/(m K)"),
    ("20 KHz", "frequency", "'KHz' in '20 KHz' is not a unit; write kHz"),
    ("3 mv", "voltage", "'mv' in '3 mv' is not a unit; write mV or MV"),
    ("24 Volt", "voltage", "'Volt' in '24 Volt' is not a unit; write for example 24 V"),
    ("5 W rms", "power", "'W rms' in '5 W rms' is not a unit; write for example 0.4 W"),
    ("4,7 V", "voltage", "'4,7 V' has a comma in a number; write a decimal point, and no separator of thousands"),
    ("1,000 V", "voltage", "'1,000 V' has a comma in a number; write a decimal point, and no separator of thousands"),
    ("29 V .. 21 V", "voltage", "'29 V .. 21 V' does not rise; write the least value first"),
    ("1 V .. 2 V .. 3 V .. 4 V", "voltage", "'1 V .. 2 V .. 3 V .. 4 V' has more than three values; write minimum .. typical .. maximum"),
    ("1 V...5 V", "voltage", "'1 V...5 V' has more than two dots in a row; write a range as 21 V .. 29 V"),
    ("24 V +10 % / +20 %", "voltage", "'24 V +10 % / +20 %' has two tolerances on one side; write them as +10 % / -20 %"),
    ("5 V ± -2 %", "voltage", "'-2 %' cannot be a tolerance here; write minimum .. maximum"),
    ("9 ± 1", "count", "'1' cannot be a tolerance here; write minimum .. maximum"),
    ("55 °C ± 5 %", "temperature", "'55 °C' with a tolerance in percent is ambiguous; write minimum .. maximum"),
    ("80 % ± 5 %", "ratio", "'80 %' with a tolerance in percent is ambiguous; write minimum .. maximum"),
    ("-12 V +10 % / -20 %", "voltage", "'-12 V' with a tolerance in percent is ambiguous; write minimum .. maximum"),
    ("-300 °C", "temperature", "'-300 °C' goes below absolute zero; check the sign and the number"),
    ("-270 °C ± 5 K", "temperature", "'-270 °C' goes below absolute zero; check the sign and the number"),
    ("9.5", "count", "'9.5' is not a whole number; write a whole number, such as 9"),
    ("1e400 V", "voltage", "'1e400 V' is beyond what can be computed with; check the exponent and the prefix"),
    ("1e-400 V", "voltage", "'1e-400 V' is beyond what can be computed with; check the exponent and the prefix"),
    ("", "voltage", "nothing where a quantity is due; write one number and its unit, such as 24 V"),
    ("24\nV", "voltage", "a quantity with control characters in it; write plain text"),
    ("24 V" + " " * 200 + "x", "voltage", "a text of 205 characters where a quantity is due; write one number and its unit"),
]

LEFTOVERS = [
    "inf V", "nan V", "NaN", "Infinity V", "0x10 V", "1_000 V", "5. V", "1 2 V", "V", "V 5", "--5 V", "5 V;", "5 V 6", "5 V (max)",
    "5 V max", "> 5 V", "~5 V", "5 V ± 2 % ± 3 %", "5 V ±", "± 2 %", "5 V ..", ".. 5 V", "..", "5 V/", "5 V/1", "5 V/()", "5 V/(A", "5 V)",
    "5 %V", "5 V^4", "5 V^", "4k7", "4k7 V", "5 dB V", "5 kk V", "5 mmV", "5 V±2%±", "24 V +10 %", "24 V +10 % -20 %", "1e V", "1e+ V",
    "1e99999999999 V", "\u0665 V", "5 \u202eV", "5 V\u0000", "${5 V}", "5 V # comment", "12V5", "true", "null", "~",
]  # fmt: skip


@pytest.mark.parametrize(("text", "dimension", "value"), EXACT)
def test_one_value(text, dimension, value):
    span = parse_span(text, dimension)
    assert span.is_exact
    assert span.typ == pytest.approx(value, rel=1e-15, abs=0)


@pytest.mark.parametrize(("text", "dimension", "ends"), SPANS)
def test_span(text, dimension, ends):
    span = parse_span(text, dimension)
    assert (span.min, span.typ, span.max) == pytest.approx(ends, rel=1e-15)


@pytest.mark.parametrize(("text", "dimension", "message"), REFUSED)
def test_refused_with_advice(text, dimension, message):
    with pytest.raises(QuantityError) as caught:
        parse_span(text, dimension)
    assert str(caught.value) == message


@pytest.mark.parametrize("text", LEFTOVERS)
@pytest.mark.parametrize("dimension", ["voltage", "number", "ratio"])
def test_text_not_understood_in_full_gives_no_value(text, dimension):
    with pytest.raises(QuantityError):
        parse_span(text, dimension)


@pytest.mark.parametrize("thing", [24, 24.0, None, ["24 V"], True])
def test_anything_but_text_is_refused(thing):
    with pytest.raises(QuantityError):
        parse_span(thing, "voltage")


def test_the_unit_tells_which_dimension():
    demands = ("current", "power", "resistance")
    assert [parse_any(text, demands)[0] for text in ("9 A", "3 W", "8 ohm")] == ["current", "power", "resistance"]
    assert parse_any("20 K", ("temperature", "temperature_difference"))[0] == "temperature_difference"
    assert parse_any("20 °C", ("temperature", "temperature_difference"))[0] == "temperature"
    with pytest.raises(QuantityError, match="a current or a power or a resistance is due"):
        parse_any("9 V", demands)


@pytest.mark.parametrize(
    ("ends", "span"),
    [
        ({"typ": 6.4, "max": 8.0}, Span(6.4, 6.4, 8.0)),
        ({"min": 1.0, "typ": 2.0}, Span(1.0, 2.0, 2.0)),
        ({"min": 1.0, "max": 3.0}, Span(1.0, 2.0, 3.0)),
        ({"max": 8.0}, Span(8.0, 8.0, 8.0)),
        ({"min": 21.0, "typ": 24.0, "max": 29.0}, Span(21.0, 24.0, 29.0)),
    ],
)
def test_span_from_ends(ends, span):
    assert span_from_ends(**ends) == span


@pytest.mark.parametrize("ends", [{}, {"min": 3.0, "max": 1.0}, {"min": 3.0, "typ": 2.0}, {"typ": math.nan, "max": 1.0}])
def test_span_from_ends_refuses(ends):
    with pytest.raises(QuantityError):
        span_from_ends(**ends)


def test_every_dimension_reads_its_own_example():
    for name, row in DIMENSIONS.items():
        assert parse_any(row.example, tuple(DIMENSIONS))[1] == parse_span(row.example, name)


def test_the_callers_decimal_context_changes_nothing():
    before = parse_span("62.123456 nC ± 3 %", "charge")
    with decimal.localcontext(decimal.Context(prec=2, rounding=decimal.ROUND_UP)):
        assert parse_span("62.123456 nC ± 3 %", "charge") == before


# --- properties --------------------------------------------------------------------------------------------------

NUMBERS = st.decimals(min_value=-10**6, max_value=10**6, places=6, allow_nan=False, allow_infinity=False)


@given(number=NUMBERS, prefix=st.sampled_from(["p", "n", "u", "m", "", "k", "M"]))
def test_a_value_is_its_decimal_times_its_prefix(number, prefix):
    power = {"p": -12, "n": -9, "u": -6, "m": -3, "": 0, "k": 3, "M": 6}[prefix]
    assert parse_span(f"{number:f} {prefix}A", "current").typ == float(number.scaleb(power))


@given(low=NUMBERS, middle=NUMBERS, high=NUMBERS)
def test_a_range_keeps_its_three_values(low, middle, high):
    low, middle, high = sorted((low, middle, high))
    assert parse_span(f"{low:f} V .. {middle:f} V .. {high:f} V", "voltage") == Span(float(low), float(middle), float(high))


@given(value=NUMBERS, percent=st.integers(min_value=0, max_value=100))
def test_a_tolerance_spans_the_value_on_both_sides(value, percent):
    span = parse_span(f"{value:f} V ± {percent} %", "voltage")
    assert span.min <= span.typ <= span.max
    assert span.max - span.min == pytest.approx(2 * abs(float(value)) * percent / 100, rel=1e-9, abs=1e-9)


PIECES = st.sampled_from(
    ["24", "0.5", "-", "+", "1e3", " ", "V", "mA", "ohm", "K/W", "%", "±", "+/-", "..", "/", "rms", "°C", "k", "(", ")", "²", "R", ",", "x", "\x00"]
)


@settings(max_examples=500)
@given(text=st.one_of(st.lists(PIECES, max_size=9).map("".join), st.text(max_size=30)), dimension=st.sampled_from(sorted(DIMENSIONS)))
def test_garbage_is_refused_or_understood_in_full(text, dimension):
    """Whatever is accepted is finite, in order, and stops being accepted with a foreign word at its end."""
    try:
        span = parse_span(text, dimension)
    except QuantityError:
        return
    assert math.isfinite(span.min) and math.isfinite(span.max) and span.min <= span.typ <= span.max
    with pytest.raises(QuantityError):
        parse_span(text + " x", dimension)
    with pytest.raises(QuantityError):
        parse_span("x " + text, dimension)


# --- against a general-purpose library of units --------------------------------------------------------------------

PLAIN = [
    ("24 V", "volt"), ("350 mA", "ampere"), ("2200 uF", "farad"), ("8 mohm", "ohm"), ("62 nC", "coulomb"), ("10 uH", "henry"),
    ("20 kHz", "hertz"), ("120 mJ", "joule"), ("1.5 min", "second"), ("2 h", "second"), ("0.4 kW", "watt"), ("40 mil", "meter"),
    ("1.2 mm", "meter"), ("4 cm^2", "meter**2"), ("2 m/s", "meter/second"), ("2 V/ms", "volt/second"), ("0.5 K/W", "kelvin/watt"),
    ("5 mJ/K", "joule/kelvin"), ("1.1 W/(m K)", "watt/meter/kelvin"), ("20 mA/K", "ampere/kelvin"), ("12 A^2 s", "ampere**2*second"),
    ("30 deg", "radian"), ("3 W h", "joule"), ("1 in", "meter"), ("7 ns", "second"), ("3 GHz", "hertz"),
]  # fmt: skip


@pytest.mark.parametrize(("text", "si"), PLAIN)
def test_against_pint(text, si):
    """Plain quantities as the library `pint` reads them, an independent table of units."""
    pint = pytest.importorskip("pint")
    theirs = pint.UnitRegistry(cache_folder=None)(text.replace("mil", "thou")).to(si).magnitude
    assert parse_any(text, tuple(DIMENSIONS))[1].typ == pytest.approx(theirs, rel=1e-12)
