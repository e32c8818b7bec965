"""The box of everything that has a span: one named side per rail, load, tolerance and surrounding."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace

import numpy as np

from ..faults import Mark
from ..quantity import Span


@dataclass(frozen=True, slots=True)
class Variable:
    """One side of the box. `name` reads in a sentence before the value: "+24V at", "ambient".

    A gap is a datum that nobody gave: it stands at its span, which is exact, and `probe` is a value to try, so
    that whatever moves for the worse when it is tried is known to depend on the missing datum. `why` says which.
    either_way: a little of it may help where much of it harms, so whatever moves at all depends on it.
    """

    name: str
    dimension: str
    span: Span
    mark: Mark
    probe: float | None = None
    why: str = ""
    either_way: bool = False


@dataclass(frozen=True, slots=True)
class Param:
    """A number of the circuit: exact, or the box's side `index`; and what is added to it."""

    value: float
    index: int | None = None
    plus: Param | None = None


ONE = Param(1.0)
ZERO = Param(0.0)


@dataclass(slots=True)
class Box:
    """Collects the spans of one mode. A span that is exact takes no side of the box."""

    variables: list[Variable] = field(default_factory=list)
    _index: dict[str, int] = field(default_factory=dict)
    levers: frozenset[str] | None = frozenset()
    """Names that get a side even where they are exact, so that sizing can move them; None for every name."""

    def param(self, name: str, span: Span, dimension: str, mark: Mark) -> Param:
        """The parameter for a span; asking twice for one name gives the same side."""
        if span.is_exact and not (self.levers is None or name in self.levers):
            return Param(span.typ)
        if name not in self._index:
            self._index[name] = len(self.variables)
            self.variables.append(Variable(name, dimension, span, mark))
        return Param(span.typ, self._index[name])

    def gap(self, name: str, at: float, probe: float, dimension: str, why: str, mark: Mark, either_way: bool = False) -> Param:
        """The parameter for a datum that is missing: `at` is where it does nothing, `probe` a plausible value."""
        if name not in self._index:
            self._index[name] = len(self.variables)
            self.variables.append(Variable(name, dimension, Span.exact(at), mark, probe, why, either_way))
        return Param(at, self._index[name])

    def index_of(self, name: str) -> int | None:
        """The side of that name, if there is one."""
        return self._index.get(name)

    def fixed(self, index: int, value: float) -> Box:
        """A box whose side `index` has shrunk to one value."""
        variables = list(self.variables)
        variables[index] = replace(variables[index], span=Span.exact(value))
        return Box(variables, dict(self._index), self.levers)

    def typical(self) -> np.ndarray:
        """The point with every side at its typical value, shape (variable,)."""
        return np.array([v.span.typ for v in self.variables], dtype=float)

    def bounds(self) -> tuple[np.ndarray, np.ndarray]:
        """The lower and the upper end of every side, each of shape (variable,)."""
        low = np.array([v.span.min for v in self.variables], dtype=float)
        high = np.array([v.span.max for v in self.variables], dtype=float)
        return low, high


def values_of(params: Sequence[Param], points: np.ndarray) -> np.ndarray:
    """The parameters' values at each point: shape (param, sample) from points of shape (sample, variable)."""
    out = np.empty((len(params), points.shape[0]))
    for row, param in enumerate(params):
        given = param.value if param.index is None else points[:, param.index]
        out[row] = given
        if param.plus is not None:
            out[row] += values_of((param.plus,), points)[0]
    return out
