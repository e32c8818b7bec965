"""Alternating rails: which net feeds each rectifier, from a source or from a transformer's secondary."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from drc_power.netlist.model import Netlist
from drc_power.survey.model import Element, Stage, Survey

_IN_SERIES = frozenset({"fuse", "resistor", "thermistor", "inductor", "ferrite", "switch", "relay", "net-tie"})


@dataclass(frozen=True, slots=True)
class AlternatingRail:
    """A net with an alternating voltage against another, and what puts it there, "" if nobody knows."""

    net: str
    back: str
    source: str


def alternating_rails(survey: Survey, netlist: Netlist) -> list[AlternatingRail]:
    """One rail for each rectifier whose alternating nets are known, in the order of the stages, each net once."""
    found = [rail for stage in survey.stages if stage.kind == "rectifier" for rail in _feeding(survey, rectified_nets(stage, survey, netlist))]
    return list({rail.net: rail for rail in reversed(found)}.values())[::-1]


def rectified_nets(stage: Stage, survey: Survey, netlist: Netlist) -> tuple[str, ...]:
    """The two alternating nets of a rectifier: a bridge with its pins known, or four diodes that make one; else ()."""
    refs = stage.parts.get("bridge", ())
    ends = [_terminal_nets(ref, survey, netlist) for ref in refs]
    if len(ends) == 1 and {"plus", "minus", "ac1", "ac2"} <= ends[0].keys():
        return ends[0]["ac1"], ends[0]["ac2"]
    if len(ends) != 4 or not all({"anode", "cathode"} <= each.keys() for each in ends):
        return ()
    anodes, cathodes = ([each[end] for each in ends] for end in ("anode", "cathode"))
    both = sorted(set(anodes) & set(cathodes))
    doubled = [len({net for net in nets if nets.count(net) == 2}) for nets in (anodes, cathodes)]
    return tuple(both) if len(both) == 2 and doubled == [1, 1] else ()


def _terminal_nets(ref: str, survey: Survey, netlist: Netlist) -> dict[str, str]:
    terminals, part = survey.parts[ref].terminals, netlist.parts[ref]
    return {name: nets[0] for name, pins in terminals.items() if (nets := part.nets_of(*pins))}


def _feeding(survey: Survey, ac: tuple[str, ...]) -> Iterator[AlternatingRail]:
    """A source that reaches the nets through parts in series, else a transformer at them, else the nets themselves."""
    if not ac:
        return
    ends = [(e, near, far) for e in survey.elements if e.group == "source" for near, far in ((e.to_net, e.from_net), (e.from_net, e.to_net))]
    direct = [(e, near, far) for e, near, far in ends if near and set(ac) & _reached(survey, near)]
    if direct:
        e, near, far = direct[0]
        yield AlternatingRail(near, far, e.ref)
        return
    secondaries = [e for e in survey.elements if e.role == "transformer" and {e.from_net, e.to_net} & set(ac)]
    yield AlternatingRail(ac[0], ac[1], secondaries[0].ref if secondaries else "")


def _reached(survey: Survey, start: str) -> set[str]:
    """The nets that a net reaches through parts in series, grounds left out."""
    ways = [{e.from_net, e.to_net} for e in survey.elements if e.group == "pass" and e.role in _IN_SERIES]
    reached, waiting = {start}, [start]
    while waiting:
        net = waiting.pop()
        new = {other for ends in ways if net in ends for other in ends} - reached - set(survey.grounds)
        reached |= new
        waiting += sorted(new)
    return reached


def feeds_a_transformer(survey: Survey, net: str) -> Element | None:
    """The transformer whose primary hangs on a net."""
    return next((e for e in survey.elements if e.role == "transformer" and e.from_net == net), None)
