"""The values that records hold, each with the place where it was written."""

from __future__ import annotations

from dataclasses import dataclass

from ..faults import Mark
from ..quantity import Span

NOWHERE = Mark("")
"""The mark of a value that no file gives."""


class Text(str):
    """A word or a phrase of an input file. It is its text, and knows where it stands."""

    __slots__ = ("mark",)
    mark: Mark

    def __new__(cls, text: str, mark: Mark = NOWHERE) -> Text:
        self = super().__new__(cls, text)
        self.mark = mark
        return self


@dataclass(frozen=True, slots=True)
class Quantity:
    """A physical value: its span in SI units (temperatures in °C), as written, and where.

    `source` is where the number was read, if the entry itself says so.
    """

    span: Span
    dimension: str
    text: str
    mark: Mark = NOWHERE
    source: Text | None = None

    @property
    def min(self) -> float:
        """The least value, in SI units."""
        return self.span.min

    @property
    def typ(self) -> float:
        """The typical value, in SI units."""
        return self.span.typ

    @property
    def max(self) -> float:
        """The greatest value, in SI units."""
        return self.span.max

    def __str__(self) -> str:
        return self.text


@dataclass(frozen=True, slots=True)
class Table:
    """A curve as points in SI units, the first column strictly rising. `dimensions` names the columns."""

    points: tuple[tuple[float, ...], ...]
    dimensions: tuple[str, ...]
    mark: Mark = NOWHERE
    source: Text | None = None

    def column(self, index: int) -> tuple[float, ...]:
        """One column, top to bottom."""
        return tuple(point[index] for point in self.points)


@dataclass(frozen=True, slots=True)
class SourceFile:
    """One file that was read. `role` is annotations, devices, rules or waivers; `path` is relative to the project."""

    role: str
    path: str
    sha256: str
