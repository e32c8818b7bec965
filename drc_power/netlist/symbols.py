"""The `libparts` section: the library symbols, which know every pin, connected or not."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from drc_power.netlist.clauses import is_set, plain
from drc_power.netlist.sexpr import Clause


@dataclass(frozen=True, slots=True)
class Jumpers:
    """Pins that a part joins inside: groups of pin numbers, and all pins that share a number."""

    groups: frozenset[tuple[str, ...]] = frozenset()
    same_number: bool = False

    def __or__(self, other: Jumpers) -> Jumpers:
        return Jumpers(self.groups | other.groups, self.same_number or other.same_number)


@dataclass(frozen=True, slots=True)
class Symbol:
    """A library symbol. `pins` gives (name, type) by number."""

    description: str = ""
    pins: Mapping[str, tuple[str, str]] = field(default_factory=dict)
    jumpers: Jumpers = Jumpers()

    def __or__(self, other: Symbol) -> Symbol:
        """Two descriptions of one symbol as one, the same whichever comes first in the file."""
        pins = dict(other.pins)
        for number, pin in self.pins.items():
            pins[number] = min(pin, pins.get(number, pin))
        return Symbol(max(self.description, other.description), pins, self.jumpers | other.jumpers)


Symbols = Mapping[tuple[str, str], Symbol]


def read_symbols(libparts: Iterable[Clause]) -> Symbols:
    """The symbols by library and name, aliases included."""
    symbols: dict[tuple[str, str], Symbol] = {}
    for libpart in libparts:
        symbol = Symbol(libpart.value("description"), _pins(libpart), read_jumpers(libpart))
        aliases = (text for section in libpart.each("aliases") for key, text in section.values if key == "alias")
        for name in (libpart.value("part"), *aliases):
            key = libpart.value("lib"), name
            symbols[key] = symbols[key] | symbol if key in symbols else symbol
    return symbols


def _pins(libpart: Clause) -> dict[str, tuple[str, str]]:
    values = (dict(pin.values) for pin in libpart.each_in("pins", "pin"))
    return {pin["num"]: (plain(pin.get("name", "")), pin.get("type", "")) for pin in values if "num" in pin}


def read_jumpers(clause: Clause) -> Jumpers:
    """The jumper pins that a `comp` or `libpart` declares, as KiCad 10 does: `(group (pin "1") (pin "3"))`."""
    groups = frozenset(
        tuple(text for key, text in group.values if key == "pin")
        for group in clause.each_in("jumper_pin_groups", "group")
    )
    return Jumpers(groups, is_set(clause, "duplicate_pin_numbers_are_jumpers"))
