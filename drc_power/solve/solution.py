"""Solve a circuit at many points of its box, and read every part off the result."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from .branches import Linear, OneWay, Resistive, Switching
from .circuit import Circuit, Probe
from .families import PowerLoads
from .groups import Groups, Loss, PartReading, Ripple
from .heat import AIR
from .newton import Solver, take
from .stability import CERTAIN_BELOW, climb, gain_bound, loop_gain
from .start import starting_point
from .swings import swing_loss_w
from .system import Prepared, System
from .track_family import Track
from .variables import Param, values_of

RUNAWAY_HELD_C = 150.0
"""Where a part that runs away has no rated temperature, the rest of the network is solved with it held here."""


@dataclass(frozen=True, slots=True)
class PartPoint:
    """One part at every point, shape (sample,) each; NaN where a quantity is not known.

    voltage_v: across the part while it conducts; block_v: what it holds off while it does not (or voltage_v).
    current_a: mean; rms_a; peak_a: while it conducts. power_w, tj_c, case_c: its heat and where that leads.
    """

    voltage_v: np.ndarray
    block_v: np.ndarray
    current_a: np.ndarray
    rms_a: np.ndarray
    peak_a: np.ndarray
    power_w: np.ndarray
    tj_c: np.ndarray
    case_c: np.ndarray


@dataclass(frozen=True)
class Solution:
    """A circuit at the points, shape (sample, variable). Every array's last axis is the sample."""

    circuit: Circuit
    system: System
    points: np.ndarray
    x: np.ndarray
    prepared: Prepared
    converged: np.ndarray
    gain: np.ndarray
    runaway: Mapping[str, np.ndarray]

    @cached_property
    def n_samples(self) -> int:
        return self.points.shape[0]

    def value(self, param: Param) -> np.ndarray:
        """A parameter at every point, shape (sample,)."""
        return values_of((param,), self.points)[0]

    @cached_property
    def ambient_c(self) -> np.ndarray:
        """The air around the parts [°C], shape (sample,): inside the enclosure, where there is one."""
        air = self.temperatures.sink_c.get(AIR) if AIR in self.circuit.heat.sinks else None
        return self.value(self.circuit.ambient_c) if air is None else air

    def node_v(self, net: str) -> np.ndarray:
        """The voltage of a net against the reference [V], shape (sample,); NaN for a net outside the network."""
        if net in self.system.layout.reference:
            return np.zeros(self.n_samples)
        at = self.system.layout.unknown("node", net)
        return self.x[at] if at >= 0 else np.full(self.n_samples, np.nan)

    def has_node(self, net: str) -> bool:
        return net in self.system.layout.reference or self.system.layout.unknown("node", net) >= 0

    def current_a(self, key: str) -> np.ndarray:
        """The current of one branch [A], shape (sample,)."""
        at = self.system.layout.unknown("current", key)
        return self.x[at] if at >= 0 else np.full(self.n_samples, np.nan)

    @cached_property
    def powers_w(self) -> Mapping[str, np.ndarray]:
        """The dissipation of every part [W], push-pull stages by their own law."""
        powers = dict(self.system.powers(self.x, self.prepared))
        for ref, probe in self.circuit.probes.items():
            if probe.push_pull is not None:
                powers[ref] = self._push_pull(probe)[3]
        return powers

    @property
    def _groups(self):
        return [(f, p) for f, p in zip(self.system.families, self.prepared.families, strict=True) if isinstance(f, Groups)]

    @cached_property
    def _read_groups(self) -> tuple:
        return tuple(row for family, p in self._groups for row in family.readings(self.x, p))

    @cached_property
    def readings(self) -> Mapping[str, PartReading]:
        """What the parts of converters and bridges carry, by reference."""
        shape = (self.n_samples,)
        return {ref: PartReading(*(np.broadcast_to(getattr(part, name), shape) for name in PartReading.__slots__))
                for _, reading in self._read_groups for ref, part in reading.parts.items()}

    @cached_property
    def ripples(self) -> tuple[Ripple, ...]:
        """What converters and bridges ask of the capacitors around them."""
        return tuple(ripple for _, reading in self._read_groups for ripple in reading.ripples)

    @cached_property
    def ripple_voltages(self) -> Mapping[str, tuple[np.ndarray, np.ndarray]]:
        """How far nets fall below and rise above their mean [V], where a rectifier's ripple reaches them undiminished.

        That is through everything that conducts by a resistance or a diode, up to the regulators.
        """
        found: dict[str, tuple[np.ndarray, np.ndarray]] = {}
        for ripple in (ripple for _, reading in self._read_groups for ripple in reading.voltages):
            found |= dict.fromkeys(self._linked_with(ripple.net) - found.keys(), (ripple.below_v, ripple.above_v))
        return found

    def _linked_with(self, net: str) -> set[str]:
        links: dict[str, set[str]] = {}
        for branch in self.circuit.branches:
            if isinstance(branch, (OneWay, Track)) or (isinstance(branch, Resistive) and branch.load is None):
                links.setdefault(branch.a, set()).add(branch.b)
                links.setdefault(branch.b, set()).add(branch.a)
        stiff = set(self.system.layout.reference) | {b.b for b in self.circuit.branches if isinstance(b, (Linear, Switching))}
        reached, queue = {net}, [net]
        while queue:
            new = links.get(queue.pop(), set()) - reached - stiff
            reached |= new
            queue += new
        return reached

    @cached_property
    def losses(self) -> Mapping[str, tuple[Loss, ...]]:
        """The kinds of loss in each part of a converter or bridge, one by one."""
        found: dict[str, list[Loss]] = {}
        for family, p in self._groups:
            for loss in (loss for law in family.laws(self.x, p) for loss in law.losses if loss.ref is not None):
                found.setdefault(loss.ref, []).append(loss)
        return {ref: tuple(losses) for ref, losses in found.items()}

    @cached_property
    def temperatures(self):
        """Steady temperatures of junctions, cases and sinks."""
        return self.system.thermal.temperatures(self.x, self.prepared.heat, self.powers_w, self.points)

    def sink_k_per_w(self, name: str) -> np.ndarray:
        """What a sink, a patch or the air of an enclosure warms by per watt that it carries [K/W], shape (sample,)."""
        sink = self.circuit.heat.sinks[name]
        if sink.surface is None:
            return self.value(sink.r_k_per_w)
        return self.system.thermal.sink_k_per_w(name, self.x, self.prepared.heat)

    def in_range(self, names: Iterable[str]) -> np.ndarray:
        """Where the laws of the given sinks' surfaces hold, and of the air that they stand in, shape (sample,)."""
        beyond = self.temperatures.beyond
        flags = [beyond[name] for name in (*names, AIR) if name in beyond]
        return ~np.any(flags, axis=0) if flags else np.ones(self.n_samples, dtype=bool)

    @cached_property
    def parts(self) -> Mapping[str, PartPoint]:
        """Every part that has a probe, in the order of the circuit."""
        return {ref: self._read(ref, probe) for ref, probe in self.circuit.probes.items()}

    def _read(self, ref: str, probe: Probe) -> PartPoint:
        unknown = np.full(self.n_samples, np.nan)
        voltage, block, (current, rms, peak) = self._voltage(probe), None, self._currents(probe)
        if probe.push_pull is not None:
            voltage, (current, rms, peak) = self._swing_v(probe), self._push_pull(probe)[:3]
        if probe.group is not None:
            read = self.readings.get(ref) or PartReading(*(unknown,) * 5)
            voltage, block, (current, rms, peak) = read.on_v, read.block_v, (read.mean_a, read.rms_a, read.peak_a)
        power = self.powers_w.get(ref, np.zeros(self.n_samples) if not probe.currents else unknown)
        missing = ref in self.circuit.heat_missing
        tj = unknown if missing else self.temperatures.junction_c.get(ref, unknown)
        case = unknown if missing else self.temperatures.case_c.get(ref, unknown)
        return PartPoint(voltage, voltage if block is None else block, current, rms, peak, power, tj, case)

    def _voltage(self, probe: Probe) -> np.ndarray:
        if not probe.a or not probe.b:
            return np.full(self.n_samples, np.nan)
        across = self.node_v(probe.a) - self.node_v(probe.b)
        signed = probe.ground is not None or probe.state == "blocked" or probe.kind in ("diode", "led", "zener", "tvs", "bridge")
        return across if signed else np.abs(across)

    def _currents(self, probe: Probe) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        if not probe.currents:
            zero = np.zeros(self.n_samples)
            return zero, zero, zero
        on = np.abs(sum(sign * self.current_a(key) for key, sign in probe.currents))
        duty = self.value(probe.duty)
        return duty * on, np.sqrt(np.maximum(duty, 0.0)) * on, on

    def inflow_a(self) -> Mapping[str, np.ndarray]:
        """What flows into each net [A], shape (sample,)."""
        total = np.zeros((self.system.n + 1, self.n_samples))
        for family, p in zip(self.system.families, self.prepared.families, strict=True):
            for nodes, currents, weight in family.flows(p):
                np.add.at(total, nodes, np.maximum(-weight * self.x[currents], 0.0))
        return {net: total[at] for net, at in self.system.layout.of_kind("node").items()}

    def _swing_v(self, probe: Probe) -> np.ndarray:
        """The whole supply of a class-AB stage, which each of its transistors must hold off."""
        swing = probe.push_pull
        return np.abs(self.node_v(swing.plus) - self.node_v(swing.minus))

    def _push_pull(self, probe: Probe) -> tuple[np.ndarray, ...]:
        """Mean, rms and peak current at full output, and the loss at the worst output."""
        swing = probe.push_pull
        side_v, load_ohm = self._swing_v(probe) / 2.0, self.value(swing.load_ohm)
        peak = side_v / load_ohm
        return peak / np.pi, peak / 2.0, peak, swing_loss_w(swing, side_v, self.points)

    def unsolved(self) -> np.ndarray:
        """Where there is no operating point: not converged, or a load below the voltage it can run at."""
        bad = ~self.converged
        for family, p in zip(self.system.families, self.prepared.families, strict=True):
            if isinstance(family, PowerLoads):
                bad |= family.collapsed(self.x, p).any(axis=0)
        return bad


class Engine:
    """Solves one circuit again and again; keeps what does not depend on the points."""

    def __init__(self, circuit: Circuit) -> None:
        self.circuit = circuit
        self.system = System(circuit.branches, circuit.heat, circuit.reference, circuit.probes)
        self.solver = Solver(self.system)

    def solve(self, points: np.ndarray, polish: bool = False) -> Solution:
        """The circuit at the points, shape (sample, variable); polished where the last digits matter."""
        prepared = self.system.prepare(points)
        x, converged = self.solver.solve(starting_point(self.system, points), prepared)
        gain, runaway = np.zeros(points.shape[0]), {}
        if self.system.followed:
            x, converged, gain, runaway = self._settle(points, x, converged, prepared)
        if polish and not runaway:
            x = self.solver.polish(x, prepared)
        return Solution(self.circuit, self.system, points, x, prepared, converged, gain, runaway)

    def _settle(self, points: np.ndarray, x: np.ndarray, converged: np.ndarray, prepared: Prepared):
        """Tell equilibria from runaway: where Newton's method found none, or one whose loop gain is not below 1."""
        gain = np.where(converged, gain_bound(self.system, x, prepared), 0.0)
        close = np.flatnonzero(converged & (gain >= CERTAIN_BELOW))
        if len(close):
            gain[close] = loop_gain(self.solver, x[:, close], take(prepared, close))
        doubtful = np.flatnonzero(~converged | (gain >= 1.0))
        runaway: dict[str, np.ndarray] = {}
        if not len(doubtful):
            return x, converged, gain, runaway
        part = take(prepared, doubtful)
        found, settled, ran = climb(self.solver, starting_point(self.system, points[doubtful]), part)
        gain[doubtful] = loop_gain(self.solver, found, part)
        x, converged = x.copy(), converged.copy()
        held = np.where(ran, self._rated_c()[:, None], np.nan)
        rest, solved = self.solver.solve(found, replace(part, held_c=held))
        x[:, doubtful] = np.where(settled, found, rest)
        converged[doubtful] = settled | (ran.any(axis=0) & solved)
        for k, row in enumerate(self.system.followed):
            if ran[k].any():
                flags = np.zeros(points.shape[0], dtype=bool)
                flags[doubtful] = ran[k]
                runaway[self.system.paths[row].part] = flags
        return x, converged, gain, runaway

    def _rated_c(self) -> np.ndarray:
        """The rated junction temperature of each followed part [°C]."""
        parts = self.circuit.mode.parts
        limits = [parts[self.system.paths[row].part].limit("tj") for row in self.system.followed]
        return np.array([limit.typ if limit is not None else RUNAWAY_HELD_C for limit in limits])
