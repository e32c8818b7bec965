"""derating.second_breakdown: bipolar transistors against the rating of `limits: second_breakdown`, steady and in events.

A curve of current over voltage scales with the case as the rest of the safe area does. Sheets drawn for a case at 25 °C
derate it less, sheets drawn for the peak junction not at all while the junction keeps its rating, so this is never the
laxer choice.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ..board import Quantity
from ..physics.envelope import case_factor, curve_current_a
from .event_view import EventView
from .judgement import Judgement
from .view import ElementView, View

KINDS = frozenset({"bjt", "igbt"})
KEY = "second_breakdown"


def steady(view: View) -> Iterator[Judgement]:
    """`derating.second_breakdown` at the operating point, where the rating is a current or a curve."""
    for element in view.elements():
        limit = element.part.limit(KEY)
        if element.kind not in KINDS or limit is None or getattr(limit, "dimension", "current") == "energy":
            continue
        v_v, i_a = np.abs(element.point.voltage_v)[:, None], element.point.peak_a[:, None]
        case_c = np.where(np.isnan(element.point.case_c), element.point.tj_c, element.point.case_c)
        value, rated = _hardest(limit, v_v, i_a, case_c, element)
        allowed, rule = element.allowed(KEY, rated)
        yield Judgement(
            f"derating.{KEY}", element.subject, "current against second breakdown", "A", value, rated, allowed,
            element.view.board.where(element.part), KEY, element.ref, mode=element.view.mode.name, limit=rule, proven=element.solved,
            lacking=(*element.missing, *_temperature_missing(limit, element)), remedy=REMEDY, inputs=lambda e=element: e.sources(f"limits.{KEY}"))


REMEDY = "take voltage off it, or use a part with a wider safe area"


def event(element: EventView) -> Iterator[Judgement]:
    """`derating.second_breakdown` along an event: its energy, or its hardest moment."""
    limit = element.part.limit(KEY)
    if element.kind not in KINDS or limit is None or element.event.role == "switch":
        return
    unit = "J" if isinstance(limit, Quantity) and limit.dimension == "energy" else "A"
    value = rated = element.view.unknown()
    lacking = (*element.event.lacking, *(() if unit == "J" else (*element.start_missing, *_temperature_missing(limit, element))))
    response = element.response
    if response is not None and unit == "J":
        value, rated = response.energy_j, element.rating(KEY)
    elif response is not None and not lacking:
        path, row = response.path, response.row
        value, rated = _hardest(limit, path.v_v[row], path.i_a[row], response.case_c.max(axis=1), element)
    yield element.judgement(f"derating.{KEY}", "energy" if unit == "J" else "current against second breakdown", unit, value, KEY, rated,
                            lacking=lacking, remedy=REMEDY, inputs=lambda: element.sources(f"limits.{KEY}"))


def _temperature_missing(limit, element: ElementView) -> tuple[str, ...]:
    return () if isinstance(limit, Quantity) or element.part.limit("tj") is not None else ("limits.tj",)


def _hardest(limit, v_v: np.ndarray, i_a: np.ndarray, case_c: np.ndarray, element: ElementView) -> tuple[np.ndarray, np.ndarray]:
    """Current and rating at the moment that uses most of it, each of shape (sample,)."""
    if isinstance(limit, Quantity):
        return i_a.max(axis=1), element.view.constant(limit.min)
    tj = element.part.limit("tj")
    factor = case_factor(case_c, tj.min) if tj is not None else np.full(case_c.shape, np.nan)
    rated = curve_current_a(v_v, limit.column(0), limit.column(1)) * factor[:, None]
    with np.errstate(divide="ignore", invalid="ignore"):
        use = np.where(i_a > 0.0, i_a / rated, 0.0)
    at = np.argmax(np.nan_to_num(use, nan=np.inf), axis=1)[:, None]
    return tuple(np.take_along_axis(x, at, axis=1)[:, 0] for x in (i_a, rated))
