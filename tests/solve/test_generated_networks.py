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
from engines import engine_solution
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st
from random_networks import Network, networks

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

drawn = settings(max_examples=60, deadline=None, derandomize=True,
                 suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large])


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
        layout = solution.system.layout
        self.voltages, self.currents = ({name: solution.x[at, sample] for name, at in layout.of_kind(kind).items()}
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


def collapsed(r: Reading, network: Network) -> list[str]:
    """Constant-power loads below a third of their nominal voltage, which is 20 times their floor: on the wrong branch."""
    return [b.key for b in network.branches if isinstance(b, PowerLoad) and r.v(b.a) - r.v(b.b) < 20.0 * b.floor_v / 3.0]


def assert_below(found: dict[str, float], limit: float) -> None:
    size, where = max((size, where) for where, size in found.items())
    assert size < limit, where


@drawn
@given(networks(), st.integers(0, 2**31))
def test_every_network_is_solved_balances_and_obeys_the_laws(network, seed):
    spread, points = spread_out(network, seed)
    solution = solve(spread, points)
    assert not solution.unsolved().any()
    assert not solution.runaway
    for sample in range(len(points)):
        reading = Reading(solution, sample)
        assert_below(imbalances(reading, spread), BALANCED)
        assert_below(misfits(reading, spread), LAWFUL)
        assert collapsed(reading, spread) == []
    # The self-check's own sums leave out the leak of 1e-18 S; from 0.1 A on that is below what it asks.
    if np.abs(solution.x[list(solution.system.layout.of_kind("current").values())]).max(axis=0).min() > 0.1:
        assert current_imbalance(solution).max() < BALANCED
        assert power_imbalance(solution).max() < BALANCED


# Two ways to write one network


def assert_same(first: Solution, second: Solution, volts: float = 1.0, amps: float = 1.0) -> None:
    """Every net, branch and junction that both have agrees; the second's voltages and currents scaled by the factors."""
    for kind, factor in (("node", volts), ("current", amps)):
        ours, theirs = (s.system.layout.of_kind(kind) for s in (first, second))
        for name in ours.keys() & theirs.keys():
            assert second.x[theirs[name], 0] == pytest.approx(factor * first.x[ours[name], 0], rel=SAME, abs=SAME), name
    for part, t_c in first.temperatures.junction_c.items():
        assert second.temperatures.junction_c[part][0] == pytest.approx(t_c[0], rel=SAME), part


def solved(network: Network) -> Solution:
    solution = solve(network)
    assert not solution.unsolved().any()
    return solution


@drawn
@given(networks(max_nets=6), st.randoms(use_true_random=False))
def test_the_order_of_the_branches_changes_nothing(network, random):
    shuffled = list(network.branches)
    random.shuffle(shuffled)
    paths = list(network.heat.paths)
    random.shuffle(paths)
    assert_same(solved(network), solved(Network(tuple(shuffled), replace(network.heat, paths=tuple(paths)))))


@drawn
@given(networks(max_nets=6), st.data())
def test_a_resistor_split_in_two_changes_nothing(network, data):
    """In series by a third and two thirds, with a net between; the part's heat is that of both."""
    whole = data.draw(st.sampled_from([b for b in network.branches if isinstance(b, Resistive)]))
    r_ohm = whole.r_ohm.value
    first, second = (replace(whole, key=f"{whole.key} {k}", r_ohm=Param(share * r_ohm)) for k, share in enumerate((1 / 3, 2 / 3)))
    halves = (replace(first, b="between"), replace(second, a="between"))
    others = tuple(b for b in network.branches if b is not whole)
    assert_same(solved(network), solved(replace(network, branches=others + halves)))


@drawn
@given(networks(max_nets=6, feeds=("fet", "parallel fets", "diode", "linear")), st.data())
def test_a_fet_doubled_at_twice_its_resistances_changes_nothing(network, data):
    """Two parts of twice the on-resistance share the current; at twice the own thermal resistance both are as hot."""
    fets = [b for b in network.branches if isinstance(b, Resistive) and b.part and b.scale]
    assume(fets)
    fet = data.draw(st.sampled_from(fets))
    path = next(p for p in network.heat.paths if p.part == fet.part)
    r_ohm = Param(2.0 * fet.r_ohm.value)
    twice = [replace(fet, key=f"{fet.key} {side}", part=f"{fet.part} {side}", r_ohm=r_ohm) for side in "xy"]
    warmer = [replace(path, part=b.part, own_k_per_w=tuple(Param(2.0 * p.value) for p in path.own_k_per_w)) for b in twice]
    branches = (*(b for b in network.branches if b is not fet), *twice)
    paths = (*(p for p in network.heat.paths if p is not path), *warmer)
    one, two = solved(network), solved(Network(branches, replace(network.heat, paths=paths)))
    assert two.current_a(twice[0].key)[0] == pytest.approx(0.5 * one.current_a(fet.key)[0], rel=SAME, abs=SAME)
    for b in twice:
        assert two.temperatures.junction_c[b.part][0] == pytest.approx(one.temperatures.junction_c[fet.part][0], rel=SAME)
    for name, at in one.system.layout.of_kind("node").items():
        assert two.node_v(name)[0] == pytest.approx(one.x[at, 0], rel=SAME, abs=SAME), name


POWERS_OF_SCALE = {"voltage_v": 1, "current_a": 1, "power_w": 2, "setpoint_v": 1, "dropout_v": 1, "quiescent_a": 1, "knee_v": 1,
                   "own_k_per_w": -2, "r_k_per_w": -2, "floor_v": 1, "knee_v_per_k": 1, "input_v": 1, "xs": 1, "ys": 1}
"""By which power of k a number of a record grows when all voltages and currents grow k times; 0 for those left out."""


def scaled(record, k: float, unless: tuple[str, ...] = ()):
    """The record with every number scaled; a curve's columns only where they are volts or amperes."""
    if isinstance(record, tuple):
        return tuple(scaled(item, k, unless) for item in record)
    if not is_dataclass(record) or isinstance(record, Param):
        return record
    changes = {}
    for name in (f.name for f in fields(record) if f.name not in unless):
        value, power = getattr(record, name), POWERS_OF_SCALE.get(name, 0)
        if name == "scale":
            continue
        if power:
            changes[name] = times(value, k**power)
        else:
            changes[name] = scaled(value, k, ("ys",) if isinstance(record, Efficiency) else unless)
    return replace(record, **changes)


def times(value, factor: float):
    if isinstance(value, tuple):
        return tuple(times(item, factor) for item in value)
    return replace(value, value=factor * value.value) if isinstance(value, Param) else factor * value


@drawn
@given(networks(max_nets=6), st.sampled_from((0.5, 1.7, 4.0)))
def test_all_voltages_and_currents_scale_together(network, k):
    """k times every voltage and current, k² the powers, thermal resistances over k²: the same temperatures."""
    heat = HeatModel(scaled(network.heat.paths, k), {name: scaled(sink, k) for name, sink in network.heat.sinks.items()})
    assert_same(solved(network), solved(Network(scaled(network.branches, k), heat)), k, k)
