"""Judges transistors by the nets at their two ends, what hangs on the node between, and their own size."""

from __future__ import annotations

from drc_power.survey.conduits import Conduit
from drc_power.survey.loads import load_on, own_size
from drc_power.survey.series import takes_power
from drc_power.survey.standing import Standing
from drc_power.survey.verdict import Verdict, signal

_SWITCH_AT = 1.0


def judge_transistor(nets: Standing, c: Conduit) -> Verdict:
    """Pass between supplies or between returns, switch between one of them and a loaded node, else signal."""
    if c.a in nets.low and c.b in nets.low:
        return _in_return(nets, c)
    if nets.is_power(c.a) and nets.is_power(c.b):
        return _between_power(nets, c)
    if c.a in nets.low or c.b in nets.low:
        return _low_side(nets, c)
    if nets.is_power(c.a) or nets.is_power(c.b):
        return _high_side(nets, c)
    return _floating(nets, c)


def _in_return(nets: Standing, c: Conduit) -> Verdict:
    if c.a in nets.grounds and c.b in nets.grounds or own_size(nets.wiring.netlist.parts[c.ref])[0] > 0:
        return Verdict("pass", ("transistor in the return between two grounds",), 0.85)
    return signal("transistor between ground and a strap")


def _between_power(nets: Standing, c: Conduit) -> Verdict:
    node = next((net for net in (c.b, c.a) if net not in nets.supplies), "")
    if node and _is_switch_node(nets, node, c.ref):
        return Verdict("switch", ("switches a node from a supply", *load_on(nets, node, c.ref)[1]), 0.9)
    return Verdict("pass", ("transistor in series between two supplies",), 0.9)


def _is_switch_node(nets: Standing, node: str, ref: str) -> bool:
    """Another transistor or a diode from the node to a return, or an inductor on it: the node moves."""
    if any(nets.holds_charge(net) for net in nets.far(node, ref)):
        return False
    for tap in (t for net in sorted(nets.far(node, ref)) for t in nets.wiring.taps(net)):
        if tap.ref == ref:
            continue
        if tap.kind == "inductor" and nets.wiring.across(tap) not in nets.supplies or tap.kind in ("transformer", "relay", "motor"):
            return True
        if tap.kind == "diode" and tap.terminal == "cathode" and nets.wiring.across(tap) in nets.low:
            return True
        if tap.kind in ("mosfet", "bjt", "igbt") and tap.terminal.startswith(("drain", "collector", "source", "emitter")):
            ends = [n for name in ("drain", "source", "collector", "emitter") for n in nets.wiring.nets_of(tap.ref, name)]
            if any(n in nets.low for n in ends) or _complements(nets, tap.ref, ref):
                return True
    return False


def _complements(nets: Standing, one: str, other: str) -> bool:
    """A pair of opposite polarity, as in a push-pull stage between split supplies."""
    channels = {nets.wiring.identities[one].channel, nets.wiring.identities[other].channel}
    return channels in ({"n", "p"}, {"npn", "pnp"})


def _in_return_chain(nets: Standing, node: str, ref: str) -> bool:
    """The node only joins channels whose far ends are returns too: back-to-back transistors in a battery's return."""
    others = [t for t in nets.wiring.taps(node) if t.ref != ref and t.kind not in ("resistor", "capacitor", "test-point", "zener", "tvs")]
    far_ends = []
    for tap in others:
        if tap.kind != "mosfet" or not tap.terminal.startswith(("drain", "source")):
            return False
        far_ends += [n for end in ("drain", "source") for n in nets.wiring.nets_of(tap.ref, end) if n != node]
    return bool(far_ends) and all(n in nets.low for n in far_ends)


def _low_side(nets: Standing, c: Conduit) -> Verdict:
    node = c.b if c.a in nets.low else c.a
    load, words = load_on(nets, node, c.ref)
    own, own_words = own_size(nets.wiring.netlist.parts[c.ref])
    if c.kind == "mosfet" and _in_return_chain(nets, node, c.ref):
        return Verdict("pass", ("one of several transistors in series in the return", *own_words), 0.85)
    if nets.leads_to_gate(node) and load < 3.0:
        return signal("drives a gate")
    if nets.is_power(node) and node in nets.supplies:
        return Verdict("switch", ("switches a supply to the return", *own_words), 0.6) if own > 0 else signal("small transistor across a supply")
    total = load + own + _driver_weight(nets, c)
    if load > 0 and total >= _SWITCH_AT:
        return Verdict("switch", ("switches a node to the return", *words, *own_words), min(0.95, 0.6 + 0.06 * total))
    return signal("signal-level transistor: nothing that draws power hangs on it")


def _high_side(nets: Standing, c: Conduit) -> Verdict:
    node = c.b if nets.is_power(c.a) else c.a
    if nets.leads_to_gate(node):
        return signal("drives a gate")
    load, words = load_on(nets, node, c.ref)
    own, own_words = own_size(nets.wiring.netlist.parts[c.ref])
    total = load + own + _driver_weight(nets, c)
    if load > 0 and total >= _SWITCH_AT:
        if _is_switch_node(nets, node, c.ref) or not takes_power(nets, node, c.ref):
            return Verdict("switch", ("switches a node from a supply", *words, *own_words), min(0.95, 0.6 + 0.06 * total))
        return Verdict("pass", ("passes a supply on", *words, *own_words), min(0.95, 0.6 + 0.06 * total))
    if own >= 1.0 and _meets_channel(nets, node, c.ref):
        return Verdict("pass", ("in series with another transistor on a supply", *own_words), 0.75)
    return signal("signal-level transistor: nothing that draws power hangs on it")


def _meets_channel(nets: Standing, node: str, ref: str) -> bool:
    """Whether the node joins this transistor's channel to another's, as in back-to-back pairs."""
    return any(
        tap.kind == "mosfet" and tap.ref != ref and tap.terminal.startswith(("drain", "source")) and own_size(tap.part)[0] >= 1.0
        for tap in nets.wiring.taps(node)
    )


def _floating(nets: Standing, c: Conduit) -> Verdict:
    own, own_words = own_size(nets.wiring.netlist.parts[c.ref])
    ends = [load_on(nets, net, c.ref)[0] for net in (c.a, c.b)]
    if own >= 1.0 and min(ends) >= 1.5 and not any(nets.leads_to_gate(net) for net in (c.a, c.b)):
        return Verdict("switch", ("power transistor between two loaded nodes", *own_words), 0.6)
    return signal("signal-level transistor: no end on a supply or return")


def _driver_weight(nets: Standing, c: Conduit) -> float:
    """A gate-driver chip at the gate, straight or through a resistor, speaks for a power transistor."""
    reached = {c.control} | {nets.wiring.across(tap) for tap in nets.wiring.tied(c.control, "resistor")}
    return 1.0 if any(tap.kind == "gate-driver" for net in sorted(reached) for tap in nets.wiring.taps(net)) else 0.0
