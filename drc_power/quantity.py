"""Text with units to spans of SI floats, and back."""

from __future__ import annotations

from dataclasses import dataclass


class QuantityError(ValueError):
    """Text that is not a quantity: what was found, and what to write instead."""

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
        return self.min == self.max


def parse_span(text: str, dimension: str) -> Span:
    """A quantity of one dimension."""
    raise NotImplementedError


def parse_any(text: str, dimensions) -> tuple[str, Span]:
    """A quantity of one of several dimensions, and which it turned out to be."""
    raise NotImplementedError


def span_from_ends(min: float | None = None, typ: float | None = None, max: float | None = None) -> Span:
    raise NotImplementedError


def example_of(dimension: str) -> str:
    raise NotImplementedError


@dataclass(frozen=True, slots=True)
class ValueField:
    """What a schematic value field says: the main value, ratings by dimension, an inductor's winding resistance."""

    span: Span
    ratings: dict
    winding_ohm: float | None = None


def parse_value_field(text: str, dimension: str) -> ValueField | None:
    raise NotImplementedError


def format_quantity(value: float, dimension_or_unit: str) -> str:
    raise NotImplementedError
