"""`EventView`: what the rules on events read: one part in one event, its path and its temperatures."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from ..board import Limit
from ..solve.events.captured import CapturedPath
from ..solve.events.impedance import JunctionImpedance, impedance_of
from ..solve.events.other_mode import OtherResponse, respond_elsewhere
from ..solve.events.probe import EventProbe
from ..solve.events.response import CASE_HELD_S, Response, capacities, heat_path, longest_s, respond
from .house import Conditions, Target
from .judgement import Judgement
from .safe_area import SafeArea, safe_area_of
from .view import ElementView


@dataclass(frozen=True)
class EventView(ElementView):
    """One part in one event: as `ElementView`, with the event's path and temperatures."""

    event: EventProbe

    @property
    def name(self) -> str:
        return self.event.name

    @cached_property
    def response(self) -> Response | OtherResponse | None:
        """The event at every sample; None where its own numbers are missing."""
        if self.event.lacking or self.event.path is None:
            return None
        return (respond_elsewhere if self.event.network else respond)(self.view.solution, self.event)

    @cached_property
    def longest_s(self) -> float:
        return longest_s(self.view.solution.circuit, self.event)

    @property
    def shortest_s(self) -> float:
        """The least that a stall or an overload lasts."""
        return self.event.note.lasts.min if self.event.note.lasts is not None else 0.0

    @cached_property
    def area(self) -> SafeArea | None:
        memo = self.event.memo
        if "area" not in memo:
            memo["area"] = safe_area_of(self.part, self.view.board.rules.methods)
        return memo["area"]

    @cached_property
    def start_missing(self) -> tuple[str, ...]:
        """What the temperature at the event's start needs and nobody gave."""
        return (*self.missing, *self.heat_missing)

    @cached_property
    def capacity_missing(self) -> tuple[str, ...]:
        """A heat capacity beyond the case, which an event longer than a second needs.

        An overload can do without where even the steady heat of what it goes to is allowed: see `bounded`.
        """
        return () if self.event.kind == "overload" else self._capacity_missing

    def bounded(self, value: np.ndarray, allowed: np.ndarray) -> tuple[np.ndarray, str]:
        """Where an overload without a heat capacity is proven all the same, as it never gets hotter than at once; and why not."""
        if self.event.kind != "overload" or not self._capacity_missing:
            return self.solved, ""
        held = ~(value > allowed)
        why = "" if held[self.solved].all() else f"{self.ref} would not stand {self.event.note.to} for good, and how slowly it warms is not given: {', '.join(self._capacity_missing)}"
        return self.solved & held, why

    @cached_property
    def _capacity_missing(self) -> tuple[str, ...]:
        path = heat_path(self.view.solution.circuit, self.ref)
        heat = self.part.note.heat
        if not self.longest_s > CASE_HELD_S or path is None or (heat is not None and heat.case is not None):
            return ()
        found = () if path.case_k_per_w is not None else ("thermal.rth_jc",)
        if any(capacities(self.view.solution.circuit, self.ref)):
            return found
        named = path.sink in self.view.board.annotations.sinks
        return (*found, f"sinks.{path.sink}.capacity" if named else "thermal.capacity")

    @cached_property
    def split_missing(self) -> tuple[str, ...]:
        """How much of the way lies beyond the case, which an event that returns warms."""
        path = heat_path(self.view.solution.circuit, self.ref)
        return ("thermal.rth_jc",) if self.event.every is not None and path is not None and path.case_k_per_w is None else ()

    @cached_property
    def conditions(self) -> Conditions:
        if self.response is None or self.response.rise_k is None:
            return super().conditions
        return Conditions(self.view.solution.ambient_c, self.response.case_c[:, -1], self.response.peak_c)

    def _limits(self, stress: str) -> tuple[Limit, ...]:
        target = Target(self.kind, stress, self.view.mode.name, self.part, event=self.name)
        return self.view.house.limits_on(target)

    def per_sample(self, values: np.ndarray) -> np.ndarray:
        """A quantity of each distinct path, at every sample."""
        return values[self.response.row]

    @cached_property
    def impedance(self) -> JunctionImpedance | None:
        memo = self.event.memo
        if "impedance" not in memo:
            memo["impedance"] = impedance_of(self.part)
        return memo["impedance"]

    def judgement(self, rule: str, quantity: str, unit: str, value, stress: str, rated=None, **more) -> Judgement:
        """A judgement of this event on this part, against the rating of a stress after house rules."""
        rated = self.rating(stress) if rated is None else rated
        allowed, limit = self.allowed(stress, rated)
        return Judgement(
            rule, self.subject, quantity, unit, value, rated, allowed, self.event.note.mark, stress, self.ref,
            mode=self.view.mode.name, event=self.name, limit=limit, **{**self._proof(value, allowed), **more})

    def _proof(self, value: np.ndarray, allowed: np.ndarray) -> dict:
        proven, why = self.bounded(value, allowed)
        return {"proven": proven, "why": why}


def deciding_share(element: EventView) -> np.ndarray:
    """How much of the area is used up along the path, shape (sample, slice)."""
    response = element.response
    return element.area.shares(response.path, response.row, response.case_c[:, 1:])


def deciding_point(element: EventView) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Voltage, current and drawn safe current of each distinct path where one moment of it, held on, would use most."""
    path, area = element.response.path, element.area
    captured = isinstance(path, CapturedPath)
    if captured and "point" in element.event.memo:
        return element.event.memo["point"]
    v_v, i_a = (path.raw_v_v[None], path.raw_i_a[None]) if captured else (path.v_v, path.i_a)
    lines = area.lines_a(v_v)
    at_line = np.minimum(np.searchsorted(area.lengths_s, path.lasts_s), len(lines) - 1)
    allowed = np.take_along_axis(np.stack(lines, axis=-1), at_line[:, None, None], axis=-1)[..., 0]
    with np.errstate(divide="ignore", invalid="ignore"):
        use = np.where(i_a > 0.0, i_a / allowed, 0.0)
    at = np.argmax(np.where(np.isnan(use), -1.0, use), axis=1)[:, None]
    found = tuple(np.take_along_axis(x, at, axis=1)[:, 0] for x in (v_v, i_a, allowed))
    if captured:
        element.event.memo["point"] = found
    return found
