"""How much of a safe area a trajectory uses: every window of it, weighed by the lines of the area.

| symbol | name here | unit | meaning |
|---|---|---|---|
| q_k(s) | use | - | i(s)/I_k(v(s)): current over what line k, for pulses of length t_k, allows at that voltage |
| q(s, a) | - | - | the same for a pulse of length a: straight in log-log between the lines, as I = c · t^m |
| u(τ) | - | - | share of the area used up at time τ |

u(τ) = max q_1(s) over ages up to t_1, + ∫ dq(τ − a, a) over ages from t_1 to t_N, + once current has flowed for longer
than t_N, the highest mean of q_DC − q_N over any window of length t_N so far. A line says what a pulse of its length does; a trajectory is a sum of slices, each of which has lasted as long
as its age, so old current counts by how much more a longer pulse uses. A rectangle telescopes to i/I(v, t) exactly.
For an area that heat alone limits, u is the junction's rise over its allowed rise (Duhamel's superposition); within the
shortest line, where the area says less than that, the hardest moment counts in full, so u is never below it. The step
to the line for any length falls on what has been sustained, not on a moment long gone. u grows with every current and
with every length of a pulse, and where lines go as a · t^m it lies above the rectangle of equal energy at the peak by a
slice's share at most.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import refuse_unless


def window_use(t_s, use, peak_use, lengths_s, beyond_use=None):
    """Share of the area used up at the end of each slice of a trajectory.

    t_s: edges of the slices, not falling [s], shape (trajectory, slice + 1).
    use: mean use of each line by each slice [-], shape (trajectory, slice, line); inf where a line allows nothing.
    peak_use: highest use of the first line within each slice [-], shape (trajectory, slice).
    lengths_s: pulse length of each line, rising [s], shape (line,); none where only a line for any length exists.
    beyond_use: use of the line for any length [-], shape (trajectory, slice); None where there is none.
    Returns the share at the end of each slice [-], shape (trajectory, slice): 1 is the edge of the area; NaN once
    current has flowed for longer than the last line says, where nothing says more.
    Raises OutsideRange for an area without a line.
    Source: Duhamel's superposition on the lines of the safe area; formats contract, I = a · t^m between lines.

    >>> window_use([[0.0, 1e-3, 2e-3]], [[[0.5, 1.0]] * 2], [[0.5] * 2], [1e-3, 4e-3]).round(4).tolist()
    [[0.5, 0.7071]]
    """
    t_s, use, peak_use = (np.asarray(x, dtype=float) for x in (t_s, use, peak_use))
    lengths_s = np.asarray(lengths_s, dtype=float)
    refuse_unless(lengths_s.size or beyond_use is not None, "a safe area needs at least one line")
    if not lengths_s.size:
        return np.maximum.accumulate(np.asarray(beyond_use, dtype=float), axis=-1)
    use = np.maximum.accumulate(use, axis=-1)
    peak_use = np.maximum(peak_use, use[..., 0])
    more = None if beyond_use is None else _step_up(use[..., -1], np.asarray(beyond_use, dtype=float))
    share = _share_at(t_s[:, 1:], t_s, use, peak_use, lengths_s, more)
    if use.shape[1] > FOLLOWED_SLICES:
        return share
    # The worst moment is where a slice ends, or where one comes of the age of a line.
    for length_s in lengths_s:
        at_s = np.minimum(t_s[:, :-1] + length_s, t_s[:, -1:])
        there = _share_at(at_s, t_s, use, peak_use, lengths_s, more)
        ends = (t_s[:, None, 1:] < at_s[..., None]).sum(axis=-1)
        np.maximum.at(share, (np.arange(len(share))[:, None], np.minimum(ends, share.shape[1] - 1)), there)
    return share


FOLLOWED_SLICES = 200
"""Up to so many slices every moment that may decide is looked at; the finer slices of a capture are their own moments."""


def _step_up(last_use, beyond_use):
    """What the line for any length uses more than the last pulse line; nothing where that has ended already."""
    finite = np.isfinite(last_use)
    return np.where(finite, np.maximum(beyond_use - np.where(finite, last_use, 0.0), 0.0), 0.0)


def _share_at(at_s, t_s, use, peak_use, lengths_s, more):
    """u at some moments of each trajectory, shape (trajectory, moment)."""
    old_s = at_s[:, :, None] - t_s[:, None, :-1]
    young_s = np.maximum(at_s[:, :, None] - t_s[:, None, 1:], 0.0)
    happened = old_s > 0.0
    recent = happened & (young_s <= lengths_s[0] * (1.0 + 1e-12))
    total = np.where(recent, peak_use[:, None, :], 0.0).max(axis=-1)
    within = _grown(use, old_s, lengths_s) - _grown(use, young_s, lengths_s)
    flowed = happened & (use[..., 0] > 0.0)[:, None, :]
    total = total + np.where(flowed, within, 0.0).sum(axis=-1)
    total = np.where(_meets_end(use, old_s, happened, lengths_s), np.inf, total)
    older = (flowed & (old_s > lengths_s[-1] * (1.0 + 1e-12))).any(axis=-1)
    if more is None:
        return np.where(older, np.nan, total)
    return total + np.where(older, _sustained(at_s, t_s, more, lengths_s[-1]), 0.0)


def _sustained(at_s, t_s, more, window_s):
    """Highest mean over any window of a length so far, shape (trajectory, moment): it begins or ends where a slice does."""
    best = np.zeros(at_s.shape)
    for begins_s, known_s in ((t_s[:, 1:] - window_s, t_s[:, 1:]), (t_s[:, :-1], t_s[:, :-1] + window_s)):
        starts_s, stops_s = (t_s[:, None, part] for part in (slice(0, -1), slice(1, None)))
        inside_s = np.minimum(stops_s, begins_s[..., None] + window_s) - np.maximum(starts_s, begins_s[..., None])
        with np.errstate(invalid="ignore"):
            mean = np.where(inside_s > 0.0, more[:, None, :] * inside_s / window_s, 0.0).sum(axis=-1)
        done = known_s[:, None, :] <= at_s[:, :, None] * (1.0 + 1e-12)
        best = np.maximum(best, np.where(done, mean[:, None, :], 0.0).max(axis=-1))
    return best


def _grown(use, age_s, lengths_s):
    """q(s, age) held below the first line and past the last, shape (trajectory, end, slice); 0 where a line has no end."""
    if lengths_s.size == 1:
        return np.zeros(age_s.shape)
    k = np.clip(np.searchsorted(lengths_s, age_s, side="right") - 1, 0, lengths_s.size - 2)
    reached_s = np.clip(age_s, lengths_s[0], lengths_s[-1])
    share = np.log(reached_s / lengths_s[k]) / np.log(lengths_s[k + 1] / lengths_s[k])
    with np.errstate(divide="ignore"):
        logs = np.log(use)
    logs = np.where(np.isfinite(logs), logs, 0.0)
    trajectory, slices = np.ogrid[: use.shape[0], : use.shape[1]]
    shorter, longer = (logs[trajectory[:, :, None], slices[:, None, :], k + step] for step in (0, 1))
    return np.exp(shorter + share * (longer - shorter))


def _meets_end(use, old_s, happened, lengths_s):
    """Where a slice lies past the end of a line that its age has reached: no current is allowed there."""
    endless = np.isinf(use)
    if not endless.any():
        return np.zeros(old_s.shape[:2], dtype=bool)
    first_s = np.where(endless.any(axis=-1), np.append(0.0, lengths_s[:-1])[np.argmax(endless, axis=-1)], np.inf)
    return (happened & (old_s > first_s[:, None, :])).any(axis=-1)


def equivalent_length_s(share, point_use, lengths_s):
    """Length of the rectangle at one point of a trajectory that uses as much of the area as the whole does.

    share: what the trajectory uses [-], shape (trajectory,).
    point_use: use of each line at the point [-], shape (trajectory, line).
    lengths_s: pulse length of each line, rising [s], shape (line,).
    Returns the length [s], shape (trajectory,): the first line's or less where that already uses as much, the
    last line's or more where no line does.
    Source: inverse of I = a · t^m between lines, as in Texas Instruments SLVA673A, section 2.3.2.

    >>> equivalent_length_s([0.7071068], [[0.5, 1.0]], [1e-3, 4e-3]).round(6).tolist()
    [0.002]
    """
    point_use = np.maximum.accumulate(np.asarray(point_use, dtype=float), axis=-1)
    share, logs_s = np.asarray(share, dtype=float), np.log(np.asarray(lengths_s, dtype=float))
    found_s = np.empty(share.shape)
    for row, (wanted, row_use) in enumerate(zip(share, point_use, strict=True)):
        usable = (row_use > 0.0) & np.isfinite(row_use)
        rising = usable & np.append(True, np.diff(row_use) > 0.0)
        known = wanted > 0.0 and np.isfinite(wanted) and rising.any()
        found_s[row] = np.exp(np.interp(np.log(wanted), np.log(row_use[rising]), logs_s[rising])) if known else np.nan
    return found_s
