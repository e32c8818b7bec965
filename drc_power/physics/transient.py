"""Temperature over time: the exact answer of a thermal network to power that moves in straight lines.

| symbol | name here | unit | meaning |
|---|---|---|---|
| P(t) | p_w | W | power, straight between samples; two samples at one time are a step |
| R_i, τ_i | r_k_per_w, tau_s | K/W, s | term of the Foster network |
| θ_i | terms_k | K | rise of each term; their sum is the rise of the junction |

Over a step of length h, x = h/τ: θ_i(t + h) = e^(−x) · θ_i(t) + R_i · [(1 − φ) · P(t + h) + (φ − e^(−x)) · P(t)]
with φ = (1 − e^(−x))/x. Nothing is approximated, so a step may be as long as the power stays straight.
Shapes: corners or samples first, time last.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.impedance import foster_zth_k_per_w
from drc_power.physics.range import nan_where, refuse_unless


def foster_response_k(t_s, p_w, r_k_per_w, tau_s, start_k=None):
    """Rise over time of a Foster network.

    t_s: times, not falling [s], shape (time,).
    p_w: power at those times [W], shape (time,) or (corner, time).
    r_k_per_w: resistances of the terms [K/W], shape (term,).
    tau_s: time constants [s], shape (term,).
    start_k: rise of each term at the first time, 0 when left out [K], shape (term,) or (term, corner).
    Returns the rise at those times [K], shape of p_w. A million samples take about a second.
    Raises OutsideRange for times that fall or numbers that are none.
    Source: exact solution of τ · dθ/dt + θ = R · P for straight P.

    >>> foster_response_k([0.0, 0.01, 0.01, 0.02], [10.0, 10.0, 0.0, 0.0], [1.0], [0.01]).round(4).tolist()
    [0.0, 6.3212, 6.3212, 2.3254]
    """
    t_s, p_w, starts_k = _checked(t_s, p_w, r_k_per_w, tau_s, start_k)
    rise_k = np.zeros(p_w.shape)
    for r, tau, start in zip(np.atleast_1d(r_k_per_w), np.atleast_1d(tau_s), starts_k, strict=True):
        rise_k += _term_k(t_s, p_w, r, tau, start)
    return rise_k


def foster_end_k(t_s, p_w, r_k_per_w, tau_s, start_k=None):
    """Rise of each term at the last time, with which a following event can start.

    t_s: times, not falling [s], shape (time,).
    p_w: power at those times [W], shape (time,) or (corner, time).
    r_k_per_w: resistances of the terms [K/W], shape (term,).
    tau_s: time constants [s], shape (term,).
    start_k: rise of each term at the first time, 0 when left out [K], shape (term,) or (term, corner).
    Returns the terms' rises [K], shape (term,) or (term, corner).
    Source: as `foster_response_k`, summed at once.

    >>> foster_end_k([0.0, 0.01], [10.0, 10.0], [1.0, 0.5], [0.01, 1.0]).round(4).tolist()
    [6.3212, 0.0498]
    """
    t_s, p_w, starts_k = _checked(t_s, p_w, r_k_per_w, tau_s, start_k)
    ends_k = []
    for r, tau, start in zip(np.atleast_1d(r_k_per_w), np.atleast_1d(tau_s), starts_k, strict=True):
        fading = np.exp(-(t_s[-1] - t_s) / tau)
        _, gains_k = _steps(t_s, p_w, r, tau)
        ends_k.append(start * fading[0] + np.sum(gains_k * fading[1:], axis=-1))
    return np.array(ends_k)


def foster_periodic_k(t_s, p_w, r_k_per_w, tau_s):
    """Rise over one period in periodic steady state, exact and without waiting for it to settle.

    The start of each term solves θ_i(0) = θ_i(T): what one period adds from rest, over 1 − e^(−T/τ_i).

    t_s: times of one period from its start to its end, not falling [s], shape (time,).
    p_w: power at those times [W], shape (time,) or (corner, time).
    r_k_per_w: resistances of the terms [K/W], shape (term,).
    tau_s: time constants [s], shape (term,).
    Returns the rise at those times [K], shape of p_w; its first and last values agree.
    Raises OutsideRange for a period of no length.
    Source: geometric series over the periods before.

    >>> foster_periodic_k([0.0, 0.01, 0.01, 0.02], [10.0, 10.0, 0.0, 0.0], [1.0], [0.01]).round(4).tolist()
    [2.6894, 7.3106, 7.3106, 2.6894]
    """
    return foster_response_k(t_s, p_w, r_k_per_w, tau_s, periodic_start_k(t_s, p_w, r_k_per_w, tau_s))


def periodic_start_k(t_s, p_w, r_k_per_w, tau_s):
    """Rise of each term at the start of a period in periodic steady state: θ_i = Δθ_i/(1 − e^(−T/τ_i)).

    t_s: times of one period from its start to its end, not falling [s], shape (time,).
    p_w: power at those times [W], shape (time,) or (corner, time).
    r_k_per_w: resistances of the terms [K/W], shape (term,).
    tau_s: time constants [s], shape (term,).
    Returns the terms' rises [K], shape (term,) or (term, corner).
    Raises OutsideRange for a period of no length.
    Source: geometric series over the periods before.

    >>> periodic_start_k([0.0, 0.01, 0.01, 0.02], [10.0, 10.0, 0.0, 0.0], [1.0], [0.01]).round(4).tolist()
    [2.6894]
    """
    period_s = float(t_s[-1]) - float(t_s[0])
    refuse_unless(period_s > 0.0, "a period must be longer than 0 s")
    added_k = foster_end_k(t_s, p_w, r_k_per_w, tau_s)
    kept = -np.expm1(-period_s / np.atleast_1d(np.asarray(tau_s, dtype=float)))
    return added_k / kept.reshape((-1,) + (1,) * (added_k.ndim - 1))


def pulse_train_peak_k(p_w, t_on_s, period_s, r_k_per_w, tau_s):
    """Highest rise under rectangular pulses without end: ΔT = P · Σ R_i · (1 − e^(−t/τ_i))/(1 − e^(−T/τ_i)).

    p_w: power during the pulse [W], any shape.
    t_on_s: length of the pulse, up to the period [s], any shape.
    period_s: period [s], any shape.
    r_k_per_w: resistances of the terms [K/W], shape (term,).
    tau_s: time constants [s], shape (term,).
    Returns the rise at the end of a pulse [K], the common shape; NaN for a pulse longer than the period.
    Source: geometric series of a Foster network's answer.

    >>> round(float(pulse_train_peak_k(10.0, 0.01, 0.02, [1.0], [0.01])), 4)
    7.3106
    """
    return p_w * _pulse_train_share(t_on_s, period_s, 0.0, r_k_per_w, tau_s)


def pulse_train_valley_k(p_w, t_on_s, period_s, r_k_per_w, tau_s):
    """Lowest rise under rectangular pulses without end: each term's peak, faded by e^(−(T − t)/τ_i).

    p_w: power during the pulse [W], any shape.
    t_on_s: length of the pulse, up to the period [s], any shape.
    period_s: period [s], any shape.
    r_k_per_w: resistances of the terms [K/W], shape (term,).
    tau_s: time constants [s], shape (term,).
    Returns the rise just before a pulse [K], the common shape; NaN for a pulse longer than the period.
    Source: geometric series of a Foster network's answer.

    >>> round(float(pulse_train_valley_k(10.0, 0.01, 0.02, [1.0], [0.01])), 4)
    2.6894
    """
    return p_w * _pulse_train_share(t_on_s, period_s, np.subtract(period_s, t_on_s), r_k_per_w, tau_s)


def pulse_train_bound_k(p_w, duty, rth_k_per_w, zth_on_k_per_w):
    """Upper bound on the peak from a data sheet's single-pulse curve: ΔT = P · (D · R_th + (1 − D) · Z_th(t)).

    p_w: power during the pulse [W], any shape.
    duty: length of the pulse over the period, 0 to 1 [-], any shape.
    rth_k_per_w: steady thermal resistance [K/W].
    zth_on_k_per_w: impedance at the length of one pulse [K/W].
    Returns the rise [K]. Reads high for every Foster network.
    Source: Motorola AN569, the simpler of its two approximations (from memory).

    >>> pulse_train_bound_k(10.0, 0.5, 1.0, 0.5)
    7.5
    """
    return p_w * (duty * rth_k_per_w + (1.0 - duty) * zth_on_k_per_w)


def pulse_train_estimate_k(p_w, duty, rth_k_per_w, zth_on_k_per_w, zth_period_k_per_w, zth_both_k_per_w):
    """Peak from a single-pulse curve read three times: ΔT = P · (D · R + (1 − D) · Z(T + t) + Z(t) − Z(T)).

    p_w: power during the pulse [W], any shape.
    duty: length of the pulse over the period, 0 to 1 [-], any shape.
    rth_k_per_w: steady thermal resistance R [K/W].
    zth_on_k_per_w: impedance at the length of one pulse, Z(t) [K/W].
    zth_period_k_per_w: impedance at the period, Z(T) [K/W].
    zth_both_k_per_w: impedance at the period and a pulse more, Z(T + t) [K/W].
    Returns the rise [K], an estimate closer than `pulse_train_bound_k`.
    Source: Motorola AN569 (from memory).

    >>> round(pulse_train_estimate_k(10.0, 0.5, 1.0, 0.632, 0.865, 0.950), 3)
    7.42
    """
    spread = (1.0 - duty) * zth_both_k_per_w + zth_on_k_per_w - zth_period_k_per_w
    return p_w * (duty * rth_k_per_w + spread)


def superposed_rise_k(at_s, t_s, p_w, zth, zth_integral):
    """Rise by superposition, for an impedance that is a curve: ΔT(t) = Σ ΔP_k · Z(t − t_k) + Σ ΔP′_k · ∫Z.

    at_s: times of interest [s], shape (point,).
    t_s: corners of the power, not falling; the power is 0 outside them [s], shape (time,).
    p_w: power at the corners, straight between them [W], shape (time,) or (corner, time).
    zth: function of time since a step [s] that gives the impedance [K/W].
    zth_integral: function of time [s] that gives its integral [K.s/W].
    Returns the rise [K], shape (point,) or (corner, point). Work grows with points times corners of the power:
    meant for drawn shapes; a capture is faster through `fit_foster` and `foster_response_k`.
    Source: superposition in a linear system (Duhamel).

    >>> z, integral = (lambda t: 2.0 + 0.0 * t), (lambda t: 2.0 * t)
    >>> superposed_rise_k([0.5, 2.0], [0.0, 1.0], [4.0, 4.0], z, integral).round(6).tolist()
    [8.0, 0.0]
    """
    t_s, p_w = np.asarray(t_s, dtype=float), np.asarray(p_w, dtype=float)
    h_s, lift_w = np.diff(t_s), np.diff(p_w)
    slopes = np.where(h_s > 0.0, lift_w / np.where(h_s > 0.0, h_s, 1.0), 0.0)
    none = np.zeros((*p_w.shape[:-1], 1))
    slope_changes = np.diff(slopes, prepend=none, append=none)
    jumps_w = np.concatenate([p_w[..., :1], -p_w[..., -1:]], axis=-1)
    jumps_w = np.concatenate([jumps_w, np.where(h_s > 0.0, 0.0, lift_w)], axis=-1)
    jump_times_s = np.concatenate([t_s[[0, -1]], t_s[1:]])
    since_jump_s, since_bend_s = (
        np.subtract.outer(np.asarray(at_s, dtype=float), start) for start in (jump_times_s, t_s)
    )
    steps = np.where(since_jump_s >= 0.0, zth(np.maximum(since_jump_s, 0.0)), 0.0)
    ramps = np.where(since_bend_s >= 0.0, zth_integral(np.maximum(since_bend_s, 0.0)), 0.0)
    return jumps_w @ steps.T + slope_changes @ ramps.T


def equivalent_length_s(energy_j, peak_w):
    """Length of the rectangle of the same energy at the peak power: t = E/P.

    energy_j: energy of the pulse [J], any shape.
    peak_w: its highest power, above 0 [W], any shape.
    Returns the length [s]. Under the root law it reads high for every shape: up to 50 % for a falling triangle.
    Source: Texas Instruments SLVA673A, eq. 7.

    >>> round(equivalent_length_s(0.18, 40.32) * 1e3, 2)
    4.46
    """
    return energy_j / peak_w


def _checked(t_s, p_w, r_k_per_w, tau_s, start_k):
    t_s, p_w = np.asarray(t_s, dtype=float), np.asarray(p_w, dtype=float)
    refuse_unless(t_s.ndim == 1 and t_s.size and p_w.shape[-1:] == t_s.shape, "power needs a value at every time")
    refuse_unless(np.isfinite(t_s).all() and np.isfinite(p_w).all(), "times and powers must be numbers")
    refuse_unless(np.diff(t_s) >= 0.0, "times must not fall")
    foster_zth_k_per_w(0.0, r_k_per_w, tau_s)  # refuses terms that are none
    starts_k = np.zeros((np.size(r_k_per_w),)) if start_k is None else np.asarray(start_k, dtype=float)
    return t_s, p_w, np.broadcast_to(starts_k, (np.size(r_k_per_w), *starts_k.shape[1:]))


def _steps(t_s, p_w, r, tau):
    """What each step keeps of a term's rise, and what it adds."""
    x = np.diff(t_s) / tau
    added = -np.expm1(-x)
    tiny = x < 1e-3
    # 1 − φ cancels for short steps; four terms of its series are exact to the last digit there.
    by_end = np.where(tiny, x * (1 / 2 - x * (1 / 6 - x * (1 / 24 - x / 120))), 1.0 - added / np.where(tiny, 1.0, x))
    return 1.0 - added, r * (by_end * p_w[..., 1:] + (added - by_end) * p_w[..., :-1])


def _term_k(t_s, p_w, r, tau, start):
    """One term's rise at every time."""
    keeps, gains_k = _steps(t_s, p_w, r, tau)
    start = np.broadcast_to(start, p_w.shape[:-1])[..., np.newaxis]
    return np.concatenate([start, _recurrence(keeps, gains_k, start)], axis=-1)


def _recurrence(keeps, gains, start):
    """y_k = keeps_k · y_k−1 + gains_k from y_−1 = start, in blocks of √n so that numpy does √n steps twice."""
    n = keeps.size
    width = max(1, int(np.ceil(np.sqrt(n))))
    padding = width * width - n
    keeps = np.pad(keeps, (0, padding), constant_values=1.0).reshape(width, width).T.copy()
    gains = np.pad(gains, [(0, 0)] * (gains.ndim - 1) + [(0, padding)])
    gains = np.moveaxis(gains.reshape(*gains.shape[:-1], width, width), -1, 0).copy()
    for k in range(1, width):
        gains[k] += keeps[k] * gains[k - 1]
        keeps[k] *= keeps[k - 1]
    carried = np.empty(gains.shape[1:])
    carry = start[..., 0]
    for block in range(width):
        carried[..., block] = carry
        carry = keeps[-1, block] * carry + gains[-1, ..., block]
    gains += keeps.reshape(width, *(1,) * (gains.ndim - 2), width) * carried
    return np.moveaxis(gains, 0, -1).reshape(*gains.shape[1:-1], width * width)[..., :n]


def _pulse_train_share(t_on_s, period_s, after_s, r_k_per_w, tau_s):
    outside = ~(np.greater_equal(t_on_s, 0.0) & np.less_equal(t_on_s, period_s) & np.greater(period_s, 0.0))
    t_on_s, period_s = np.where(outside, 0.0, t_on_s), np.where(outside, 1.0, period_s)
    terms = zip(np.atleast_1d(r_k_per_w), np.atleast_1d(tau_s), strict=True)
    share = sum(
        r * np.expm1(-t_on_s / tau) / np.expm1(-period_s / tau) * np.exp(-np.maximum(after_s, 0.0) / tau)
        for r, tau in terms
    )
    return nan_where(outside, share)
