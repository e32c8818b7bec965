"""Find the worst corner of the box for many quantities at once.

By the sign of each quantity's change along each side a first corner is guessed, and random corners and interior
points are tried beside it; then sides are flipped one at a time, for every quantity from its own worst point so far,
until no flip makes anything worse. A box of few sides is searched at every corner. Where a quantity is worst inside
the box (a matched load, a duty of a half), shrinking steps along the sides that matter follow it there.
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

THRIFTY_SIDES = 4
NOTICEABLE = 2e-3
"""In a thrifty search a side counts when it moves some objective by this share of what the strongest side does."""

MAX_ROUNDS = 6
N_SHRINKS = 14
"""How often the step inside the box is halved, from a quarter of a side: to some 1e-5 of it."""

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


def worst_corners(box: Box, objectives: Objectives, thrifty: bool = False) -> Worst:
    """Search the box. The followed objectives come first in the result, then the others.

    thrifty: for costly objectives; sides that move none of them noticeably around the typical point stay there.
    """
    search = _Search(box, objectives, thrifty)
    search.start()
    if search.n_free:
        for _ in range(MAX_ROUNDS):
            before = search.worst_values()
            while search.flip_sides():
                pass
            search.look_inside()
            search.refine_inside()
            if not search.is_worse_than(before):
                break
    return search.result()


def joined(first: Worst, n: int, second: Worst) -> Worst:
    """Two searches of one box as one: the second's objectives stand after the first `n` of the first."""
    at = np.concatenate([first.at[:n], second.at + len(first.points), first.at[n:]])
    influence = np.vstack([first.influence[:n], second.influence, first.influence[n:]])
    return Worst(np.vstack([first.points, second.points]), at, influence)


class _Search:
    def __init__(self, box: Box, objectives: Objectives, thrifty: bool) -> None:
        self.objectives, self.thrifty = objectives, thrifty
        self.low, self.high = box.bounds()
        self.typical = box.typical()
        self.free = np.flatnonzero(self.high > self.low)
        self.n_free = len(self.free)
        self.points = np.empty((0, len(self.typical)))
        self.values = None
        self.n_followed = 0
        self.seen: dict[bytes, int] = {}

    def evaluate(self, points: np.ndarray) -> None:
        """Add the points that were not seen yet."""
        new = []
        for point in points:
            key = point.tobytes()
            if key not in self.seen:
                self.seen[key] = len(self.points) + len(new)
                new.append(point)
        if not new:
            return
        followed, others = self.objectives(np.array(new))
        self.n_followed, values = len(followed), np.vstack([followed, others])
        self.points = np.vstack([self.points, new])
        self.values = values if self.values is None else np.hstack([self.values, values])

    def start(self) -> None:
        """The typical point, each side's ends, then the corner that each objective's signs point to, and random points."""
        ends = [self.typical]
        for side in self.free:
            for end in (self.low, self.high):
                point = self.typical.copy()
                point[side] = end[side]
                ends.append(point)
        self.evaluate(np.array(ends))
        index = [self.seen[point.tobytes()] for point in ends]
        if self.thrifty:
            index = self._drop_idle_sides(index)
        if self.n_free <= (THRIFTY_SIDES if self.thrifty else WHOLE_BOX_SIDES):
            self.evaluate(self._all_corners())
            return
        at_low, at_high, inside = self.values[:, index[1::2]], self.values[:, index[2::2]], self.values[:, [index[0]]]
        corners = np.tile(self.typical, (self.values.shape[0], 1))
        ends = np.where(at_low < at_high, self.low[self.free], self.high[self.free])
        is_valley = inside < np.minimum(at_low, at_high) - SAME * np.maximum(1.0, np.abs(inside))
        corners[:, self.free] = np.where(is_valley, self.typical[self.free], ends)
        self.evaluate(np.vstack([corners, self._random()]))

    def _drop_idle_sides(self, index: list[int]) -> list[int]:
        """Leave the sides at typical that move no followed objective noticeably; the index without their ends."""
        followed = self.values[: self.n_followed]
        here = followed[:, [index[0]]]
        moves = np.maximum(np.abs(followed[:, index[1::2]] - here), np.abs(followed[:, index[2::2]] - here))
        largest = moves.max(axis=1, keepdims=True, initial=0.0)
        counts = (moves > np.maximum(NOTICEABLE * largest, SAME)).any(axis=0)
        self.free, self.n_free = self.free[counts], int(counts.sum())
        kept = [k for side in np.flatnonzero(counts) for k in (index[1 + 2 * side], index[2 + 2 * side])]
        return [index[0], *kept]

    def _all_corners(self) -> np.ndarray:
        bits = (np.arange(2**self.n_free)[:, None] >> np.arange(self.n_free)) & 1
        points = np.tile(self.typical, (len(bits), 1))
        points[:, self.free] = np.where(bits == 1, self.high[self.free], self.low[self.free])
        return points

    def flip_sides(self) -> bool:
        """Flip every side at every worst point, then all that made it worse together; whether anything got worse."""
        before = self.worst_values()
        points = self._worst_points()
        neighbours = [self._at_ends(point) for point in points]
        self.evaluate(np.vstack([row for _, row in neighbours]))
        self.evaluate(np.array([self._joined(k, point, *rows) for k, (point, rows) in
                                enumerate(zip(points, neighbours, strict=True))]))
        return self.is_worse_than(before)

    def look_inside(self) -> None:
        """Try the middle of every side that matters at every worst point."""
        before = self.worst_values()
        middles = []
        for k, point in enumerate(self._worst_points()):
            sides, rows = self._at_ends(point)
            moved = np.abs(self._values_at(rows)[k] - before[k])
            for side in dict.fromkeys(sides[moved > SAME * max(1.0, abs(before[k]))].tolist()):
                middle = point.copy()
                middle[side] = (self.low[side] + self.high[side]) / 2.0
                middles.append(middle)
        self.evaluate(np.array(middles).reshape(len(middles), len(self.typical)))

    def _worst_points(self) -> np.ndarray:
        return self.points[self.values[: self.n_followed].argmin(axis=1)]

    def worst_values(self) -> np.ndarray:
        return self.values[: self.n_followed].min(axis=1)

    def is_worse_than(self, before: np.ndarray) -> bool:
        return bool((self.worst_values() < before - SAME * np.maximum(1.0, np.abs(before))).any())

    def _at_ends(self, point: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """The sides, and the point with each moved to the ends it is not at: both for one that lies inside."""
        sides, rows = [], []
        for side in self.free.tolist():
            for end in (self.low[side], self.high[side]):
                if point[side] != end:
                    sides.append(side)
                    row = point.copy()
                    row[side] = end
                    rows.append(row)
        return np.array(sides, dtype=int), np.array(rows).reshape(len(rows), len(point))

    def _joined(self, objective: int, point: np.ndarray, sides: np.ndarray, rows: np.ndarray) -> np.ndarray:
        """The point with every move that alone made this objective worse; of two ends the worse one."""
        values, joined = self._values_at(rows)[objective], point.copy()
        for k in np.argsort(-values, kind="stable"):
            if values[k] < self.values[objective, self.seen[point.tobytes()]]:
                joined[sides[k]] = rows[k, sides[k]]
        return joined

    def _values_at(self, points: np.ndarray) -> np.ndarray:
        """The followed objectives at points already evaluated, shape (objective, point)."""
        return self.values[: self.n_followed, [self.seen[point.tobytes()] for point in points]]

    def refine_inside(self) -> None:
        """Follow the quantities that are worst inside the box along the sides on which they are."""
        step = (self.high - self.low) / 4.0
        for _ in range(N_SHRINKS):
            moves = []
            for objective in range(self.n_followed):
                point = self.points[self.values[objective].argmin()]
                moves += [point + sign * step * (np.arange(len(point)) == side) for side in self._inner_sides(objective, point)
                          for sign in (-1.0, 1.0)]
            if not moves:
                return
            self.evaluate(np.clip(np.array(moves), self.low, self.high))
            step = step / 2.0

    def _inner_sides(self, objective: int, point: np.ndarray) -> list[int]:
        """The sides on which a worst point lies inside the box although the quantity depends on them."""
        sides = []
        for side in self.free[(point > self.low)[self.free] & (point < self.high)[self.free]]:
            ends = []
            for end in (self.low, self.high):
                other = point.copy()
                other[side] = end[side]
                at = self.seen.get(other.tobytes())
                ends.append(np.inf if at is None else self.values[objective, at])
            here = self.values[objective].min()
            if max(np.abs(np.array(ends) - here)) > SAME * max(1.0, abs(here)):
                sides.append(int(side))
        return sides

    def _random(self) -> np.ndarray:
        """Random corners and random interior points."""
        n = N_RANDOM // 8 if self.thrifty else N_RANDOM
        share = np.random.default_rng(SEED).random((2 * n, self.n_free))
        share[:n] = np.round(share[:n])
        points = np.tile(self.typical, (len(share), 1))
        points[:, self.free] = self.low[self.free] + share * (self.high - self.low)[self.free]
        return points

    def result(self) -> Worst:
        """The worst points only, and each objective's answer to every side there as far as it was tried."""
        at = self.values.argmin(axis=1)
        influence = np.zeros((len(at), len(self.typical)))
        for objective, sample in enumerate(at):
            for side, neighbour in zip(*self._at_ends(self.points[sample]), strict=True):
                other = self.seen.get(neighbour.tobytes())
                own, other = (sample, other) if other is not None else self._from_typical(sample, side)
                moved = self.values[objective, other] - self.values[objective, own]
                if abs(moved) > abs(influence[objective, side]):
                    influence[objective, side] = moved
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
        return (ends[1], ends[0]) if is_high else (ends[0], ends[1])
