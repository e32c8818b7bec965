"""Which nets are supplies: a table of evidence adds up per net; and what voltage a rail may have."""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import NamedTuple

from drc_power.survey import pins
from drc_power.survey.pins import plain
from drc_power.survey.values import farads
from drc_power.survey.voltages import is_control_name, is_supply_name, voltage_of_name
from drc_power.survey.wiring import Tap, Wiring

REGULATORS = frozenset({"linear-regulator", "switching-regulator", "load-switch"})
_CHIPS = frozenset({"ic", "gate-driver", "optocoupler", "unknown", "crystal"})
ENOUGH = 2.0


class NetView(NamedTuple):
    """One net as the evidence rows see it."""

    wiring: Wiring
    net: str
    taps: list[Tap]
    grounds: frozenset[str]

    def count(self, holds: Callable[[Tap], bool]) -> int:
        return sum(1 for tap in self.taps if holds(tap))

    def taps_behind_converter(self) -> list[Tap]:
        """Inductors from a converter's switch node to this net, where a capacitor holds it."""
        coils = [t for t in self.wiring.tied(self.net, "inductor") if "switch_node" in self.wiring.terminals_on(self.wiring.across(t))]
        return coils if self.decouplers() and "switch_node" not in self.wiring.terminals_on(self.net) else []

    def decouplers(self) -> list[Tap]:
        return [t for t in self.taps if t.kind == "capacitor" and self.wiring.across(t) in self.grounds]


class Row(NamedTuple):
    """`measure` says how often the sign is seen; each counts `weight`, all together at most `limit`."""

    measure: Callable[[NetView], float]
    weight: float
    limit: float
    words: str


_SURGE_NUMBER = re.compile(r"^(SM[ABCD]J|SMDJ|P6KE|1[.]?5KE|5KP|SMF)\d", re.IGNORECASE)
_SURGE_SIZE = re.compile(r"SM[ABC](\b|_)|DO-?(201|214|15)|RV_Disc|varistor|\d\dD\d\d\dK", re.IGNORECASE)


def _is_surge(view: NetView, tap: Tap) -> bool:
    """A suppressor of supply size from the net to a ground, not one for a data line."""
    if tap.kind not in ("tvs", "zener", "diode") or view.wiring.across(tap) not in view.grounds:
        return False
    size = f"{tap.part.value} {tap.part.footprint} {tap.part.symbol}"
    return bool(_SURGE_NUMBER.match(tap.part.value)) or tap.kind == "tvs" and bool(_SURGE_SIZE.search(size))


def _is_supply_tap(tap: Tap) -> bool:
    if tap.kind in REGULATORS:
        return tap.terminal == "" and tap.pin.type == "power_in" and pins.is_supply_name(plain(tap.pin.name))
    return tap.kind in _CHIPS and tap.terminal == "supply"


def _is_signal_tap(tap: Tap) -> bool:
    return tap.kind in _CHIPS and tap.terminal == "" and tap.pin.type in ("output", "bidirectional", "tri_state", "open_collector")


def _channels_meet(view: NetView) -> bool:
    """Ends of two transistors' channels, and no capacitor to ground: a switched node."""
    ends = {t.ref for t in view.taps if t.kind in ("mosfet", "igbt") and t.terminal.startswith(("drain", "source", "collector", "emitter"))}
    sources = any(t.kind in ("mosfet", "igbt") and t.terminal.startswith(("source", "emitter")) for t in view.taps)
    return len(ends) >= 2 and sources and not view.decouplers()


def _steady_source(view: NetView) -> float:
    """A DC source or a battery whose other end is a ground."""
    return view.count(lambda t: t.kind in ("source", "battery") and view.wiring.across(t) in view.grounds
                      and (t.kind == "battery" or not _changes(t)))


def _changes(tap: Tap) -> bool:
    text = f"{tap.part.symbol} {tap.part.value} {tap.part.fields.get('Sim.Type', '')}".upper()
    return any(word in text for word in ("PULSE", "SIN", "PWL", "EXP", "NOISE", "RANDOM", "AM", "FFM", "AC "))


ROWS: tuple[Row, ...] = (
    Row(lambda v: voltage_of_name(v.net) is not None, 3.0, 3.0, "net name says a voltage"),
    Row(lambda v: is_supply_name(v.net), 2.0, 2.0, "net name is a supply's"),
    Row(lambda v: is_control_name(v.net), -4.0, -4.0, "net name is a control signal's"),
    Row(lambda v: v.count(_is_supply_tap), 1.0, 3.0, "supply pins of chips"),
    Row(lambda v: bool(v.count(lambda t: _is_supply_tap(t) and pins.is_supply_name(plain(t.pin.name)))), 0.5, 0.5, "supply pin by its name"),
    Row(lambda v: v.count(lambda t: t.pin.type == "power_out" and not pins.is_ground_pin(t.pin)), 2.0, 2.0, "power output pin"),
    Row(lambda v: v.count(lambda t: t.kind in REGULATORS and t.terminal == "input"), 3.0, 3.0, "input of a regulator"),
    Row(lambda v: v.count(lambda t: t.kind in REGULATORS and t.terminal == "output"), 3.0, 3.0, "output of a regulator"),
    Row(lambda v: v.count(lambda t: t.kind == "bridge" and t.terminal == "plus"), 3.0, 3.0, "output of a rectifier"),
    Row(lambda v: bool(v.taps_behind_converter()), 3.0, 3.0, "behind a converter's inductor"),
    Row(_steady_source, 3.0, 3.0, "source or battery"),
    Row(lambda v: v.count(lambda t: t.kind == "connector" and t.pin.number in pins.supply_pins(t.part)), 2.0, 2.0, "supply contact of a connector"),
    Row(lambda v: len(v.decouplers()), 0.5, 1.5, "capacitors to ground"),
    Row(lambda v: v.count(lambda t: _is_surge(v, t)), 1.5, 1.5, "surge suppressor to ground"),
    Row(lambda v: bool(v.wiring.tied(v.net, "connector")) and v.count(lambda t: _is_surge(v, t)), 1.0, 1.0, "surge suppressor at a contact"),
    Row(lambda v: v.count(lambda t: t.kind == "diode" and t.terminal == "cathode" and bool(v.wiring.tied(v.wiring.across(t), "connector"))), 1.0, 1.0, "fed through a diode from a contact"),
    Row(lambda v: any((farads(t.part.value) or 0) >= 4.7e-6 for t in v.decouplers()), 1.0, 1.0, "bulk capacitor"),
    Row(lambda v: not v.decouplers() and not v.count(_is_supply_tap) and v.count(_is_signal_tap), -3.0, -3.0, "driven by a signal output"),
    Row(_channels_meet, -3.0, -3.0, "two channels meet and nothing holds it steady"),
    Row(lambda v: bool(v.wiring.tied(v.net, "connector")) and any((farads(t.part.value) or 0) >= 47e-6 for t in v.decouplers()), 1.5, 1.5, "bulk capacitor at a contact"),
    Row(lambda v: v.count(_is_signal_tap), -1.0, -3.0, "signal pins of chips"),
)


def _counted(row: Row, view: NetView) -> float:
    total = row.weight * float(row.measure(view))
    return max(row.limit, total) if row.limit < 0 else min(row.limit, total)


def supply_score(wiring: Wiring, net: str, grounds: frozenset[str]) -> tuple[float, tuple[str, ...]]:
    """(weight, words) of the evidence that a net is a supply."""
    view = NetView(wiring, net, wiring.taps(net), grounds)
    parts = [(row, _counted(row, view)) for row in ROWS]
    return sum(value for _, value in parts), tuple(row.words for row, value in parts if value > 0)


def find_supplies(wiring: Wiring, grounds: frozenset[str]) -> dict[str, tuple[str, ...]]:
    """Supply nets with the words of their evidence, in the netlist's order."""
    found = {}
    for net in wiring.nets:
        if net in grounds or len(wiring.taps(net)) < 2:
            continue
        score, words = supply_score(wiring, net, grounds)
        if score >= ENOUGH:
            found[net] = words
    return found
