"""Monte Carlo over the box: random points, and what they say of a quantity."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from .variables import Box

BATCH = 2000
"""Samples solved together: enough to fill numpy, few enough to keep memory small."""

CONFIDENCE_Z = 1.959963984540054
"""Two-sided 95 % point of the normal distribution (from memory; scipy.stats.norm.ppf(0.975) in the test)."""

DISTRIBUTIONS = ("uniform", "normal")


def sample_batches(box: Box, n_samples: int, seed: int, stream: int, distribution: str = "uniform") -> Iterator[np.ndarray]:
    """Random points of the box in batches, each of shape (sample, variable); the same for the same seed and stream.

    uniform: every value of a span alike. normal: the span's half widths are three sigma on either side of typical,
    cut at its ends.
    """
    low, high = box.bounds()
    typical = box.typical()
    rng = np.random.default_rng([seed, stream])
    for first in range(0, n_samples, BATCH):
        n = min(BATCH, n_samples - first)
        if distribution == "uniform":
            yield low + rng.random((n, len(low))) * (high - low)
        else:
            yield _truncated_normal(rng, n, low, typical, high)


def _truncated_normal(rng, n: int, low: np.ndarray, typical: np.ndarray, high: np.ndarray) -> np.ndarray:
    deviates = rng.standard_normal((n, len(low)))
    while (outside := np.abs(deviates) > 3.0).any():
        deviates[outside] = rng.standard_normal(int(outside.sum()))
    return typical + deviates / 3.0 * np.where(deviates < 0.0, typical - low, high - typical)


def share_with_interval(n_beyond: int, n: int) -> tuple[float, float, float]:
    """A share of samples and its 95 % confidence interval by Wilson's score.

    Source: Wilson, Journal of the American Statistical Association 22, 1927; E. B. Wilson's score interval.

    >>> [round(p, 4) for p in share_with_interval(0, 1000)]
    [0.0, 0.0, 0.0038]
    """
    if n == 0:
        return math.nan, 0.0, 1.0
    share, z2 = n_beyond / n, CONFIDENCE_Z**2
    middle = (share + z2 / (2 * n)) / (1 + z2 / n)
    half = CONFIDENCE_Z / (1 + z2 / n) * math.sqrt(share * (1 - share) / n + z2 / (4 * n * n))
    return share, max(0.0, middle - half), min(1.0, middle + half)
