"""Fuses: the melting curve read both ways, and the melting integral below it.

| symbol | name here | unit | meaning |
|---|---|---|---|
| I_m(t) | currents_a | A | current that melts the element in time t |
| I²t | i2t_a2_s | A2.s | melting integral: what melts it before heat can leave |
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.area_use import window_use
from drc_power.physics.range import nan_where, refuse_unless


def melting_current_a(t_s, times_s, currents_a, i2t_a2_s=None):
    """Current that melts a fuse in a time, straight in log-log: I = I_k · (t/t_k)^n.

    t_s: time, above 0 [s], any shape.
    times_s: melting times, rising [s], shape (point,).
    currents_a: currents that melt it in those times, above 0 and not rising [A], shape (point,).
    i2t_a2_s: melting integral, for times before the first point [A2.s]; None where it is not known.
    Returns the current [A], shape of t_s: before the first point √(I²t/t) and no less than the first point's, which
    alone stands without the integral; past the last point NaN, where nobody has said what melts it.
    Raises OutsideRange for points that cannot be drawn.
    Source: IEC 60269-1 and UL 248 time-current characteristics, drawn on log-log paper; adiabatic law below them.

    >>> melting_current_a([0.01, 0.1, 1.0], [0.1, 10.0], [100.0, 25.0], 1600.0).round(3).tolist()
    [400.0, 100.0, 50.0]
    """
    times_s, currents_a = np.asarray(times_s, dtype=float), np.asarray(currents_a, dtype=float)
    refuse_unless(times_s.size and np.all((times_s > 0.0) & (currents_a > 0.0)), "melting times and currents must be above 0")
    refuse_unless((np.diff(times_s) > 0.0) & (np.diff(currents_a) <= 0.0), "a longer time must melt at no more current")
    t_s = np.asarray(t_s, dtype=float)
    within_s = np.clip(np.nan_to_num(t_s, nan=times_s[0]), times_s[0], times_s[-1])
    melting_a = np.exp(np.interp(np.log(within_s), np.log(times_s), np.log(currents_a)))
    if i2t_a2_s is not None:
        at_once_a = np.sqrt(i2t_a2_s / np.where(t_s > 0.0, t_s, np.inf))
        melting_a = np.where(t_s < times_s[0], np.maximum(melting_a, at_once_a), melting_a)
    return nan_where(~(t_s > 0.0) | (t_s > times_s[-1]), melting_a)


def melting_share(t_s, i_a, times_s, currents_a, rated_a):
    """How near a current over time comes to melting a fuse, as a share of the current: squares add up as heat does.

    t_s: edges of the slices, not falling [s], shape (event, slice + 1).
    i_a: current of each slice [A], shape (event, slice).
    times_s: melting times, rising [s], shape (point,).
    currents_a: currents that melt it in those times [A], shape (point,).
    rated_a: current that it carries for good [A].
    Returns the highest share [-], shape (event,): 1 melts it. Exact for a rectangle as long as a point of the curve or
    between two; a shorter one is held against the first point, a longer one than the last against the rated current.
    Source: Joule's law and superposition, as `area_use.window_use`.

    >>> melting_share([[0.0, 1.0]], [[25.0]], [0.1, 10.0], [100.0, 25.0], 10.0).round(4).tolist()
    [0.5]
    """
    i_a = np.asarray(i_a, dtype=float)
    use = (i_a[..., None] / np.asarray(currents_a, dtype=float)) ** 2
    share = window_use(t_s, use, use[..., 0], times_s, (i_a / rated_a) ** 2)
    return np.sqrt(share.max(axis=-1))
