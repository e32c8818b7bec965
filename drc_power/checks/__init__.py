"""The rules, one small function each, and the place that turns what they find into findings."""

from __future__ import annotations

from collections.abc import Iterator

from ..solve.solution import Solution
from . import coverage, derating, envelope, events, heat, linear, network
from .house import House
from .judgement import Judgement
from .view import View

RULES = (heat.dissipation, heat.junction, envelope.envelope, derating.derating, network.headroom,
         network.load_voltage, network.source_limit, network.runaway, network.unsolved, coverage.rails, linear.steady, events.events)


def judge(solution: Solution, house: House, only: str | None = None) -> list[Judgement]:
    """Every judgement of one mode, or of one part alone, in an order that depends on the board alone."""
    view = View(solution, house, only)
    found = [judgement for rule in RULES for judgement in rule(view)]
    judged = {judgement.ref for judgement in found if judgement.ref and not judgement.only_if_exceeded}
    return [*found, *coverage.unjudged(view, judged)]


__all__ = ["RULES", "House", "Judgement", "View", "judge"]
