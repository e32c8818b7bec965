"""The rows of heat in the equations: dissipations, the temperatures that laws follow, sinks, and parts with two ways.

| unknown | its row |
|---|---|
| power of a part | P − Σ dissipation = 0 |
| temperature of a junction | T − T_end − R · P₁ = 0, or T − held = 0 |
| temperature of a sink | T − T_air − R · ΣP = 0, or the heat of its surface − ΣP = 0 |
| flow of a second way | T_end + R · P₁ − T_end' − R' · q = 0, with P₁ = P − q |

A sink, a patch of copper and the air of an enclosure are all sinks here. Only those are unknowns that a followed
temperature needs, or that no product of resistances gives.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping

import numpy as np

from .heat import AIR, HeatModel, HeatPath, Temperatures, own_of
from .layout import Layout
from .surfaces import LEAST_RISE_K, Surfaces
from .variables import values_of

Values = Mapping[str, np.ndarray]

STARTING_RISE_K = 30.0
"""Where Newton's method starts a surface: from above it comes down to the solution without a detour."""

LEAST_K_PER_W = 1e-9
"""Of a way beside another, so that two ways without resistance have a solution."""


class ThermalNetwork:
    """The thermal part of a `System`. Arrays are (row, sample)."""

    def __init__(self, heat: HeatModel, layout: Layout, watched: set[str]) -> None:
        self.heat = heat
        known = {path.part for path in heat.paths}
        self.paths = self._coupled(watched & known)
        names = {name for path in self.paths for name in path.sinks}
        names |= {heat.sinks[name].into for name in names if heat.sinks[name].into}
        self.sinks = sorted(names)
        self.parts = [path.part for path in self.paths]
        self.parts += [part for part in (heat.inside if AIR in names else ()) if part not in set(self.parts)]
        self.beside = [row for row, path in enumerate(self.paths) if path.beside]
        self.followed = [row for row, path in enumerate(self.paths) if path.part in watched]
        self._place(layout)
        self._join()

    def _coupled(self, followed: set[str]) -> list[HeatPath]:
        if any(sink.name == AIR for sink in self.heat.sinks.values()):
            return list(self.heat.paths)
        together = set(self.heat.coupled_with(sorted(followed | set(self.heat.by_law()))))
        return [path for path in self.heat.paths if path.part in together]

    def _place(self, layout: Layout) -> None:
        self.power_at = layout.places("power", self.parts)
        self.temperature_at = layout.places("temperature", [self.paths[r].part for r in self.followed])
        self.sink_at = layout.places("sink", self.sinks)
        self.flow_at = layout.places("flow", [self.paths[r].part for r in self.beside])
        self.kelvin_at = np.concatenate([self.temperature_at, self.sink_at])
        rows = {name: at for name, at in zip(self.sinks, self.sink_at.tolist(), strict=True)}
        self.end_at = np.array([rows.get(path.sink, -1) for path in self.paths], dtype=np.intp)
        self.other_end_at = np.array([rows[self.paths[r].beside.sink] for r in self.beside], dtype=np.intp)
        self.air_at = np.array([rows.get(self.heat.sinks[name].into, -1) for name in self.sinks], dtype=np.intp)
        by_surface = [k for k, name in enumerate(self.sinks) if self.heat.sinks[name].surface]
        self.by_surface = np.array(by_surface, dtype=np.intp)
        self.by_resistance = np.array([k for k in range(len(self.sinks)) if k not in set(by_surface)], dtype=np.intp)
        self.surfaces = Surfaces([self.heat.sinks[self.sinks[k]].surface for k in by_surface]) if by_surface else None

    def _join(self) -> None:
        """Which unknowns carry heat into which sink: (row of sink, place, sign)."""
        rows = {name: k for k, name in enumerate(self.sinks)}
        joints = [(rows[path.sink], self.power_at[k], 1.0) for k, path in enumerate(self.paths)
                  if path.sink and path.sink != AIR]
        for at, r in zip(self.flow_at.tolist(), self.beside, strict=True):
            path = self.paths[r]
            joints.append((rows[path.beside.sink], at, 1.0))
            if path.sink and path.sink != AIR:
                joints.append((rows[path.sink], at, -1.0))
        if AIR in rows:
            # All that its parts dissipate reaches the air in the end, by whichever sink.
            inside = set(self.heat.inside)
            joints += [(rows[AIR], at, 1.0) for part, at in zip(self.parts, self.power_at.tolist(), strict=True) if part in inside]
        self.into_row = np.array([j[0] for j in joints], dtype=np.intp)
        self.from_at = np.array([j[1] for j in joints], dtype=np.intp)
        self.sign = np.array([j[2] for j in joints])[:, None]

    def prepare(self, points: np.ndarray) -> Values:
        """The numbers at the given points, shape (sample, variable)."""
        sinks = [self.heat.sinks[name] for name in self.sinks]
        starts = values_of([p.start_c for p in self.paths], points)
        airs = values_of([s.start_c for s in sinks], points)
        return {"own": own_of([path.own_k_per_w for path in self.paths], points),
                "start": np.where(self.end_at[:, None] >= 0, 0.0, starts),
                "other": np.maximum(own_of([self.paths[r].beside.own_k_per_w for r in self.beside], points), LEAST_K_PER_W),
                "sink": values_of([s.r_k_per_w for s in sinks], points),
                "air": np.where(self.air_at[:, None] >= 0, 0.0, airs), "outside": airs}

    def place_start(self, x: np.ndarray, prepared: Values, points: np.ndarray) -> None:
        """Temperatures to start Newton's method from: those of the air, surfaces a little above."""
        for row, at in zip(self.followed, self.temperature_at, strict=True):
            x[at] = values_of((self.paths[row].start_c,), points)[0]
        x[self.sink_at] = prepared["outside"]
        x[self.sink_at[self.by_surface]] += STARTING_RISE_K

    def add(self, x: np.ndarray, prepared: Values, held_c: np.ndarray | None, residual: np.ndarray, entries: list) -> None:
        """Every row but the dissipations, which the families of the circuit add."""
        if not len(self.power_at):
            return
        n = x.shape[1]
        residual[self.power_at] += x[self.power_at]
        entries.append((self.power_at, self.power_at, np.ones((len(self.power_at), n))))
        self._add_junctions(x, prepared, held_c, residual, entries)
        if len(self.beside):
            self._add_flows(x, prepared, residual, entries)
        if self.sinks:
            self._add_sinks(x, prepared, residual, entries)

    def _first_w(self, x: np.ndarray) -> np.ndarray:
        """The heat that each path's first way takes."""
        first = x[self.power_at[: len(self.paths)]]
        first[self.beside] -= x[self.flow_at]
        return first

    def settling_c(self, x: np.ndarray, prepared: Values) -> np.ndarray:
        """The temperatures that the present heats lead to, shape (followed part, sample)."""
        rows = self.followed
        return (prepared["start"] + x[self.end_at])[rows] + prepared["own"][rows] * self._first_w(x)[rows]

    def _add_junctions(self, x, prepared, held_c, residual, entries) -> None:
        rows, at = self.followed, self.temperature_at
        held = np.full((len(rows), x.shape[1]), np.nan) if held_c is None else held_c
        free = np.isnan(held)
        residual[at] += x[at] - np.where(free, self.settling_c(x, prepared), held)
        own = np.where(free, prepared["own"][rows], 0.0)
        entries += [(at, at, np.ones_like(own)), (at, self.power_at[rows], -own), (at, self.end_at[rows], -free.astype(float))]
        two = [k for k, row in enumerate(rows) if row in set(self.beside)]
        if two:
            flows = self.flow_at[[self.beside.index(rows[k]) for k in two]]
            entries.append((at[two], flows, own[two]))

    def _add_flows(self, x, prepared, residual, entries) -> None:
        rows, at = self.beside, self.flow_at
        own, other = np.maximum(prepared["own"][rows], LEAST_K_PER_W), prepared["other"]
        first = (prepared["start"] + x[self.end_at])[rows] + own * self._first_w(x)[rows]
        residual[at] += first - x[self.other_end_at] - other * x[at]
        one = np.ones_like(own)
        entries += [(at, self.power_at[rows], own), (at, at, -own - other), (at, self.end_at[rows], one),
                    (at, self.other_end_at, -one)]

    def inflow_w(self, x: np.ndarray) -> np.ndarray:
        """The heat that each sink takes in, shape (sink, sample)."""
        inflow = np.zeros((len(self.sinks), x.shape[1]))
        np.add.at(inflow, self.into_row, self.sign * x[self.from_at])
        return inflow

    def _add_sinks(self, x, prepared, residual, entries) -> None:
        at, inflow = self.sink_at, self.inflow_w(x)
        around = prepared["air"] + x[self.air_at]
        drive, per_own, per_air = x[at] - around, np.ones_like(inflow), -np.ones_like(inflow)
        weight = prepared["sink"].copy()
        if self.surfaces:
            k = self.by_surface
            drive[k], per_own[k], per_air[k] = self.surfaces.heat(x[at[k]], around[k])
            weight[k] = 1.0
        residual[at] += drive - weight * inflow
        entries += [(at, at, per_own), (at, self.air_at, per_air),
                    (at[self.into_row], self.from_at, -self.sign * weight[self.into_row])]

    def gain_bound(self, x: np.ndarray, prepared: Values, slopes_w_per_k: np.ndarray) -> np.ndarray:
        """An upper estimate of the loop gain at fixed currents, shape (sample,): the largest row sum of |R · dP/dT|.

        slopes_w_per_k: |dP/dT| summed for each part, shape (part, sample). Parts with two ways have no such bound.
        """
        if self.beside:
            return np.full(x.shape[1], np.inf)
        gain = prepared["own"] * slopes_w_per_k[: len(self.paths)]
        if self.sinks:
            shared = np.zeros((len(self.sinks), x.shape[1]))
            places = {at: k for k, at in enumerate(self.power_at.tolist())}
            np.add.at(shared, self.into_row, slopes_w_per_k[[places[at] for at in self.from_at.tolist()]])
            steps = self._k_per_w(x, prepared) * shared
            behind = np.array([self.sinks.index(AIR) if at >= 0 else -1 for at in self.air_at])
            steps = steps + np.where(behind[:, None] >= 0, steps[behind], 0.0)
            on = {name: k for k, name in enumerate(self.sinks)}
            rows = [k for k, path in enumerate(self.paths) if path.sink]
            gain[rows] += steps[[on[self.paths[k].sink] for k in rows]]
        return gain.max(axis=0, initial=0.0)

    def _k_per_w(self, x: np.ndarray, prepared: Values) -> np.ndarray:
        """By how much each sink warms with one watt more [K/W]."""
        r = prepared["sink"].copy()
        if self.surfaces:
            k = self.by_surface
            around = prepared["air"] + x[self.air_at]
            r[k] = 1.0 / self.surfaces.heat(x[self.sink_at[k]], around[k])[1]
        return r

    def sink_k_per_w(self, name: str, x: np.ndarray, prepared: Values) -> np.ndarray:
        """Rise over heat of one computed surface where it stands [K/W]; without heat, that of its smallest rise."""
        k, row = self.sinks.index(name), self.by_surface.tolist().index(self.sinks.index(name))
        around = (prepared["air"] + x[self.air_at])[self.by_surface]
        rise = np.maximum(x[self.sink_at[k]] - around[row], LEAST_RISE_K)
        surface_c = x[self.sink_at[self.by_surface]].copy()
        surface_c[row] = around[row] + rise
        return rise / self.surfaces.heat(surface_c, around)[0][row]

    def temperatures(self, x: np.ndarray, prepared: Values, power_w: Values, points: np.ndarray) -> Temperatures:
        """Steady temperatures of junctions, cases and sinks: unknowns read off x, the rest by their resistances."""
        n, heat = points.shape[0], self.heat.sink_power(power_w, points.shape[0])
        sink_c, beyond = {}, {}
        for name, sink in self.heat.sinks.items():
            start, r = values_of((sink.start_c, sink.r_k_per_w), points)
            sink_c[name] = start + r * heat[name]
        for name, at, inflow in zip(self.sinks, self.sink_at, self.inflow_w(x), strict=True):
            sink_c[name], heat[name] = x[at], inflow
        if self.surfaces:
            around = prepared["air"] + x[self.air_at]
            k = self.by_surface
            flags = self.surfaces.beyond(x[self.sink_at[k]], around[k])
            beyond = {self.sinks[row]: flag for row, flag in zip(k, flags, strict=True)}
        flows = {self.paths[r].part: x[at] for r, at in zip(self.beside, self.flow_at, strict=True)}
        own, junction_c, case_c, first_w = self.heat.own(points), {}, {}, {}
        for row, path in enumerate(self.heat.paths):
            first_w[path.part] = power_w.get(path.part, np.zeros(n)) - flows.get(path.part, 0.0)
            start = sink_c[path.sink] if path.sink else values_of((path.start_c,), points)[0]
            junction_c[path.part] = start + own[row] * first_w[path.part]
            if path.case_k_per_w is not None:
                case_c[path.part] = junction_c[path.part] - values_of((path.case_k_per_w,), points)[0] * first_w[path.part]
        return Temperatures(junction_c, case_c, sink_c, first_w, heat, beyond)

    def imbalance(self, x: np.ndarray, prepared: Values) -> Iterator[tuple[str, np.ndarray]]:
        """For each computed surface, how far the heat it gives off is from the heat it takes in, relative to that."""
        if self.surfaces:
            k, around = self.by_surface, prepared["air"] + x[self.air_at]
            given, taken = self.surfaces.heat(x[self.sink_at[k]], around[k])[0], self.inflow_w(x)[k]
            for row, out, into in zip(k, given, taken, strict=True):
                yield self.sinks[row], np.abs(out - into) / np.maximum(np.abs(into), 1e-6)

