"""The `libparts` sections: the library symbols, which know every pin, connected or not."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from drc_power.netlist.clauses import Inside, each, is_set, plain, text_of
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
    """The symbols of the `libparts` sections by library and name, aliases included."""
    symbols: dict[tuple[str, str], Symbol] = {}
    for libpart in each("libpart", libparts):
        inside = libpart.by_name()
        symbol = Symbol(text_of(inside, "description"), _pins(inside), read_jumpers(inside))
        aliases = (alias.text for alias in each("alias", inside.get("aliases", ())))
        for name in (text_of(inside, "part"), *aliases):
            key = text_of(inside, "lib"), name
            symbols[key] = symbols[key] | symbol if key in symbols else symbol
    return symbols


def _pins(inside: Inside) -> dict[str, tuple[str, str]]:
    values = ({clause.name: clause.text for clause in pin.clauses} for pin in each("pin", inside.get("pins", ())))
    return {v["num"]: (plain(v.get("name", "")), v.get("type", "")) for v in values if "num" in v}


def read_jumpers(inside: Inside) -> Jumpers:
    """The jumper pins that a `comp` or `libpart` clause declares, as KiCad 10 does."""
    groups = [group for clause in inside.get("jumper_pin_groups", ()) for group in clause.clauses]
    pins = frozenset((*group.words, *(pin.text for pin in each("pin", [group]))) for group in groups)
    return Jumpers(pins, is_set(inside, "duplicate_pin_numbers_are_jumpers"))
