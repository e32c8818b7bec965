"""Which unknown stands where: node voltages, branch currents, heats and temperatures in one vector.

Row r of the equations belongs to unknown r: Kirchhoff's current law for a node voltage, the branch's law for a
current, the heat balance for a power, the thermal path for a temperature. One more row, always zero, stands for
the reference ground and for temperatures nobody follows.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field

import numpy as np


@dataclass(slots=True)
class Layout:
    """The unknowns in order of first mention. `reference` nodes are held at zero volt."""

    reference: frozenset[str]
    names: dict[tuple[str, str], int] = field(default_factory=dict)
    sealed: bool = False

    def unknown(self, kind: str, name: str) -> int:
        """The place of an unknown; −1, the zero row, once sealed and not known."""
        if kind == "node" and name in self.reference:
            return -1
        if self.sealed:
            return self.names.get((kind, name), -1)
        return self.names.setdefault((kind, name), len(self.names))

    def places(self, kind: str, names: Iterable[str]) -> np.ndarray:
        """The places of several unknowns of one kind, shape (name,)."""
        return np.array([self.unknown(kind, name) for name in names], dtype=np.intp)

    def __len__(self) -> int:
        return len(self.names)

    def of_kind(self, kind: str) -> dict[str, int]:
        """The unknowns of one kind with their places."""
        return {name: place for (k, name), place in self.names.items() if k == kind}
