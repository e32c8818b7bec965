"""Margins, and what they say: met, close, exceeded or unproven.

Everything that is not a number, or that no number follows from, ends as NaN, and NaN is `unproven`, never `met`.
"""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np
from numpy.typing import ArrayLike

from drc_power.findings.model import VERDICTS, Finding, Result

EQUAL_WITHIN = 1e-9
"""Share of the margin's scale below which a difference is the noise of floating point: equal to the limit is met."""

FAILING = ("close", "unproven", "exceeded")
"""What `fails_from` may be, from the mildest to the gravest."""

TALLY_ORDER = ("exceeded", "unproven", "close", "waived", "met")

_TEMPERATURE = "°C"


@np.errstate(all="ignore")
def margin(value: ArrayLike, allowed: ArrayLike, *, at_least: bool = False,
           ambient_c: ArrayLike | None = None, unit: str = "") -> float | np.ndarray:
    """Share of the allowed span that is left: m = 1 − value/allowed; for a minimum m = value/allowed − 1.

    value: what the part sees, a magnitude where the limit is one [unit], shape (corner,) or scalar.
    allowed: the limit after house rules [unit], shape (corner,) or scalar.
    at_least: the limit is a minimum.
    ambient_c: temperature that the part would have without loss [°C], needed where unit is "°C".
    unit: the unit of value and allowed; "°C" counts from ambient: m = (allowed − value)/(allowed − ambient), and −1
        where the limit lies on ambient's wrong side and the quotient has no meaning.
    Returns the margin [1], shape (corner,) or a float: 0 at the limit, negative past it, NaN where a datum is missing
    or infinite (only a value that is infinitely past its limit gives −infinity). The scale of a negative limit is its
    magnitude, so that the sign stays right; a limit of 0 has none and gives 0 on it, 1 on its good side, −1 past it.
    Source: definitions of the findings format.

    >>> round(margin(163.2, 150.0, ambient_c=55.0, unit="°C"), 4)
    -0.1389
    >>> margin(45.0, 60.0)
    0.25
    """
    sign = -1.0 if at_least else 1.0
    value, allowed = sign * _floats(value), sign * _floats(allowed)
    if unit == _TEMPERATURE:
        return _quotient(allowed - value, allowed - sign * _floats(ambient_c), value)
    room = allowed - value
    return _quotient(room, np.where(allowed == 0.0, np.abs(room), np.abs(allowed)), value)


@np.errstate(all="ignore")
def margin_between(value: ArrayLike, low: ArrayLike, high: ArrayLike) -> float | np.ndarray:
    """Margin between two limits: m = min(value − low, high − value) / ((high − low)/2), 1 in the middle.

    value, low, high: in one unit [any], shape (corner,) or scalar.
    Returns the margin [1], shape (corner,) or a float; −1 where low and high leave no room, unless they are one
    and the value is on it. NaN as in `margin`. Source: definitions of the findings format.

    >>> round(margin_between(3.1, 3.0, 3.6), 4)
    0.3333
    """
    value, low, high = _floats(value), _floats(low), _floats(high)
    return _quotient(np.minimum(value - low, high - value), (high - low) / 2.0, value)


def _floats(values: ArrayLike | None) -> np.ndarray:
    """None becomes NaN, alone or inside a list."""
    return np.asarray(values, dtype=float)


def _quotient(room: np.ndarray, scale: np.ndarray, value: np.ndarray) -> float | np.ndarray:
    """room/scale; 0 for noise around the limit, −1 for a scale that is not positive, NaN for what is not finite."""
    noise = EQUAL_WITHIN * np.where(scale > 0.0, scale, np.abs(value))
    found = np.where(scale > 0.0, room / scale, -1.0)
    found = np.where(np.abs(room) <= noise, 0.0, found)
    endless = np.isinf(value) & np.isneginf(room) & np.isfinite(scale)
    found = np.where(np.isfinite(room) & np.isfinite(scale), found, np.where(endless, -np.inf, np.nan))
    return found[()] if found.ndim else float(found)


def verdict_of(margin: float | None, close_at: float, proven: bool = True) -> str:
    """What one margin says.

    margin: as `margin` gives it [1]; None, NaN and +infinity are unproven, for no limit is infinitely far away.
    close_at: share of the allowed value from which a finding is close [1], 0 to 1: close when margin < 1 − close_at.
    proven: False where a datum is missing or a model left its range; the verdict is then unproven whatever the margin.

    >>> verdict_of(0.0, 1.0), verdict_of(0.05, 0.9), verdict_of(-0.139, 0.9), verdict_of(float("nan"), 0.9)
    ('met', 'close', 'exceeded', 'unproven')
    """
    if not 0.0 <= close_at <= 1.0:
        raise ValueError(f"close_at is a share from 0 to 1, not {close_at!r}")
    if not proven or margin is None or not margin < np.inf:
        return "unproven"
    if margin < -EQUAL_WITHIN:
        return "exceeded"
    return "close" if margin < 1.0 - close_at - EQUAL_WITHIN else "met"


def worst_corner(margins: ArrayLike, proven: ArrayLike = True) -> int:
    """Index of the corner that decides: the gravest verdict, then the least margin, then the first.

    margins: shape (corner,) [1]. proven: shape (corner,) or scalar. A corner without a margin goes before every
    corner that keeps the limit and after every corner that exceeds it.

    >>> worst_corner([0.3, float("nan"), 0.1]), worst_corner([0.3, float("nan"), -0.1])
    (1, 2)
    """
    margins, proven = np.broadcast_arrays(_floats(margins), np.asarray(proven, dtype=bool))
    unknown = ~(margins < np.inf) | ~proven
    rank = np.select([unknown, margins < -EQUAL_WITHIN], [1, 0], 2)
    return int(np.lexsort((np.arange(margins.size), margins, rank))[0])


def gravest(verdicts: Iterable[str]) -> str:
    """The gravest of some verdicts. Of none at all: unproven, for nothing was shown.

    >>> gravest(["met", "close", "waived"]), gravest([])
    ('close', 'unproven')
    """
    return max(verdicts, key=VERDICTS.index, default="unproven")


def tally(findings: Iterable[Finding]) -> dict[str, int]:
    """How many findings have each verdict, the verdicts in the order of the findings format."""
    counts = dict.fromkeys(TALLY_ORDER, 0)
    for finding in findings:
        counts[finding.verdict] += 1
    return counts


def overall_verdict(result: Result) -> str:
    """The verdict of a whole run: its gravest finding. A run without findings is unproven."""
    return gravest(finding.verdict for finding in result.findings)


def exit_status(result: Result, fails_from: str | None = None) -> int:
    """1 where the run's verdict is `fails_from` or graver, else 0. Waived findings never fail a run.

    fails_from: close, unproven or exceeded; left out, what the result's own house rules say.
    """
    fails_from = fails_from or result.fails_from
    if fails_from not in FAILING:
        raise ValueError(f"fails_from is one of {', '.join(FAILING)}, not {fails_from!r}")
    return int(VERDICTS.index(overall_verdict(result)) >= VERDICTS.index(fails_from))
