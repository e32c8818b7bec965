"""Surfaces that air cools: their conductance over rise and air temperature, laid down once as a polynomial.

The equations of `physics/` cost hundreds of array operations; inside Newton's method a polynomial through their values
at Chebyshev's points costs twenty, is smooth, and misses them by less than `FIT_WITHIN`.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

LEAST_RISE_K, MOST_RISE_K = 0.1, 200.0
"""A surface cooler than the first is taken to have its coefficient; past the second the laws are not trusted."""

COLDEST_C, HOTTEST_C = -60.0, 120.0
"""The air around a surface."""

N_RISES, N_AIRS = 12, 6
FIT_WITHIN = 1e-3
"""Share of the conductance that the polynomial may miss from a rise of 3 K on, far below what the correlations are good for."""


@dataclass(frozen=True)
class Surface:
    """A surface of one sink or patch, or the walls of an enclosure.

    conductance_w_per_k: from rises and air temperatures, arrays of one shape, to heat over rise [W/K].
    said: what it is made of and assumed to be, for the workings; source: of the equations.
    most_rise_k: past it the laws are not asked; the conductance stays what it is there.
    """

    conductance_w_per_k: Callable[[np.ndarray, np.ndarray], np.ndarray]
    said: str
    source: str
    assumed: tuple[str, ...] = ()
    most_rise_k: float = MOST_RISE_K

    @cached_property
    def logs(self) -> np.ndarray:
        """The logarithm of the conductance at Chebyshev's points, shape (rise, air); not finite where no law holds."""
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.log(self.conductance_w_per_k(*_grid(self.most_rise_k)))


class Surfaces:
    """Several surfaces at once. Arrays are (surface, sample)."""

    def __init__(self, surfaces: Sequence[Surface]) -> None:
        logs = np.array([surface.logs for surface in surfaces]).reshape(len(surfaces), N_RISES, N_AIRS)
        self.most_rise_k = np.array([surface.most_rise_k for surface in surfaces])[:, None]
        self.coefficients = np.einsum("iu,suw,jw->sij", _INTO_POWERS[0], logs, _INTO_POWERS[1])

    def heat(self, surface_c: np.ndarray, air_c: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """Heat given off [W] and its slopes over the surface's and the air's temperature [W/K], shape (surface, sample)."""
        rise = surface_c - air_c
        size = np.hypot(rise, LEAST_RISE_K)
        u, u_inside = _scaled(np.log(np.minimum(size, 1e9)), np.log(LEAST_RISE_K), np.log(self.most_rise_k))
        w, w_inside = _scaled(air_c, COLDEST_C, HOTTEST_C)
        log_g, per_u, per_w = self._polynomial(u, w)
        g = np.exp(log_g)
        per_rise = g + g * per_u * u_inside * (rise / size) ** 2
        return g * rise, per_rise, g * rise * per_w * w_inside - per_rise

    def _polynomial(self, u: np.ndarray, w: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """Σ c_ij · u^i · w^j and its slopes over u and w."""
        us, ws = _powers(u, N_RISES), _powers(w, N_AIRS)
        rows = self.coefficients @ ws
        slopes = (self.coefficients[:, :, 1:] * np.arange(1.0, N_AIRS)) @ ws[:, :-1]
        over_u = rows[:, 1:] * np.arange(1.0, N_RISES)[:, None]
        return tuple(np.einsum("sun,sun->sn", *pair) for pair in ((us, rows), (us[:, :-1], over_u), (us, slopes)))

    def beyond(self, surface_c: np.ndarray, air_c: np.ndarray) -> np.ndarray:
        """Where the laws were not asked: hotter than the most rise, or in other air."""
        return ~((surface_c - air_c <= self.most_rise_k) & (air_c >= COLDEST_C) & (air_c <= HOTTEST_C))


def _scaled(value: np.ndarray, low: float, high: np.ndarray | float) -> tuple[np.ndarray, np.ndarray]:
    """The value on a scale from −1 to 1, held at its ends, and the slope of that scale, 0 where it is held."""
    scaled = (2.0 * value - low - high) / (high - low)
    return np.clip(scaled, -1.0, 1.0), np.where(np.abs(scaled) < 1.0, 2.0 / (high - low), 0.0)


def _powers(x: np.ndarray, n: int) -> np.ndarray:
    """1, x, x², ... of shape (surface, power, sample)."""
    out = np.ones((x.shape[0], n, x.shape[1]))
    for k in range(1, n):
        out[:, k] = out[:, k - 1] * x
    return out


def _points(n: int) -> np.ndarray:
    return np.cos(np.pi * (np.arange(n) + 0.5) / n)


def _grid(most_rise_k: float) -> tuple[np.ndarray, np.ndarray]:
    """Rises and air temperatures at Chebyshev's points, shape (rise, air)."""
    low, high = np.log(LEAST_RISE_K), np.log(most_rise_k)
    rises = np.exp((low + high) / 2.0 + (high - low) / 2.0 * _points(N_RISES))
    airs = (COLDEST_C + HOTTEST_C) / 2.0 + (HOTTEST_C - COLDEST_C) / 2.0 * _points(N_AIRS)
    return tuple(np.meshgrid(rises, airs, indexing="ij"))


_INTO_POWERS = tuple(np.linalg.inv(np.vander(_points(n), n, increasing=True)) for n in (N_RISES, N_AIRS))
"""From values at the points to coefficients of powers, lowest first."""
