"""The worst corner: found by signs, confirmed by flips and random points, on functions whose worst corner is known."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from drc_power.faults import Mark
from drc_power.quantity import Span
from drc_power.solve.search import worst_corners
from drc_power.solve.variables import Box


def box_of(n: int) -> Box:
    box = Box()
    for k in range(n):
        box.param(f"x{k}", Span(-1.0, 0.25, 1.0), "voltage", Mark("here"))
    return box


@settings(max_examples=40, deadline=None)
@given(st.integers(1, 12), st.integers(0, 2**31))
def test_linear_functions_have_their_worst_corner_by_sign(n, seed):
    weights = np.random.default_rng(seed).normal(size=(3, n))
    worst = worst_corners(box_of(n), lambda points: (weights @ points.T, weights[:0] @ points.T))
    values = (weights @ worst.points.T)[np.arange(3), worst.at]
    assert values == pytest.approx(-np.abs(weights).sum(axis=1))


@pytest.mark.parametrize("n", [6, 9])
def test_products_change_sign_and_need_flips(n):
    """x0·x1 + x2·x3 + ...: around the typical point the signs mislead where a side looks the other way at the far end."""
    def objective(points):
        return (points[:, 0::3] * points[:, 1::3]).sum(axis=1)[None] - 0.1 * points.sum(axis=1)[None]

    worst = worst_corners(box_of(n), lambda points: (objective(points), np.zeros((0, len(points)))))
    found = objective(worst.points)[0, worst.at[0]]
    corners = np.array(list(itertools.product((-1.0, 1.0), repeat=n)))
    assert found == pytest.approx(objective(corners).min())


def test_influence_names_the_sides_that_matter():
    worst = worst_corners(box_of(8), lambda points: (points[:, [2]].T * 3.0, np.zeros((0, len(points)))))
    assert np.flatnonzero(np.abs(worst.influence[0]) > 1e-9).tolist() == [2]


def test_a_box_without_sides_is_one_point():
    worst = worst_corners(Box(), lambda points: (np.zeros((1, len(points))), np.zeros((1, len(points)))))
    assert worst.points.shape == (1, 0)


@pytest.mark.parametrize("n", [1, 5, 10])
def test_a_worst_point_inside_the_box_is_followed(n):
    """Worst at x0 = 0.3 and x1 = -0.4, a corner in the rest."""
    def objective(points):
        bowl = (points[:, 0] - 0.3) ** 2 + (points[:, 1] + 0.4) ** 2 if n > 1 else (points[:, 0] - 0.3) ** 2
        return (bowl + 0.1 * points[:, 2:].sum(axis=1))[None]

    worst = worst_corners(box_of(n), lambda points: (objective(points), np.zeros((0, len(points)))))
    assert objective(worst.points)[0, worst.at[0]] == pytest.approx(-0.1 * max(0, n - 2), abs=2e-4)


def test_half_duty_is_found():
    """A ripple of D·(1 − D) is largest at a duty of a half, whatever ends the span has."""
    box = Box()
    box.param("duty", Span(0.2, 0.25, 0.95), "ratio", Mark("here"))
    worst = worst_corners(box, lambda points: (-(points * (1.0 - points)).T, np.zeros((0, len(points)))))
    assert worst.points[worst.at[0], 0] == pytest.approx(0.5, abs=1e-3)
