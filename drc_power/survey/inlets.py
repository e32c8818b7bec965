"""Where power comes in: batteries, sources, and the contacts that look most like an inlet, island by island."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Sequence
from typing import NamedTuple

from drc_power.netlist.model import Part
from drc_power.survey.elements import Found
from drc_power.survey.graph import distances
from drc_power.survey.pins import plain
from drc_power.survey.standing import Standing
from drc_power.survey.verdict import Verdict
from drc_power.survey.voltages import leaf


class End(NamedTuple):
    """A source or load: the part, the net it is on and the return that closes the circuit ("" when none was found)."""

    ref: str
    net: str
    back: str
    verdict: Verdict


class Contact(NamedTuple):
    """A connector on a power net, as the rows below see it."""

    nets: Standing
    part: Part
    net: str
    fed: frozenset[str]
    behind: frozenset[str]
    feeds: frozenset[str]
    driven: frozenset[str]

    @property
    def words(self) -> str:
        p = self.part
        return f"{p.ref} {p.value} {p.symbol} {p.footprint} {p.description} {leaf(self.net)}"

    def others(self) -> set[str]:
        return {net for net in self.part.nets_of() if not net.startswith("unconnected-")}


class Row(NamedTuple):
    """If `holds`, the contact gains `weight` as a place where power comes in."""

    holds: Callable[[Contact], bool]
    weight: float
    words: str


_INLET = re.compile(
    r"barrel|dc_?jack|USB|XT\d0|batt|\bBAT\b|screw|terminal|JST|AMASS|banana|DC-?\d|PJ-|phoenix|MKDS|\bPWR|\bpower|\binput\b|V_?IN\b|supply|mains|_AC\b|anderson|MOLEX_39|microfit|mini-?fit|faston", re.IGNORECASE
)
_OUTLET = re.compile(r"motor|\bfan|load|\bout(put)?\d?\b|speaker|heater|valve|lamp|\bled|servo|sensor|i2c|uart|prog|jtag|swd|debug|spi\b", re.IGNORECASE)
_HEADER = re.compile(r"pin_?(header|socket)|Conn_0[12]x\d\d(?!.*terminal)|_Odd_Even|expansion|gpio", re.IGNORECASE)

ROWS: tuple[Row, ...] = (
    Row(lambda c: c.net not in c.fed and c.net not in c.behind, 3.0, "nothing else feeds the net"),
    Row(lambda c: c.net in c.behind, 0.5, "something else may feed the net"),
    Row(lambda c: c.net in c.fed, -2.0, "something else feeds the net"),
    Row(lambda c: c.net in c.feeds, 1.5, "a pass element leads on from it"),
    Row(lambda c: c.net in c.driven, -20.0, "a switch drives the net"),
    Row(lambda c: len(c.others()) <= 4, 1.0, "few contacts"),
    Row(lambda c: bool(_INLET.search(c.words)), 1.0, "looks like an inlet"),
    Row(lambda c: bool(_OUTLET.search(c.words)), -1.5, "looks like an outlet"),
    Row(lambda c: bool(_HEADER.search(c.words)), -0.5, "a header"),
    Row(lambda c: any(plain(p.name) in ("VBUS", "VIN", "+") for p in c.part.pins if p.net == c.net), 1.0, "contact named as an inlet"),
    Row(lambda c: any(t.terminal == "input" for t in c.nets.wiring.taps(c.net)), 0.5, "a regulator takes it in"),
    Row(lambda c: any(t.kind in ("fuse", "tvs") for t in c.nets.wiring.taps(c.net)), 1.0, "protected as an inlet is"),
)


def _contacts(nets: Standing, founds: Sequence[Found]) -> list[tuple[float, End]]:
    passing = [f for f in founds if f.verdict.group == "pass"]
    fed, behind = fed_nets(nets, founds)
    feeds = frozenset(f.conduit.a for f in passing) | frozenset(f.conduit.b for f in passing if not f.conduit.one_way)
    driven = _driven(nets, founds)
    found = []
    for part in nets.wiring.parts():
        if nets.wiring.kind(part.ref) == "connector":
            for net in part.nets_of():
                if nets.is_power(net):
                    contact = Contact(nets, part, net, fed, behind, feeds, driven)
                    score = sum(row.weight for row in ROWS if row.holds(contact))
                    words = tuple(row.words for row in ROWS if row.weight > 0 and row.holds(contact))
                    found.append((score, End(part.ref, net, return_of(nets, part), Verdict("source", ("contact where power comes in", *words), 0.6))))
    return found


def _driven(nets: Standing, founds: Sequence[Found]) -> frozenset[str]:
    """Nodes that a transistor, a relay or a driver chip moves: power comes out of them, not in."""
    moved = {net for f in founds if f.verdict.group == "switch" and not f.conduit.one_way for net in (f.conduit.a, f.conduit.b)}
    fixed = {net for f in founds if f.verdict.group == "pass" and f.conduit.kind not in ("inductor", "resistor") for net in (f.conduit.a, f.conduit.b)}
    coils = {net for f in founds if f.verdict.group == "pass" and f.conduit.kind == "inductor" and moved & {f.conduit.a, f.conduit.b} for net in (f.conduit.a, f.conduit.b)}
    return frozenset((moved - fixed | coils) - nets.supplies)


def return_of(nets: Standing, part: Part) -> str:
    """The ground or return on which a part's circuit closes, empty when it touches none."""
    own = part.nets_of()
    return next((net for net in own if net in nets.grounds), next((net for net in own if net in nets.low), ""))


def find_sources(nets: Standing, founds: Sequence[Found]) -> list[End]:
    """Batteries and sources first, then the likeliest inlet of every island that has none yet."""
    ends = _proper_sources(nets)
    reach = _Reach(nets, founds)
    covered = set().union(*(reach.of(end.net) for end in ends)) if ends else set()
    contacts = [(score, end) for score, end in _contacts(nets, founds) if score > 0]
    for _, end in sorted(contacts, key=lambda item: (-item[0], -len(reach.of(item[1].net)))):
        if end.net not in covered:
            ends.append(end)
            covered |= reach.of(end.net)
            ends.extend(other for _, other in contacts if other.net == end.net and other.ref != end.ref and _twin(nets, other, end))
    order = {ref: i for i, ref in enumerate(nets.wiring.netlist.parts)}
    return sorted(dict.fromkeys(ends), key=lambda end: (order[end.ref], end.net))


class _Reach:
    """Nets that power can reach from a net, remembered."""

    def __init__(self, nets: Standing, founds: Sequence[Found]) -> None:
        self._nets, self._founds, self._known = nets, founds, {}

    def of(self, net: str) -> set[str]:
        if net not in self._known:
            self._known[net] = set(distances(self._founds, self._nets, [net]))
        return self._known[net]


def _twin(nets: Standing, other: End, end: End) -> bool:
    """A second contact of the same make, or another that looks like an inlet, shares the net (a jack beside a terminal)."""
    parts = nets.wiring.netlist.parts
    part = parts[other.ref]
    alike = part.symbol == parts[end.ref].symbol
    inlet = len(part.nets_of()) <= 3 and bool(_INLET.search(f"{part.ref} {part.value} {part.symbol} {part.footprint}"))
    return (alike or inlet) and not _OUTLET.search(parts[other.ref].value + parts[other.ref].ref)


def _proper_sources(nets: Standing) -> list[End]:
    found = []
    for part in nets.wiring.parts():
        kind = nets.wiring.kind(part.ref)
        if kind not in ("battery", "source"):
            continue
        plus, minus = nets.wiring.net(part.ref, "plus"), nets.wiring.net(part.ref, "minus")
        if plus in nets.grounds and nets.is_power(minus):
            plus, minus = minus, plus
        feeds = nets.is_power(plus) or any(t.kind in ("transformer", "bridge") for t in nets.wiring.taps(plus))
        if plus and feeds and plus not in nets.gates:
            found.append(End(part.ref, plus, minus, Verdict("source", (f"{kind} on a power net",), 0.9)))
    return found


def steps_from(nets: Standing, founds: Sequence[Found], ends: Iterable[End]) -> dict[str, int]:
    """Steps of every power net from its source; an island without one starts at its busiest net that nothing feeds."""
    steps = distances(founds, nets, dict.fromkeys(end.net for end in ends))
    fed, behind = fed_nets(nets, founds)
    rest = [net for net in nets.wiring.nets if nets.is_power(net)]
    for net in sorted(rest, key=lambda n: (n in fed, n in behind, n not in nets.supplies, -len(nets.wiring.taps(n)))):
        if net not in steps:
            steps = distances(founds, nets, [net], steps)
    return steps


def fed_nets(nets: Standing, founds: Sequence[Found]) -> tuple[frozenset[str], frozenset[str]]:
    """Nets that a one-way element or a chip's power output feeds, and nets that two-way elements join to those."""
    fed = {f.conduit.b for f in founds if f.conduit.one_way and f.verdict.group in ("pass", "switch")}
    fed |= {net for net in nets.supplies if any(t.pin.type == "power_out" for t in nets.wiring.tied(net, "ic"))}
    behind = distances([f for f in founds if not f.conduit.one_way], nets, sorted(fed))
    return frozenset(fed), frozenset(behind) - fed
