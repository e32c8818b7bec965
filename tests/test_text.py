"""Text of unknown origin becomes harmless; numbers read as engineers write them."""

import sys
import unicodedata

import pytest
from hypothesis import given
from hypothesis import strategies as st

from drc_power.text import display_width, fit, natural_key, pad, printable, shorten, si, si_apart

# Unicode core specification, section 9.2 "Arabic": prepended concatenation marks are format characters by category
# but have a visible shape.
VISIBLE_FORMAT_CHARACTERS = set(
    "\u0600\u0601\u0602\u0603\u0604\u0605\u06dd\u070f\u0890\u0891\u08e2\U000110bd\U000110cd"
)


def test_every_control_format_and_separator_character_of_unicode_is_made_visible():
    """Against Unicode's own character data as Python carries it (general categories Cc, Cf, Cs, Zl, Zp)."""
    every = map(chr, range(sys.maxunicode + 1))
    hidden = {c for c in every if unicodedata.category(c) in {"Cc", "Cf", "Cs", "Zl", "Zp"}}
    let_through = {c for c in hidden - VISIBLE_FORMAT_CHARACTERS if printable(f"a{c}b") == f"a{c}b"}
    assert not let_through


def test_letters_digits_and_signs_stay():
    text = "Q3 µΩ°²±≤→ 抵抗 резистор \u05d0\u05d1 é e\u0301 🙂"
    assert printable(text) == text


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("a\nb\tc\rd", r"a\nb\tc\rd"),
        ("\x1b[31m", r"\u001b[31m"),
        ("\u202egnd", r"\u202egnd"),
        ("lone \ud800", r"lone \ud800"),
        ("tag\U000e0041", r"tag\U000e0041"),
        ("\x00\x7f\x9b", r"\u0000\u007f\u009b"),
    ],
)
def test_hidden_characters_show_as_escapes(text, shown):
    assert printable(text) == shown


def test_piled_up_accents_do_not_climb_over_the_line_above():
    assert printable("a" + "\u0301" * 50).count("\u0301") == 3


@given(st.text(st.characters()))
def test_printable_text_is_one_line_of_encodable_characters_and_stays_as_it_is(text):
    shown = printable(text)
    assert len(shown.splitlines()) <= 1
    shown.encode("utf-8")
    assert printable(shown) == shown


@given(st.text(), st.integers(3, 30))
def test_shortened_text_keeps_both_ends(text, limit):
    short = shorten(text, limit)
    assert len(short) <= limit
    assert short == text or (short[0] == text[0] and short[-1] == text[-1] and "…" in short)


@given(st.text(st.sampled_from("aZ9 抵🙂\u0301")), st.integers(5, 30))
def test_fitted_text_takes_no_more_columns_than_allowed(text, width):
    assert display_width(fit(text, width)) <= width
    assert display_width(pad(fit(text, width), width)) == width


def test_widths_follow_east_asian_width():
    """Unicode Standard Annex 11: W and F take two columns."""
    for char in "抵a\u3042\uff21\uac00é":
        wide = unicodedata.east_asian_width(char) in "WF"
        assert display_width(char) == (2 if wide else 1), char


def test_natural_order():
    in_order = ["C100", "R1", "R1A", "R02", "R2", "R10"]
    assert sorted(reversed(in_order), key=natural_key) == in_order


@given(st.lists(st.text(st.sampled_from("R0129a-"), max_size=6), unique=True))
def test_natural_order_is_total_and_agrees_with_numbers(names):
    keys = sorted(natural_key(name) for name in names)
    assert len(set(keys)) == len(names)
    numbers = sorted((n for n in names if n.isdigit()), key=natural_key)
    assert [int(n) for n in numbers] == sorted(int(n) for n in numbers)


def test_a_run_of_ten_thousand_digits_can_be_ordered():
    assert natural_key("R" + "1" * 10_000) > natural_key("R9")


@pytest.mark.parametrize(
    ("value", "unit", "shown"),
    [
        (0.35, "A", "350 mA"),
        (12.0, "V", "12 V"),
        (0.0022, "F", "2.2 mF"),
        (1e-7, "F", "100 nF"),
        (4700.0, "ohm", "4.7 kohm"),
        (0.99996, "A", "1 A"),
        (999.949, "W", "999.9 W"),
        (163.25, "°C", "163.2 °C"),
        (-0.04, "°C", "0.0 °C"),
        (-40.0, "°C", "-40.0 °C"),
        (1.36, "K/W", "1.36 K/W"),
        (0.002, "K", "0.002 K"),
        (0.8, "", "0.8"),
        (-3.3, "V", "-3.3 V"),
        (0.0, "V", "0 V"),
        (-0.0, "V", "0 V"),
        (1e-15, "A", "0.001 pA"),
        (float("inf"), "V", "∞ V"),
        (float("nan"), "V", "-"),
        (None, "°C", "-"),
    ],
)
def test_numbers_with_units(value, unit, shown):
    assert si(value, unit) == shown


@given(st.floats(1e-12, 1e11), st.sampled_from(["V", "A", "K/W", "J"]))
def test_a_shown_number_reads_back_within_its_four_digits(value, unit):
    number, shown_unit = si(value, unit).split(" ")
    factor = {"p": 1e-12, "n": 1e-9, "u": 1e-6, "m": 1e-3, "k": 1e3, "M": 1e6, "G": 1e9}.get(
        shown_unit.removesuffix(unit), 1.0
    )
    assert float(number) * factor == pytest.approx(value, rel=5.1e-4)


@pytest.mark.parametrize(
    ("value", "other", "unit", "shown"),
    [
        (5.0, 5.0, "A", ("5 A", "5 A")),
        (5.0002, 5.0, "A", ("5.0002 A", "5 A")),
        (150.01, 150.0, "°C", ("150.01 °C", "150.00 °C")),
        (None, 1.0, "W", ("-", "1 W")),
    ],
)
def test_two_numbers_are_told_apart(value, other, unit, shown):
    assert si_apart(value, other, unit) == shown
