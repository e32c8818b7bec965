"""Random power networks: each is solved, balances, and obeys laws written here from the records' own words.

Nothing of the solver's families is used to judge: `misfits` reads the records with plain floats and `numpy.interp`.
Tolerance: currents and powers balance to 1e-9 of what flows; every law holds to 1e-9 of its largest term.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Iterator
from dataclasses import fields, is_dataclass, replace

import numpy as np
import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st
from engines import engine_solution
from random_networks import KEEPS_DOMAIN, Network, networks

from drc_power.solve.balance import current_imbalance, power_imbalance
from drc_power.solve.branches import (
    Branch, CurrentLoad, Curve, Drop, Efficiency, Linear, OneWay, PowerLoad, Resistive, Source, Switching,
)
from drc_power.solve.heat import HeatModel
from drc_power.solve.solution import Solution
from drc_power.solve.variables import Param

BALANCED = 1e-9
LAWFUL = 1e-9
SAME = 1e-8
"""Two ways to write one network agree to this: each stops where no unknown moves by more than 1e-12 of itself."""

SPREAD = np.array([1.0, 0.94, 1.05])
"""Every source and load of a network is solved at these shares of its nominal value, independently of the others."""

random_networks = settings(max_examples=80, deadline=None, suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large])


def solve(network: Network, points: np.ndarray | None = None) -> Solution:
    return engine_solution(network.branches, network.heat, points)


def spread_out(network: Network, seed: int) -> tuple[Network, np.ndarray]:
    """The network with every source and load a side of the box, and as many points as `SPREAD` has values."""
    nominal: list[float] = []

    def side(branch: Branch) -> Branch:
        names = [f for f in ("voltage_v", "current_a", "power_w") if isinstance(getattr(branch, f, None), Param)]
        for name in names:
            nominal.append(getattr(branch, name).value)
            branch = replace(branch, **{name: Param(nominal[-1], len(nominal) - 1)})
        return branch

    branches = tuple(side(b) for b in network.branches)
    shares = np.random.default_rng(seed).choice(SPREAD, (len(SPREAD), len(nominal)))
    shares[0] = 1.0
    return replace(network, branches=branches), shares * np.array(nominal)


# The laws, written from the records


class Reading:
    """One sample of a solution: voltages, currents and temperatures by name, and the records' numbers."""

    def __init__(self, solution: Solution, sample: int) -> None:
        self.voltages, self.currents = ({name: solution.x[at, sample] for name, at in solution.system.layout.of_kind(kind).items()}
                                        for kind in ("node", "current"))
        self.junctions = {part: t[sample] for part, t in solution.temperatures.junction_c.items()}
        self.point = solution.points[sample]

    def v(self, node: str) -> float:
        return 0.0 if node == "0" else self.voltages[node]

    def i(self, key: str) -> float:
        return self.currents[key]

    def t(self, part: str | None) -> float:
        return self.junctions.get(part, 25.0)

    def number(self, param: Param) -> float:
        return param.value if param.index is None else self.point[param.index]


def along(curve: Curve, x: float, extend: bool) -> float:
    """Straight lines between points; below the first its value, past the last on along the last slope or held."""
    xs, ys = curve.xs, curve.ys
    if extend and x > xs[-1]:
        return ys[-1] + (ys[-1] - ys[-2]) / (xs[-1] - xs[-2]) * (x - xs[-1])
    return float(np.interp(x, xs, ys))


def among(lines: list[tuple[float, float]], at: float) -> float:
    """Straight between the values of neighbouring curves, the nearest curve outside."""
    return float(np.interp(at, [x for x, _ in lines], [y for _, y in lines]))


def ohms(r: Reading, b: Resistive) -> float:
    return r.number(b.r_ohm) * (along(b.scale, r.t(b.part), True) if b.scale else 1.0)


def forward_v(r: Reading, drop: Drop, i: float, t_c: float) -> float:
    if drop.lines:
        return among([(t, along(curve, i, True)) for t, curve in drop.lines], t_c)
    return r.number(drop.knee_v) + drop.knee_v_per_k * (t_c - 25.0) + r.number(drop.slope_ohm) * i


def efficiency(r: Reading, eta: Efficiency, i: float, v_in: float) -> float:
    return among([(v, along(curve, i, False)) for v, curve in zip(eta.input_v, eta.curves, strict=True)], v_in)


def resistive(r: Reading, b: Resistive) -> Iterator[tuple[float, float]]:
    yield r.v(b.a) - r.v(b.b), ohms(r, b) * r.i(b.key)


def one_way(r: Reading, b: OneWay) -> Iterator[tuple[float, float]]:
    i, across = r.i(b.key), r.v(b.a) - r.v(b.b)
    forward = forward_v(r, b.drop, max(i, 0.0), r.t(b.part))
    yield min(i, 0.0), 0.0
    yield (across, forward) if i > 1e-12 else (max(across, forward), forward)


def source(r: Reading, b: Source) -> Iterator[tuple[float, float]]:
    yield r.v(b.a) - r.v(b.b), r.number(b.voltage_v) - r.number(b.resistance_ohm) * r.i(b.key)


def linear(r: Reading, b: Linear) -> Iterator[tuple[float, float]]:
    v_in, v_out = r.v(b.a) - r.v(b.ground), r.v(b.b) - r.v(b.ground)
    yield v_out, min(r.number(b.setpoint_v), v_in - r.number(b.dropout_v))
    yield r.i(f"{b.key} input"), r.i(b.key) + r.number(b.quiescent_a)


def switching(r: Reading, b: Switching) -> Iterator[tuple[float, float]]:
    v_in, v_out, i = r.v(b.a) - r.v(b.ground), r.v(b.b) - r.v(b.ground), r.i(b.key)
    loss = max(v_out * i * (1.0 / efficiency(r, b.efficiency, i, v_in) - 1.0), v_in * r.number(b.quiescent_a))
    yield v_out, r.number(b.setpoint_v)
    yield v_in * r.i(f"{b.key} input"), v_out * i + loss


def current_load(r: Reading, b: CurrentLoad) -> Iterator[tuple[float, float]]:
    yield r.i(b.key), r.number(b.current_a)


def power_load(r: Reading, b: PowerLoad) -> Iterator[tuple[float, float]]:
    yield (r.v(b.a) - r.v(b.b)) * r.i(b.key), r.number(b.power_w)


LAWS: dict[type, Callable] = {Resistive: resistive, OneWay: one_way, Source: source, Linear: linear, Switching: switching,
                              CurrentLoad: current_load, PowerLoad: power_load}


def flows(r: Reading, b: Branch) -> Iterator[tuple[str, float]]:
    """The mean current that a branch takes out of each of its nodes."""
    i = r.i(b.key)
    if isinstance(b, (Linear, Switching)):
        i_in = r.i(f"{b.key} input")
        yield from ((b.a, i_in), (b.ground, -i_in), (b.b, -i), (b.ground, i))
    else:
        mean = (r.number(b.duty) if hasattr(b, "duty") else -1.0) * i
        yield from ((b.a, mean), (b.b, -mean))


def losses(r: Reading, b: Branch) -> Iterator[tuple[str | None, float]]:
    """What each part of a branch turns into heat, by the law of its current; what a source gives is negative."""
    i = r.i(b.key)
    if isinstance(b, Resistive):
        yield b.part, r.number(b.duty) * ohms(r, b) * i * i
    elif isinstance(b, OneWay):
        yield b.part, forward_v(r, b.drop, max(i, 0.0), r.t(b.part)) * i
    else:
        yield getattr(b, "part", None), sum(r.v(node) * out for node, out in flows(r, b))


def by_part(r: Reading, network: Network) -> dict[str | None, float]:
    total: dict[str | None, float] = defaultdict(float)
    for branch in network.branches:
        for part, watts in losses(r, branch):
            total[part] += watts
    return total


def hot(r: Reading, network: Network) -> Iterator[tuple[str, float, float]]:
    """Each junction, and what its way to the ambient makes of the losses."""
    watts = by_part(r, network)
    for path in network.heat.paths:
        rise = sum(r.number(p) for p in path.own_k_per_w) * watts[path.part]
        if path.sink:
            shared = sum(watts[other.part] for other in network.heat.paths if other.sink == path.sink)
            rise += r.number(network.heat.sinks[path.sink].r_k_per_w) * shared
        yield path.part, r.t(path.part), r.number(path.start_c) + rise


def misfits(r: Reading, network: Network) -> dict[str, float]:
    """By how much each law is missed, relative to its larger side, or to 1 V, 1 A or 1 W where both are smaller."""
    out = {}
    for branch in network.branches:
        for k, (left, right) in enumerate(LAWS[type(branch)](r, branch)):
            out[f"{branch.key} law {k}"] = abs(left - right) / max(abs(left), abs(right), 1.0)
    for part, found, expected in hot(r, network):
        out[f"{part} temperature"] = abs(found - expected) / max(abs(expected), 1.0)
    return out


def imbalances(r: Reading, network: Network) -> dict[str, float]:
    """Σ i over Σ |i| at every net, and Σ P over Σ |P|.

    A net's |i| counts as at least a millionth of the largest, and as 1 uA: every net leaks 1e-18 S to the reference.
    """
    total, through, watts = defaultdict(float), defaultdict(float), []
    for branch in network.branches:
        for node, amps in flows(r, branch):
            total[node] += amps
            through[node] += abs(amps)
        watts += [w for _, w in losses(r, branch)]
    least = 1e-6 * max(max(through.values()), 1.0)
    out = {node: abs(total[node]) / max(through[node], least) for node in total if node != "0"}
    return out | {"power": abs(sum(watts)) / max(sum(map(abs, watts)), 1e-3)}


def worst(found: dict[str, float]) -> tuple[float, str]:
    return max((size, name) for name, size in found.items())


@random_networks
@given(networks(), st.integers(0, 2**31))
def test_every_network_is_solved_balances_and_obeys_the_laws(network, seed):
    spread, points = spread_out(network, seed)
    solution = solve(spread, points)
    assert not solution.unsolved().any()
    assert not solution.runaway
    for sample in range(len(points)):
        reading = Reading(solution, sample)
        assert worst(imbalances(reading, spread)) < (BALANCED, "")
        assert worst(misfits(reading, spread)) < (LAWFUL, "")
    if any(isinstance(b, (CurrentLoad, PowerLoad)) for b in network.branches):
        assert current_imbalance(solution).max() < BALANCED
        assert power_imbalance(solution).max() < BALANCED
