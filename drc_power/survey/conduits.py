"""The ways through a part that current can take, whatever the part is for."""

from __future__ import annotations

from dataclasses import dataclass

from drc_power.survey.model import Identity
from drc_power.survey.wiring import Wiring


@dataclass(frozen=True, slots=True)
class Conduit:
    """One way through one part, from net `a` to net `b`.

    A transistor's `a` is its drain or collector, a diode's its anode, a regulator's its input. `one_way` means that
    supply current cannot flow from b to a. A package with two transistors has two conduits.
    """

    ref: str
    kind: str
    a: str
    b: str
    control: str = ""
    one_way: bool = False
    suffix: str = ""


def conduits(wiring: Wiring, identity: Identity) -> tuple[Conduit, ...]:
    """The conduits of a part; those whose ends share a net or have none are left out."""
    maker = _MAKERS.get(identity.kind)
    found = maker(wiring, identity) if maker else []
    return tuple(dict.fromkeys(c for c in found if c.a and c.b and c.a != c.b))


def _each(wiring: Wiring, identity: Identity, first: str, second: str, one_way: bool = False) -> list[Conduit]:
    """One conduit per pair of pins of two terminals; a single pin is paired with all of the other side."""
    ref = identity.ref
    pins = {pin.number: pin.net for pin in wiring.netlist.parts[ref].pins}
    ones = [pins.get(n, "") for n in identity.terminals.get(first, ())]
    others = [pins.get(n, "") for n in identity.terminals.get(second, ())]
    if len(ones) == len(others):
        pairs = list(zip(ones, others, strict=True))
    else:
        pairs = [(one, other) for one in ones for other in others]
    return [Conduit(ref, identity.kind, a, b, one_way=one_way) for a, b in pairs if not _loose(a) and not _loose(b)]


def _loose(net: str) -> bool:
    return not net or net.startswith("unconnected-")


def _two_ended(wiring: Wiring, identity: Identity) -> list[Conduit]:
    return _each(wiring, identity, "a", "b")


def _diode(wiring: Wiring, identity: Identity) -> list[Conduit]:
    return _each(wiring, identity, "anode", "cathode", one_way=True) or _each(wiring, identity, "a", "b")


def _transistor(first: str, second: str, control: str):
    def maker(wiring: Wiring, identity: Identity) -> list[Conduit]:
        found = []
        for suffix in ("", "_2"):
            control_net = wiring.net(identity.ref, control + suffix)
            for a in wiring.nets_of(identity.ref, first + suffix):
                for b in wiring.nets_of(identity.ref, second + suffix):
                    found.append(Conduit(identity.ref, identity.kind, a, b, control_net, False, suffix))
        return found

    return maker


def _regulator(wiring: Wiring, identity: Identity) -> list[Conduit]:
    """From the input to each switch node that has an inductor outside, and to each output that no such node feeds."""
    ref = identity.ref
    barred = {*wiring.nets_of(ref, "ground"), *wiring.nets_of(ref, "input")}
    nodes = [net for net in wiring.nets_of(ref, "switch_node") if net not in barred]
    outputs = [net for net in wiring.nets_of(ref, "output") if net not in barred]
    coiled = [net for net in nodes if any(tap.kind in ("inductor", "transformer") for tap in wiring.taps(net))]
    behind = {wiring.across(tap) for net in coiled for tap in wiring.tied(net, "inductor")}
    targets = coiled + [net for net in outputs if net not in behind and net not in coiled] or nodes
    inputs = [net for net in wiring.nets_of(ref, "input") if net not in targets and net not in wiring.nets_of(ref, "ground")]
    used = _manager_inputs(wiring, ref, inputs) or inputs[:1]
    return [Conduit(ref, identity.kind, a, b, wiring.net(ref, "enable"), True) for a in used for b in targets]


_MANAGER_PINS = 20


def _manager_inputs(wiring: Wiring, ref: str, inputs: list[str]) -> list[str]:
    """A power manager takes power in at every input that a contact or battery is on (charger and cell)."""
    if len(wiring.netlist.parts[ref].pins) < _MANAGER_PINS:
        return []
    return [net for net in inputs if wiring.tied(net, "connector") or wiring.tied(net, "battery")]


def _bridge(wiring: Wiring, identity: Identity) -> list[Conduit]:
    plus = wiring.net(identity.ref, "plus")
    return [Conduit(identity.ref, identity.kind, wiring.net(identity.ref, ac), plus, one_way=True) for ac in ("ac1", "ac2")]


def _transformer(wiring: Wiring, identity: Identity) -> list[Conduit]:
    """From the first end of the primary to each end of the secondary."""
    primary = wiring.nets_of(identity.ref, "primary")
    return [Conduit(identity.ref, identity.kind, primary[0], net) for net in wiring.nets_of(identity.ref, "secondary")] if primary else []


_MAKERS = {
    **dict.fromkeys(("resistor", "ferrite", "fuse", "thermistor", "net-tie", "switch", "inductor", "relay", "ic"), _two_ended),
    **dict.fromkeys(("diode", "zener", "tvs", "led"), _diode),
    "mosfet": _transistor("drain", "source", "gate"),
    "bjt": _transistor("collector", "emitter", "base"),
    "igbt": _transistor("collector", "emitter", "gate"),
    **dict.fromkeys(("linear-regulator", "switching-regulator", "load-switch"), _regulator),
    "bridge": _bridge,
    "transformer": _transformer,
}
