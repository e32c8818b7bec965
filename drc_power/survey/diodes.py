"""Judges diodes by which way they point between which nets; clamps, freewheels, rectifiers, series diodes."""

from __future__ import annotations

import re
from collections.abc import Callable

from drc_power.netlist.model import Part
from drc_power.survey.channel import texts
from drc_power.survey.conduits import Conduit
from drc_power.survey.loads import load_on
from drc_power.survey.pins import BOOST_NAME, plain
from drc_power.survey.standing import MAIN_ENDS, Standing
from drc_power.survey.verdict import Verdict, signal

_SMALL = re.compile(r"\b(1N4148|1N4448|1N914|LL4148|BA[VSWT]\d+|BAT\d+|BAR\d+|RB751|RB520|SD10[13]|CDBU|PMEG10|1SS\d+|DAN\d|DAP\d|SDM\d|HSMS)", re.IGNORECASE)


def is_small_diode(part: Part) -> bool:
    """Whether the part number is a small-signal diode's."""
    return bool(_SMALL.search(texts(part)))


def _kinds(nets: Standing, net: str, ref: str) -> set[str]:
    return nets.wiring.kinds_on(net, ref)


def _feeder(nets: Standing, net: str, ref: str) -> bool:
    """A net on which power comes in: a contact or source on it, no chip's signal pins, no gate."""
    taps = [tap for tap in nets.wiring.taps(net) if tap.ref != ref]
    from_outside = any(tap.kind in ("connector", "source", "battery", "fuse", "switch", "transformer", "relay") for tap in taps)
    pinned = any(tap.kind in ("ic", "optocoupler") and tap.terminal == "" and tap.pin.type not in ("passive", "power_in") for tap in taps)
    return from_outside and not pinned and net not in nets.gates


def _has_reservoir(nets: Standing, net: str) -> bool:
    """A capacitor, or a choke on to one."""
    return bool(nets.wiring.tied(net, "capacitor")) or any(nets.holds_charge(nets.wiring.across(t)) for t in nets.wiring.tied(net, "inductor"))


def _switched(nets: Standing, net: str, ref: str) -> bool:
    """A node that a transistor, a converter or a winding moves about."""
    return net not in nets.supplies and not nets.holds_charge(net) and not nets.wiring.tied(net, "fuse") and any(
        tap.terminal in MAIN_ENDS or tap.terminal == "switch_node" or tap.kind in ("inductor", "transformer")
        for tap in nets.wiring.taps(net)
        if tap.ref != ref
    )


def _pulled_down(nets: Standing, net: str, ref: str) -> bool:
    """A node that something pulls towards the return, or that a winding swings: a diode from it upwards freewheels."""
    if net in nets.supplies or nets.holds_charge(net):
        return False
    if nets.wiring.kinds_on(net, ref) & {"inductor", "transformer", "relay", "motor"} or "switch_node" in nets.wiring.terminals_on(net):
        return True
    for tap in nets.wiring.taps(net):
        if tap.terminal in MAIN_ENDS and any(n in nets.low or nets.is_negative(n) for end in MAIN_ENDS for n in nets.wiring.nets_of(tap.ref, end)):
            return True
    return any(tap.kind == "ic" and tap.terminal == "" and tap.pin.type in ("open_collector", "output") for tap in nets.wiring.taps(net))


def _reversed_across_supply(nets: Standing, c: Conduit) -> Verdict | None:
    if c.a in nets.low and (c.b in nets.supplies or nets.is_power(c.b) and not _switched(nets, c.b, c.ref)):
        return Verdict("clamp", ("across the supply, conducts only when it is reversed",), 0.85)
    return None


def _bridge_leg(nets: Standing, c: Conduit) -> Verdict | None:
    """One of two diodes that meet at an alternating input, as in a bridge of single diodes."""
    for node, mine in ((c.a, "cathode"), (c.b, "anode")):
        if is_small_diode(nets.wiring.netlist.parts[c.ref]) or node in nets.supplies or node in nets.low or nets.holds_charge(node):
            continue
        partner = any(t.ref != c.ref and t.terminal == mine for t in nets.wiring.tied(node, "diode"))
        rest = _kinds(nets, node, c.ref) - {"diode", "capacitor", "tvs", "resistor", "test-point"}
        fed = rest & {"fuse", "transformer", "source"} or "connector" in rest and "ic" not in rest
        if partner and fed and rest <= {"connector", "transformer", "source", "inductor", "switch", "fuse", "ic"}:
            return Verdict("switch", ("leg of a rectifier bridge",), 0.85)
    return None


def _bootstrap(nets: Standing, c: Conduit) -> Verdict | None:
    if any(BOOST_NAME.match(plain(tap.pin.name)) and tap.kind not in ("connector", "capacitor") for tap in nets.wiring.taps(c.b)):
        return signal("bootstrap diode of a gate driver")
    return None


def _in_gate_network(nets: Standing, c: Conduit) -> Verdict | None:
    return signal("diode in a gate network") if nets.leads_to_gate(c.a) or nets.leads_to_gate(c.b) else None


def _around_regulator(nets: Standing, c: Conduit) -> Verdict | None:
    """From a regulator's output back to its input, or from its adjust pin to its output."""
    kinds = ("linear-regulator", "switching-regulator")
    regulators = {t.ref: t.terminal for kind in kinds for t in nets.wiring.tied(c.a, kind)}
    for tap in (t for kind in kinds for t in nets.wiring.tied(c.b, kind)):
        ends = (regulators.get(tap.ref), tap.terminal)
        if ends == ("output", "input"):
            return Verdict("clamp", ("back over a regulator: conducts only when its input falls below its output",), 0.7)
        if ends == ("feedback", "output"):
            return signal("discharges the capacitor at a regulator's adjust pin")
    return None


def _around_pass(nets: Standing, c: Conduit) -> Verdict | None:
    """Back over a series transistor, from its steady output to its input."""
    if not nets.holds_charge(c.a) and c.a not in nets.supplies:
        return None
    reach = nets.far(c.a, c.ref)
    for kind in ("mosfet", "bjt"):
        for tap in nets.wiring.tied(c.b, kind):
            ends = {net for end in MAIN_ENDS for net in nets.wiring.nets_of(tap.ref, end)}
            if tap.terminal in MAIN_ENDS and ends & reach:
                return Verdict("clamp", ("back over a series transistor: conducts only when its input falls below its output",), 0.65)
    return None


def _line_clamp(nets: Standing, c: Conduit) -> Verdict | None:
    """A small diode from a signal to a supply or from ground to a signal."""
    for fixed, line in ((c.a, c.b), (c.b, c.a)):
        if nets.is_any(fixed) and not nets.is_any(line) and not _switched(nets, line, c.ref):
            paired = any(t.kind == "diode" and t.ref != c.ref for t in nets.wiring.taps(line))
            if is_small_diode(nets.wiring.netlist.parts[c.ref]) and (paired or not _feeder(nets, line, c.ref)):
                return signal("clamps a signal to a supply or ground")
    return None


def _freewheel_up(nets: Standing, c: Conduit) -> Verdict | None:
    if nets.is_power(c.b) and c.b in nets.supplies and _pulled_down(nets, c.a, c.ref) and load_on(nets, c.a, c.ref)[0] >= 1.0:
        return Verdict("switch", ("from a switched node to a supply: freewheel or rectifier diode",), 0.9)
    return None


def _freewheel_down(nets: Standing, c: Conduit) -> Verdict | None:
    if c.a in nets.low and _switched(nets, c.b, c.ref) and (nets.is_power(c.b) or load_on(nets, c.b, c.ref)[0] >= 1.0):
        return Verdict("switch", ("from the return to a switched node: freewheel or rectifier diode",), 0.9)
    return None


def _coil_diode(nets: Standing, c: Conduit) -> Verdict | None:
    """Across a relay's coil or a motor, wherever that stands."""
    for kind in ("relay", "motor", "inductor"):
        if {t.ref for t in nets.wiring.tied(c.a, kind)} & {t.ref for t in nets.wiring.tied(c.b, kind)}:
            return Verdict("switch", ("across a coil: freewheel diode",), 0.85)
    return None


def _rectifier(nets: Standing, c: Conduit) -> Verdict | None:
    """From a switched or alternating node into a reservoir capacitor."""
    if c.a in nets.low:
        return None
    moved = _pulled_down(nets, c.a, c.ref) or bool(_kinds(nets, c.a, c.ref) & {"transformer"})
    if moved and (nets.is_power(c.a) or load_on(nets, c.a, c.ref)[0] >= 2.0) and _has_reservoir(nets, c.b) and c.b not in nets.low:
        return Verdict("switch", ("from a switched node into a reservoir: rectifier diode",), 0.85)
    return None


def _snubber(nets: Standing, c: Conduit) -> Verdict | None:
    """From a winding's switched end into a resistor and capacitor back to its supply: limits the switch's voltage."""
    if not _switched(nets, c.a, c.ref) or _kinds(nets, c.b, c.ref) - {"resistor", "capacitor", "tvs", "zener", "test-point"}:
        return None
    ends = {nets.wiring.across(t) for kind in ("resistor", "capacitor", "tvs", "zener") for t in nets.wiring.tied(c.b, kind)}
    if ends and ends <= nets.supplies and not nets.holds_charge(c.b):
        return Verdict("clamp", ("snubber of a winding: limits the voltage at a switched node",), 0.7)
    return None


def _multiplier(nets: Standing, c: Conduit) -> Verdict | None:
    """A stage of a voltage multiplier: only diodes and capacitors beyond a node that carries power."""
    beyond = _kinds(nets, c.b, c.ref) - {"resistor", "connector", "test-point"}
    if nets.is_power(c.a) and c.a not in nets.supplies and beyond <= {"diode", "capacitor"} and "capacitor" in beyond:
        return Verdict("switch", ("stage of a voltage multiplier",), 0.75)
    return None


def _series(nets: Standing, c: Conduit) -> Verdict | None:
    """From one supply into another: reverse-polarity protection or OR-ing."""
    if nets.is_power(c.a) and nets.is_power(c.b):
        return Verdict("pass", ("in series between two supplies",), 0.85)
    if nets.is_power(c.b) and _feeder(nets, c.a, c.ref) or nets.is_power(c.a) and _feeds(nets, c.b, c.ref):
        return Verdict("pass", ("in series with what feeds a supply",), 0.8)
    return None


def _feeds(nets: Standing, net: str, ref: str) -> bool:
    return net not in nets.low and net not in nets.gates and load_on(nets, net, ref)[0] >= 1.5 and not nets.leads_to_gate(net)


_RULES: tuple[Callable[[Standing, Conduit], Verdict | None], ...] = (
    _bridge_leg, _bootstrap, _around_regulator, _around_pass, _coil_diode, _reversed_across_supply, _line_clamp, _freewheel_up, _freewheel_down,
    _in_gate_network, _snubber, _rectifier, _multiplier, _series,
)


def judge_diode(nets: Standing, c: Conduit) -> Verdict:
    """The first rule that holds decides."""
    for rule in _RULES:
        verdict = rule(nets, c)
        if verdict:
            return verdict
    return signal("diode on signals")


def judge_clamp(nets: Standing, c: Conduit) -> Verdict:
    """Surge suppressors and Zener diodes: clamps where they hold a supply or a switched node."""
    if nets.leads_to_gate(c.a) or nets.leads_to_gate(c.b):
        return signal("limits a gate's voltage")
    if nets.is_any(c.a) and nets.is_any(c.b):
        return Verdict("clamp", ("limits the voltage across a supply or a switched node",), 0.85)
    return signal("protects or limits a signal")


def judge_led(nets: Standing, c: Conduit) -> Verdict:
    """An indicator is signal; one without a series resistor on a power node is a load."""
    straight = {"resistor", "ic", "switching-regulator"}.isdisjoint(_kinds(nets, c.a, c.ref) | _kinds(nets, c.b, c.ref))
    if straight and (nets.is_any(c.a) or nets.is_any(c.b)):
        return Verdict("load", ("light-emitting diode straight on a power path",), 0.6)
    return signal("indicator")
