"""Judges the parts with two ends that carry supply current without switching it: fuses, beads, inductors, resistors."""

from __future__ import annotations

import re

from drc_power.survey import pins
from drc_power.survey.conduits import Conduit
from drc_power.survey.grounds import is_low_ohm
from drc_power.survey.loads import has_power_size, load_on, own_size
from drc_power.survey.pins import plain
from drc_power.survey.standing import MAIN_ENDS, Standing
from drc_power.survey.values import henries, ohms, watts
from drc_power.survey.verdict import Verdict, signal
from drc_power.survey.voltages import voltage_of_name
from drc_power.survey.wiring import Tap

_RF_HENRY = 100e-9


def takes_power(nets: Standing, net: str, without: str) -> bool:
    """Whether a net is a supply or node already, or what hangs on it draws power."""
    return nets.is_power(net) or load_on(nets, net, without)[0] >= 1.0


def may_feed(nets: Standing, net: str, without: str) -> bool:
    """Whether power may come from a net: a contact, battery, fuse, rectifier or power transistor on it, no signal pins."""
    for tap in nets.wiring.taps(net):
        if tap.ref == without:
            continue
        if tap.kind in ("connector", "battery", "source", "fuse", "bridge"):
            return True
        if tap.kind == "mosfet" and tap.terminal in MAIN_ENDS and own_size(tap.part)[0] >= 1.0:
            return True
    return False


def is_return(nets: Standing, net: str, without: str) -> bool:
    """Whether return current comes through the net: a ground, or a transistor, ground pin or connector on it."""
    if net in nets.grounds:
        return True
    return net in nets.low and any(
        tap.terminal in MAIN_ENDS
        or tap.kind in ("connector", "battery", "source", "inductor", "motor", "bridge", "speaker") and tap.terminal != "plus"
        or pins.is_ground_pin(tap.pin)
        or tap.kind in ("diode", "tvs", "zener") and tap.terminal == "anode"
        for tap in nets.wiring.taps(net)
        if tap.ref != without
    )


def judge_fuse(nets: Standing, c: Conduit) -> Verdict:
    """A fuse is always on a power path."""
    return Verdict("pass", ("a fuse is in series with a supply",), 0.95)


def judge_tie(nets: Standing, c: Conduit) -> Verdict:
    """A jumper or net tie conducts: it counts where it joins supplies or grounds."""
    if c.a in nets.grounds and c.b in nets.grounds:
        return Verdict("pass", ("joins two grounds",), 0.8)
    for one, other in ((c.a, c.b), (c.b, c.a)):
        if nets.is_power(one) and other not in nets.low and takes_power(nets, other, c.ref):
            return Verdict("pass", ("joins a supply to what draws from it",), 0.85)
    return signal("jumper on signals")


def judge_switch(nets: Standing, c: Conduit) -> Verdict:
    """A mechanical switch counts where a supply goes through it; buttons to ground are signals."""
    if c.a in nets.low or c.b in nets.low:
        return signal("switch to ground on a signal")
    for one, other in ((c.a, c.b), (c.b, c.a)):
        if nets.is_power(one) and not _signal_pins(nets, other) and (takes_power(nets, other, c.ref) or may_feed(nets, other, c.ref)):
            return Verdict("pass", ("a supply goes through the switch",), 0.85)
    return signal("switch on signals")


def _signal_pins(nets: Standing, net: str) -> bool:
    return any(tap.kind in ("ic", "gate-driver") and tap.terminal == "" for tap in nets.wiring.taps(net)) and not nets.is_power(net)


def judge_ferrite(nets: Standing, c: Conduit) -> Verdict:
    """A bead counts in a supply or in a return; on a data line it is a filter."""
    if nets.is_power(c.a) or nets.is_power(c.b) or any("switch_node" in nets.wiring.terminals_on(net) for net in (c.a, c.b)):
        return Verdict("pass", ("bead in series with a supply",), 0.9)
    if is_return(nets, c.a, c.ref) and is_return(nets, c.b, c.ref):
        return Verdict("pass", ("bead between two grounds",), 0.85)
    if takes_power(nets, c.a, c.ref) and takes_power(nets, c.b, c.ref) and not (c.a in nets.low or c.b in nets.low):
        return Verdict("pass", ("bead between a source and a load",), 0.6)
    return signal("filter bead on a signal")


def judge_inductor(nets: Standing, c: Conduit) -> Verdict:
    """An inductor counts at a switch node, in a supply, or between a driver and its load."""
    part = nets.wiring.netlist.parts[c.ref]
    taps = [t for net in (c.a, c.b) for t in nets.wiring.taps(net) if t.ref != c.ref]
    if any(t.terminal == "switch_node" for t in taps):
        return Verdict("pass", ("inductor at a converter's switch node",), 0.95)
    if c.a in nets.low and c.b in nets.low:
        return Verdict("pass", ("inductor in a return",), 0.7)
    if nets.is_power(c.a) or nets.is_power(c.b):
        small = (henries(part.value) or 1.0) < _RF_HENRY
        if small and not (c.a in nets.supplies and c.b in nets.supplies):
            return signal("inductor of radio-frequency size")
        return Verdict("pass", ("inductor in series with a supply or a switched node",), 0.85)
    if any(_drives_speaker(t) for t in taps) and any(t.kind in ("connector", "speaker", "capacitor") for t in taps):
        return Verdict("pass", ("output filter of a power amplifier",), 0.75)
    return signal("inductor on signals")


_POWER_OUT = re.compile(r"^(OUT|SPK|VO)\w{0,4}[+-]?$|^[LR]?OUT\w?[+-]?$|^O[ABCD]\d?$|^MOT\w*$")


def _drives_speaker(tap: Tap) -> bool:
    return tap.kind == "ic" and bool(_POWER_OUT.match(plain(tap.pin.name))) and len(tap.part.pins) >= 8


def judge_thermistor(nets: Standing, c: Conduit) -> Verdict:
    """An inrush limiter lies between two power nets; other thermistors measure."""
    if nets.is_power(c.a) and nets.is_power(c.b):
        return Verdict("pass", ("thermistor in series with a supply",), 0.7)
    return signal("thermistor that measures temperature")


def judge_resistor(nets: Standing, c: Conduit) -> Verdict:
    """A resistor counts as shunt, link, dropper or supply filter, as a load across a rail, and otherwise not."""
    part = nets.wiring.netlist.parts[c.ref]
    value = ohms(part.value)
    if c.a in nets.gates or c.b in nets.gates:
        return signal("gate or base resistor")
    if {t.ref for t in nets.wiring.tied(c.a, "inductor")} & {t.ref for t in nets.wiring.tied(c.b, "inductor")}:
        return signal("across an inductor: damping")
    if is_low_ohm(part):
        verdict = _shunt(nets, c, value)
    elif value is not None and value <= 100.0:
        verdict = _dropper(nets, c, value)
    elif value is not None and value <= 1000.0 and has_power_size(part) and nets.is_power(c.a) and nets.is_power(c.b):
        verdict = Verdict("pass", ("limits an inrush between two power nets",), 0.7)
    else:
        verdict = None
    return verdict or _load_resistor(nets, c, value, watts(f"{part.value} {part.description}")) or signal(_why_signal(nets, c, value))


def _shunt(nets: Standing, c: Conduit, value: float | None) -> Verdict | None:
    word = "link" if value == 0 else "current-sense resistor"
    if value and _under_a_chip(nets, c):
        return Verdict("pass", (f"{word} between a chip and the return",), 0.85)
    if is_return(nets, c.a, c.ref) and is_return(nets, c.b, c.ref):
        return Verdict("pass", (f"{word} in a return",), 0.9)
    for one, other in ((c.a, c.b), (c.b, c.a)):
        if nets.is_power(one) and other not in nets.low and not nets.leads_to_gate(other) and takes_power(nets, other, c.ref):
            return Verdict("pass", (f"{word} in series with a supply or a switched node",), 0.9)
    if value and _monitored(nets, c) and (nets.is_power(c.a) or nets.is_power(c.b)):
        return Verdict("pass", (f"{word} with a chip that measures across it",), 0.9)
    if c.a in nets.low or c.b in nets.low:
        return None
    loaded = [load_on(nets, net, c.ref)[0] >= 1.5 for net in (c.a, c.b)]
    if value and any(loaded) and all(is_loaded or may_feed(nets, net, c.ref) for is_loaded, net in zip(loaded, (c.a, c.b), strict=True)):
        return Verdict("pass", (f"{word} between a driver and its load",), 0.7)
    return None


def _under_a_chip(nets: Standing, c: Conduit) -> bool:
    """From a ground to a pin of a chip that switches a load itself, as under the bridges of a motor driver."""
    for ground, other in ((c.a, c.b), (c.b, c.a)):
        if ground in nets.grounds and other not in nets.grounds and not nets.is_power(other):
            return bool(nets.wiring.kinds_on(other, c.ref) & {"ic", "gate-driver", "switching-regulator"})
    return False


def _monitored(nets: Standing, c: Conduit) -> bool:
    """A chip has pins on both ends: it measures the current."""
    kinds = ("ic", "gate-driver", "switching-regulator", "load-switch")
    chips = [{t.ref for kind in kinds for t in nets.wiring.tied(net, kind)} for net in (c.a, c.b)]
    return bool(chips[0] & chips[1])


def _dropper(nets: Standing, c: Conduit, value: float) -> Verdict | None:
    if nets.is_power(c.a) and nets.is_power(c.b) and (c.a in nets.supplies or c.b in nets.supplies) and not _switching(nets, c):
        return Verdict("pass", ("resistor between two supplies: filter or dropper",), 0.7)
    if c.a in nets.low and c.b in nets.low and is_return(nets, c.a, c.ref) and is_return(nets, c.b, c.ref):
        return Verdict("pass", ("low resistance in a return",), 0.7)
    if value > 10.0 or nets.leads_to_gate(c.a) or nets.leads_to_gate(c.b):
        return None
    for one, other in ((c.a, c.b), (c.b, c.a)):
        if nets.is_power(one) and other not in nets.low and load_on(nets, other, c.ref)[0] >= 1.5:
            return Verdict("pass", ("low resistance in series with a load",), 0.6)
    return None


def _switching(nets: Standing, c: Conduit) -> bool:
    """Whether an end is a node that neither is a supply nor holds charge, so that a filter makes no sense there."""
    return any(net not in nets.supplies and not nets.holds_charge(net) and any(t.terminal in MAIN_ENDS for t in nets.wiring.taps(net)) for net in (c.a, c.b))


def _load_resistor(nets: Standing, c: Conduit, value: float | None, rated_w: float | None) -> Verdict | None:
    """A resistor straight across a rail draws from it all the time."""
    rail = c.a if nets.is_power(c.a) and c.b in nets.low else c.b if nets.is_power(c.b) and c.a in nets.low else ""
    if not rail:
        return None
    volts = voltage_of_name(rail)
    power_w = volts**2 / value if volts and value else 0.0
    if value is None or value <= 1000.0 or power_w >= 0.05 or (rated_w or 0.0) >= 1.0:
        return Verdict("load", ("resistor across a rail",), 0.7)
    return None


def _why_signal(nets: Standing, c: Conduit, value: float | None) -> str:
    """The plainest reason that holds, for the reader."""
    wiring = nets.wiring
    if any(wiring.tied(net, "led") and not nets.is_any(net) for net in (c.a, c.b)):
        return "series resistor of a light-emitting diode"
    if any("feedback" in wiring.terminals_on(net) and not nets.is_power(net) for net in (c.a, c.b)):
        return "feedback divider"
    if any(wiring.kinds_on(net, c.ref) == {"capacitor"} for net in (c.a, c.b)):
        return "in series with a capacitor: snubber or filter"
    sides = {"supply" if nets.is_power(n) else "return" if n in nets.low else "signal" for n in (c.a, c.b)}
    reasons = (
        ({"supply", "signal"}, "pull-up, bias or divider"),
        ({"return", "signal"}, "pull-down, bias or divider"),
        ({"supply", "return"}, "small bleed across a rail"),
        ({"supply"}, "high resistance between supplies"),
        ({"return"}, "strap to ground"),
    )
    return next((words for wanted, words in reasons if sides == wanted), "series resistor on a signal")
