"""What hangs on the switches of a stage: the drivers of their gates, and RC snubbers at the switched net."""

from __future__ import annotations

from ..board import BoardPart
from ..quantity import parse_value_field
from .circuit import Builder, Probe
from .cycles import GATE, SNUBBER, Cycled
from .parts import supply_nets
from .stage_parts import GAP_COULOMB, conducting_nets, other_net
from .supply import ground_of, is_active
from .variables import Param

DRIVERS = frozenset({"gate-driver", "ic", "switching-regulator"})
SNUBBER_MAX_F = 1e-6
"""A capacitor from here up in series with a resistor is no snubber but a filter."""


def add_gate_drives(builder: Builder) -> None:
    """The gate charge of every switched MOSFET, drawn by the chip that drives it.

    A chip whose current is annotated, as `draws` or by a load that heats it, or that counts it in its efficiency,
    draws it already.
    """
    for ref, hertz in builder.driven.items():
        driver = _driver_of(builder, builder.parts[ref])
        if driver is None or _is_counted(builder, driver):
            continue
        nets = supply_nets(builder, driver)
        if len(nets) != 1:
            builder.lack(driver.ref, "pins: {input: ...} (its supply pins are on no net or on several)")
            continue
        builder.add(Cycled(f"{driver.ref} gate of {ref}", nets[0], ground_of(builder, nets[0]), GATE, driver.ref, hertz,
                           coulomb=_charge(builder, builder.parts[ref], driver)))


def _charge(builder: Builder, part: BoardPart, driver: BoardPart) -> Param:
    given = part.device.gate.charge if part.device else None
    if given is not None:
        return builder.span(f"{part.ref} gate charge", given)
    return builder.gap(driver.ref, f"gate.charge of {part.ref}", 0.0, GAP_COULOMB, "charge")


def _driver_of(builder: Builder, part: BoardPart) -> BoardPart | None:
    """The chip at a MOSFET's gate, straight or behind one resistor or diode."""
    gate = part.terminals.get("gate") if part.kind == "mosfet" else None
    if gate is None:
        return None
    behind = [other_net(near, gate) for near in _parts_at(builder, gate) if near.kind in ("resistor", "diode", "ferrite")]
    for net in (gate, *behind):
        if net in builder.board.grounds or net in {builder.board.net(name) for name in builder.mode.rails}:
            continue
        chips = [near for near in _parts_at(builder, net) if near.kind in DRIVERS and _drives(near, net)]
        if chips:
            return chips[0]
    return None


def _drives(chip: BoardPart, net: str) -> bool:
    """Whether a chip has an output on the net; a pin that only listens there is none."""
    return any(pin.net == net and pin.type.split("+")[0] in ("output", "power_out", "bidirectional", "tri_state", "unspecified", "passive")
               for pin in chip.part.pins)


def _is_counted(builder: Builder, driver: BoardPart) -> bool:
    heated = any(str(load.heats) == driver.ref for load in builder.mode.loads.values() if load.heats)
    by_efficiency = any(getattr(branch, "chip", None) is not None and branch.chip.part == driver.ref for branch in builder.branches)
    return heated or driver.note.draws is not None or by_efficiency or not is_active(builder, driver)


def _parts_at(builder: Builder, net: str) -> list[BoardPart]:
    refs = dict.fromkeys(node.ref for node in builder.board.netlist.nets[net].nodes)
    return [builder.parts[ref] for ref in refs if ref not in builder.board.not_fitted]


def add_snubbers(builder: Builder) -> None:
    """A resistor and a capacitor in series from a switched net to either end of its bridge."""
    for x, a, b, hertz in builder.switched:
        for first in _parts_at(builder, x):
            found = _chain(builder, first, x, {a, b})
            if found is None or found[0].ref in builder.probes:
                continue
            resistor, farad = found
            key = f"{resistor.ref} snubber"
            builder.add(Cycled(key, a, b, SNUBBER, resistor.ref, hertz, farad=farad))
            ends = conducting_nets(resistor)
            builder.probes[resistor.ref] = Probe(resistor.ref, "resistor", "switching", *ends, group=key)
            builder.staged.add(resistor.ref)


def _chain(builder: Builder, first: BoardPart, x: str, ends: set[str]) -> tuple[BoardPart, Param] | None:
    """The resistor and the capacitance of a snubber that begins with a part at the switched net."""
    if first.kind not in ("resistor", "capacitor"):
        return None
    inner = other_net(first, x)
    others = [part for part in _parts_at(builder, inner) if part.ref != first.ref]
    if inner in ends or len(others) != 1 or {first.kind, others[0].kind} != {"resistor", "capacitor"}:
        return None
    if other_net(others[0], inner) not in ends:
        return None
    resistor, capacitor = (first, others[0]) if first.kind == "resistor" else (others[0], first)
    read = parse_value_field(capacitor.part.value, "capacitance")
    if read is None or read.span.max >= SNUBBER_MAX_F:
        return None
    return resistor, builder.box.param(f"{capacitor.ref} capacitance", read.span, "capacitance", builder.board.where(capacitor))
