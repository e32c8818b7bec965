"""The hottest moment of an event, between its samples too.

| symbol | name here | unit | meaning |
|---|---|---|---|
| θ_i | terms_k | K | rise of each Foster term; their sum is the rise of the junction |
| dθ/dt | slope_k_per_s | K/s | Σ (R_i · P − θ_i)/τ_i |

Where power falls along a straight line the junction may peak inside it: a capacitor's charge, drawn with
two corners, peaks half way. Only lines that could hold the peak are searched.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.transient import foster_response_k

N_HALVINGS = 60
"""Halvings of a time step: past the last digit of a double."""


def foster_peak_k(t_s, p_w, r_k_per_w, tau_s, start_k=None):
    """Highest rise of a Foster network under power that moves in straight lines, and when.

    t_s: times, not falling [s], shape (time,).
    p_w: power at those times [W], shape (time,) or (corner, time).
    r_k_per_w: resistances of the terms [K/W], shape (term,).
    tau_s: time constants [s], shape (term,).
    start_k: rise of each term at the first time, 0 when left out [K], shape (term,) or (term, corner).
    Returns (rise [K], time [s]), each of shape () or (corner,).
    Raises OutsideRange as `foster_response_k`.
    Source: exact solution of τ · dθ/dt + θ = R · P for straight P; zero of its slope by bisection.

    >>> peak_k, when_s = foster_peak_k([0.0, 1.0], [10.0, 0.0], [1.0], [0.5])
    >>> round(float(peak_k), 4), round(float(when_s), 4)
    (4.5069, 0.5493)
    """
    t_s, p_w = np.asarray(t_s, dtype=float), np.asarray(p_w, dtype=float)
    rows_w = np.atleast_2d(p_w)
    starts_k = np.zeros((np.size(r_k_per_w), 1)) if start_k is None else np.asarray(start_k, dtype=float)
    starts_k = np.broadcast_to(starts_k.reshape(np.size(r_k_per_w), -1), (np.size(r_k_per_w), len(rows_w)))
    found = [_peak_of_row(t_s, row_w, r_k_per_w, tau_s, row_k) for row_w, row_k in zip(rows_w, starts_k.T, strict=True)]
    peaks_k, times_s = np.array(found).T
    return (peaks_k, times_s) if p_w.ndim > 1 else (peaks_k[0], times_s[0])


def _peak_of_row(t_s, p_w, r_k_per_w, tau_s, start_k):
    rise_k, slope_k_per_s, bound_k = np.zeros(t_s.size), np.zeros(t_s.size), np.zeros(t_s.size - 1)
    terms = list(zip(np.atleast_1d(r_k_per_w), np.atleast_1d(tau_s), np.atleast_1d(start_k), strict=True))
    for r, tau, start in terms:
        term_k = foster_response_k(t_s, p_w, [r], [tau], [start])
        rise_k += term_k
        slope_k_per_s += (r * p_w - term_k) / tau
        # Within a step a term gains at most what the step's higher power would give it.
        headroom_k = np.maximum(r * np.maximum(p_w[:-1], p_w[1:]) - term_k[:-1], 0.0)
        bound_k += term_k[:-1] - np.expm1(-np.diff(t_s) / tau) * headroom_k
    best = int(np.argmax(rise_k))
    turns = (slope_k_per_s[:-1] > 0.0) & (slope_k_per_s[1:] < 0.0) & (bound_k > rise_k[best])
    steps = np.flatnonzero(turns & (np.diff(t_s) > 0.0))
    if not steps.size:
        return rise_k[best], t_s[best]
    inner_k, inner_s = _turning_points(t_s, p_w, terms, steps)
    top = int(np.argmax(inner_k))
    return max((rise_k[best], t_s[best]), (inner_k[top], inner_s[top]))


def _turning_points(t_s, p_w, terms, steps):
    """Rise and time where the slope passes through zero within each of some steps."""
    until = slice(steps[-1] + 1)
    rises_k = [foster_response_k(t_s[until], p_w[until], [r], [tau], [start]) for r, tau, start in terms]
    states_k = np.array(rises_k)[:, steps]
    length_s, low, high = np.diff(t_s)[steps], np.zeros(steps.size), np.ones(steps.size)
    r_k_per_w, tau_s, _ = (np.array(column)[:, np.newaxis] for column in zip(*terms, strict=True))

    def at(share):
        x = share * length_s / tau_s
        faded, climb_w = np.exp(-x), share * (p_w[steps + 1] - p_w[steps])
        phi = np.where(x > 1e-8, -np.expm1(-x) / np.where(x > 0.0, x, 1.0), 1.0 - x / 2.0)
        terms_k = faded * states_k + r_k_per_w * (p_w[steps] * (1.0 - faded) + climb_w * (1.0 - phi))
        return terms_k.sum(axis=0), ((r_k_per_w * (p_w[steps] + climb_w) - terms_k) / tau_s).sum(axis=0)

    for _ in range(N_HALVINGS):
        middle = (low + high) / 2.0
        rising = at(middle)[1] > 0.0
        low, high = np.where(rising, middle, low), np.where(rising, high, middle)
    return at(low)[0], t_s[steps] + low * length_s
