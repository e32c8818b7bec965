"""The equations of one network: residuals and derivatives of all families, gathered by place."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from .branches import Branch
from .bridges import HalfBridge
from .converters import Converter
from .families import FAMILIES, Values
from .groups import Groups
from .heat import HeatModel
from .layout import Layout
from .variables import values_of

LAWS = {**FAMILIES, HalfBridge: Groups, Converter: Groups}
"""The family of each kind of branch and of group."""

LEAK_SIEMENS = 1e-18
"""From every node to the reference, so that a net nothing drives rests at zero instead of anywhere."""


@dataclass(frozen=True, slots=True)
class Prepared:
    """The numbers of every family at the samples: what stays fixed while Newton's method runs."""

    families: tuple[Values, ...]
    heat: Values
    n_samples: int
    held_c: np.ndarray | None = None
    """Temperatures to hold, shape (followed part, sample), NaN where the heat decides; None where it always does."""


class System:
    """Square equations F(x) = 0 for unknowns x of shape (unknown + 1, sample); the last row is the zero row."""

    def __init__(self, branches: Sequence[Branch], heat: HeatModel, reference: Sequence[str]) -> None:
        self.branches, self.heat = tuple(branches), heat
        self.layout = Layout(frozenset(reference))
        by_kind = defaultdict(list)
        for branch in branches:
            by_kind[type(branch)].append(branch)
        self.families = [LAWS[kind](by_kind[kind], self.layout) for kind in LAWS if by_kind[kind]]
        self._lay_out_heat()
        self.layout.sealed = True
        for family in self.families:
            family.follow_temperature(self.layout)
        self.nodes = np.array(list(self.layout.of_kind("node").values()), dtype=np.intp)
        self.n = len(self.layout)

    def _lay_out_heat(self) -> None:
        """Temperatures are unknowns only where a law depends on them; powers where such a temperature needs them."""
        watched = {part for family in self.families for part in temperature_dependent(family.branches)}
        known = {path.part for path in self.heat.paths}
        coupled = self.heat.coupled_with(sorted(watched & known))
        self.paths = [path for path in self.heat.paths if path.part in coupled]
        self.sinks = sorted({path.sink for path in self.paths if path.sink})
        self.power_at = self.layout.places("power", [path.part for path in self.paths])
        self.followed = [row for row, path in enumerate(self.paths) if path.part in watched]
        self.temperature_at = self.layout.places("temperature", [self.paths[r].part for r in self.followed])
        self.sink_at = self.layout.places("sink power", self.sinks)

    def prepare(self, points: np.ndarray) -> Prepared:
        """The numbers at the given points, shape (sample, variable)."""
        model = HeatModel(tuple(self.paths), self.heat.sinks)
        sinks = [self.heat.sinks[name] for name in self.sinks]
        heat = {"own": model.own(points), "start": values_of([p.start_c for p in self.paths], points),
                "sink": values_of([s.r_k_per_w for s in sinks], points)}
        return Prepared(tuple(f.parameters(points) for f in self.families), heat, points.shape[0])

    def evaluate(self, x: np.ndarray, prepared: Prepared):
        """Residual of shape (unknown, sample) and the entries of the derivative as (rows, columns, values)."""
        residual = np.zeros((self.n + 1, prepared.n_samples))
        entries = [(self.nodes, self.nodes, np.full((len(self.nodes), prepared.n_samples), LEAK_SIEMENS))]
        residual[self.nodes] += LEAK_SIEMENS * x[self.nodes]
        for family, p in zip(self.families, prepared.families, strict=True):
            for nodes, currents, weight in family.flows(p):
                weight = np.broadcast_to(weight, (len(nodes), prepared.n_samples))
                np.add.at(residual, nodes, weight * x[currents])
                entries.append((nodes, currents, weight))
            rows, places = family.equations(x, p)
            for row, value in rows:
                residual[row] += value
            entries += places
        self._add_heat(x, prepared, residual, entries)
        return residual[:-1], entries

    def _add_heat(self, x: np.ndarray, prepared: Prepared, residual: np.ndarray, entries: list) -> None:
        """P − Σ dissipation = 0, ΣP of each sink, and T − T_start − R·P − R_sink·ΣP = 0."""
        if not self.paths:
            return
        one, heat = np.ones((1, prepared.n_samples)), prepared.heat
        residual[self.power_at] += x[self.power_at]
        entries.append((self.power_at, self.power_at, np.repeat(one, len(self.power_at), axis=0)))
        for family, p in zip(self.families, prepared.families, strict=True):
            for parts, power, slopes in family.heats(x, p):
                at = self.layout.places("power", [part or "" for part in parts])
                np.add.at(residual, at, -power)
                entries += [(at, columns, -value) for columns, value in slopes]
        for row, (name, at) in enumerate(zip(self.sinks, self.sink_at, strict=True)):
            members = self.power_at[[k for k, path in enumerate(self.paths) if path.sink == name]]
            residual[at] += x[at] - x[members].sum(axis=0)
            entries.append((np.array([at]), np.array([at]), one))
            entries += [(np.array([at]), np.array([m]), -one) for m in members]
        held_c = prepared.held_c if prepared.held_c is not None else np.full((len(self.followed), prepared.n_samples), np.nan)
        self._add_temperatures(x, heat, held_c, residual, entries)

    def _add_temperatures(self, x, heat: Values, held_c: np.ndarray, residual, entries) -> None:
        one = np.ones((1, held_c.shape[1]))
        for row, at, held in zip(self.followed, self.temperature_at, held_c, strict=True):
            power, own, free = self.power_at[row], heat["own"][row], np.isnan(held)
            target, weight = heat["start"][row] + own * x[power], np.where(free, own, 0.0)
            entries += [(np.array([at]), np.array([at]), one), (np.array([at]), np.array([power]), -weight[None])]
            if self.paths[row].sink:
                k = self.sinks.index(self.paths[row].sink)
                sink = self.sink_at[k]
                target = target + heat["sink"][k] * x[sink]
                entries.append((np.array([at]), np.array([sink]), -np.where(free, heat["sink"][k], 0.0)[None]))
            residual[at] += x[at] - np.where(free, target, held)

    def regime(self, x: np.ndarray, prepared: Prepared) -> np.ndarray:
        """Which straight line each branch stands on, booleans of shape (bit, sample)."""
        rows = [bits for family, p in zip(self.families, prepared.families, strict=True) for bits in family.regime(x, p)]
        return np.vstack(rows) if rows else np.zeros((0, prepared.n_samples), dtype=bool)

    def powers(self, x: np.ndarray, prepared: Prepared) -> Mapping[str, np.ndarray]:
        """The dissipation of every part [W], shape (sample,)."""
        total: dict[str, np.ndarray] = {}
        for family, p in zip(self.families, prepared.families, strict=True):
            for parts, power, _ in family.heats(x, p):
                for part, watts in zip(parts, power, strict=True):
                    if part is not None:
                        total[part] = total.get(part, 0.0) + watts
        return total


def temperature_dependent(branches: Sequence[Branch]) -> set[str]:
    """The parts whose law depends on their junction temperature."""
    found = set()
    for branch in branches:
        for part, law in _laws(branch):
            scale, drop = getattr(law, "scale", None), getattr(law, "drop", None)
            if scale is not None or (drop is not None and (drop.knee_v_per_k or drop.scale is not None or len(drop.lines) > 1)):
                found.add(part)
    return found - {None}


def _laws(branch: Branch):
    legs = getattr(branch, "legs", None)
    return [(getattr(branch, "part", None), branch)] if legs is None else [(leg.part, leg) for leg in legs]
