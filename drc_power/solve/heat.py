"""The way of each part's heat to the ambient: its own resistance, then a sink shared with others."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from .variables import Param, values_of


@dataclass(frozen=True, slots=True)
class HeatPath:
    """T_j = T_start + (Σ own) · P + R_shared · Σ P over all parts of the same sink.

    start_c is the ambient or a fixed case; own_k_per_w what the part has for itself; case_k_per_w how many of
    those lie between junction and case (None where the case temperature is not known).
    """

    part: str
    start_c: Param
    own_k_per_w: tuple[Param, ...]
    case_k_per_w: Param | None = None
    sink: str | None = None


@dataclass(frozen=True, slots=True)
class Sink:
    """A heat sink between the parts mounted on it and the ambient."""

    name: str
    r_k_per_w: Param
    start_c: Param


@dataclass(frozen=True, slots=True)
class HeatModel:
    """All heat paths of one mode. Vectorised: arrays are (part, sample) and (sink, sample)."""

    paths: tuple[HeatPath, ...]
    sinks: Mapping[str, Sink]

    def own(self, points: np.ndarray) -> np.ndarray:
        """Σ own resistance of each path [K/W], shape (part, sample)."""
        out = np.zeros((len(self.paths), points.shape[0]))
        for row, path in enumerate(self.paths):
            out[row] = values_of(path.own_k_per_w, points).sum(axis=0)
        return out

    def temperatures(self, power_w: Mapping[str, np.ndarray], points: np.ndarray) -> Temperatures:
        """Steady temperatures of junctions, cases and sinks for given dissipations [W], shape (sample,) each."""
        n = points.shape[0]
        sink_c, heat = {}, self.sink_power(power_w, n)
        for name, sink in self.sinks.items():
            start, r = values_of((sink.start_c, sink.r_k_per_w), points)
            sink_c[name] = start + r * heat[name]
        own, junction_c, case_c = self.own(points), {}, {}
        for row, path in enumerate(self.paths):
            power = power_w.get(path.part, np.zeros(n))
            start = sink_c[path.sink] if path.sink else values_of((path.start_c,), points)[0]
            junction_c[path.part] = start + own[row] * power
            if path.case_k_per_w is not None:
                case_c[path.part] = junction_c[path.part] - values_of((path.case_k_per_w,), points)[0] * power
        return Temperatures(junction_c, case_c, sink_c)

    def sink_power(self, power_w: Mapping[str, np.ndarray], n: int) -> dict[str, np.ndarray]:
        """The heat each sink carries [W], shape (sample,)."""
        heat = {name: np.zeros(n) for name in self.sinks}
        for path in self.paths:
            if path.sink and path.part in power_w:
                heat[path.sink] = heat[path.sink] + power_w[path.part]
        return heat

    def coupled_with(self, parts: Sequence[str]) -> tuple[str, ...]:
        """The parts that share a sink with one of the given, and the given."""
        sinks = {path.sink for path in self.paths if path.part in parts and path.sink}
        return tuple(p.part for p in self.paths if p.part in parts or p.sink in sinks)


@dataclass(frozen=True, slots=True)
class Temperatures:
    """Steady temperatures [°C] by part and by sink, shape (sample,) each."""

    junction_c: Mapping[str, np.ndarray]
    case_c: Mapping[str, np.ndarray]
    sink_c: Mapping[str, np.ndarray]
