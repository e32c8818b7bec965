"""From the parts that a stage names to the positions, edges and probes of its group."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from ..board import BoardPart, StageNote
from ..faults import Fault, InputError
from .branches import Drop, Leg
from .circuit import Builder, Probe
from .edges import Edge, Edges
from .parts import (
    forward_drop,
    gate_of,
    on_resistance,
    rds_scale,
    resistance,
    saturation_drop,
)
from .position import Position
from .variables import ZERO, Param

TRANSISTORS = frozenset({"mosfet", "bjt", "igbt"})
DIODES = frozenset({"diode", "led"})
ENDS = ("drain", "source", "collector", "emitter", "anode", "cathode", "a", "b")

GAP_DUTY, GAP_HZ, GAP_S, GAP_DEAD_S, GAP_COULOMB = 0.01, 1e3, 1e-9, 20e-9, 1e-9
BODY_V, BODY_PROBE_V = 1.0, 1.05
"""A body diode that the device data leaves out: what it may drop, for the number shown beside `unproven`."""


def parts_named(builder: Builder, refs: Iterable) -> list[BoardPart]:
    """The parts that a key of a stage names and that are on the board."""
    return [builder.parts[str(ref)] for ref in refs if str(ref) not in builder.board.not_fitted]


def conducting_nets(part: BoardPart) -> tuple[str, ...]:
    """The two nets that a switch, a diode or an inductor conducts between."""
    return tuple(net for terminal, net in part.terminals.items() if terminal in ENDS)


def other_net(part: BoardPart, net: str) -> str:
    """The net at the other end of a part."""
    return next((other for other in conducting_nets(part) if other != net), net)


def shared_net(stage: StageNote, name: str, *groups: Sequence[BoardPart]) -> str:
    """The net where parts of every group meet. Raises InputError where there is none."""
    first, *others = groups
    for net in dict.fromkeys(net for part in first for net in conducting_nets(part)):
        if all(net in conducting_nets(part) for part in first) and all(
                all(net in conducting_nets(part) for part in group) for group in others):
            return net
    refs = " and ".join("/".join(part.ref for part in group) for group in groups)
    raise InputError(Fault(stage.mark, f"{refs} of stage {name} share no net", "name the parts that meet at the switched node"))


def is_switch(part: BoardPart) -> bool:
    return part.kind in TRANSISTORS


def leg_of(builder: Builder, part: BoardPart) -> Leg:
    """A part while it carries the current."""
    if part.kind == "mosfet":
        return Leg(part.ref, on_resistance(builder, part, part.note.gate), rds_scale(part))
    if part.kind in TRANSISTORS:
        return Leg(part.ref, drop=saturation_drop(builder, part))
    return Leg(part.ref, drop=forward_drop(builder, part))


def body_leg(builder: Builder, part: BoardPart) -> Leg:
    """A MOSFET's body diode."""
    body = part.device.body if part.device else None
    if body and body.knee is not None:
        slope = builder.span(f"{part.ref} body slope", body.slope) or ZERO
        return Leg(part.ref, drop=Drop(builder.span(f"{part.ref} body knee", body.knee), slope))
    return Leg(part.ref, drop=Drop(builder.gap(part.ref, "body.knee", BODY_V, BODY_PROBE_V, "voltage")))


def position_of(builder: Builder, name: str, stage: StageNote, parts: Sequence[BoardPart], freewheels: bool) -> Position:
    """Parts side by side as one position: switches in parallel, a diode, or switches with a diode beside them.

    freewheels: whether this side carries the current while the other is off, in the dead times too.
    """
    switches, diodes = [p for p in parts if is_switch(p)], [p for p in parts if p.kind in DIODES]
    if len(diodes) > 1 or len(switches) + len(diodes) < len(parts):
        refs = " and ".join(part.ref for part in parts)
        raise InputError(Fault(stage.mark, f"{refs} of stage {name} are not switches in parallel with at most one diode",
                               "diodes in parallel are not supported yet: name one of them, with the data of all"))
    if not switches:
        return Position((leg_of(builder, diodes[0]),))
    if not freewheels:
        return Position(tuple(leg_of(builder, part) for part in switches))
    bipolar = next((part for part in switches if part.kind != "mosfet"), None)
    if bipolar is not None and not diodes:
        raise InputError(Fault(stage.mark, f"{bipolar.ref} of stage {name} cannot carry the current backwards",
                               "name the diode beside it in the same list"))
    if bipolar is not None:
        return Position((leg_of(builder, diodes[0]),))
    free = leg_of(builder, diodes[0]) if diodes else body_leg(builder, switches[0])
    return Position(tuple(leg_of(builder, part) for part in switches), free)


def edges_of(builder: Builder, mains: Sequence[BoardPart], frees: Sequence[BoardPart]) -> Edges:
    """What a cycle costs the main switches; what the free side's charges add to it."""
    owner = mains[0].ref
    diodes = [part for part in frees if part.kind in DIODES]
    outputs = tuple(charge_of(builder, part, "output", part.ref) for part in frees if part.kind == "mosfet")
    recovered = tuple(charge_of(builder, part, "recovery", owner) for part in diodes or frees)
    return Edges(tuple(_edge(builder, part) for part in mains), outputs, recovered)


def charge_of(builder: Builder, part: BoardPart, name: str, owner: str) -> Param:
    """A charge [C] of the device data; a gap that `owner` lacks where it is not given."""
    given = getattr(part.device.charge, name) if part.device else None
    if given is not None:
        return builder.span(f"{part.ref} {name} charge", given)
    datum = f"charge.{name}" if part.ref == owner else f"charge.{name} of {part.ref}"
    return builder.gap(owner, datum, 0.0, GAP_COULOMB, "charge")


def _edge(builder: Builder, part: BoardPart) -> Edge:
    data = part.device and (part.device.gate if part.kind == "mosfet" else part.device.switching)
    output = charge_of(builder, part, "output", part.ref) if part.kind == "mosfet" else ZERO
    if not data or data.rise is None or data.fall is None:
        where = "gate" if part.kind == "mosfet" else "switching"
        both = builder.gap(part.ref, f"{where}.rise and {where}.fall", 0.0, GAP_S, "time")
        return Edge(both, both, output)
    return Edge(builder.span(f"{part.ref} rise", data.rise), builder.span(f"{part.ref} fall", data.fall), output)


def shunt_leg(builder: Builder, part: BoardPart) -> Leg:
    """A shunt in series with a position."""
    return Leg(part.ref, resistance(builder, part))


def add_switch_probes(builder: Builder, key: str, parts: Iterable[BoardPart], x: str, ends: tuple[str, str], hertz: Param) -> None:
    """Probes of the switches and diodes of a group at its switched net, which then are in no branch of their own.

    ends: the nets between which that net is switched, at a frequency [Hz].
    """
    builder.switched.append((x, *ends, hertz))
    for part in parts:
        if part.kind == "mosfet":
            builder.driven[part.ref] = hertz
        builder.probes[part.ref] = Probe(
            part.ref, part.kind, "switching", x, other_net(part, x), group=key, pulsed=True,
            gate=gate_of(builder, part) if part.kind == "mosfet" else None,
            overshoot=builder.span(f"{part.ref} overshoot", part.note.overshoot))
        builder.staged.add(part.ref)


def add_group_probe(builder: Builder, key: str, part: BoardPart) -> None:
    """The probe of a part of a group that does not switch: its inductor, a shunt."""
    ends = conducting_nets(part)
    builder.probes[part.ref] = Probe(part.ref, part.kind, "conducting", *(ends if len(ends) == 2 else ("", "")), group=key)
    builder.staged.add(part.ref)


def frequency_of(builder: Builder, name: str, stage: StageNote, owner: str) -> Param:
    """The switching frequency; a gap of `owner` where it is not given."""
    given = builder.span(f"{name} at", stage.frequency)
    return given if given is not None else builder.gap(owner, f"stages.{name}.frequency", 0.0, GAP_HZ, "frequency")


def dead_time_of(builder: Builder, name: str, stage: StageNote, free: Position, owner: str) -> Param:
    """The dead time [s] where the free side has a switch of its own; a gap of it where it is not given."""
    if free.free is None:
        return ZERO
    given = builder.span(f"{name} dead time", stage.dead_time)
    return given if given is not None else builder.gap(owner, f"stages.{name}.dead_time", 0.0, GAP_DEAD_S, "time")
