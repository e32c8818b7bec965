"""Schematic value fields, where the symbol implies the unit: `4k7` on a resistor, `10uF/25V` on a capacitor.

A field is cut into words at spaces and slashes; the first word is the value, and every further word must be a rating,
a tolerance or a plain word of the trade. One word not understood, and the field gives no value at all.
"""

from __future__ import annotations

import decimal
import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from decimal import Decimal

from .spans import EXACT, Span
from .units import PREFIXES


@dataclass(frozen=True, slots=True)
class ValueField:
    """What a value field says. `span` is the main value in SI units, with its tolerance if one is written.

    `ratings` holds maximum voltage, current and power by dimension. `winding_ohm` is an inductor's resistance.
    """

    span: Span
    ratings: Mapping[str, float] = field(default_factory=dict)
    winding_ohm: float | None = None


@dataclass(frozen=True, slots=True)
class _Kind:
    """How the value of one dimension is written: its unit, prefixes, the letter that may stand for the point."""

    units: str
    prefixes: str
    letters: str = ""
    bare: bool = False
    simulation: str = ""


_KINDS = {
    "resistance": _Kind("R|ohms?|Ohms?", "mkKMG", "RmkKM", bare=True, simulation="r"),
    "impedance": _Kind("R|ohms?|Ohms?", "mk", "Rk", bare=False),
    "capacitance": _Kind("F|f", "pnum", "pnum", simulation="c"),
    "inductance": _Kind("H|h", "pnum", "num", simulation="l"),
    "current": _Kind("A", "um", "A"),
    "voltage": _Kind("V", "mk", "V"),
    "power": _Kind("W", "mk", "W"),
    "frequency": _Kind("Hz", "kMG"),
}
"""`prefixes` may also end a value without its unit (`100n`), where the dimension has `letters` besides its own."""

_NUMBER = r"(?:0|[1-9][0-9]*)(?:\.[0-9]+)?|\.[0-9]+"
_FRACTION = re.compile(r"(?<![0-9./])1/([1-9][0-9]?)\s*W\b")
_SIMULATION_SCALE = {"": 0, "f": -15, "p": -12, "n": -9, "u": -6, "k": 3, "meg": 6, "g": 9}
_TOLERANCE = re.compile(r"(?:±|\+/-)?([0-9]+(?:\.[0-9]+)?)%")
_WINDING = re.compile(r"(?:DCR|Rdc)[=:]?(.+)", re.IGNORECASE)
_PLAIN_WORD = re.compile(
    r"X[5678][RSTUV]|[YZ]5[UV]|C0G|COG|NP0|NPO|0[1246]0[1235]|0[68]0[35]|1206|1210|1812|2010|2512|@100MHz", re.IGNORECASE
)
"""Dielectric classes, imperial chip sizes, and the frequency that a bead's impedance is given at."""

_JOINTS = (
    (re.compile(r"\s*(?:±|\+/-)\s*"), " ±"),
    (re.compile(r"(?<=[0-9]) +(?=(?:[fpnumkKMG]?(?:F|H|A|V|W|R|[Oo]hms?)|%)(?![A-Za-z0-9]))"), ""),
    (re.compile(r"(?<=DCR) +(?=[0-9])", re.IGNORECASE), "="),
    (re.compile(r" *@ *(?=100)"), " @"),
)
"""Spaces that stand inside one word of a field, and what to put instead."""

_SAME = str.maketrans({"\u00b5": "u", "\u03bc": "u", "\u2126": "R", "\u03a9": "R", "\u00a0": " "})


def parse_value_field(text: str, dimension: str) -> ValueField | None:
    """What a schematic value field says of a part whose main value has the given dimension; None if not all is clear.

    `dimension` is resistance, capacitance, inductance, current (fuse), voltage (Zener), power, frequency, or
    impedance (ferrite bead: ohms at 100 MHz, no resistance to direct current).

    >>> parse_value_field("4k7 1%", "resistance").span
    Span(min=4653.0, typ=4700.0, max=4747.0)
    >>> parse_value_field("1.0uH/4.2A/DCR=35mR", "inductance").ratings
    {'current': 4.2}
    """
    if not isinstance(text, str) or len(text) > 60 or dimension not in _KINDS:
        return None
    with decimal.localcontext(EXACT):
        words = _words(text.translate(_SAME))
        value = _value(words[0], dimension) if words else None
        return None if value is None else _with_ratings(value, words[1:], dimension)


def _words(text: str) -> list[str]:
    """The words of a field, with `1/4W` made one word and a lone unit joined to its number."""
    text = _FRACTION.sub(lambda match: f"{1 / int(match[1])}W", text)
    for pattern, instead in _JOINTS:
        text = pattern.sub(instead, text)
    words = re.split(r" *[/ ] *", text.strip(" "))
    return [] if "" in words or _PLAIN_WORD.fullmatch(words[0]) else words


def _value(word: str, dimension: str) -> Decimal | None:
    """The main value of a field: `4k7`, `0R05`, `100n`, `10uF`, `c=100u`."""
    kind = _KINDS[dimension]
    if kind.simulation and word[:2].casefold() == kind.simulation + "=":
        return _simulation_value(word[2:])
    return _plain_value(word, kind, short=True)


def _plain_value(word: str, kind: _Kind, short: bool) -> Decimal | None:
    """A number with prefix and unit. `short` allows the unit to be implied."""
    match = re.fullmatch(rf"({_NUMBER})([{kind.prefixes}]?)({kind.units}|)", word)
    if match:
        number, prefix, unit = match.groups()
        if not unit and not (short and (prefix and kind.letters if prefix else kind.bare)):
            return None
        return _scaled(number, prefix)
    return _infix_value(word, kind) if kind.letters else None


def _infix_value(word: str, kind: _Kind) -> Decimal | None:
    """A number whose point is a letter, `4k7` or `R005`, with the unit after it or not."""
    match = re.fullmatch(rf"([0-9]*)([{kind.letters}])([0-9]+)({kind.units}|)", word)
    if not match or re.match("0[0-9]", match[1]):
        return None
    if not match[1] and (match[2] != "R" or len(match[3]) < 2):  # R1 may be a reference; R10 is a marking of 0.1 ohm
        return None
    letter = match[2] if match[2] in PREFIXES or match[2] == "K" else ""
    return _scaled(f"{match[1] or 0}.{match[3]}", letter)


def _scaled(number: str, prefix: str) -> Decimal:
    return Decimal(number).scaleb(PREFIXES["k" if prefix == "K" else prefix])


def _simulation_value(text: str) -> Decimal | None:
    """A circuit simulator's number: letters in any case; `m` alone is left out, for it reads as milli or mega."""
    match = re.fullmatch(rf"({_NUMBER})(meg|[fpnukg]?)", text.casefold())
    return Decimal(match[1]).scaleb(_SIMULATION_SCALE[match[2]]) if match else None


def _with_ratings(value: Decimal, words: list[str], dimension: str) -> ValueField | None:
    """The whole field, or None when one word is not understood or says a thing twice."""
    tolerance: Decimal | None = None
    winding: float | None = None
    ratings: dict[str, float] = {}
    for word in words:
        if _PLAIN_WORD.fullmatch(word):
            continue
        if match := _TOLERANCE.fullmatch(word):
            if tolerance is not None or Decimal(match[1]) >= 100:
                return None
            tolerance = Decimal(match[1]) / 100
        elif match := _WINDING.fullmatch(word):
            ohm = _plain_value(match[1], _KINDS["resistance"], short=False) if dimension == "inductance" else None
            if ohm is None or winding is not None:
                return None
            winding = float(ohm)
        else:
            name, rating = _rating(word)
            if rating <= 0 or name == dimension or name in ratings:
                return None
            ratings[name] = rating
    reach = abs(value) * (tolerance or 0)
    return ValueField(Span(float(value - reach), float(value), float(value + reach)), ratings, winding)


def _rating(word: str) -> tuple[str, float]:
    """A maximum voltage, current or power; ("", 0.0) if the word is none of them."""
    for name in ("voltage", "current", "power"):
        value = _plain_value(word, _KINDS[name], short=False)
        if value is not None:
            return name, float(value)
    return "", 0.0
