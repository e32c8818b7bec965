"""Where power comes in and where it goes out: connectors, batteries, sources, motors, chips."""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import NamedTuple

from drc_power.netlist.model import Part
from drc_power.survey.chips import power_outputs
from drc_power.survey.elements import Found
from drc_power.survey.pins import plain
from drc_power.survey.standing import Standing
from drc_power.survey.verdict import Verdict

_CONTACTS = frozenset({"connector"})
_INLET = re.compile(r"barrel|dc_?jack|USB|XT\d0|battery|screw|terminal_?block|JST|AMASS|banana|power|DC-?\d|PJ-|phoenix|MKDS|TerminalBlock|PWR|Input|\bIN\b|VIN|BAT", re.IGNORECASE)
_OUTLET = re.compile(r"motor|fan|load|\bout(put)?\b|speaker|heater|valve|lamp|led", re.IGNORECASE)


class End(NamedTuple):
    """A source or load: the part, the net it is on and the return that closes the circuit ("" when none was found)."""

    ref: str
    net: str
    back: str
    verdict: Verdict


def _fed_nets(founds: Sequence[Found]) -> set[str]:
    """Nets that a one-way element feeds: nothing but a downstream net."""
    return {f.conduit.b for f in founds if f.conduit.one_way and f.verdict.group in ("pass", "switch")}


def _return_of(nets: Standing, part: Part) -> str:
    own = part.nets_of()
    return next((net for net in own if net in nets.grounds), next((net for net in own if net in nets.low), ""))


def find_sources(nets: Standing, founds: Sequence[Found]) -> list[End]:
    """Sources of every island of power nets that has one: batteries and sources first, then the likeliest inlets."""
    proper = _proper_sources(nets)
    covered = {net for end in proper for net in _downstream(founds, nets, end.net)}
    ends = list(proper)
    for score, end in sorted(_inlets(nets, founds), key=lambda item: -item[0]):
        if end.net in covered or score <= 0:
            continue
        ends.append(end)
        covered |= _downstream(founds, nets, end.net)
        ends.extend(other for _, other in _inlets(nets, founds) if other.net == end.net and other.ref != end.ref and _twin(nets, other, end))
    order = {ref: i for i, ref in enumerate(nets.wiring.netlist.parts)}
    return sorted(dict.fromkeys(ends), key=lambda end: (order[end.ref], end.net))


def _twin(nets: Standing, other: End, end: End) -> bool:
    """A second contact of the same make on the same net shares the job (two banana jacks, two battery tabs)."""
    parts = nets.wiring.netlist.parts
    return parts[other.ref].symbol == parts[end.ref].symbol and not _OUTLET.search(_words(parts[other.ref]))


def _proper_sources(nets: Standing) -> list[End]:
    found = []
    for part in nets.wiring.parts():
        if nets.wiring.kind(part.ref) not in ("battery", "source"):
            continue
        plus, minus = nets.wiring.net(part.ref, "plus"), nets.wiring.net(part.ref, "minus")
        if plus in nets.grounds and nets.is_power(minus):
            plus, minus = minus, plus
        feeds = nets.is_power(plus) or any(t.kind in ("transformer", "bridge") for t in nets.wiring.taps(plus))
        if plus and feeds and plus not in nets.gates:
            found.append(End(part.ref, plus, minus, Verdict("source", (f"{nets.wiring.kind(part.ref)} on a power net",), 0.9)))
    return found


def _words(part: Part) -> str:
    return f"{part.ref} {part.value} {part.symbol} {part.footprint} {part.description}"


def _inlets(nets: Standing, founds: Sequence[Found]) -> list[tuple[float, End]]:
    """Contacts on power nets with the weight of what says that power comes in there."""
    fed = _fed_nets(founds)
    feeds = {f.conduit.a for f in founds if f.verdict.group == "pass"} | {f.conduit.b for f in founds if f.verdict.group == "pass" and not f.conduit.one_way}
    found = []
    for part in nets.wiring.parts():
        if nets.wiring.kind(part.ref) not in _CONTACTS:
            continue
        for net in part.nets_of():
            if nets.is_power(net):
                few = len({n for n in part.nets_of() if not n.startswith("unconnected-")}) <= 4
                score = (3.0 if net not in fed else -2.0) + (1.5 if net in feeds else 0.0) + (1.0 if few else 0.0)
                score += (1.0 if _INLET.search(_words(part)) else 0.0) - (1.5 if _OUTLET.search(_words(part)) else 0.0)
                score += 1.0 if any(plain(p.name) in ("VBUS", "+", "VIN") for p in part.pins if p.net == net) else 0.0
                score -= 3.0 if _is_switched(founds, net) else 0.0
                found.append((score, End(part.ref, net, _return_of(nets, part), Verdict("source", ("contact where power comes in",), 0.6))))
    return found


def _is_switched(founds: Sequence[Found], net: str) -> bool:
    return any(f.verdict.group == "switch" and net in (f.conduit.a, f.conduit.b) and f.conduit.kind in ("mosfet", "bjt", "igbt", "relay") and f.conduit.a != net for f in founds)


def _downstream(founds: Sequence[Found], nets: Standing, net: str) -> set[str]:
    from drc_power.survey.graph import distances

    return set(distances(founds, nets, [net]))


def find_loads(nets: Standing, sources: Sequence[End]) -> list[End]:
    """Everything that draws from a power net: chips at each supply, contacts out, coils, motors, speakers."""
    inlets = {(end.ref, end.net) for end in sources}
    found = []
    for part in nets.wiring.parts():
        kind = nets.wiring.kind(part.ref)
        words = _LOAD_WORDS.get(kind)
        if words:
            for net in _drawing_nets(nets, part, kind):
                if (part.ref, net) not in inlets:
                    found.append(End(part.ref, net, _return_of(nets, part) or _other_end(nets, part, net), Verdict("load", (words,), 0.7)))
    return found


_LOAD_WORDS = {
    "ic": "supply pin of a chip",
    "gate-driver": "supply pin of a gate driver",
    "connector": "contact where power goes out",
    "motor": "motor",
    "speaker": "loudspeaker or sounder",
    "relay": "relay coil",
    "crystal": "supply pin of an oscillator",
}


def _drawing_nets(nets: Standing, part: Part, kind: str) -> list[str]:
    if kind in ("ic", "gate-driver"):
        wanted = nets.wiring.nets_of(part.ref, "supply")
        return [net for net in wanted if net in nets.supplies]
    if kind == "relay":
        wanted = nets.wiring.nets_of(part.ref, "coil")
    else:
        wanted = part.nets_of()
    powered = [net for net in wanted if nets.is_power(net)]
    return powered[:1] if kind in ("motor", "speaker", "relay", "crystal") else powered


def _other_end(nets: Standing, part: Part, net: str) -> str:
    return next((other for other in part.nets_of() if other != net and not other.startswith("unconnected-")), "")


def find_drivers(nets: Standing) -> list[End]:
    """Chips with power outputs of their own (motor bridges, audio power amplifiers): one switch per output net."""
    found = []
    for part in nets.wiring.parts():
        if nets.wiring.kind(part.ref) != "ic":
            continue
        supply = next((net for net in nets.wiring.nets_of(part.ref, "supply") if net in nets.supplies), "")
        for net in power_outputs(part):
            if net not in nets.supplies and net not in nets.low:
                found.append(End(part.ref, supply or _return_of(nets, part), net, Verdict("switch", ("chip with power outputs of its own",), 0.7)))
    return found
