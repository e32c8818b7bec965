"""Circuits for the solver's tests, built from records, without a board."""

from __future__ import annotations

import numpy as np

from drc_power.solve.branches import Curve, Drop, Efficiency, Resistive
from drc_power.solve.heat import HeatModel, HeatPath, Sink
from drc_power.solve.newton import Solver
from drc_power.solve.start import starting_point
from drc_power.solve.system import System
from drc_power.solve.variables import Param

P = Param
RDS_SCALE = Curve(np.array([25.0, 100.0, 150.0]), np.array([1.0, 1.45, 1.85]))
DIODE = Drop(P(0.4), P(0.05))


def flat(efficiency: float) -> Efficiency:
    """An efficiency that depends on nothing."""
    return Efficiency((0.0,), (Curve(np.array([0.0]), np.array([efficiency])),))


def link(key: str, a: str, b: str, ohm: float, part: str | None = None) -> Resistive:
    return Resistive(key, a, b, P(ohm), part)


def solve(branches, points=None, heat: HeatModel | None = None, reference=("0",)):
    """Node voltages and currents by name, each of shape (sample,), and where Newton's method converged."""
    points = np.zeros((1, 0)) if points is None else np.asarray(points, dtype=float)
    system = System(branches, heat or HeatModel((), {}), reference)
    x, converged = Solver(system).solve(starting_point(system, points), system.prepare(points))
    named = {(kind, name): x[at] for (kind, name), at in system.layout.names.items()}
    return named, converged, system, x


def own_heat(*rows: tuple[str, float, float], sink: tuple[float, float] | None = None) -> HeatModel:
    """Paths of (part, start °C, K/W); with a sink (start °C, K/W) all of them stand on it."""
    if sink is None:
        return HeatModel(tuple(HeatPath(part, P(start), (P(r),)) for part, start, r in rows), {})
    paths = tuple(HeatPath(part, P(start), (P(r),), P(r), "sink") for part, start, r in rows)
    return HeatModel(paths, {"sink": Sink("sink", P(sink[1]), P(sink[0]))})
