"""Elimination over the sample axis against numpy's dense solver, on random sparse matrices."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from drc_power.solve.elimination import SingularPattern, plan_elimination, solve_planned


@settings(max_examples=60, deadline=None)
@given(st.integers(1, 25), st.integers(0, 2**31), st.floats(0.05, 0.5))
def test_equals_dense_solution(n, seed, density):
    rng = np.random.default_rng(seed)
    mask = rng.random((n, n)) < density
    mask[np.arange(n), rng.permutation(n)] = True
    rows, columns = np.nonzero(mask)
    matrices = rng.normal(size=(4, n, n)) * mask
    matrices[1:] = matrices[0] * (1.0 + 0.01 * rng.normal(size=(3, n, n)))
    if np.linalg.cond(matrices).max() > 1e8:
        return
    right = rng.normal(size=(n, 4))
    values = matrices[:, rows, columns].T
    got = solve_planned(plan_elimination(rows, columns, values[:, 0], n), values, right)
    expected = np.linalg.solve(matrices, right.T[..., None])[..., 0].T
    assert got == pytest.approx(expected, rel=1e-6, abs=1e-6)


def test_a_column_without_entries_is_singular():
    with pytest.raises(SingularPattern):
        plan_elimination(np.array([0, 1]), np.array([0, 0]), np.array([1.0, 2.0]), 2)


def test_fill_in_is_small_on_a_chain():
    """A tree eliminates without fill: the slots stay near the number of entries."""
    n = 400
    rows = np.concatenate([np.arange(n), np.arange(n - 1), np.arange(1, n)])
    columns = np.concatenate([np.arange(n), np.arange(1, n), np.arange(n - 1)])
    values = np.concatenate([np.full(n, 2.1), np.full(2 * (n - 1), -1.0)])
    plan = plan_elimination(rows, columns, values, n)
    assert plan.n_slots <= 1.1 * len(rows)
