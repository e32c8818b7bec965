"""Resistors off the power paths that still draw from them: dividers, bleeders and ties to a gate."""

from __future__ import annotations

from collections import defaultdict

from ..board import BoardPart
from .branches import Resistive
from .circuit import Builder
from .parts import resistance, value_resistance
from .supply import is_active

QUIET_TERMINALS = frozenset({"gate", "feedback", "control", "enable"})
"""Terminals that take no direct current."""


def add_dividers(builder: Builder) -> None:
    """Add every resistor chain between nets of the network whose inner nets take no current of their own.

    A net with a pin that may drive or draw (an output, a bidirectional pin, a connector) ends a chain: what flows
    into it is the annotated loads' affair, not a resistor's.
    """
    powered = builder.nets() | set(builder.board.grounds)
    chains = _candidates(builder)
    ends = defaultdict(set)
    for ref, (a, b) in chains.items():
        ends[a].add(ref)
        ends[b].add(ref)
    dead = [net for net in ends if net not in powered and not _may_stay(builder, net, ends[net])]
    while dead:
        net = dead.pop()
        for ref in sorted(ends[net]):
            for other in chains.pop(ref):
                ends[other].discard(ref)
                if other != net and other not in powered and not _may_stay(builder, other, ends[other]):
                    dead.append(other)
    for ref, (a, b) in chains.items():
        builder.add(Resistive(ref, a, b, resistance(builder, builder.parts[ref]), ref))


def _candidates(builder: Builder) -> dict[str, tuple[str, str]]:
    known = builder.probes.keys() | builder.staged
    found = {}
    for ref, part in builder.parts.items():
        if part.kind == "resistor" and ref not in known and is_active(builder, part) and _is_known(part):
            nets = part.terminals.get("a"), part.terminals.get("b")
            if None not in nets and nets[0] != nets[1]:
                found[ref] = nets
    return found


def _is_known(part: BoardPart) -> bool:
    return part.note.resistance is not None or value_resistance(part) is not None


def _may_stay(builder: Builder, net: str, resistors: set[str]) -> bool:
    """Whether an inner net carries a chain on: quiet, with two resistors, or one and a gate whose voltage it sets."""
    others = [node for node in builder.board.netlist.nets[net].nodes if node.ref not in resistors]
    quiet = all(_is_quiet(builder.parts[node.ref], node.pin) for node in others)
    return quiet and (len(resistors) > 1 or (len(resistors) == 1 and any(
        _terminal(builder.parts[n.ref], n.pin) == "gate" for n in others)))


def _is_quiet(part: BoardPart, pin_number: str) -> bool:
    if part.kind in ("capacitor", "test-point"):
        return True
    if _terminal(part, pin_number) in QUIET_TERMINALS:
        return True
    pin_type = next((pin.type for pin in part.part.pins if pin.number == pin_number), "")
    return pin_type.split("+")[0] == "input"


def _terminal(part: BoardPart, pin_number: str) -> str | None:
    return next((name for name, pins in part.identity.terminals.items() if pin_number in pins), None)
