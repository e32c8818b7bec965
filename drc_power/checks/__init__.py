"""The rules, one small function each, and the place that turns what they find into findings."""

from __future__ import annotations

from collections.abc import Iterator

from ..solve.solution import Solution
from . import copper, coverage, derating, envelope, events, heat, linear, network, second_breakdown
from .house import House
from .judgement import Judgement
from .supplied import held_back
from .view import View

STEADY_RULES = (heat.dissipation, heat.junction, envelope.envelope, derating.derating, network.headroom,
                network.load_voltage, network.source_limit, network.runaway, network.unsolved, coverage.rails,
                copper.sinks, copper.patches, copper.tracks, copper.vias, linear.steady, second_breakdown.steady)
EVENT_RULES = (events.events,)


def judge(solution: Solution, house: House, only: str | None = None) -> list[Judgement]:
    """Every steady judgement of one mode, or of one part alone, in an order that depends on the board alone."""
    view = View(solution, house, only)
    found = list(held_back(view, (judgement for rule in STEADY_RULES for judgement in rule(view))))
    found += coverage.loads_left_blank(view)
    judged = {judgement.ref for judgement in found if judgement.ref and not judgement.only_if_exceeded}
    return [*found, *coverage.unjudged(view, judged)]


def judge_events(solution: Solution, house: House, only: str | None = None) -> list[Judgement]:
    """Every judgement of the events that start from one mode, in an order that depends on the board alone."""
    view = View(solution, house, only)
    return [judgement for rule in EVENT_RULES for judgement in rule(view)]


def judge_all(solution: Solution, house: House, only: str | None = None) -> list[Judgement]:
    """The steady judgements, then those of the events."""
    return [*judge(solution, house, only), *judge_events(solution, house, only)]


__all__ = ["EVENT_RULES", "STEADY_RULES", "House", "Judgement", "View", "judge", "judge_all", "judge_events"]
