"""What an event does to its part: the path, the junction and the case along it, at every point of a solution."""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from ...physics.event_heat import foster_paths_k, periodic_starts_k, two_body_foster
from ...physics.inrush import path_energy_j
from ..circuit import Circuit
from ..heat import HeatPath
from ..solution import Solution
from ..variables import values_of
from .captured import CapturedPath
from .impedance import JunctionImpedance, impedance_of
from .paths import Path
from .probe import EventProbe

CASE_HELD_S = 1.0
"""Up to this length the case keeps its temperature; a longer event warms what lies behind it."""

MOST_CORNERS = 10


@dataclass(frozen=True)
class Response:
    """One event on one part in one solution. `row` maps samples to distinct paths; a row is what depends on numbers alone."""

    solution: Solution
    probe: EventProbe
    path: Path
    row: np.ndarray
    rise_k: np.ndarray | None
    unit_k: np.ndarray | None

    @cached_property
    def start(self):
        """The part's steady operating point, from which the event starts."""
        return self.solution.parts[self.probe.ref]

    @cached_property
    def lasts_s(self) -> np.ndarray:
        return self.path.lasts_s[self.row]

    @cached_property
    def energy_j(self) -> np.ndarray:
        """Heat of one event [J], shape (sample,)."""
        if isinstance(self.path, CapturedPath):
            return np.full(self.solution.n_samples, self.path.energy_j)
        return path_energy_j(self.path.t_s, self.path.v_v, self.path.i_a)[self.row]

    @cached_property
    def period_s(self) -> np.ndarray | None:
        return self.solution.value(self.probe.every) if self.probe.every is not None else None

    @cached_property
    def mean_w(self) -> np.ndarray:
        """Mean loss of an event that returns, the mode's own loss between [W], shape (sample,)."""
        return self.start.power_w + self._mean_extra_w()

    def _mean_extra_w(self) -> np.ndarray:
        if self.period_s is None:
            return np.zeros(self.solution.n_samples)
        return (self.energy_j - self.start.power_w * self.lasts_s) / self.period_s

    @cached_property
    def case_c(self) -> np.ndarray:
        """The case along the event, the junction's start where it is not known [°C], shape (sample, time)."""
        start_c = np.where(np.isnan(self.start.case_c), self.start.tj_c, self.start.case_c)
        return start_c[:, None] + self.case_rise_k

    @cached_property
    def case_rise_k(self) -> np.ndarray:
        """Rise of the case over its steady temperature [K], shape (sample, time)."""
        own, far = _beyond_case(self.solution, self.probe.ref)
        extra = self._mean_extra_w() * (own + far)
        rise_k = np.repeat(extra[:, None], self.path.t_s.shape[1], axis=1)
        late = np.flatnonzero(self.lasts_s > CASE_HELD_S)
        if len(late):
            rise_k[late] = self._warming_k(late, own[late], far[late])
        return rise_k

    def _warming_k(self, late: np.ndarray, own: np.ndarray, far: np.ndarray) -> np.ndarray:
        near_j, far_j = capacities(self.solution.circuit, self.probe.ref)
        r, tau = two_body_foster(own, near_j, far, far_j)
        t_s = self.path.t_s[self.row[late]]
        power_w = self.path.p_w[self.row[late]] - self.start.power_w[late, None]
        rise_k, end_k = foster_paths_k(t_s, power_w, r, tau)
        if self.period_s is None:
            return rise_k
        start_k = periodic_starts_k(end_k, t_s[:, -1], self.period_s[late], tau)
        return foster_paths_k(t_s, power_w, r, tau, start_k)[0]

    @cached_property
    def junction_c(self) -> np.ndarray:
        """The junction along the event [°C], shape (sample, time): the event's power takes the place of the mode's."""
        extra_k = self.rise_k[self.row] - self.start.power_w[:, None] * self.unit_k[self.row]
        return self.start.tj_c[:, None] + self.case_rise_k + extra_k

    @cached_property
    def peak_at(self) -> np.ndarray:
        """The hottest sample of the path, shape (sample,)."""
        return np.argmax(np.where(np.isnan(self.junction_c), -np.inf, self.junction_c), axis=1)

    @cached_property
    def peak_c(self) -> np.ndarray:
        """The hottest junction [°C], shape (sample,)."""
        return np.take_along_axis(self.junction_c, self.peak_at[:, None], axis=1)[:, 0]


def respond(solution: Solution, probe: EventProbe) -> Response:
    """The event at every point of the solution. Distinct paths are worked out once, for the whole search."""
    keys = sorted(probe.inputs)
    columns = [solution.value(probe.inputs[key]) for key in keys]
    if probe.supplied_by:
        keys, columns = [*keys, "voltage"], [*columns, _supply_v(solution, probe)]
    if probe.every is not None:
        keys, columns = [*keys, "every"], [*columns, solution.value(probe.every)]
    table = np.array(columns).T if columns else np.zeros((solution.n_samples, 0))
    distinct, row = np.unique(table, axis=0, return_inverse=True)
    found = [_row_of(solution, probe, tuple(keys), distinct[k]) if not probe.supplied_by else None for k in range(len(distinct))]
    if probe.supplied_by or not found:
        parts = _work_out(solution, probe, tuple(keys), distinct)
    else:
        parts = [None if rows[0] is None else np.concatenate(rows) for rows in zip(*found, strict=True)]
    path = probe.path({}) if probe.kind == "waveform" else Path(*parts[:3])
    return Response(solution, probe, path, row.reshape(-1), *parts[3:])


def _row_of(solution: Solution, probe: EventProbe, keys: tuple[str, ...], numbers: np.ndarray):
    key = numbers.tobytes()
    if key not in probe.memo:
        probe.memo[key] = _work_out(solution, probe, keys, numbers[None])
    return probe.memo[key]


def _work_out(solution: Solution, probe: EventProbe, keys: tuple[str, ...], numbers: np.ndarray):
    """Path, rise and unit response of some distinct rows, each of shape (row, time)."""
    values = dict(zip(keys, numbers.T, strict=True))
    period_s = values.pop("every", None)
    path = probe.path(values)
    impedance = _impedance(solution.circuit, probe)
    if isinstance(path, CapturedPath):
        return path.t_s, path.v_v, path.i_a, *_captured_rise(path, impedance, period_s)
    path = Path(path.t_s, path.v_v, path.i_a * probe.share)
    if impedance is None:
        return path.t_s, path.v_v, path.i_a, None, None
    known = np.isfinite(path.t_s).all(axis=1) & np.isfinite(path.p_w).all(axis=1)
    t_s, p_w = np.where(known[:, None], path.t_s, 0.0), np.where(known[:, None], path.p_w, 0.0)
    rise_k, unit_k = (np.where(known[:, None], impedance.rise_k(t_s, w, period_s), np.nan) for w in (p_w, np.ones_like(p_w)))
    return path.t_s, path.v_v, path.i_a, rise_k, unit_k


def _captured_rise(path: CapturedPath, impedance: JunctionImpedance | None, period_s: np.ndarray | None):
    """Rise by every sample of a capture, and the unit response at the start of each slice, which takes least away."""
    if impedance is None:
        return None, None
    unit_k = impedance.rise_k(path.t_s, np.ones_like(path.t_s), period_s)
    return path.rise_k(impedance, period_s), np.concatenate([unit_k[:, :1], unit_k[:, :-1]], axis=1)


def _impedance(circuit: Circuit, probe: EventProbe) -> JunctionImpedance | None:
    if "impedance" not in probe.memo:
        probe.memo["impedance"] = impedance_of(circuit.mode.parts[probe.ref])
    return probe.memo["impedance"]


def _supply_v(solution: Solution, probe: EventProbe) -> np.ndarray:
    """The highest of the nets around the part, which the event puts across it."""
    return np.max([np.abs(np.nan_to_num(solution.node_v(net))) for net in probe.supplied_by], axis=0)


def longest_s(circuit: Circuit, probe: EventProbe) -> float:
    """The longest that the event may last, over its own spans [s]; NaN where that is not known."""
    if "longest" not in probe.memo:
        probe.memo["longest"] = _longest_s(circuit, probe)
    return probe.memo["longest"]


def _longest_s(circuit: Circuit, probe: EventProbe) -> float:
    if probe.path is None or probe.lacking:
        return np.nan
    low, high = circuit.box.bounds()
    sides = sorted({p.index for p in probe.inputs.values() if p.index is not None})[:MOST_CORNERS]
    points = np.tile(circuit.box.typical(), (2 ** len(sides), 1))
    for k, ends in enumerate(itertools.product(*((low[s], high[s]) for s in sides))):
        points[k, sides] = ends
    values = {key: values_of((param,), points)[0] for key, param in probe.inputs.items()}
    if probe.supplied_by:
        values["voltage"] = np.zeros(len(points))
    with np.errstate(all="ignore"):
        return float(np.max(probe.path(values).lasts_s))


def heat_path(circuit: Circuit, ref: str) -> HeatPath | None:
    """The part's way to the ambient, where it has one."""
    return next((path for path in circuit.heat.paths if path.part == ref), None)


def _beyond_case(solution: Solution, ref: str) -> tuple[np.ndarray, np.ndarray]:
    """Resistances from the case to the sink and from the sink on [K/W]; without a sink, nothing and all of it."""
    path = heat_path(solution.circuit, ref)
    if path is None or path.case_k_per_w is None:
        return (np.full(solution.n_samples, np.nan),) * 2
    own = values_of(path.own_k_per_w, solution.points).sum(axis=0) - solution.value(path.case_k_per_w)
    if not path.sink:
        return np.zeros_like(own), np.maximum(own, 0.0)
    return np.maximum(own, 0.0), solution.sink_k_per_w(path.sink)


def capacities(circuit: Circuit, ref: str) -> tuple[float, float]:
    """Heat capacity of the case and of what stands behind it [J/K]; 0 where nobody gave one."""
    part, path = circuit.mode.parts[ref], heat_path(circuit, ref)
    own = part.device.thermal.capacity if part.device else None
    near_j = own.min if own is not None else 0.0
    far_j = circuit.heat.sinks[path.sink].capacity_j_per_k if path and path.sink else 0.0
    # Without a sink the case itself is the body behind which the whole resistance lies.
    return (near_j, far_j) if path and path.sink else (0.0, near_j)
