"""The netlist seen from its nets: which terminal of which kind of part sits on each net, fitted parts only."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property

from drc_power.netlist.model import Netlist, Part, Pin
from drc_power.survey.model import Identity

OPEN = "unconnected-"


@dataclass(frozen=True, slots=True)
class Tap:
    """One pin on a net, with the terminal it is of its part ("" when no terminal)."""

    part: Part
    identity: Identity
    pin: Pin
    terminal: str

    @property
    def ref(self) -> str:
        return self.part.ref

    @property
    def kind(self) -> str:
        return self.identity.kind


class Wiring:
    """Index of a netlist by net. Nothing in it changes once built; all orders follow the netlist's own."""

    def __init__(self, netlist: Netlist, identities: Mapping[str, Identity], left_out: Iterable[str] = ()) -> None:
        self.netlist = netlist
        self.identities = identities
        self.left_out = frozenset(left_out)
        self._taps: dict[str, list[Tap]] = {}
        self._by_kind: dict[tuple[str, str], list[Tap]] = {}
        for part in self.parts():
            self._add(part)

    def parts(self) -> Iterator[Part]:
        """The fitted parts."""
        return (part for ref, part in self.netlist.parts.items() if ref not in self.left_out)

    def _add(self, part: Part) -> None:
        identity = self.identities[part.ref]
        terminal_of: dict[str, str] = {}
        for name, numbers in identity.terminals.items():
            for number in numbers:
                terminal_of.setdefault(number, name)
        for pin in part.pins:
            if pin.net:
                tap = Tap(part, identity, pin, terminal_of.get(pin.number, ""))
                self._taps.setdefault(pin.net, []).append(tap)
                self._by_kind.setdefault((pin.net, identity.kind), []).append(tap)

    @cached_property
    def nets(self) -> tuple[str, ...]:
        """Nets with at least one pin of a fitted part, in the netlist's order."""
        return tuple(net for net in self.netlist.nets if net in self._taps)

    def taps(self, net: str) -> list[Tap]:
        """The pins on a net."""
        return self._taps.get(net, [])

    def kind(self, ref: str) -> str:
        return self.identities[ref].kind

    def net(self, ref: str, terminal: str) -> str:
        """Net of the first wired pin of a terminal, empty if there is none."""
        return next(iter(self.nets_of(ref, terminal)), "")

    def nets_of(self, ref: str, terminal: str) -> tuple[str, ...]:
        """Distinct nets of a terminal's pins, in pin order, unconnected ones left out."""
        numbers = self.identities[ref].terminals.get(terminal, ())
        by_number = {pin.number: pin.net for pin in self.netlist.parts[ref].pins}
        nets = (by_number.get(number, "") for number in numbers)
        return tuple(dict.fromkeys(net for net in nets if net and not net.startswith(OPEN)))

    def across(self, tap: Tap) -> str:
        """For a part with two ends, the net at the other end; empty for any other part."""
        if tap.kind not in TWO_ENDED:
            return ""
        here = tap.pin.net
        return next((net for end in _ENDS for net in self.nets_of(tap.ref, end) if net != here), "")

    def tied(self, net: str, kind: str) -> list[Tap]:
        """The taps of one kind of part on a net."""
        return self._by_kind.get((net, kind), [])

    def kinds_on(self, net: str, without: str = "") -> set[str]:
        """Kinds of the parts on a net, one part left out."""
        found = self._kinds.get(net, set())
        mine = self.identities[without].kind if without else ""
        if mine in found and all(tap.ref == without for tap in self.tied(net, mine)):
            return found - {mine}
        return found

    @cached_property
    def _kinds(self) -> dict[str, set[str]]:
        kinds: dict[str, set[str]] = {}
        for net, kind in self._by_kind:
            kinds.setdefault(net, set()).add(kind)
        return kinds

    @cached_property
    def _terminals(self) -> dict[str, set[str]]:
        return {net: {tap.terminal for tap in taps} for net, taps in self._taps.items()}

    def terminals_on(self, net: str) -> set[str]:
        """Names of the terminals on a net."""
        return self._terminals.get(net, set())


TWO_ENDED = frozenset({
    "resistor", "capacitor", "inductor", "ferrite", "fuse", "thermistor", "net-tie", "switch", "motor", "speaker", "crystal",
    "diode", "zener", "tvs", "led", "source", "battery",
})
"""Kinds that have two ends, so that one can look through a part from one net to the other."""

_ENDS = ("a", "b", "anode", "cathode", "plus", "minus")
