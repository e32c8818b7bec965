"""Find the worst corner of the box for many quantities at once.

By the sign of each quantity's change along each side a first corner is guessed, and random corners and interior
points are tried beside it; then sides are flipped one at a time, for every quantity from its own worst point so far,
until no flip makes anything worse. A box of few sides is searched at every corner.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from .variables import Box

Objectives = Callable[[np.ndarray], tuple[np.ndarray, np.ndarray]]
"""From points of shape (sample, variable) to two arrays of shape (objective, sample), the lower, the worse: those
that are followed by flipping sides, and those that take the worst of what is found on the way."""

WHOLE_BOX_SIDES = 7
"""A box of so many sides or fewer is searched at every corner."""

MAX_ROUNDS = 6
N_RANDOM = 64
SEED = 20
SAME = 1e-9
"""Objectives that differ by less than this share of their size are equal: rounding, not a worse corner."""


@dataclass(frozen=True, slots=True)
class Worst:
    """Where each objective is worst: `points` (sample, variable), `at` the sample of each objective.

    influence: how much each objective changes when one side alone moves across its span from there,
    shape (objective, variable); 0 for a side that does not matter.
    """

    points: np.ndarray
    at: np.ndarray
    influence: np.ndarray


def worst_corners(box: Box, objectives: Objectives) -> Worst:
    """Search the box. The followed objectives come first in the result, then the others."""
    search = _Search(box, objectives)
    search.start()
    for _ in range(MAX_ROUNDS):
        if not search.flip_sides():
            break
    return search.result()


class _Search:
    def __init__(self, box: Box, objectives: Objectives) -> None:
        self.objectives = objectives
        self.low, self.high = box.bounds()
        self.typical = box.typical()
        self.free = np.flatnonzero(self.high > self.low)
        self.n_free = len(self.free)
        self.points = np.empty((0, len(self.typical)))
        self.values = None
        self.n_followed = 0
        self.seen: dict[bytes, int] = {}

    def evaluate(self, points: np.ndarray) -> bool:
        """Add points not seen yet; whether any was new."""
        new = []
        for point in points:
            key = point.tobytes()
            if key not in self.seen:
                self.seen[key] = len(self.points) + len(new)
                new.append(point)
        if not new:
            return False
        followed, others = self.objectives(np.array(new))
        self.n_followed, values = len(followed), np.vstack([followed, others])
        self.points = np.vstack([self.points, new])
        self.values = values if self.values is None else np.hstack([self.values, values])
        return True

    def start(self) -> None:
        """The typical point, each side's ends, then the corner that each objective's signs point to, and random points."""
        ends = [self.typical]
        for side in self.free:
            for end in (self.low, self.high):
                point = self.typical.copy()
                point[side] = end[side]
                ends.append(point)
        self.evaluate(np.array(ends))
        if self.n_free <= WHOLE_BOX_SIDES:
            self.evaluate(self._all_corners())
            return
        index = [self.seen[point.tobytes()] for point in ends]
        at_low, at_high = self.values[:, index[1::2]], self.values[:, index[2::2]]
        corners = np.tile(self.typical, (self.values.shape[0], 1))
        corners[:, self.free] = np.where(at_low < at_high, self.low[self.free], self.high[self.free])
        self.evaluate(np.vstack([corners, self._random()]))

    def _all_corners(self) -> np.ndarray:
        bits = (np.arange(2**self.n_free)[:, None] >> np.arange(self.n_free)) & 1
        points = np.tile(self.typical, (len(bits), 1))
        points[:, self.free] = np.where(bits == 1, self.high[self.free], self.low[self.free])
        return points

    def flip_sides(self) -> bool:
        """Flip every side at every worst point; whether that made any followed objective worse."""
        followed = slice(0, self.n_followed)
        before = self.values[followed].min(axis=1)
        worst = np.unique(self.values[followed].argmin(axis=1))
        if self.n_free:
            self.evaluate(self._neighbours(self.points[worst]))
        after = self.values[followed].min(axis=1)
        return bool((after < before - SAME * np.maximum(1.0, np.abs(before))).any())

    def _neighbours(self, points: np.ndarray) -> np.ndarray:
        out = np.repeat(points, self.n_free, axis=0)
        side = np.tile(self.free, len(points))
        row = np.arange(len(out))
        middle = (self.low + self.high)[side] / 2.0
        out[row, side] = np.where(out[row, side] > middle, self.low[side], self.high[side])
        return out

    def _random(self) -> np.ndarray:
        """Random corners and random interior points."""
        share = np.random.default_rng(SEED).random((2 * N_RANDOM, self.n_free))
        share[:N_RANDOM] = np.round(share[:N_RANDOM])
        points = np.tile(self.typical, (len(share), 1))
        points[:, self.free] = self.low[self.free] + share * (self.high - self.low)[self.free]
        return points

    def result(self) -> Worst:
        """The worst points only, and each objective's answer to every side there as far as it was tried."""
        at = self.values.argmin(axis=1)
        influence = np.zeros((len(at), len(self.typical)))
        for objective, sample in enumerate(at):
            for side, neighbour in zip(self.free, self._neighbours(self.points[sample][None]), strict=True):
                other = self.seen.get(neighbour.tobytes())
                if other is None:
                    other, own = self._from_typical(sample, side)
                else:
                    own = sample
                influence[objective, side] = self.values[objective, other] - self.values[objective, own]
        used, places = np.unique(at, return_inverse=True)
        return Worst(self.points[used], places.reshape(-1), influence)

    def _from_typical(self, sample: int, side: int) -> tuple[int, int]:
        """Where the neighbour was never tried: the same side's two ends around the typical point."""
        ends = []
        for end in (self.low, self.high):
            point = self.typical.copy()
            point[side] = end[side]
            ends.append(self.seen[point.tobytes()])
        is_high = self.points[sample][side] > (self.low[side] + self.high[side]) / 2.0
        return (ends[0], ends[1]) if is_high else (ends[1], ends[0])
