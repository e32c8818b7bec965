"""YAML text to a tree of marked text, and nothing more: no tag builds anything, no word changes its meaning.

PyYAML's events are turned into `Branch` (mapping), `Row` (list), `Text` and `Blank` (no value). Scalars stay text,
so that `1e-3`, `off`, `010` and `yes` mean what the schema that reads them says. Anchors are allowed within the
bounds below, which count nodes after expansion.
"""

from __future__ import annotations

from typing import Any

from ..faults import Mark
from .values import Text


class Blank(Text):
    """A place where a value is due and nothing stands (or YAML's `null` or `~`)."""

    __slots__ = ()


class Branch(dict):
    """A mapping. Keys are `Text` with their own marks; `marks` says where each value begins."""

    __slots__ = ("mark", "marks")

    def __init__(self, mark: Mark) -> None:
        super().__init__()
        self.mark = mark
        self.marks: dict[str, Mark] = {}

    def put(self, key: Text, value: Any) -> None:
        """Add one key."""
        self[key] = value
        self.marks[key] = value.mark


class Row(list):
    """A list."""

    __slots__ = ("mark",)

    def __init__(self, mark: Mark) -> None:
        super().__init__()
        self.mark = mark
