"""Transient thermal impedance: tables, Foster and Cauer networks, one into the other.

| symbol | name here | unit | meaning |
|---|---|---|---|
| Z_th(t) | zth_k_per_w | K/W | rise after time t per watt switched on at 0 |
| R_i, τ_i | r_k_per_w, tau_s | K/W, s | term of a Foster network, τ_i = R_i · C_i |
| R_k, C_k | r_k_per_w, c_j_per_k | K/W, J/K | link and node of a Cauer ladder, junction first |

A Foster network is a sum of terms that describes one place and cannot be cut or lengthened; a Cauer ladder
is a chain of bodies to which a sink can be added.
"""

from __future__ import annotations

from fractions import Fraction
from itertools import zip_longest
from typing import NamedTuple

import numpy as np

from drc_power.physics.range import nan_where, refuse_unless

PER_DECADE = 10
DECADES_BELOW = 2
"""How finely a curve is fitted, and how far below its first point the root law is looked at."""

WEIGHT_FINAL, WEIGHT_AT_POINTS, WEIGHT_BETWEEN, WEIGHT_BELOW = 300.0, 30.0, 1.0, 0.1
"""What a fit is held to: the final value and the points as printed, then the lines between, least the root law."""


class Foster(NamedTuple):
    """A Foster network, shortest term first, and how far it is from the table that it was fitted to."""

    r_k_per_w: np.ndarray
    tau_s: np.ndarray
    residual: float
    """Largest deviation at the curve's own points, as a share of them [-]."""
    longest_s: float
    """Until when the network stands for its curve [s]: infinity where the final value was given."""


def foster_zth_k_per_w(t_s, r_k_per_w, tau_s):
    """Impedance of a Foster network: Z_th(t) = Σ R_i · (1 − e^(−t/τ_i)).

    t_s: time since the power was switched on, not below 0 [s], any shape.
    r_k_per_w: resistances of the terms [K/W], shape (term,).
    tau_s: time constants, above 0 [s], shape (term,).
    Returns the impedance [K/W], shape of t_s; NaN for a negative time.
    Source: JEDEC JESD51-14 and every maker's note on Foster models.

    >>> round(float(foster_zth_k_per_w(0.01, [0.5, 1.0], [0.01, 1.0])), 4)
    0.326
    """
    t_s = np.asarray(t_s, dtype=float)
    r_k_per_w, tau_s = _checked_terms(r_k_per_w, tau_s)
    zth_k_per_w = np.zeros(t_s.shape)
    for r, tau in zip(r_k_per_w, tau_s, strict=True):
        zth_k_per_w += -r * np.expm1(-np.maximum(t_s, 0.0) / tau)
    return nan_where(~(t_s >= 0.0), zth_k_per_w)


def table_zth_k_per_w(t_s, times_s, zth_k_per_w, rth_k_per_w=None):
    """Impedance from a data sheet's curve, straight in log-log between its points.

    t_s: time since the power was switched on, not below 0, infinity for steady state [s], any shape.
    times_s: abscissae, above 0 and rising [s], shape (point,).
    zth_k_per_w: ordinates, above 0 and not falling [K/W], shape (point,).
    rth_k_per_w: final value [K/W]; left out, nothing is said past the last point.
    Returns the impedance [K/W], shape of t_s; NaN for a negative time and past the last point without a final
    value. Before the first point it falls with √t, past the last it goes on along the last line up to the
    final value. Both read high, since a chip falls at least so fast towards short times and its curve bends
    downward towards long ones.
    Source: common practice; one-dimensional heat flow into a half space for √t.

    >>> round(float(table_zth_k_per_w(3e-3, [1e-3, 10e-3], [0.13, 0.5])), 4)
    0.2472
    """
    lines = _lines(*_checked_table(times_s, zth_k_per_w), rth_k_per_w)
    t_s = np.asarray(t_s, dtype=float)
    line = lines[:, np.searchsorted(lines[0, 1:], t_s, side="right")]
    return nan_where(~_answered(t_s, times_s, rth_k_per_w), _on_line(np.maximum(t_s, 0.0), line))


def table_zth_integral_k_s_per_w(t_s, times_s, zth_k_per_w, rth_k_per_w=None):
    """Integral of the impedance from 0 to t, exact for the curve of `table_zth_k_per_w`: the answer to a ramp.

    t_s: upper end of the integral, not below 0 and finite [s], any shape.
    times_s: abscissae, above 0 and rising [s], shape (point,).
    zth_k_per_w: ordinates, above 0 and not falling [K/W], shape (point,).
    rth_k_per_w: final value [K/W]; left out, nothing is said past the last point.
    Returns the integral, the rise per watt a second of rising power [K.s/W], shape of t_s; NaN where
    `table_zth_k_per_w` is.
    Source: integral of z · (t/t_k)^m, line by line.

    >>> round(float(table_zth_integral_k_s_per_w(0.04, [0.01], [1.0], 1.0)), 9)
    0.036666667
    """
    lines = _lines(*_checked_table(times_s, zth_k_per_w), rth_k_per_w)
    t_s = np.asarray(t_s, dtype=float)
    k = np.searchsorted(lines[0, 1:], t_s, side="right")
    whole = np.append(0.0, np.cumsum(_integral_on_line(lines[0, 1:], lines[:, :-1])))
    integral = whole[k] + _integral_on_line(np.maximum(t_s, 0.0), lines[:, k])
    return nan_where(~_answered(t_s, times_s, rth_k_per_w), integral)


def fit_foster(times_s, zth_k_per_w, rth_k_per_w=None):
    """Foster network of a data sheet's curve, by non-negative least squares on a fixed grid of time constants.

    times_s: abscissae, above 0 and rising [s], shape (point,).
    zth_k_per_w: ordinates, above 0 and not falling [K/W], shape (point,).
    rth_k_per_w: final value, which the network goes on to past the last point [K/W]; left out, the network
        says nothing past that point.
    Returns a `Foster`: resistances [K/W], time constants [s], the largest deviation at the curve's own points as
    a share of them [-], and how long it holds [s]. Between two points with a kink the network bulges above the
    straight line.
    Raises OutsideRange for a curve that falls or starts at 0.
    Source: Lawson and Hanson, Solving Least Squares Problems, 1974 (scipy.optimize.nnls); common practice.

    >>> fit = fit_foster([1e-4, 1e-3, 1e-2, 1e-1], [0.04, 0.13, 0.5, 1.2], 1.36)
    >>> round(float(fit.r_k_per_w.sum()), 2), fit.residual < 0.01
    (1.36, True)
    """
    from scipy.optimize import nnls

    times_s, zth_k_per_w = _checked_table(times_s, zth_k_per_w)
    start_s = times_s[0] / 10.0**DECADES_BELOW
    at_s = np.union1d(_per_decade(start_s, times_s[-1]), times_s)
    taus_s = _per_decade(start_s / 3.0, 3.0 * times_s[-1])
    # Shares of the curve's own value, so that the shortest times count as much as the longest.
    shares = -np.expm1(-at_s[:, np.newaxis] / taus_s) / table_zth_k_per_w(at_s, times_s, zth_k_per_w)[:, np.newaxis]
    printed = np.isin(at_s, times_s)
    weights = np.where(printed, WEIGHT_AT_POINTS, np.where(at_s < times_s[0], WEIGHT_BELOW, WEIGHT_BETWEEN))
    rows = shares * weights[:, np.newaxis]
    if rth_k_per_w is not None:
        final = max(rth_k_per_w, zth_k_per_w[-1])
        rows, weights = np.vstack([rows, np.full(taus_s.size, WEIGHT_FINAL / final)]), np.append(weights, WEIGHT_FINAL)
    r_k_per_w = nnls(rows, weights)[0]
    residual = np.max(np.abs(shares[printed] @ r_k_per_w - 1.0))
    longest_s = float(times_s[-1]) if rth_k_per_w is None else np.inf
    return Foster(r_k_per_w[r_k_per_w > 0.0], taus_s[r_k_per_w > 0.0], float(residual), longest_s)


def foster_to_cauer(r_k_per_w, tau_s):
    """Cauer ladder of a Foster network: the continued fraction of Z(s) = Σ R_i/(1 + s · τ_i).

    Carried out in exact rational arithmetic: in floating point the polynomials lose every digit beyond about
    six terms.

    r_k_per_w: resistances of the terms, above 0 [K/W], shape (term,).
    tau_s: time constants, above 0 [s], shape (term,); equal ones are merged.
    Returns (resistances [K/W], capacities [J/K]) from the junction outward, each of shape (node,).
    Source: W. Cauer's canonical form; Euclid's algorithm on numerator and denominator of Z(s).

    >>> r_k_per_w, c_j_per_k = foster_to_cauer([1.0, 2.0], [0.01, 1.0])
    >>> r_k_per_w.round(6).tolist(), c_j_per_k.round(6).tolist()
    ([1.040192, 1.959808], [0.009804, 0.500349])
    """
    refuse_unless(np.greater(r_k_per_w, 0.0), "a ladder needs resistances above 0 K/W")
    merged = {}
    for r, tau in zip(*_checked_terms(r_k_per_w, tau_s), strict=True):
        merged[tau] = merged.get(tau, Fraction(0)) + Fraction(r)
    terms = [(r, Fraction(tau)) for tau, r in merged.items()]
    numerator, denominator = _rational_impedance(terms)
    links, capacities = [], []
    for _ in terms:
        capacities.append(denominator[-1] / numerator[-1])
        denominator = _minus(denominator, [Fraction(0), *(capacities[-1] * n for n in numerator)])
        links.append(numerator[-1] / denominator[-1])
        numerator = _minus(numerator, [links[-1] * d for d in denominator])
    return np.array(links, dtype=float), np.array(capacities, dtype=float)


def cauer_to_foster(r_k_per_w, c_j_per_k):
    """Foster network of a Cauer ladder: eigenvalues 1/τ_i of the ladder and their share at the junction.

    r_k_per_w: resistances from each node to the next, the last one to the reference, above 0 [K/W], shape (node,).
    c_j_per_k: heat capacity of each node, junction first, above 0 [J/K], shape (node,).
    Returns (resistances [K/W], time constants [s]), shortest first, each of shape (node,).
    Source: modal form of C · dT/dt = −G · T + P; by singular values of √(1/R) · A · √(1/C), A the links'
    incidence, which keeps short and long time constants equally sharp.

    >>> r_k_per_w, tau_s = cauer_to_foster([1.040192, 1.959808], [0.0098039, 0.500349])
    >>> r_k_per_w.round(4).tolist(), tau_s.round(4).tolist()
    ([1.0, 2.0], [0.01, 1.0])
    """
    r_k_per_w, c_j_per_k = np.asarray(r_k_per_w, dtype=float), np.asarray(c_j_per_k, dtype=float)
    refuse_unless((r_k_per_w > 0.0) & (c_j_per_k > 0.0), "a ladder needs resistances and capacities above 0")
    incidence = np.eye(r_k_per_w.size) - np.eye(r_k_per_w.size, k=1)
    _, roots, modes = np.linalg.svd(incidence / np.sqrt(r_k_per_w[:, np.newaxis] * c_j_per_k))
    tau_s = 1.0 / roots**2
    return modes[:, 0] ** 2 * tau_s / c_j_per_k[0], tau_s


def _checked_terms(r_k_per_w, tau_s):
    r_k_per_w, tau_s = np.atleast_1d(np.asarray(r_k_per_w, dtype=float)), np.atleast_1d(np.asarray(tau_s, dtype=float))
    paired = r_k_per_w.shape == tau_s.shape and tau_s.ndim == 1
    refuse_unless(paired, "a Foster network has a time constant per resistance")
    refuse_unless((r_k_per_w >= 0.0) & (tau_s > 0.0) & np.isfinite(tau_s), "Foster terms must be positive")
    return r_k_per_w, tau_s


def _checked_table(times_s, zth_k_per_w):
    times_s, zth_k_per_w = np.asarray(times_s, dtype=float), np.asarray(zth_k_per_w, dtype=float)
    refuse_unless(times_s.ndim == 1 and times_s.shape == zth_k_per_w.shape, "a curve needs an impedance per time")
    refuse_unless(times_s.size and np.all((times_s > 0) & (zth_k_per_w > 0)), "times and impedances must be above 0")
    refuse_unless(np.diff(times_s) > 0, "the times of an impedance curve must rise from point to point")
    refuse_unless(np.diff(zth_k_per_w) >= 0, "an impedance curve must not fall with time")
    return times_s, zth_k_per_w


def _lines(times_s, zth_k_per_w, rth_k_per_w):
    """Lines z · (t/t_z)^m of a completed table: rows start, t_z, z, m; the root law first, the level one last."""
    exponents = np.append(0.5, np.diff(np.log(zth_k_per_w)) / np.diff(np.log(times_s)))
    final = max(rth_k_per_w or 0.0, zth_k_per_w[-1])
    if final > zth_k_per_w[-1]:
        # A last line that is level never gets there; the final value then follows at once.
        growth = (final / zth_k_per_w[-1]) ** (1.0 / exponents[-1]) if exponents[-1] > 0.01 else 1.0 + 1e-9
        exponents = np.append(exponents, np.log(final / zth_k_per_w[-1]) / np.log(growth))
        times_s, zth_k_per_w = np.append(times_s, growth * times_s[-1]), np.append(zth_k_per_w, final)
    anchors_s, anchors_k_per_w = np.append(times_s[0], times_s), np.append(zth_k_per_w[0], zth_k_per_w)
    return np.array([np.append(0.0, times_s), anchors_s, anchors_k_per_w, np.append(exponents, 0.0)])


def _answered(t_s, times_s, rth_k_per_w):
    return (t_s >= 0.0) & (t_s <= (np.inf if rth_k_per_w is not None else times_s[-1]))


def _on_line(t_s, line):
    _, anchor_s, anchor_k_per_w, exponent = line
    return anchor_k_per_w * (t_s / anchor_s) ** exponent


def _integral_on_line(t_s, line):
    start_s, anchor_s, anchor_k_per_w, exponent = line
    powers = (t_s / anchor_s) ** (exponent + 1.0) - (start_s / anchor_s) ** (exponent + 1.0)
    return anchor_k_per_w * anchor_s / (exponent + 1.0) * powers


def _per_decade(start_s, end_s):
    n_steps = max(1, int(np.ceil(PER_DECADE * np.log10(end_s / start_s))))
    return np.geomspace(start_s, end_s, n_steps + 1)


def _rational_impedance(terms):
    """Numerator and denominator of Σ R/(1 + s · τ), coefficients by rising power of s."""
    numerator, denominator = [], [Fraction(1)]
    for r, tau in terms:
        numerator = _plus(_times_pole(numerator, tau), [r * d for d in denominator])
        denominator = _times_pole(denominator, tau)
    return numerator, denominator


def _times_pole(polynomial, tau):
    """The polynomial times (1 + s · τ)."""
    return _plus(polynomial, [Fraction(0), *(tau * c for c in polynomial)])


def _plus(one, other):
    return [a + b for a, b in zip_longest(one, other, fillvalue=Fraction(0))]


def _minus(minuend, subtrahend):
    """Difference of two polynomials of one degree whose leading terms cancel."""
    return [a - b for a, b in zip(minuend, subtrahend, strict=True)][:-1]
