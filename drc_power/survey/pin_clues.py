"""What a part's pins say of its kind: each row is a question about the pins and the weight of a yes."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import NamedTuple

from drc_power.netlist.model import Part
from drc_power.survey import pins as pin_tables
from drc_power.survey.pins import BOOST_NAME, DRIVE_NAME, plain


@dataclass(frozen=True)
class PinSet:
    """The pins of one part, asked in the ways that the rows below need."""

    part: Part

    @cached_property
    def names(self) -> frozenset[str]:
        """Names that say something: not empty and not just the pin's own number."""
        return frozenset(plain(p.name) for p in self.part.pins if p.name and plain(p.name) != p.number.upper())

    @cached_property
    def count(self) -> int:
        return len(self.part.pins)

    def shows(self, kind: str, *terminals: str) -> bool:
        """Whether the names show all these terminals of `kind`."""
        found = pin_tables.named(kind, self.part.pins)
        return all(terminal in found for terminal in terminals)

    def only(self, kind: str) -> bool:
        """Whether every pin that has a name is a terminal of `kind`."""
        known = sum(len(numbers) for numbers in pin_tables.named(kind, self.part.pins).values())
        return known >= sum(1 for p in self.part.pins if plain(p.name) not in ("", "NC", "MP"))

    def number_of(self, kind: str, terminal: str) -> int:
        return len(pin_tables.named(kind, self.part.pins).get(terminal, ()))

    @cached_property
    def drives(self) -> int:
        """Pins that drive gates outside."""
        return sum(1 for p in self.part.pins if p.type != "input" and DRIVE_NAME.match(plain(p.name)))

    @cached_property
    def power_block(self) -> bool:
        """Two transistors as half a bridge in one package, named after what they do."""
        return self.has("VIN", "PGND") and self.any_of("SW", "VSW") and self.any_of("TG", "HG", "GH") and not self.any_of("VCC", "VDD", "PVCC", "VDRV")

    @cached_property
    def boosts(self) -> bool:
        """A pin for the bootstrap capacitor of a high-side switch."""
        return any(BOOST_NAME.match(name) for name in self.names)

    @cached_property
    def plain_contacts(self) -> bool:
        """Pins called Pin_1, P1, 1 and the like."""
        return self.count > 0 and all(
            name.startswith(("PIN_", "PAD")) or name.lstrip("P").isdigit() or name in ("MP", "MOUNTPIN", "PM", "SHIELD", "")
            for name in (plain(p.name) for p in self.part.pins)
        )

    def has(self, *wanted: str) -> bool:
        return all(name in self.names for name in wanted)

    def any_of(self, *wanted: str) -> bool:
        return any(name in self.names for name in wanted)


class PinClue(NamedTuple):
    """One row: where `holds` is true of the pins, `kind` gains `weight` (which may be negative)."""

    holds: Callable[[PinSet], bool]
    kind: str
    weight: float
    words: str


_TWO_ENDED = ("resistor", "capacitor", "inductor", "ferrite", "fuse", "diode", "led", "zener", "tvs")
_BIG = ("resistor", "capacitor", "ferrite", "fuse", "diode", "zener", "led", "mosfet", "bjt", "igbt", "bridge", "battery")


def _shows_three(kind: str, *terminals: str) -> Callable[[PinSet], bool]:
    return lambda p: 3 <= p.count <= 12 and p.shows(kind, *terminals) and p.only(kind)


PIN_CLUES: tuple[PinClue, ...] = (
    PinClue(_shows_three("mosfet", "drain", "gate", "source"), "mosfet", 6.0, "pins named drain, gate, source"),
    PinClue(_shows_three("bjt", "collector", "base", "emitter"), "bjt", 6.0, "pins named collector, base, emitter"),
    PinClue(_shows_three("igbt", "collector", "gate", "emitter"), "igbt", 6.0, "pins named collector, gate, emitter"),
    PinClue(lambda p: p.has("G1", "G2") and p.any_of("S1", "S2", "D1", "D2", "S1/D2"), "mosfet", 6.0, "two sets of drain, gate, source"),
    PinClue(lambda p: p.count <= 3 and p.shows("diode", "anode", "cathode") and p.only("diode"), "diode", 2.5, "pins named anode, cathode"),
    PinClue(lambda p: p.count <= 3 and p.shows("diode", "anode", "cathode") and p.only("diode"), "led", 1.0, "pins named anode, cathode"),
    PinClue(lambda p: p.power_block, "mosfet", 9.0, "half a bridge in one package"),
    PinClue(lambda p: p.any_of("RK", "GK", "BK", "RA", "GA"), "led", 4.0, "anodes or cathodes by colour"),
    PinClue(lambda p: p.count == 4 and p.has("+", "-"), "bridge", 3.0, "pins + and - and two more"),
    PinClue(lambda p: p.count <= 8 and p.shows("linear-regulator", "input", "output", "ground") and not p.drives
            and not p.shows("switching-regulator", "switch_node"), "linear-regulator", 2.5, "pins named input, output, ground"),
    PinClue(lambda p: p.count <= 4 and p.shows("linear-regulator", "input", "output", "feedback"), "linear-regulator", 4.0, "pins named input, output, adjust"),
    PinClue(lambda p: p.shows("switching-regulator", "input", "switch_node") and p.count >= 5
            and (p.shows("switching-regulator", "feedback") or p.shows("switching-regulator", "output") or p.boosts),
            "switching-regulator", 5.0, "pins named input, switch node, feedback"),
    PinClue(lambda p: p.boosts and p.any_of("SW", "SW1", "SW2", "LX", "LX1", "PH") and not p.drives, "switching-regulator", 3.0, "switch node and bootstrap pin"),
    PinClue(lambda p: 3 < p.count <= 12 and len(p.names) >= 3 and not p.shows("mosfet", "drain", "source") and not p.power_block and not p.has("G1", "G2"), "mosfet", -4.0, "pins not a mosfet's"),
    PinClue(lambda p: 3 < p.count <= 12 and len(p.names) >= 3 and not p.shows("bjt", "collector", "emitter") and not p.any_of("C1", "E1", "C2"), "bjt", -4.0, "pins not a bipolar transistor's"),
    PinClue(lambda p: p.number_of("switching-regulator", "switch_node") >= 3 and p.shows("switching-regulator", "input"), "switching-regulator", 4.0, "several pins for the switch node"),
    PinClue(lambda p: p.drives >= 1 and p.boosts, "gate-driver", 2.5, "pins that drive gates outside"),
    PinClue(lambda p: p.drives >= 2, "gate-driver", 2.5, "pins that drive gates outside"),
    PinClue(lambda p: p.drives >= 1 and p.count >= 5, "switching-regulator", -3.0, "drives gates outside"),
    PinClue(lambda p: p.drives >= 1 and p.count >= 5 and p.shows("switching-regulator", "feedback"), "ic", 4.0, "controller of outside switches"),
    PinClue(lambda p: p.drives >= 2 and p.count >= 5, "load-switch", -2.0, "drives gates outside"),
    PinClue(lambda p: 4 <= p.count <= 10 and p.has("D", "S") and p.any_of("ON", "EN"), "load-switch", 5.0, "pins named drain, source, on"),
    PinClue(lambda p: p.any_of("ILIM", "ISET", "FLT", "FLG", "FAULT", "OC") and p.shows("load-switch", "input", "output"), "load-switch", 3.0, "input, output and a fault flag or current limit"),
    PinClue(lambda p: p.any_of("IP+", "IP-", "IP+_1"), "ic", 4.0, "current path through a sensor"),
    PinClue(lambda p: p.any_of("A1", "COIL1") and p.any_of("11", "14", "COM", "NO"), "relay", 3.0, "coil and contacts"),
    PinClue(lambda p: p.count >= 9, "ic", 1.5, "many pins"),
    PinClue(lambda p: p.count >= 30, "ic", 1.5, "very many pins"),
    PinClue(lambda p: p.count >= 3 and p.plain_contacts, "connector", 1.5, "numbered contacts"),
    PinClue(lambda p: p.any_of("PIN_1"), "connector", 3.0, "numbered contacts"),
    PinClue(lambda p: p.has("VBUS") and p.any_of("D+", "D-", "CC1", "DP1", "-D"), "connector", 1.0, "bus contacts"),
    PinClue(lambda p: p.count == 1, "test-point", 1.0, "one pin"),
    PinClue(lambda p: p.count == 0, "mechanical", 4.0, "no pins"),
    *(PinClue(lambda p: p.count not in (2, 3), kind, -2.0, "not two pins") for kind in ("diode", "zener")),
    *(PinClue(lambda p: p.count <= 2, kind, -5.0, "at most two pins") for kind in ("ic", "mosfet", "bjt", "igbt", "linear-regulator", "switching-regulator", "load-switch", "gate-driver", "bridge", "optocoupler", "relay", "transformer")),
    *(PinClue(lambda p: p.count == 3, kind, -2.0, "three pins") for kind in ("gate-driver", "bridge", "switching-regulator")),
    *(PinClue(lambda p: p.count < 2, kind, -4.0, "fewer than two pins") for kind in _TWO_ENDED),
    *(PinClue(lambda p: p.count > 12, kind, -6.0, "too many pins") for kind in _BIG),
    *(PinClue(lambda p: p.count > 16, kind, -2.0, "too many pins") for kind in ("linear-regulator", "load-switch")),
)


def pin_clues(part: Part) -> list[PinClue]:
    """The rows that hold for the pins of `part`."""
    pins = PinSet(part)
    return [clue for clue in PIN_CLUES if clue.holds(pins)]
