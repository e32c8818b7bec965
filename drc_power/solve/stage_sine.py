"""Sinusoidal bridges: from their annotation, of one leg or three, to a `SineBridge`."""

from __future__ import annotations

from collections.abc import Sequence

from ..board import BoardPart, LoadNote, Quantity, StageNote
from ..faults import Fault, InputError
from ..quantity import Span
from .branches import Leg
from .circuit import Builder
from .parts import GAP_A
from .position import Position
from .sine_bridge import SineBridge
from .stage_parts import (
    DIODES,
    add_group_probe,
    add_switch_probes,
    conducting_nets,
    dead_time_of,
    edges_of,
    frequency_of,
    is_switch,
    leg_of,
    other_net,
    parts_named,
    position_of,
    shunt_leg,
)
from .variables import Param

GAP_FACTOR = 0.95
"""What a missing modulation or power factor is moved to, from 1."""


def add_sine_bridge(builder: Builder, name: str, stage: StageNote) -> None:
    """One leg or three between a supply and its return."""
    high, low = parts_named(builder, stage.high), parts_named(builder, stage.low)
    legs = _legs(name, stage, high, low)
    owner, key = high[0].ref, f"stage {name}"
    a = other_net(high[0], next(iter(legs)))
    feet = {x: other_net(lows[0], x) for x, (_, lows) in legs.items()}
    positions: dict[str, Position] = {}
    groups: dict[str, Sequence[BoardPart]] = {}
    for k, (highs, lows) in enumerate(legs.values()):
        for side, parts in ((f"high {k} ", highs), (f"low {k} ", lows)):
            positions[side], groups[side] = _two_way(builder, name, stage, parts), parts
    b, shunt = _feet(builder, stage, feet, positions)
    edges = {side: edges_of(builder, [p for p in parts if is_switch(p)], [p for p in groups[_opposite(side)] if p.kind in DIODES | {"mosfet"}])
             for side, parts in groups.items()}
    first = next(iter(positions.values()))
    drive, demand, load_part = _demand(builder, name, stage)
    frequency = frequency_of(builder, name, stage, owner)
    builder.add(SineBridge(
        key, a, b, positions, edges, drive, demand, _factor(builder, name, stage, "modulation", owner),
        _factor(builder, name, stage, "power_factor", owner), frequency,
        dead_time_of(builder, name, stage, first, owner), load_part, shunt))
    for x, (highs, lows) in legs.items():
        add_switch_probes(builder, key, [*highs, *lows], x, (a, b), frequency)
    shunts = [leg for position in positions.values() for leg in position.shunts] + ([shunt] if shunt else [])
    for leg in shunts:
        add_group_probe(builder, key, builder.parts[leg.part])


def _legs(name: str, stage: StageNote, high: list[BoardPart], low: list[BoardPart]) -> dict[str, tuple[list[BoardPart], list[BoardPart]]]:
    """The parts of each leg, by the net where its high and low parts meet."""
    found = {}
    for part in high:
        for x in conducting_nets(part):
            lows = [other for other in low if x in conducting_nets(other)]
            if lows:
                found[x] = ([p for p in high if x in conducting_nets(p)], lows)
    n_wanted = 3 if str(stage.kind) == "three-phase" else 1
    placed = {part.ref for highs, lows in found.values() for part in (*highs, *lows)}
    if len(found) != n_wanted or placed != {part.ref for part in (*high, *low)}:
        raise InputError(Fault(stage.mark, f"stage {name} has {len(found)} legs of a high and a low part, not {n_wanted}",
                               "write high: [Q1, Q3, Q5], low: [Q2, Q4, Q6], each pair at one phase"))
    return found


def _two_way(builder: Builder, name: str, stage: StageNote, parts: Sequence[BoardPart]) -> Position:
    """Switches with what carries the current back: themselves, a diode beside them, or their body diodes."""
    switches, diodes = [p for p in parts if is_switch(p)], [p for p in parts if p.kind in DIODES]
    if switches and all(part.kind == "mosfet" for part in switches):
        return position_of(builder, name, stage, parts, freewheels=True)
    if len(switches) != 1 or len(diodes) != 1:
        refs = " and ".join(part.ref for part in parts)
        raise InputError(Fault(stage.mark, f"{refs} of stage {name} are not one transistor with one diode beside it",
                               "name the diode beside each bipolar transistor or IGBT in the same list"))
    diode = leg_of(builder, diodes[0])
    if diode.drop.lines:
        builder.lack(diodes[0].ref, "conduction.knee and conduction.slope (curves are not followed over a sine yet)")
    return Position((leg_of(builder, switches[0]),), diode)


def _opposite(side: str) -> str:
    return side.replace("high", "low") if side.startswith("high") else side.replace("low", "high")


def _feet(builder: Builder, stage: StageNote, feet: dict[str, str], positions: dict[str, Position]) -> tuple[str, Leg | None]:
    """The return of the bridge, with a shunt in each foot or one in the common one."""
    grounds, common = builder.board.grounds, None
    ends, apart = list(feet.values()), len(set(feet.values())) == len(feet)
    for shunt in parts_named(builder, stage.shunts):
        nets = conducting_nets(shunt)
        for k, end in enumerate(ends):
            if apart and end in nets and end not in grounds:
                side = f"low {k} "
                positions[side] = Position(positions[side].legs, positions[side].free, (shunt_leg(builder, shunt),))
                ends[k] = other_net(shunt, end)
                break
        else:
            if len(set(ends)) == 1 and ends[0] in nets and ends[0] not in grounds:
                common, ends = shunt_leg(builder, shunt), [other_net(shunt, ends[0])] * len(ends)
    if len(set(ends)) != 1:
        raise InputError(Fault(stage.mark, "the low parts do not lead to one return", "name the shunts in their feet: shunts: [R1, R2, R3]"))
    return ends[0], common


def _factor(builder: Builder, name: str, stage: StageNote, key: str, owner: str) -> Param:
    given = getattr(stage, key)
    if given is not None and given.span.max > 1.0:
        raise InputError(Fault(given.mark, f"a {key.replace('_', ' ')} of {given.text}", "write up to 1"))
    if given is not None:
        return builder.span(f"{name} {key.replace('_', ' ')}", given)
    return builder.gap(owner, f"stages.{name}.{key}", 1.0, GAP_FACTOR, "ratio")


def _demand(builder: Builder, name: str, stage: StageNote) -> tuple[str, Param, str | None]:
    """How the load's current is given. A current is its amplitude, unless `rms` is written behind it."""
    load: LoadNote | None = builder.mode.loads.get(str(stage.load)) if stage.load is not None else None
    part = str(load.heats) if load is not None and load.heats else None
    if stage.current is not None:
        return "current", amplitude_of(builder, f"{name} current", stage.current), part
    if load is not None and load.draws is not None:
        return "current", amplitude_of(builder, f"{stage.load} at", load.draws), part
    if load is not None and (load.power is not None or load.resistance is not None):
        drive = "power" if load.power is not None else "resistance"
        return drive, builder.span(f"{stage.load} at", getattr(load, drive)), part
    if load is not None and load.lacks_demand:
        return "current", builder.box.gap(f"{stage.load} at", 0.0, GAP_A, "current", f"loads.{stage.load}.draws", load.mark, either_way=True), part
    raise InputError(Fault(stage.mark, f"stage {name} names no load", "write load: NAME, a name under loads:, or current: 14 A rms"))


def amplitude_of(builder: Builder, name: str, quantity: Quantity) -> Param:
    """The amplitude of a sinusoidal current [A]."""
    scale = 2.0**0.5 if "rms" in quantity.text else 1.0
    span = Span(*(scale * end for end in (quantity.span.min, quantity.span.typ, quantity.span.max)))
    return builder.box.param(name, span, quantity.dimension, quantity.mark)
