"""A first guess of every node's voltage: that of the electrically nearest stiff point."""

from __future__ import annotations

import heapq
from collections import defaultdict

import numpy as np

from .branches import Linear, OneWay, Resistive, Source, Switching
from .bridges import HalfBridge
from .converters import Converter
from .groups import Groups, key_of
from .rectifier import Rectifier
from .system import System
from .track_family import Track
from .variables import values_of

STARTING_A = 1e-3
"""Diodes start as conducting: from there Newton's method finds the ones that do not."""

DIODE_OHM = 0.1
"""How far a diode is from its neighbour in this search; a resistor is as far as its resistance."""

TRACK_OHM = 1e-3


def starting_point(system: System, points: np.ndarray) -> np.ndarray:
    """Unknowns of shape (unknown + 1, sample) to start Newton's method from."""
    n_samples = points.shape[0]
    x = np.zeros((system.n + 1, n_samples))
    nodes, currents = system.layout.of_kind("node"), system.layout.of_kind("current")
    voltages = _nearest_voltages(system, points)
    for name, at in nodes.items():
        if name in voltages:
            x[at] = voltages[name]
    for branch in system.branches:
        if isinstance(branch, OneWay):
            x[currents[branch.key]] = STARTING_A
    for group in (g for family in system.families if isinstance(family, Groups) for g in family.branches):
        for slot, amperes in group.start.items():
            x[currents[key_of(group, slot)]] = amperes
    system.thermal.place_start(x, system.thermal.prepare(points), points)
    return x


def _nearest_voltages(system: System, points: np.ndarray) -> dict[str, np.ndarray]:
    """Dijkstra's search from the reference and through sources and regulators, by resistance."""
    edges = _edges(system, points)
    zero = np.zeros(points.shape[0])
    queue = [(0.0, k, name, zero) for k, name in enumerate(sorted(system.layout.reference))]
    heapq.heapify(queue)
    found: dict[str, np.ndarray] = {}
    ticket = len(queue)
    while queue:
        distance, _, name, voltage = heapq.heappop(queue)
        if name in found:
            continue
        found[name] = voltage
        for other, length, rise in edges[name]:
            if other not in found:
                ticket += 1
                heapq.heappush(queue, (distance + length, ticket, other, voltage + rise))
    return found


def _edges(system: System, points: np.ndarray) -> dict[str, list[tuple[str, float, np.ndarray | float]]]:
    """From each node: the node reached, how far it is, and by how much its voltage differs."""
    edges = defaultdict(list)
    for branch in system.branches:
        if isinstance(branch, Source):
            volts = values_of((branch.voltage_v,), points)[0]
            edges[branch.b].append((branch.a, 0.0, volts))
        elif isinstance(branch, (Linear, Switching)):
            edges[branch.ground].append((branch.b, 1e-6, values_of((branch.setpoint_v,), points)[0]))
        elif isinstance(branch, Resistive):
            edges[branch.a].append((branch.b, branch.r_ohm.value, 0.0))
            edges[branch.b].append((branch.a, branch.r_ohm.value, 0.0))
        elif isinstance(branch, OneWay):
            edges[branch.a].append((branch.b, DIODE_OHM, -_first_drop(branch, points)))
        elif isinstance(branch, Rectifier):
            edges[branch.a].append((branch.b, 1e-3, np.sqrt(2.0) * values_of((branch.rms_v,), points)[0]))
        elif isinstance(branch, HalfBridge):
            edges[branch.main_node].append((branch.x, DIODE_OHM, 0.0))
        elif isinstance(branch, Converter):
            volts = values_of((branch.setpoint_v,), points)[0]
            edges[branch.ground] += [(branch.held, 1e-6, volts), (branch.b, 2e-6, volts)]
    return edges


def _first_drop(branch: OneWay, points: np.ndarray) -> np.ndarray | float:
    """The drop at the smallest current, or a little more, so that the diode starts as conducting."""
    if branch.drop.lines:
        return max(curve.ys[0] for _, curve in branch.drop.lines)
    return values_of((branch.drop.knee_v,), points)[0]
