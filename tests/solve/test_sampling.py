"""Random points of the box, and the interval of a share, against scipy."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from drc_power.faults import Mark
from drc_power.quantity import Span
from drc_power.solve.sampling import CONFIDENCE_Z, sample_batches, share_with_interval
from drc_power.solve.variables import Box


def box() -> Box:
    found = Box()
    found.param("rail", Span(21.0, 24.0, 29.0), "voltage", Mark("here"))
    found.param("load", Span(0.1, 0.2, 0.3), "current", Mark("here"))
    return found


@pytest.mark.parametrize("distribution", ["uniform", "normal"])
def test_every_sample_lies_in_the_box_and_a_seed_gives_the_same(distribution):
    points, again = (np.vstack(list(sample_batches(box(), 4500, 7, 0, distribution))) for _ in range(2))
    assert points.shape == (4500, 2)
    assert (points == again).all()
    assert (points >= [21.0, 0.1]).all()
    assert (points <= [29.0, 0.3]).all()


def test_modes_draw_different_samples():
    one, other = (np.vstack(list(sample_batches(box(), 10, 7, stream))) for stream in (0, 1))
    assert (one != other).all()


def test_uniform_samples_are_uniform():
    rail = np.vstack(list(sample_batches(box(), 20_000, 3, 0)))[:, 0]
    assert stats.kstest(rail, stats.uniform(21.0, 8.0).cdf).pvalue > 0.001


def test_normal_samples_are_a_normal_cut_at_three_sigma():
    load = np.vstack(list(sample_batches(box(), 20_000, 3, 0, "normal")))[:, 1]
    assert stats.kstest(load, stats.truncnorm(-3.0, 3.0, 0.2, 0.1 / 3.0).cdf).pvalue > 0.001


def test_the_constant_of_the_interval():
    assert CONFIDENCE_Z == pytest.approx(stats.norm.ppf(0.975), abs=1e-12)


@pytest.mark.parametrize(("beyond", "n"), [(0, 100), (3, 100), (50, 100), (999, 1000), (1000, 1000)])
def test_the_interval_is_wilsons(beyond, n):
    expected = stats.binomtest(beyond, n).proportion_ci(0.95, method="wilson")
    assert share_with_interval(beyond, n) == pytest.approx((beyond / n, expected.low, expected.high), abs=1e-12)
