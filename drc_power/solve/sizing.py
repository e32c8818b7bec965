"""Inverse sizing: how far one quantity can be moved until a margin function just reaches zero.

The margin is the worst over the box at each value of the quantity. The worst points of the box as it stands are
known; the turn is found on them, and confirmed by flipping every side of the box at the turn. Where a flip is worse
there, its point joins the known ones and the turn is found anew.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from .variables import Box

Margins = Callable[[np.ndarray], np.ndarray]
"""From points of shape (sample, variable) to the least margin at each, shape (sample,); NaN where it is unproven."""

N_GRID = 41
"""Values between the present one and the end of a lever's reach."""

N_STRIDES = 5
N_ZOOMS = 7
"""The turn is found to 5⁻⁷ of a grid step."""

MAX_ROUNDS = 6
NOT_MET = -1e6
"""The margin of an unproven point."""

AGREES = 1e-6
"""A margin this near to zero is zero: the rule is just met."""


@dataclass(frozen=True, slots=True)
class Lever:
    """One quantity that may be moved: the side of the box it is, where it stands, how far it may go, and how it is written.

    worse: +1 when more of it is expected to be worse (a load's current, an ambient), −1 when less is (a load's resistance).
    """

    name: str
    index: int
    now: float
    least: float
    most: float
    dimension: str
    worse: int = 1

    def values(self, low: float, high: float) -> np.ndarray:
        """Values between two ends, evenly on a logarithmic scale where both ends are above zero."""
        if low > 0.0 and self.dimension != "temperature":
            return np.geomspace(low, high, N_GRID)
        return np.linspace(low, high, N_GRID)


@dataclass(frozen=True, slots=True)
class Boundary:
    """Where a lever may go: `value` just meets the rule; None where nothing in its reach does, or nothing breaks it."""

    lever: Lever
    value: float | None
    passes_now: bool


def boundary(box: Box, margins: Margins, lever: Lever, worst: np.ndarray) -> Boundary:
    """The value nearest to the present one at which the rule turns from met to not met, or back.

    worst: the worst points known of the box as it stands, shape (sample, variable).
    """
    points = worst
    passes = bool(_margin_at(margins, points, lever, np.array([lever.now]))[0] >= -AGREES)
    for _ in range(MAX_ROUNDS):
        value = _nearest_turn(margins, points, lever, passes)
        if value is None:
            break
        flipped = _flipped(box, points, lever, value)
        found = margins(flipped)
        found = np.where(np.isnan(found), NOT_MET, found)
        if found.min() >= -AGREES:
            return Boundary(lever, value, passes)
        points = np.vstack([points, flipped[found.argmin()]])
    return Boundary(lever, None, passes)


def _flipped(box: Box, points: np.ndarray, lever: Lever, value: float) -> np.ndarray:
    """The points with the lever at a value, and each of them with every other side at each of its ends."""
    low, high = box.bounds()
    held = points.copy()
    held[:, lever.index] = value
    sides = [k for k in np.flatnonzero(high > low) if k != lever.index]
    rows = [held]
    for side in sides:
        for end in (low[side], high[side]):
            row = held.copy()
            row[:, side] = end
            rows.append(row)
    return np.unique(np.vstack(rows), axis=0)


def _margin_at(margins: Margins, points: np.ndarray, lever: Lever, values: np.ndarray) -> np.ndarray:
    """The least margin over the points at each value of the lever; an unproven one counts as not met."""
    tried = np.repeat(points, len(values), axis=0)
    tried[:, lever.index] = np.tile(values, len(points))
    found = margins(tried).reshape(len(points), len(values))
    return np.where(np.isnan(found), NOT_MET, found).min(axis=0)


def _nearest_turn(margins: Margins, points: np.ndarray, lever: Lever, passes: bool) -> float | None:
    """Walk from the present value toward worse (while it passes) or better (while it does not) to the first turn."""
    toward = lever.worse if passes else -lever.worse
    end = lever.most if toward > 0 else lever.least
    grid = _from_now(lever, end)
    for first in range(0, len(grid) - 1, N_STRIDES):
        # A stretch at a time: far out, where parts run away, every answer is costly.
        stretch = grid[first : first + N_STRIDES + 1]
        turned = np.flatnonzero((_margin_at(margins, points, lever, stretch) >= -AGREES / 2) != passes)
        if len(turned) and turned[0] > 0:
            return _bisected(margins, points, lever, stretch[turned[0] - 1], stretch[turned[0]], passes)
        if len(turned):
            return float(stretch[0])
    return None


def _from_now(lever: Lever, end: float) -> np.ndarray:
    grid = lever.values(min(lever.now, end), max(lever.now, end))
    return grid if end > lever.now else grid[::-1]


def _bisected(margins: Margins, points: np.ndarray, lever: Lever, before: float, after: float, passes: bool) -> float:
    """The turn between two values, on the side that meets the rule."""
    for _ in range(N_ZOOMS):
        inner = np.linspace(before, after, N_STRIDES + 1)
        meets = _margin_at(margins, points, lever, inner) >= -AGREES / 2
        turned = np.flatnonzero(meets != passes)
        if not len(turned) or turned[0] == 0:
            break
        before, after = inner[turned[0] - 1], inner[turned[0]]
    return float(before if passes else after)
