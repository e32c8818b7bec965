"""The way of each part's heat to the ambient: its own resistances, and the sinks, patches and air it shares with others."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass

import numpy as np

from .surfaces import Surface
from .variables import Param, values_of

AIR = "air of the enclosure"
"""The key of the air that an enclosure holds, which every part in it warms."""

TRACKS = "tracks of the board"
"""The key of what all annotated tracks dissipate."""


@dataclass(frozen=True, slots=True)
class Way:
    """A second way of a part's heat beside its first: its own resistances, then a sink or patch."""

    own_k_per_w: tuple[Param, ...]
    sink: str


@dataclass(frozen=True, slots=True)
class HeatPath:
    """T_j = T + (Σ own) · P, where T is the sink's temperature, or `start_c` where there is none.

    start_c is the ambient or a fixed case; own_k_per_w what the part has for itself; case_k_per_w how many of
    those lie between junction and case (None where the case temperature is not known). `beside` is a parallel way:
    both share the heat so that each leads to the same junction temperature.
    """

    part: str
    start_c: Param
    own_k_per_w: tuple[Param, ...]
    case_k_per_w: Param | None = None
    sink: str | None = None
    beside: Way | None = None

    @property
    def sinks(self) -> tuple[str, ...]:
        """What the part stands on, at most two."""
        return tuple(name for name in (self.sink, self.beside.sink if self.beside else None) if name)


@dataclass(frozen=True, slots=True)
class Sink:
    """What parts stand on and heat together: a heat sink, a patch of copper, the air of an enclosure.

    It gives its heat to `into`, or to a temperature `start_c` where it stands in no other air: through a resistance that
    is given, or from a surface by the laws of convection and radiation. A capacity of 0 is one that nobody knows.
    """

    name: str
    r_k_per_w: Param
    start_c: Param
    surface: Surface | None = None
    into: str | None = None
    capacity_j_per_k: float = 0.0


@dataclass(frozen=True, slots=True)
class HeatModel:
    """All heat paths of one mode. Vectorised: arrays are (part, sample) and (sink, sample).

    inside: the parts whose heat warms the air of the enclosure, where there is one.
    """

    paths: tuple[HeatPath, ...]
    sinks: Mapping[str, Sink]
    inside: tuple[str, ...] = ()

    def own(self, points: np.ndarray) -> np.ndarray:
        """Σ own resistance of each path [K/W], shape (part, sample)."""
        return own_of((path.own_k_per_w for path in self.paths), points)

    def sink_power(self, power_w: Mapping[str, np.ndarray], n: int) -> dict[str, np.ndarray]:
        """The heat each sink carries where no part has two ways [W], shape (sample,)."""
        heat = {name: np.zeros(n) for name in self.sinks}
        for path in self.paths:
            if path.sink and path.sink != AIR and path.part in power_w:
                heat[path.sink] = heat[path.sink] + power_w[path.part]
        for part in self.inside:
            heat[AIR] = heat[AIR] + power_w.get(part, 0.0)
        return heat

    def coupled_with(self, parts: Iterable[str]) -> tuple[str, ...]:
        """The parts that share a sink with one of the given, directly or through others, and the given."""
        found, sinks = set(parts), set()
        while True:
            reached = {name for path in self.paths if path.part in found for name in path.sinks}
            if reached <= sinks:
                return tuple(path.part for path in self.paths if path.part in found)
            sinks |= reached
            found |= {path.part for path in self.paths if sinks.intersection(path.sinks)}

    def by_law(self) -> Iterator[str]:
        """The parts whose temperature no product of resistances gives: two ways, a computed surface, an enclosure."""
        for path in self.paths:
            if path.beside or any(self.sinks[name].surface or self.sinks[name].into for name in path.sinks):
                yield path.part


def own_of(rows: Iterable[tuple[Param, ...]], points: np.ndarray) -> np.ndarray:
    """The sum of each row of resistances [K/W], shape (row, sample)."""
    return np.array([values_of(row, points).sum(axis=0) for row in rows]).reshape(-1, points.shape[0])


@dataclass(frozen=True, slots=True)
class Temperatures:
    """Steady temperatures [°C] and heats [W] by part and by sink, shape (sample,) each.

    first_w: the heat of a part that takes its first way. sink_w: what a sink gives off. ambient_c: the air around the
    parts. beyond: where a sink is hotter, or its air further from common, than the laws of its surface hold for.
    """

    junction_c: Mapping[str, np.ndarray]
    case_c: Mapping[str, np.ndarray]
    sink_c: Mapping[str, np.ndarray]
    first_w: Mapping[str, np.ndarray]
    sink_w: Mapping[str, np.ndarray]
    beyond: Mapping[str, np.ndarray]
