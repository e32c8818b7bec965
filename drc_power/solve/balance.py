"""The self-check of a solution: current in equals current out at every net, power in equals power out of the network,
heat in equals heat out at every sink, patch and enclosure."""

from __future__ import annotations

import numpy as np

from .families import Sources
from .groups import Groups
from .solution import Solution


def current_imbalance(solution: Solution) -> np.ndarray:
    """Largest |Σ i| / Σ |i| over the nets, shape (sample,); 0 where nothing flows."""
    total = np.zeros((solution.system.n + 1, solution.n_samples))
    through = np.zeros_like(total)
    for family, p in zip(solution.system.families, solution.prepared.families, strict=True):
        for nodes, currents, weight in family.flows(p):
            np.add.at(total, nodes, weight * solution.x[currents])
            np.add.at(through, nodes, np.abs(weight * solution.x[currents]))
    nodes = solution.system.nodes
    # The leak that anchors a floating net, some 1e-17 A, is no imbalance: nothing below a millionth counts alone.
    scale = np.maximum(through[nodes], 1e-6 * through[nodes].max(axis=0, initial=0.0) + 1e-300)
    return (np.abs(total[nodes]) / scale).max(axis=0, initial=0.0)


def power_imbalance(solution: Solution) -> np.ndarray:
    """|P of all sources − P of all parts and loads| over P of all sources, shape (sample,); 0 where nothing flows."""
    given = np.zeros(solution.n_samples)
    taken = np.zeros(solution.n_samples)
    for family, p in zip(solution.system.families, solution.prepared.families, strict=True):
        x = solution.x
        if isinstance(family, Sources):
            given += ((x[family.a] - x[family.b]) * x[family.i]).sum(axis=0)
        if isinstance(family, Groups):
            given += family.given_w(x, p)
        for _, power, _ in family.heats(x, p):
            taken += power.sum(axis=0)
    return np.abs(given - taken) / np.maximum(np.abs(given), 1e-300)


def heat_imbalance(solution: Solution) -> np.ndarray:
    """Largest |heat given off − heat taken in| over the heat taken in, of all computed surfaces, shape (sample,)."""
    rows = [share for _, share in solution.system.thermal.imbalance(solution.x, solution.prepared.heat)]
    return np.max(rows, axis=0) if rows else np.zeros(solution.n_samples)
