"""A network of records solved as checks solve it: Newton's method, then heat, loop gain and runaway."""

from __future__ import annotations

from collections import defaultdict
from types import SimpleNamespace

import numpy as np

from drc_power.solve.heat import HeatModel
from drc_power.solve.solution import Engine, Solution


class Unrated:
    """A part of which nobody gives a rated temperature."""

    def limit(self, stress: str) -> None:
        return None


def engine_solution(branches, heat: HeatModel | None = None, points: np.ndarray | None = None, reference=("0",)) -> Solution:
    """The solution at the points, shape (sample, variable), polished; a mode whose parts have no ratings stands in."""
    mode = SimpleNamespace(parts=defaultdict(Unrated))
    circuit = SimpleNamespace(branches=tuple(branches), heat=heat or HeatModel((), {}), reference=reference, mode=mode, probes={})
    return Engine(circuit).solve(np.zeros((1, 0)) if points is None else points, polish=True)
