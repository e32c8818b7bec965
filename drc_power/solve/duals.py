"""Numbers that carry their slopes: the law of a group of parts is written once, and its derivatives follow.

A `Dual` is a value over the samples and its slope over each unknown that it depends on, by the unknown's name. Which
names those are depends on how a law is written, never on the numbers, so that every evaluation fills the same places.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np


class Dual:
    """value, shape (sample,), and slopes: name of an unknown → slope over it, each of that shape or a number.

    >>> x = Dual.unknown("x", np.array([3.0]))
    >>> y = 2.0 * x * x + 1.0
    >>> y.value.tolist(), y.slopes["x"].tolist()
    ([19.0], [12.0])
    """

    __slots__ = ("slopes", "value")
    __array_ufunc__ = None  # an array on the left leaves the operation to this class

    def __init__(self, value, slopes: Mapping[str, np.ndarray | float] | None = None) -> None:
        self.value = value
        self.slopes = slopes or {}

    @classmethod
    def unknown(cls, name: str, value: np.ndarray) -> Dual:
        """An unknown itself: slope 1 over its own name."""
        return cls(value, {name: 1.0})

    def through(self, value: np.ndarray, slope: np.ndarray) -> Dual:
        """A function of this number, by its value and its derivative here."""
        return Dual(value, {name: slope * s for name, s in self.slopes.items()})

    def __neg__(self) -> Dual:
        return self.through(-self.value, -1.0)

    def __add__(self, other) -> Dual:
        if not isinstance(other, Dual):
            return Dual(self.value + other, self.slopes)
        return Dual(self.value + other.value, _merged(self.slopes, other.slopes, 1.0, 1.0))

    __radd__ = __add__

    def __sub__(self, other) -> Dual:
        if not isinstance(other, Dual):
            return Dual(self.value - other, self.slopes)
        return Dual(self.value - other.value, _merged(self.slopes, other.slopes, 1.0, -1.0))

    def __rsub__(self, other) -> Dual:
        return self.through(other - self.value, -1.0)

    def __mul__(self, other) -> Dual:
        if not isinstance(other, Dual):
            return self.through(self.value * other, other)
        return Dual(self.value * other.value, _merged(self.slopes, other.slopes, other.value, self.value))

    __rmul__ = __mul__

    def __truediv__(self, other) -> Dual:
        if not isinstance(other, Dual):
            return self.through(self.value / other, 1.0 / other)
        value = self.value / other.value
        return Dual(value, _merged(self.slopes, other.slopes, 1.0 / other.value, -value / other.value))

    def __rtruediv__(self, other) -> Dual:
        value = other / self.value
        return self.through(value, -value / self.value)

    def __pow__(self, exponent: int) -> Dual:
        return self.through(self.value**exponent, exponent * self.value ** (exponent - 1))


def _merged(one: Mapping, other: Mapping, weight_one, weight_other) -> dict:
    slopes = {name: weight_one * s for name, s in one.items()}
    for name, s in other.items():
        slopes[name] = slopes[name] + weight_other * s if name in slopes else weight_other * s
    return slopes


def value_of(number) -> np.ndarray | float:
    """The plain value of a number that may carry slopes."""
    return number.value if isinstance(number, Dual) else number


def constant(value) -> Dual:
    """A number without slopes."""
    return Dual(np.asarray(value, dtype=float))


def where(mask: np.ndarray, one, other) -> Dual:
    """One number where the mask holds, the other elsewhere."""
    one, other = (n if isinstance(n, Dual) else constant(n) for n in (one, other))
    slopes = {name: np.where(mask, one.slopes.get(name, 0.0), other.slopes.get(name, 0.0))
              for name in {**one.slopes, **other.slopes}}
    return Dual(np.where(mask, one.value, other.value), slopes)


def maximum(one, other) -> Dual:
    """The larger of two numbers."""
    return where(np.asarray(value_of(one)) >= value_of(other), one, other)


def sqrt(number: Dual) -> Dual:
    """The square root of a number above zero."""
    root = np.sqrt(number.value)
    return number.through(root, 0.5 / root)


def read(table: Callable[[np.ndarray], tuple[np.ndarray, np.ndarray]], number: Dual) -> Dual:
    """A table that gives value and slope, read at a number."""
    return number.through(*table(number.value))
