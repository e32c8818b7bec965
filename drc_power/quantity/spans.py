"""Text to spans of SI floats, strictly: text is understood in full or refused with advice."""

from __future__ import annotations

import decimal
import re
from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal

from .units import DIMENSIONS, Powers, powers_of, same_letters, unit_of


class QuantityError(ValueError):
    """Text that is not the quantity that is due: what was found, and what to write instead."""

    def __init__(self, found: str, instead: str = "") -> None:
        super().__init__(found + (f"; {instead}" if instead else ""))
        self.found = found
        self.instead = instead


@dataclass(frozen=True, slots=True)
class Span:
    """Minimum, typical and maximum of one quantity in SI units (temperatures in °C)."""

    min: float
    typ: float
    max: float

    @classmethod
    def exact(cls, x: float) -> Span:
        """A span of no width."""
        return cls(x, x, x)

    @property
    def is_exact(self) -> bool:
        """Whether minimum and maximum are the same."""
        return self.min == self.max


LONGEST = 100
"""Characters that a quantity may have."""

EXACT = decimal.Context(prec=40, traps=[])
"""Decimal arithmetic of our own, whatever the caller has set."""

MOST_NAMED = 3
"""Dimensions that a message names one by one."""

_LARGEST, _SMALLEST = Decimal("1e30"), Decimal("1e-30")
_SAME = str.maketrans({"\u2212": "-", "\u00a0": " ", "\u202f": " ", "\u2009": " "})  # minus, and narrow or fixed spaces
_ITEM = re.compile(r"([+-]?(?:[0-9]+(?:\.[0-9]+)?|\.[0-9]+)(?:[eE][+-]?[0-9]{1,4})?)\s*(.*)")
_TOLERANCE = re.compile(r"(.+?)(?:±|\+/-)(.+)")
_TWO_TOLERANCES = re.compile(r"(.+?)([+-])([^+-]+)/\s*([+-])([^+-]+)")
_RMS = re.compile(r"(?<=[VA]) +rms$")
_SHARE: Powers = (("share", 1),)


@dataclass(frozen=True, slots=True)
class _Item:
    """One number with its unit, in SI. `celsius`: the unit was °C alone, a temperature or a difference."""

    value: Decimal
    powers: Powers
    text: str
    bare: bool = False
    celsius: bool = False

    def fits(self, dimension: str) -> bool:
        """Whether the unit is one of the dimension's."""
        if self.bare or dimension in ("number", "count"):
            return self.bare and dimension in ("number", "count")
        if dimension == "temperature":
            return self.celsius
        return self.powers in powers_of(dimension)


def parse_span(text: str, dimension: str) -> Span:
    """The span that a text gives, in SI units. Raises `QuantityError` for anything not understood in full.

    >>> parse_span("24 V +10 % / -20 %", "voltage")
    Span(min=19.2, typ=24.0, max=26.4)
    """
    return parse_any(text, (dimension,))[1]


def parse_any(text: str, dimensions: Sequence[str]) -> tuple[str, Span]:
    """The span that a text gives, and which of the dimensions its unit turned out to be.

    >>> parse_any("0 A", ("voltage", "current"))
    ('current', Span(min=0.0, typ=0.0, max=0.0))
    """
    with decimal.localcontext(EXACT):
        return _read(_checked(text), tuple(dimensions))


def span_from_ends(min: float | None = None, typ: float | None = None, max: float | None = None) -> Span:
    """The span of the ends that are given: a missing end is typical, a missing typical the middle.

    >>> span_from_ends(typ=6.4, max=8.0)
    Span(min=6.4, typ=6.4, max=8.0)
    """
    given = [x for x in (min, typ, max) if x is not None]
    if not given:
        raise QuantityError("a span without any end", "give min, typ or max")
    if typ is None:
        typ = given[0] if len(given) == 1 else (given[0] + given[1]) / 2
    low, high = typ if min is None else min, typ if max is None else max
    if not low <= typ <= high:
        raise QuantityError("min, typ and max do not rise", "write the least value as min, the greatest as max")
    return Span(low, typ, high)


def a_dimension(dimension: str) -> str:
    """The dimension in words with its article.

    >>> a_dimension("energy")
    'an energy'
    """
    return DIMENSIONS[dimension].words


def example_of(dimension: str) -> str:
    """How a quantity of the dimension is written, for advice."""
    return DIMENSIONS[dimension].example


def such_as(dimensions: Sequence[str]) -> str:
    """Advice by example.

    >>> such_as(("voltage", "current"))
    'write for example 24 V or 350 mA'
    """
    return "write for example " + " or ".join(example_of(each) for each in dimensions[:MOST_NAMED])


def due_words(dimensions: Sequence[str]) -> str:
    """What is due where any of the dimensions may stand.

    >>> due_words(("voltage", "current"))
    'a voltage or a current'
    """
    return " or ".join(a_dimension(each) for each in dimensions) if len(dimensions) <= MOST_NAMED else "a quantity"


def _checked(text: str) -> str:
    """The text in plain characters, or the reason why it cannot be a quantity."""
    if not isinstance(text, str):
        raise QuantityError(f"{type(text).__name__} where a text with a unit is due", "write for example 24 V")
    if len(text) > LONGEST:
        raise QuantityError(f"a text of {len(text)} characters where a quantity is due", "write one number and its unit")
    plain = text.translate(_SAME).strip()
    if not plain:
        raise QuantityError("nothing where a quantity is due", "write one number and its unit, such as 24 V")
    if not plain.isprintable():
        raise QuantityError("a quantity with control characters in it", "write plain text")
    if re.search(r"[0-9],[0-9]", plain):
        raise QuantityError(f"{_cut(plain)!r} has a comma in a number", "write a decimal point, and no separator of thousands")
    if "..." in plain:
        raise QuantityError(f"{_cut(plain)!r} has more than two dots in a row", "write a range as 21 V .. 29 V")
    return plain


def _read(plain: str, dimensions: tuple[str, ...]) -> tuple[str, Span]:
    """One of the forms: a range, one tolerance, two tolerances, a single value."""
    if ".." in plain:
        return _range(plain, dimensions)
    if match := _TOLERANCE.fullmatch(plain):
        return _tolerance(match[1], match[2], match[2], dimensions)
    if match := _TWO_TOLERANCES.fullmatch(plain):
        if match[2] == match[4]:
            raise QuantityError(f"{_cut(plain)!r} has two tolerances on one side", "write them as +10 % / -20 %")
        upper, lower = (match[3], match[5]) if match[2] == "+" else (match[5], match[3])
        return _tolerance(match[1], upper, lower, dimensions, even=False)
    item = _item(plain, dimensions)
    return _dimension_of(item, dimensions), _span(item.value, item.value, item.value)


def _range(plain: str, dimensions: tuple[str, ...]) -> tuple[str, Span]:
    parts = plain.split("..")
    if len(parts) > 3:
        raise QuantityError(f"{_cut(plain)!r} has more than three values", "write minimum .. typical .. maximum")
    items = [_item(part, dimensions) for part in parts]
    dimension = _dimension_of(items[0], dimensions)
    for item in items:
        _dimension_of(item, (dimension,))
    values = [item.value for item in items]
    if values != sorted(values):
        raise QuantityError(f"{_cut(plain)!r} does not rise", "write the least value first")
    middle = values[1] if len(values) == 3 else (values[0] + values[-1]) / 2
    return dimension, _span(values[0], middle, values[-1])


def _tolerance(main: str, upper: str, lower: str, dimensions: tuple[str, ...], even: bool = True) -> tuple[str, Span]:
    item = _item(main, dimensions)
    dimension = _dimension_of(item, dimensions)
    up, down = (_reach(item, dimension, text, even) for text in (upper, lower))
    return dimension, _span(_possible(item.value - down, item, dimension), item.value, item.value + up)


def _reach(item: _Item, dimension: str, text: str, even: bool) -> Decimal:
    """How far a tolerance reaches to one side, in SI."""
    difference = "temperature_difference" if dimension == "temperature" else dimension
    amount = _item(text, (difference,))
    if amount.value < 0 or dimension == "count":
        raise QuantityError(f"{_cut(amount.text)!r} cannot be a tolerance here", "write minimum .. maximum")
    if amount.powers != _SHARE:
        _dimension_of(amount, (difference,))
        return amount.value
    if dimension in ("temperature", "ratio") or (item.value < 0 and not even):
        raise QuantityError(f"{_cut(item.text)!r} with a tolerance in percent is ambiguous", "write minimum .. maximum")
    return abs(item.value) * amount.value


def _item(text: str, dimensions: tuple[str, ...]) -> _Item:
    """One number and its unit."""
    text = text.strip()
    match = _ITEM.fullmatch(text)
    if not match:
        raise QuantityError(f"{_cut(text)!r} is not a number with a unit", such_as(dimensions))
    number, unit_text = Decimal(match[1]), match[2]
    if not unit_text:
        return _Item(_bounded(number, text), (), text, bare=True)
    unit = unit_of(_RMS.sub("", unit_text))
    if unit is None:
        same = same_letters(unit_text, dimensions)
        advice = "write " + " or ".join(same) if same else such_as(dimensions)
        raise QuantityError(f"{_cut(unit_text)!r} in {_cut(text)!r} is not a unit", advice)
    return _Item(_bounded(number * unit.factor, text), unit.powers, text, celsius=unit_text in ("°C", "\u2103", "degC"))


def _bounded(value: Decimal, text: str) -> Decimal:
    if value.is_finite() and (value == 0 or _SMALLEST <= abs(value) <= _LARGEST):
        return value
    raise QuantityError(f"{_cut(text)!r} is beyond what can be computed with", "check the exponent and the prefix")


def _dimension_of(item: _Item, dimensions: tuple[str, ...]) -> str:
    """The first dimension that the item's unit fits."""
    for dimension in dimensions:
        if item.fits(dimension):
            _possible(item.value, item, dimension)
            return dimension
    due = due_words(dimensions)
    if item.bare:
        raise QuantityError(f"{_cut(item.text)!r} has no unit, {due} is due", such_as(dimensions))
    what = next((row.words for name, row in DIMENSIONS.items() if item.fits(name)), "something else")
    raise QuantityError(f"{_cut(item.text)!r} is {what}, {due} is due", such_as(dimensions))


def _possible(value: Decimal, item: _Item, dimension: str) -> Decimal:
    if dimension == "temperature" and value < Decimal("-273.15"):
        raise QuantityError(f"{_cut(item.text)!r} goes below absolute zero", "check the sign and the number")
    if dimension == "count" and value != value.to_integral_value():
        raise QuantityError(f"{_cut(item.text)!r} is not a whole number", "write a whole number, such as 9")
    return value


def _span(low: Decimal, typical: Decimal, high: Decimal) -> Span:
    return Span(float(low) + 0.0, float(typical) + 0.0, float(high) + 0.0)  # + 0.0: no negative zero


def _cut(text: str) -> str:
    return text if len(text) <= 40 else text[:37] + "..."
