"""A stall or an overload: the network in another condition for a while, from the temperatures of this one.

The other network is solved with its temperature-dependent parts held at the hottest that they reach, which depends
on what they then burn: a few rounds settle it. Between start and end a part's loss follows its temperature in a
straight line.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from functools import cached_property

import numpy as np

from ...physics.event_heat import foster_paths_k
from ..circuit import Circuit
from ..solution import Engine, Solution
from ..start import starting_point
from ..variables import Param, values_of
from .impedance import impedance_of
from .paths import Path, rectangle
from .probe import EventProbe
from .response import CASE_HELD_S, capacities, heat_path

ROUNDS = 2
GRID = np.append(0.0, np.geomspace(1e-3, 1.0, 9))
"""Moments of the event at which losses and temperatures are followed, as shares of its length."""

AT_ONCE_S = 1e-9


@dataclass(frozen=True)
class Warming:
    """One part along the event, shape (sample, time): junction and case [°C], and the junction's rise over its case."""

    junction_c: np.ndarray
    case_c: np.ndarray
    rise_k: np.ndarray


@dataclass
class OtherNetwork:
    """The circuit of the other condition. `columns` picks its sides out of the box of the mode that it starts from.

    refs: the parts that are judged; those whose losses follow their temperature are followed besides.
    """

    circuit: Circuit
    columns: np.ndarray
    lasts: Param
    refs: tuple[str, ...] = ()
    _engine: Engine | None = None
    _last: tuple[Solution, Solution, Mapping[str, Warming]] | None = field(default=None, repr=False)

    def solve(self, solution: Solution) -> tuple[Solution, Mapping[str, Warming]]:
        """The other network at the event's end, and every part's temperatures along the event."""
        if self._last is None or self._last[0] is not solution:
            self._last = (solution, *self._solve(solution))
        return self._last[1:]

    def _solve(self, solution: Solution) -> tuple[Solution, Mapping[str, Warming]]:
        self._engine = self._engine or Engine(self.circuit)
        system, points = self._engine.system, solution.points[:, self.columns]
        prepared = system.prepare(points)
        t_s = self.value_of_lasts(solution)[:, None] * GRID
        followed = [system.paths[row].part for row in system.followed]
        held_c = np.array([_start_c(solution, ref) for ref in followed]).reshape(len(followed), -1)
        x, first_w, found, warm = starting_point(system, points), None, None, {}
        for _ in range(ROUNDS + 1):
            x, converged = self._engine.solver.solve(x, replace(prepared, held_c=held_c))
            found = Solution(self.circuit, system, points, x, prepared, converged, np.zeros(len(points)), {})
            first_w = first_w or found.powers_w
            warm = self._follow({*followed, *self.refs}, solution, found, first_w, warm, t_s)
            held_c = np.array([warm[ref].junction_c.max(axis=1) for ref in followed]).reshape(len(followed), -1)
        return found, warm

    def value_of_lasts(self, solution: Solution) -> np.ndarray:
        return solution.value(self.lasts)

    def _follow(self, refs: set[str], before: Solution, after: Solution, first_w, warm, t_s) -> dict[str, Warming]:
        """Temperatures along the event for losses that go from the first to those at its end."""
        losses = {ref: _loss_w(first_w[ref], after.powers_w[ref], warm.get(ref), t_s.shape)
                  for ref in before.circuit.probes if ref in after.powers_w and ref in before.powers_w}
        return {ref: self._warm(before, after, ref, losses, t_s) for ref in sorted(refs & losses.keys())
                if heat_path(before.circuit, ref) is not None}

    def _warm(self, before: Solution, after: Solution, ref: str, losses, t_s: np.ndarray) -> Warming:
        extra_w = losses[ref] - before.powers_w[ref][:, None]
        start = before.parts[ref]
        rise_k = _rise_k(before, ref, extra_w, t_s)
        beyond_k = _beyond_k(before, after, ref, losses, extra_w, t_s)
        case_k = np.where(t_s[:, -1:] > CASE_HELD_S, beyond_k, 0.0)
        case_c = np.where(np.isnan(start.case_c), start.tj_c, start.case_c)[:, None] + case_k
        return Warming(start.tj_c[:, None] + case_k + rise_k, case_c, rise_k)


def _start_c(solution: Solution, ref: str) -> np.ndarray:
    found = solution.temperatures.junction_c.get(ref)
    return found if found is not None else solution.ambient_c


def _loss_w(first_w, last_w, warm: Warming | None, shape) -> np.ndarray:
    """A part's loss along the event, straight in its temperature between the loss when cold and the loss when hot."""
    if warm is None:
        return np.broadcast_to(last_w[:, None], shape)
    start_c, junction_c = warm.junction_c[:, :1], warm.junction_c
    span_k = junction_c.max(axis=1, keepdims=True) - start_c
    with np.errstate(divide="ignore", invalid="ignore"):
        share = np.where(span_k > 0.0, np.clip((junction_c - start_c) / span_k, 0.0, 1.0), 1.0)
    return first_w[:, None] + share * (last_w - first_w)[:, None]


def _rise_k(before: Solution, ref: str, extra_w: np.ndarray, t_s: np.ndarray) -> np.ndarray:
    """Of the junction over its case; at once where only the steady resistance is known."""
    impedance = impedance_of(before.circuit.mode.parts[ref])
    path = heat_path(before.circuit, ref)
    if impedance is not None and path.case_k_per_w is not None:
        return impedance.rise_k(t_s, extra_w)
    steady = before.value(path.case_k_per_w)[:, None] if path.case_k_per_w is not None else 0.0
    return steady * extra_w


def _beyond_k(before: Solution, after: Solution, ref: str, losses, extra_w: np.ndarray, t_s: np.ndarray) -> np.ndarray:
    """Rise of the case: through what lies before the sink at once, in the sink or behind the case with its capacity."""
    path = heat_path(before.circuit, ref)
    own = values_of(path.own_k_per_w, before.points).sum(axis=0)
    if path.case_k_per_w is not None:
        own = own - before.value(path.case_k_per_w)
    near_j, far_j = capacities(before.circuit, ref)
    moved_c = (after.ambient_c - before.ambient_c)[:, None]
    if not path.sink:
        fixed = before.circuit.mode.parts[ref].note.heat is not None and before.circuit.mode.parts[ref].note.heat.case is not None
        return 0.0 * t_s if fixed else _slow_k(own, near_j or far_j, extra_w, moved_c, t_s)
    members = [p.part for p in before.circuit.heat.paths if p.sink == path.sink and p.part in losses]
    all_w = sum(losses[member] - before.powers_w[member][:, None] for member in members)
    return own[:, None] * extra_w + _slow_k(before.sink_k_per_w(path.sink), far_j, all_w, moved_c, t_s)


def _slow_k(r: np.ndarray, c_j_per_k: float, extra_w: np.ndarray, moved_c: np.ndarray, t_s: np.ndarray) -> np.ndarray:
    """Rise of a body behind whose resistance the air may change too; without a capacity the worse of before and after."""
    tau = np.maximum(r * c_j_per_k, AT_ONCE_S)[:, None]
    rise_k = foster_paths_k(t_s, extra_w, r[:, None], tau)[0] + moved_c * -np.expm1(-t_s / tau)
    return rise_k if c_j_per_k > 0.0 else np.maximum(rise_k, 0.0)


@dataclass(frozen=True)
class OtherResponse:
    """As `Response`, of one part in an event that changes the network: two edges, the event's start and its worst."""

    solution: Solution
    probe: EventProbe
    found: Solution
    warming: Warming | None

    @property
    def start(self):
        return self.solution.parts[self.probe.ref]

    @cached_property
    def row(self) -> np.ndarray:
        return np.arange(self.solution.n_samples)

    @cached_property
    def path(self) -> Path:
        """The hardest current and the voltage while it flows, for the whole of the event."""
        point = self.found.parts[self.probe.ref]
        with np.errstate(divide="ignore", invalid="ignore"):
            drop_v = np.where(point.current_a > 0.0, np.abs(point.power_w / point.current_a), 0.0)
        pulsed = self.found.circuit.probes[self.probe.ref].pulsed
        return rectangle(drop_v if pulsed else np.abs(point.voltage_v), np.abs(point.peak_a), self.lasts_s)

    @cached_property
    def lasts_s(self) -> np.ndarray:
        return self.probe.network.value_of_lasts(self.solution)

    @cached_property
    def energy_j(self) -> np.ndarray:
        return self.found.powers_w.get(self.probe.ref, np.zeros(self.solution.n_samples)) * self.lasts_s

    period_s = None

    @property
    def mean_w(self) -> np.ndarray:
        return self.start.power_w

    @cached_property
    def case_c(self) -> np.ndarray:
        start_c = np.where(np.isnan(self.start.case_c), self.start.tj_c, self.start.case_c)
        return np.stack([start_c, start_c if self.warming is None else self.warming.case_c.max(axis=1)], axis=-1)

    @property
    def case_rise_k(self) -> np.ndarray:
        return self.case_c - self.case_c[:, :1]

    @cached_property
    def rise_k(self) -> np.ndarray | None:
        return None if self.warming is None else self._hottest(self.warming.rise_k)

    @cached_property
    def unit_k(self) -> np.ndarray:
        return np.zeros((self.solution.n_samples, 2))

    @cached_property
    def peak_c(self) -> np.ndarray:
        unknown = np.full(self.solution.n_samples, np.nan)
        return unknown if self.warming is None else self.warming.junction_c.max(axis=1)

    @cached_property
    def peak_at(self) -> np.ndarray:
        return np.ones(self.solution.n_samples, dtype=int)

    def _hottest(self, along: np.ndarray) -> np.ndarray:
        at = self.warming.junction_c.argmax(axis=1)[:, None]
        hottest = np.take_along_axis(along, at, axis=1)
        return np.concatenate([0.0 * hottest, hottest], axis=1)


def respond_elsewhere(solution: Solution, probe: EventProbe) -> OtherResponse:
    """One part of an event that changes the network."""
    found, warming = probe.network.solve(solution)
    return OtherResponse(solution, probe, found, warming.get(probe.ref))
