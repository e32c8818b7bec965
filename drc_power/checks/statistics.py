"""What random samples of the box say of each judgement: percentiles toward its limit, and the share beyond it."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, field

import numpy as np

from ..solve.sampling import share_with_interval
from ..solve.solution import Engine
from . import judge_all
from .house import House
from .judgement import Judgement

PERCENTILES = (50.0, 95.0, 99.9)
"""Of the samples this share is no worse than the value given."""


@dataclass(slots=True)
class Tally:
    """Margins and values of every judgement over all batches so far."""

    margins: list[np.ndarray] = field(default_factory=list)
    values: list[np.ndarray] = field(default_factory=list)

    def add(self, judgements: list[Judgement]) -> None:
        self.margins.append(np.array([j.margins() for j in judgements]))
        self.values.append(np.array([j.value for j in judgements]))

    def row(self, k: int) -> dict[str, object] | None:
        """The statistics of one judgement, as the JSON has them; None where no sample gives a margin."""
        margins = np.concatenate([m[k] for m in self.margins])
        values = np.concatenate([v[k] for v in self.values])
        known = np.isfinite(margins)
        if not known.any():
            return None
        order = np.argsort(-margins[known], kind="stable")
        ranked = values[known][order]
        at = {_name(p): float(ranked[min(len(ranked) - 1, int(np.ceil(p / 100.0 * len(ranked))) - 1)]) for p in PERCENTILES}
        share, low, high = share_with_interval(int((margins[known] < 0.0).sum()), int(known.sum()))
        return {"n": int(len(margins)), "unsolved": int((~known).sum()), **at, "beyond": share, "beyond_interval": [low, high]}


def _name(percentile: float) -> str:
    return f"p{percentile:g}".replace(".", "_")


def sampled(engine: Engine, house: House, batches: Iterator[np.ndarray], progress: Callable[[int], None]) -> Tally:
    """Judge every batch of points."""
    tally, done = Tally(), 0
    for points in batches:
        tally.add(judge_all(engine.solve(points), house))
        done += len(points)
        progress(done)
    return tally
