"""Puts the survey together: identify, wire, judge, direct, group, trace."""

from __future__ import annotations

from collections.abc import Sequence

from drc_power.netlist.model import Netlist
from drc_power.survey import elements, inlets, outlets
from drc_power.survey.elements import Found, judge_all
from drc_power.survey.fitted import why_not_fitted
from drc_power.survey.graph import directed, return_distances
from drc_power.survey.identify import identify
from drc_power.survey.inlets import End
from drc_power.survey.model import Element, Identity, Signal, Survey
from drc_power.survey.neighbours import with_neighbours
from drc_power.survey.paths import trace
from drc_power.survey.rails_found import make_rails
from drc_power.survey.stages import find_stages
from drc_power.survey.standing import Standing
from drc_power.survey.wiring import Wiring


def build_survey(netlist: Netlist) -> Survey:
    """The survey of a netlist; see the package."""
    left_out = tuple(ref for ref, part in netlist.parts.items() if why_not_fitted(part))
    identities = with_neighbours(netlist, identify(netlist), left_out)
    wiring = Wiring(netlist, identities, left_out)
    nets = Standing(wiring)
    drivers = outlets.find_drivers(nets)
    nets.power |= {end.back for end in drivers}
    founds = judge_all(wiring, nets)
    ways_in = inlets.find_sources(nets, founds)
    steps = inlets.steps_from(nets, founds, ways_in)
    back_steps = return_distances(founds, nets, [end.back for end in ways_in])
    found_elements = _elements(netlist, identities, founds, nets, (steps, back_steps))
    found_elements += [_end_element(identities, end) for end in (*ways_in, *drivers, *outlets.find_loads(nets, ways_in))]
    order = {ref: i for i, ref in enumerate(netlist.parts)}
    ordered = tuple(sorted(found_elements, key=lambda e: (order[e.ref], _GROUPS.index(e.group), e.from_net, e.to_net)))
    return Survey(
        netlist=netlist.path,
        grounds=tuple(net for net in netlist.nets if net in nets.grounds),
        rails=make_rails(nets, ordered),
        parts=identities,
        elements=ordered,
        stages=find_stages(wiring, nets, ordered),
        paths=trace(ordered, nets),
        signal=_signals(netlist, identities, founds, ordered, left_out),
        not_fitted=left_out,
    )


_GROUPS = ("source", "pass", "switch", "clamp", "load")


def _elements(netlist: Netlist, identities: dict[str, Identity], founds: Sequence[Found], nets: Standing, steps: tuple[dict[str, int], dict[str, int]]) -> list[Element]:
    made = []
    for found in founds:
        if not found.verdict.on_path:
            continue
        identity = identities[found.conduit.ref]
        from_net, to_net = directed(found, nets, *steps)
        confidence = round(found.verdict.confidence * (0.5 + 0.5 * identity.confidence), 2)
        made.append(Element(identity.ref, found.verdict.group, identity.kind, from_net, to_net,
                            found.conduit.control or None, confidence, found.verdict.because + identity.because[:3]))
    return list(dict.fromkeys(made))


def _end_element(identities: dict[str, Identity], end: End) -> Element:
    identity = identities[end.ref]
    confidence = round(end.verdict.confidence * (0.5 + 0.5 * identity.confidence), 2)
    ends = (end.back, end.net) if end.verdict.group == "source" else (end.net, end.back)
    return Element(end.ref, end.verdict.group, identity.kind, *ends, None, confidence, end.verdict.because + identity.because[:2])


def _signals(netlist: Netlist, identities: dict[str, Identity], founds: Sequence[Found], made: Sequence[Element], left_out: Sequence[str]) -> tuple[Signal, ...]:
    on_path = {e.ref for e in made}
    reasons: dict[str, str] = {}
    for found in founds:
        if not found.verdict.on_path:
            reasons.setdefault(found.conduit.ref, found.verdict.because[0])
    return tuple(
        Signal(ref, reasons.get(ref) or elements.plain_reason(identities[ref].kind))
        for ref in netlist.parts
        if ref not in on_path and ref not in left_out
    )
