"""The equations of one network: residuals and derivatives of all families, gathered by place."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from .branches import Branch
from .bridges import HalfBridge
from .circuit import Probe
from .converters import Converter
from .cycles import Cycled
from .families import FAMILIES, Values
from .groups import Groups
from .heat import HeatModel, HeatPath
from .layout import Layout
from .rectifier import Rectifier
from .sine_bridge import SineBridge
from .swings import Swings
from .thermal_network import ThermalNetwork
from .track_family import Track, Tracks

LAWS = {**FAMILIES, Track: Tracks, HalfBridge: Groups, Converter: Groups, Rectifier: Groups, SineBridge: Groups, Cycled: Groups}
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

    def __init__(self, branches: Sequence[Branch], heat: HeatModel, reference: Sequence[str],
                 probes: Mapping[str, Probe] | None = None) -> None:
        self.branches, self.heat = tuple(branches), heat
        self.layout = Layout(frozenset(reference))
        by_kind = defaultdict(list)
        for branch in branches:
            by_kind[type(branch)].append(branch)
        self.families = [LAWS[kind](by_kind[kind], self.layout) for kind in LAWS if by_kind[kind]]
        watched = {part for family in self.families for part in temperature_dependent(family.branches)}
        self.swings = Swings(probes or {}, self.layout)
        self.thermal = ThermalNetwork(heat, self.layout, watched)
        self.layout.sealed = True
        for family in self.families:
            family.follow_temperature(self.layout)
        self.nodes = np.array(list(self.layout.of_kind("node").values()), dtype=np.intp)
        self.n = len(self.layout)

    @property
    def paths(self) -> list[HeatPath]:
        """The heat paths that are part of the equations."""
        return self.thermal.paths

    @property
    def followed(self) -> list[int]:
        """The rows of `paths` whose temperature a law depends on."""
        return self.thermal.followed

    @property
    def temperature_at(self) -> np.ndarray:
        return self.thermal.temperature_at

    def prepare(self, points: np.ndarray) -> Prepared:
        """The numbers at the given points, shape (sample, variable)."""
        heat = {**self.thermal.prepare(points), **self.swings.parameters(points)}
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
        """What the parts dissipate, into the rows of the thermal network."""
        self.thermal.add(x, prepared.heat, prepared.held_c, residual, entries)
        if not len(self.thermal.power_at):
            return
        for family, p in zip((*self.families, self.swings), (*prepared.families, prepared.heat), strict=True):
            for parts, power, slopes in family.heats(x, p):
                at = self.layout.places("power", [part or "" for part in parts])
                np.add.at(residual, at, -power)
                entries += [(at, columns, -value) for columns, value in slopes]

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
