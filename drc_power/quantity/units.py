"""Units as data, and the little algebra that compound units need.

A unit is a factor to SI and the powers of the base units volt, ampere, second, metre, kelvin, radian and share
(for % and ppm): `K/W` is K·V⁻¹·A⁻¹. Factors are decimal, so that nothing is rounded before the end.
"""

from __future__ import annotations

import functools
import math
import re
from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal

Powers = tuple[tuple[str, int], ...]

PREFIXES = {"f": -15, "p": -12, "n": -9, "u": -6, "m": -3, "": 0, "k": 3, "M": 6, "G": 9, "T": 12}
"""Powers of ten by prefix."""

PREFIXED = {
    "V": "V", "A": "A", "s": "s", "m": "m", "K": "K",
    "W": "V A", "J": "V A s", "ohm": "V/A", "R": "V/A", "S": "A/V", "F": "A s/V", "H": "V s/A", "C": "A s", "Hz": "1/s",
}
"""Symbols that take a prefix, in terms of the base units."""

PLAIN = {
    "min": ("60", "s"), "h": ("3600", "s"),
    "cm": ("0.01", "m"), "mil": ("25.4e-6", "m"), "in": ("25.4e-3", "m"),
    "oz": ("34.8e-6", "m"),  # copper of 1 oz/ft² is 34.8 um thick (from memory: weight over density, the trade's figure)
    "degC": ("1", "K"),
    "rad": ("1", "rad"), "deg": (str(Decimal(repr(math.pi)) / 180), "rad"),
    "%": ("0.01", "share"), "ppm": ("1e-6", "share"),
}
"""Symbols that take no prefix: their factor and base unit."""

_SAME = {
    "°C": "degC", "\u2103": "degC",
    "\u00b5": "u", "\u03bc": "u",  # micro sign, Greek mu
    "\u2126": "ohm", "\u03a9": "ohm",  # ohm sign, Greek omega
    "²": "^2 ", "³": "^3 ", "·": " ", "\u22c5": " ",
}
"""Ways to write the same in a unit."""


@dataclass(frozen=True, slots=True)
class Unit:
    """A factor to SI, and the powers of the base units, sorted by name, none of them zero."""

    factor: Decimal
    powers: Powers


@dataclass(frozen=True, slots=True)
class Dimension:
    """What a quantity measures: in words, its SI unit, an example for advice, and other units that mean it too."""

    words: str
    unit: str
    example: str
    also: tuple[str, ...] = ()


DIMENSIONS: Mapping[str, Dimension] = {
    "voltage": Dimension("a voltage", "V", "24 V"),
    "current": Dimension("a current", "A", "350 mA"),
    "resistance": Dimension("a resistance", "ohm", "8 mohm"),
    "impedance": Dimension("an impedance", "ohm", "600 ohm"),
    "conductance": Dimension("a conductance", "S", "2 mS"),
    "power": Dimension("a power", "W", "0.4 W"),
    "energy": Dimension("an energy", "J", "120 mJ"),
    "capacitance": Dimension("a capacitance", "F", "2200 uF"),
    "inductance": Dimension("an inductance", "H", "10 uH"),
    "charge": Dimension("a charge", "C", "62 nC"),
    "frequency": Dimension("a frequency", "Hz", "20 kHz"),
    "time": Dimension("a time", "s", "20 ms"),
    "temperature": Dimension("a temperature", "°C", "55 °C"),
    "temperature_difference": Dimension("a temperature difference", "K", "25 K"),
    "thermal_resistance": Dimension("a thermal resistance", "K/W", "0.5 K/W"),
    "thermal_capacity": Dimension("a heat capacity", "J/K", "60 J/K"),
    "thermal_resistance_area": Dimension("a thermal resistance times area", "K m²/W", "0.3 K cm²/W"),
    "conductivity": Dimension("a thermal conductivity", "W/(m K)", "1.1 W/(m K)"),
    "heat_transfer": Dimension("a heat transfer coefficient", "W/(m² K)", "10 W/(m² K)"),
    "length": Dimension("a length", "m", "1.2 mm"),
    "area": Dimension("an area", "m²", "4 cm²"),
    "speed": Dimension("a speed", "m/s", "2 m/s"),
    "slew": Dimension("a slew rate", "V/s", "2 V/ms"),
    "ratio": Dimension("a ratio", "%", "80 %"),
    "tempco": Dimension("a temperature coefficient", "1/K", "400 ppm/K", ("%/K",)),
    "current_tempco": Dimension("a temperature coefficient of current", "A/K", "20 mA/K"),
    "voltage_tempco": Dimension("a temperature coefficient of voltage", "V/K", "-2 mV/K"),
    "angle": Dimension("an angle", "rad", "30 deg"),
    "i2t": Dimension("a melting integral", "A² s", "12 A²s"),
    "number": Dimension("a plain number", "", "1.45"),
    "count": Dimension("a whole number", "", "9"),
}
"""Every dimension by name. `number` and `count` take no unit."""

ONE = Unit(Decimal(1), ())


def _times(a: Unit, b: Unit, power: int = 1) -> Unit:
    powers = dict(a.powers)
    for base, exponent in b.powers:
        powers[base] = powers.get(base, 0) + exponent * power
    kept = tuple(sorted((base, exponent) for base, exponent in powers.items() if exponent))
    return Unit(a.factor * b.factor**power, kept)


@functools.lru_cache(maxsize=1024)
def unit_of(text: str) -> Unit | None:
    """The unit that a text names, or None. All that follows a slash divides: `W/m K` is `W/(m K)`.

    >>> unit_of("K/W").powers
    (('A', -1), ('K', 1), ('V', -1))
    """
    for written, plain in _SAME.items():
        text = text.replace(written, plain)
    above, *below = re.split(r"/(?![^(]*\))", text)
    unit = ONE if above.strip() in ("", "1") and below else _product(above)
    for part in below:
        divisor = _product(_without_parentheses(part))
        unit = _times(unit, divisor, -1) if unit and divisor else None
    return unit


def _without_parentheses(text: str) -> str:
    inside = re.fullmatch(r"\s*\(([^()]*)\)\s*", text)
    return inside[1] if inside else text


def _product(text: str) -> Unit | None:
    unit = ONE
    for factor in re.split(r"[ *]+", text.strip()):
        match = re.fullmatch(r"([A-Za-z]+|%)(?:\^([23]))?", factor)
        symbol = symbol_of(match[1]) if match else None
        if symbol is None:
            return None
        unit = _times(unit, symbol, int(match[2] or 1))
    return unit


@functools.lru_cache(maxsize=256)
def symbol_of(name: str) -> Unit | None:
    """One symbol with its prefix, such as `mV`."""
    if name in PLAIN:
        factor, base = PLAIN[name]
        return Unit(Decimal(factor), ((base, 1),))
    for prefix, exponent in PREFIXES.items():
        base = name[len(prefix):]
        if name.startswith(prefix) and base in PREFIXED:
            same = PREFIXED[base]
            powers = ((base, 1),) if same == base else unit_of(same).powers
            return Unit(Decimal(1).scaleb(exponent), powers)
    return None


@functools.lru_cache(maxsize=64)
def powers_of(dimension: str) -> tuple[Powers, ...]:
    """The powers of base units that a dimension may be written in."""
    row = DIMENSIONS[dimension]
    return tuple(unit_of(unit).powers for unit in (row.unit, *row.also) if unit)


def same_letters(wrong: str, dimensions: tuple[str, ...]) -> list[str]:
    """The units of the dimensions that differ from a wrong one by upper and lower case alone."""
    known = [*PLAIN, *(prefix + base for prefix in PREFIXES for base in PREFIXED)]
    same = [unit for unit in known if unit.casefold() == wrong.casefold()]
    return [unit for unit in same if any(symbol_of(unit).powers in powers_of(each) for each in dimensions)]
