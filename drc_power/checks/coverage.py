"""coverage.data and coverage.rail: what cannot be judged, by name."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from ..findings.identity import named_subject, net_subject, part_subject
from .judgement import Judgement
from .view import View


def rails(view: View) -> Iterator[Judgement]:
    """`coverage.rail`: nets whose voltage or feed nobody gives."""
    parts = view.board.netlist.parts
    for unfed in view.solution.circuit.unfed:
        pins = [(parts[node.ref].uuid, node.pin) for node in view.board.netlist.nets[unfed.net].nodes if node.ref in parts]
        yield Judgement(
            "coverage.rail", net_subject(pins, unfed.net), "supply", "V", view.solution.node_v(unfed.net), view.unknown(),
            view.unknown(), unfed.mark, "voltage", net=unfed.net, lacking=("supply",),
            why=unfed.text, remedy=unfed.remedy)


def loads_left_blank(view: View) -> Iterator[Judgement]:
    """`coverage.data` of loads whose demand is left blank: what they draw counts as nothing until then."""
    for name, load in view.mode.loads.items():
        if load.lacks_demand:
            yield Judgement(
                "coverage.data", named_subject("load", name), f"demand of the load {name}", "", view.unknown(), view.unknown(),
                view.unknown(), load.mark, None, net=view.board.net(load.net) if load.net else None, mode=view.mode.name,
                lacking=("demand",), why=f"what the load {name} takes is left blank",
                remedy=f"write loads: {{{name}: {{draws: ...}}}}, or power, or resistance; 0 A if it takes nothing")


def unjudged(view: View, judged: Iterable[str]) -> Iterator[Judgement]:
    """`coverage.data`: elements that no other rule has anything to say about, or that the network could not take in."""
    judged = frozenset(judged)
    for ref in view.board.elements:
        if ref not in judged:
            yield _unjudged(view, ref)


def _unjudged(view: View, ref: str) -> Judgement:
    part = view.mode.parts[ref]
    missing = view.solution.circuit.missing.get(ref, ())
    lacking = missing or (("limits",) if part.device else ("device",))
    if part.device is None:
        remedy = f"write parts: {{{ref}: {{device: NAME}}}}, or outside: with a reason"
    else:
        remedy = f"give {', '.join(lacking)}"
    return Judgement(
        "coverage.data", part_subject(part.part.uuid, ref), "device data", "", view.unknown(), view.unknown(),
        view.unknown(), view.board.where(part), None, ref, lacking=lacking, remedy=remedy)
