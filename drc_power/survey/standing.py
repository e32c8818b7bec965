"""What each net is to power, as far as is known: ground, return, supply, power node, gate, or none of these."""

from __future__ import annotations

import re

from drc_power.survey.grounds import find_grounds, is_low_ohm, low_side
from drc_power.survey.rails import find_supplies
from drc_power.survey.values import farads, ohms
from drc_power.survey.voltages import leaf, voltage_of_name
from drc_power.survey.wiring import Tap, Wiring

MAIN_ENDS = ("drain", "source", "collector", "emitter", "drain_2", "source_2", "collector_2", "emitter_2")
CONTROLS = frozenset({"gate", "base", "gate_2", "base_2"})
SWITCHING_PIN = re.compile(r"^(SW\d?|VS\d?|PHASE\w?|SH[ABC123]?|HS|VSW|LX\d?|SW_?\w|[ABCUVW]?S[ABCUVW]?|MOT\w*|V_?S[ABCUVW123]|SRC|HOS?|SPKR?\w*|PH\w?)$")


class Standing:
    """The known roles of the nets. `power` grows while elements are found; the rest is fixed."""

    def __init__(self, wiring: Wiring) -> None:
        self.wiring = wiring
        self.grounds = find_grounds(wiring)
        self.supply_words = find_supplies(wiring, self.grounds)
        self.supplies = frozenset(self.supply_words)
        self.low = low_side(wiring, self.grounds, self.supplies)
        self.gates = self._gate_nets()
        self.power: set[str] = set(self.supplies)

    def is_power(self, net: str) -> bool:
        """A supply, or a net that an element already found carries power to; never a ground."""
        return net in self.power and net not in self.low

    def is_negative(self, net: str) -> bool:
        """A supply below ground, by its name."""
        return net in self.supplies and ((voltage_of_name(net) or 0.0) < 0 or leaf(net).startswith("-"))

    def is_any(self, net: str) -> bool:
        """Power or return."""
        return net in self.power or net in self.low

    def holds_charge(self, net: str) -> bool:
        """A capacitor of 1 uF or more to a return: the net's voltage is steady."""
        return any((farads(t.part.value) or 0.0) >= 1e-6 and self.wiring.across(t) in self.low for t in self.wiring.tied(net, "capacitor"))

    def _gate_nets(self) -> frozenset[str]:
        """Nets of gates and bases, and nets one resistor away that lead nowhere but to such a gate."""
        direct = {
            tap.pin.net
            for part in self.wiring.parts()
            if self.wiring.kind(part.ref) in ("mosfet", "bjt", "igbt")
            for tap in self._controls(part.ref)
        } - self.supplies - self.low
        return frozenset(net for net in direct if not self._is_also_main(net))

    def _controls(self, ref: str) -> list[Tap]:
        nets = [net for name in sorted(CONTROLS) for net in self.wiring.nets_of(ref, name)]
        return [tap for net in nets for tap in self.wiring.taps(net) if tap.ref == ref and tap.terminal in CONTROLS]

    def _is_also_main(self, net: str) -> bool:
        """A gate tied to a power node (a diode-connected transistor) does not make that node a gate net."""
        return any(tap.kind in ("inductor", "fuse", "transformer") for tap in self.wiring.taps(net))

    def leads_to_gate(self, net: str, limit_ohm: float = 1000.0) -> bool:
        """Whether the net is a gate's, or reaches one through one gate resistor."""
        if net in self.gates:
            return True
        if net in self.supplies or net in self.low:
            return False
        return any(
            self.wiring.across(tap) in self.gates
            for tap in self.wiring.tied(net, "resistor")
            if (ohms(tap.part.value) or limit_ohm) <= limit_ohm
        ) and not any(tap.kind in ("connector", "inductor") for tap in self.wiring.taps(net))

    def far(self, net: str, without: str = "") -> set[str]:
        """The net and those behind beads, net ties, fuses and low resistances: what a node reaches without loss."""
        found, waiting = {net}, [net]
        while waiting:
            for tap in self.wiring.taps(waiting.pop()):
                if tap.ref == without:
                    continue
                if tap.kind in ("net-tie", "ferrite", "fuse") or tap.kind == "resistor" and is_low_ohm(tap.part, 5.0):
                    other = self.wiring.across(tap)
                    if other and other not in found | self.supplies | self.grounds | self.gates:
                        found.add(other)
                        waiting.append(other)
        return found
