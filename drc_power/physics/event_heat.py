"""Junction heat of many events at once, each on its own time axis.

| symbol | name here | unit | meaning |
|---|---|---|---|
| P(t) | p_w | W | power of each event, straight between samples; two samples at one time are a step |
| R_i, τ_i | r_k_per_w, tau_s | K/W, s | terms of a Foster network, common to all events or each event's own |
| θ_i | start_k | K | rise of each term at the first sample |

`transient` has the same equations for one time axis and a million samples.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import nan_where

AT_ONCE_S = 1e-9
"""Time constant of a body without heat capacity."""


def foster_paths_k(t_s, p_w, r_k_per_w, tau_s, start_k=0.0):
    """Rise along each event: θ_i' = (R_i · P − θ_i)/τ_i, exact for straight P, summed over the terms.

    t_s: times, not falling [s], shape (event, time).
    p_w: power at those times [W], shape (event, time).
    r_k_per_w: resistances of the terms [K/W], shape (term,) or (event, term).
    tau_s: time constants, above 0 [s], shape (term,) or (event, term).
    start_k: rise of each term at the first time [K], shape (event, term) or a number.
    Returns (rise at those times [K], shape (event, time); rise of each term at the last [K], shape (event, term)).
    Source: exact solution of the Foster network for straight P, as `transient.foster_response_k`.

    >>> rise_k, end_k = foster_paths_k([[0.0, 0.01]], [[10.0, 10.0]], [1.0], [0.01])
    >>> rise_k.round(4).tolist(), end_k.round(4).tolist()
    ([[0.0, 6.3212]], [[6.3212]])
    """
    t_s, p_w = (np.asarray(x, dtype=float) for x in (t_s, p_w))
    shape = (t_s.shape[0], np.shape(r_k_per_w)[-1])
    r, tau = (np.broadcast_to(np.asarray(x, dtype=float), shape) for x in (r_k_per_w, tau_s))
    terms_k = np.broadcast_to(np.asarray(start_k, dtype=float), shape)
    rise_k = np.empty(t_s.shape)
    rise_k[:, 0] = terms_k.sum(axis=-1)
    for step in range(1, t_s.shape[1]):
        x = (t_s[:, step] - t_s[:, step - 1])[:, None] / tau
        added, by_end = _shares(x)
        gained_w = by_end * p_w[:, step, None] + (added - by_end) * p_w[:, step - 1, None]
        terms_k = (1.0 - added) * terms_k + r * gained_w
        rise_k[:, step] = terms_k.sum(axis=-1)
    return rise_k, terms_k


def periodic_starts_k(end_k, t_end_s, period_s, tau_s):
    """Rise of each term at the start of an event that returns for ever: θ_i = Δθ_i · e^(−(T − t)/τ_i)/(1 − e^(−T/τ_i)).

    end_k: rise of each term at the event's end when it starts from rest [K], shape (event, term).
    t_end_s: length of the event [s], shape (event,).
    period_s: from start to start, not below the length [s], shape (event,).
    tau_s: time constants, above 0 [s], shape (term,) or (event, term).
    Returns the terms' rises at each start [K], shape (event, term); NaN for an event longer than its period.
    Source: geometric series over the events before.

    >>> periodic_starts_k([[6.3212]], [0.01], [0.02], [0.01]).round(4).tolist()
    [[2.6894]]
    """
    t_end_s, period_s = (np.asarray(x, dtype=float)[:, None] for x in (t_end_s, period_s))
    rest_s = period_s - t_end_s
    faded = np.exp(-np.maximum(rest_s, 0.0) / tau_s)
    return nan_where(~(rest_s >= 0.0), np.asarray(end_k) * faded / -np.expm1(-period_s / tau_s))


def fading_k(t_s, start_k, tau_s):
    """What is left along each event of the rise that it started with: Σ θ_i · e^(−t/τ_i).

    t_s: times since the start [s], shape (event, time).
    start_k: rise of each term at the start [K], shape (event, term).
    tau_s: time constants, above 0 [s], shape (term,) or (event, term).
    Returns the rise [K], shape (event, time).
    Source: answer of a Foster network to no power.

    >>> fading_k([[0.0, 0.01]], [[1.0]], [0.01]).round(4).tolist()
    [[1.0, 0.3679]]
    """
    t_s, start_k = np.asarray(t_s, dtype=float), np.asarray(start_k, dtype=float)
    tau_s = np.broadcast_to(np.asarray(tau_s, dtype=float), start_k.shape)
    return sum(start_k[:, k, None] * np.exp(-t_s / tau_s[:, k, None]) for k in range(start_k.shape[1])) + 0.0 * t_s


def superposed_paths_k(t_s, p_w, zth, zth_integral):
    """Rise along each event for an impedance that is a curve: ΔT(t) = Σ ΔP_k · Z(t − t_k) + Σ ΔP'_k · ∫Z.

    t_s: times, not falling [s], shape (event, time).
    p_w: power at those times, straight between them [W], shape (event, time).
    zth: function of time since a step [s] that gives the impedance [K/W].
    zth_integral: function of time [s] that gives its integral [K.s/W].
    Returns the rise at those times [K], shape (event, time).
    Source: superposition in a linear system (Duhamel), as `transient.superposed_rise_k`.

    >>> z, integral = (lambda t: 2.0 + 0.0 * t), (lambda t: 2.0 * t)
    >>> superposed_paths_k([[0.0, 1.0, 1.0]], [[4.0, 4.0, 0.0]], z, integral).round(6).tolist()
    [[8.0, 8.0, 0.0]]
    """
    t_s, p_w = np.asarray(t_s, dtype=float), np.asarray(p_w, dtype=float)
    h_s, lift_w = np.diff(t_s), np.diff(p_w)
    moves = h_s > 0.0
    slopes = np.where(moves, lift_w / np.where(moves, h_s, 1.0), 0.0)
    bends = np.diff(slopes, axis=-1, prepend=0.0)
    jumps_w = np.concatenate([p_w[:, :1], np.where(moves, 0.0, lift_w)], axis=-1)
    rise_k = np.zeros(t_s.shape)
    for step in np.flatnonzero(jumps_w.any(axis=0)):
        since_s = t_s - t_s[:, step, None]
        rise_k += jumps_w[:, step, None] * np.where(_after(since_s, step), zth(np.maximum(since_s, 0.0)), 0.0)
    for step in np.flatnonzero(bends.any(axis=0)):
        rise_k += bends[:, step, None] * zth_integral(np.maximum(t_s - t_s[:, step, None], 0.0))
    return rise_k


def _after(since_s, step):
    """Samples from a jump onward: at one time, those before it in the row have not seen it yet."""
    return np.arange(since_s.shape[1]) >= step


def _shares(x):
    """Of a step x = h/τ: what a term gains of its final value, and how much of that the step's end decides."""
    added = -np.expm1(-x)
    tiny = x < 1e-3
    by_end = np.where(tiny, x * (1 / 2 - x * (1 / 6 - x * (1 / 24 - x / 120))), 1.0 - added / np.where(tiny, 1.0, x))
    return added, by_end


def two_body_foster(r_near_k_per_w, c_near_j_per_k, r_far_k_per_w, c_far_j_per_k):
    """Foster terms of a case behind whose interface a sink stands: case, resistance, sink, resistance, air.

    r_near_k_per_w: from the case to the sink [K/W], shape (event,).
    c_near_j_per_k: heat capacity of the case, 0 where it has none [J/K], shape (event,).
    r_far_k_per_w: from the sink to the air [K/W], shape (event,).
    c_far_j_per_k: heat capacity of the sink, 0 where it has none [J/K], shape (event,).
    Returns (resistances [K/W], time constants [s]), each of shape (event, 2); a body without capacity follows at once.
    Source: Z(s) = (R_1 + R_2 + s·R_1·R_2·C_2)/(1 + s·(R_1·C_1 + R_2·C_1 + R_2·C_2) + s²·R_1·C_1·R_2·C_2).

    >>> r_k_per_w, tau_s = two_body_foster([1.040192], [0.0098039], [1.959808], [0.500349])
    >>> r_k_per_w.round(4).tolist(), tau_s.round(4).tolist()
    ([[1.0, 2.0]], [[0.01, 1.0]])
    """
    r_1, c_1, r_2, c_2 = (np.asarray(x, dtype=float) for x in (r_near_k_per_w, c_near_j_per_k, r_far_k_per_w, c_far_j_per_k))
    both_s, product = r_1 * c_1 + r_2 * c_1 + r_2 * c_2, r_1 * c_1 * r_2 * c_2
    root_s = np.sqrt(np.maximum(both_s**2 - 4.0 * product, 0.0))
    slow_s = np.maximum((both_s + root_s) / 2.0, AT_ONCE_S)
    fast_s = np.maximum(product / slow_s, AT_ONCE_S)
    apart_s = np.where(slow_s > fast_s, slow_s - fast_s, 1.0)
    fast_r = np.where(slow_s > fast_s, (r_1 * r_2 * c_2 - (r_1 + r_2) * fast_s) / apart_s, 0.0)
    fast_r = np.clip(fast_r, 0.0, r_1 + r_2)
    return np.stack([fast_r, r_1 + r_2 - fast_r], axis=-1), np.stack([fast_s, slow_s], axis=-1)
