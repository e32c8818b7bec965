"""SI floats to text for people: an engineering prefix and four significant digits."""

from __future__ import annotations

import math

from .units import DIMENSIONS, PREFIXED

DIGITS = 4
_PREFIX_OF = {-15: "f", -12: "p", -9: "n", -6: "u", -3: "m", 0: "", 3: "k", 6: "M", 9: "G"}

_SCALED = {
    "ratio": (100.0, "%"), "area": (1e4, "cm²"), "angle": (180.0 / math.pi, "deg"), "tempco": (1e6, "ppm/K"),
    "slew": (1e-3, "V/ms"),
}
"""Dimensions that are printed in a unit other than SI: the factor from SI, and that unit."""


def format_quantity(value: float, dimension_or_unit: str) -> str:
    """A value in SI units (°C) as text, by the name of its dimension or by its SI unit.

    >>> format_quantity(4.9849, "voltage"), format_quantity(0.008, "ohm"), format_quantity(163.21, "°C")
    ('4.985 V', '8 mohm', '163.2 °C')
    """
    factor, unit = _SCALED.get(dimension_or_unit, (1.0, ""))
    if not unit:
        row = DIMENSIONS.get(dimension_or_unit)
        unit = row.unit if row else dimension_or_unit
    takes_prefix = factor == 1.0 and _takes_prefix(unit)
    number, prefix = _engineering(value, unit) if takes_prefix else (_digits(value * factor), "")
    return f"{number} {prefix}{unit}".rstrip()


def _takes_prefix(unit: str) -> bool:
    """Whether the unit is one symbol, or one over another, that a prefix can scale."""
    above, _, below = unit.partition("/")
    return above in PREFIXED and above != "K" and below in ("", "s", "K")


def _engineering(value: float, unit: str) -> tuple[str, str]:
    """The digits and the prefix, chosen after rounding so that 999.96 is 1 k."""
    rounded = _round(value)
    if rounded == 0 or not math.isfinite(rounded):
        return _digits(rounded), ""
    exponent = 3 * (int(f"{rounded:e}".partition("e")[2]) // 3)
    if exponent not in _PREFIX_OF or (unit == "s" and exponent > 0):
        return _digits(rounded), ""
    return _digits(rounded / 10.0**exponent), _PREFIX_OF[exponent]


def _round(value: float) -> float:
    return float(f"{value:.{DIGITS - 1}e}")


def _digits(value: float) -> str:
    return f"{_round(value) + 0.0:.10g}"
