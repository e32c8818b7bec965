"""Half bridges and chopped switches with a steady duty: from their annotation to an averaged pair."""

from __future__ import annotations

from dataclasses import replace

from ..board import BoardPart, StageNote
from ..faults import Fault, InputError
from ..quantity import parse_value_field
from .branches import CurrentLoad, Resistive
from .bridges import HalfBridge
from .circuit import Builder, Probe
from .parts import gate_of, on_resistance, rds_scale, two_ends
from .position import Position
from .stage_parts import (
    DIODES,
    GAP_DUTY,
    TRANSISTORS,
    add_group_probe,
    add_switch_probes,
    conducting_nets,
    dead_time_of,
    edges_of,
    frequency_of,
    is_switch,
    other_net,
    parts_named,
    position_of,
    shared_net,
    shunt_leg,
)
from .variables import Param

GAP_W = 1e-3
SMOOTHING_F = 1e-6
"""A capacitor from here up at a shunt's inner end takes the pulses off it."""


def add_half_bridge(builder: Builder, name: str, stage: StageNote) -> None:
    """High and low parts at one net, with the load that hangs there, or the current that flows out of it."""
    high, low = parts_named(builder, stage.high), parts_named(builder, stage.low)
    if not high or not low:
        raise InputError(Fault(stage.mark, f"stage {name} needs high and low parts", "write high: Q1, low: D1"))
    x = shared_net(stage, name, high, low)
    by_current = stage.load is None and stage.current is not None
    outward = by_current or _load_return(builder, name, stage) != other_net(high[0], x)
    main, free = (high, low) if outward else (low, high)
    free_end = _add_pair(builder, name, stage, x, main, free, 1 if outward else -1)
    if by_current:
        # A current without a load flows out of the bridge and back into its lower end.
        current = builder.span(f"{name} current", stage.current)
        builder.add(CurrentLoad(f"stage {name} output", x, free_end, current))


def add_single_switch(builder: Builder, name: str, stage: StageNote) -> None:
    """A switch that chops its load: with a diode across the load the current goes on, without one it stops."""
    left_blank = {"frequency", "duty"} & stage.blank
    if stage.frequency is None and stage.duty is None and not left_blank:
        return
    switches, clamps = parts_named(builder, stage.switch), parts_named(builder, stage.clamp)
    if clamps and clamps[0].kind in DIODES | {"mosfet"}:
        x = shared_net(stage, name, switches, clamps)
        _add_pair(builder, name, stage, x, switches, clamps, 1 if str(stage.kind) == "high-side" else -1)
        return
    if len(switches) > 1:
        raise InputError(Fault(stage.mark, f"stage {name} chops its load with {len(switches)} switches and no freewheel path",
                               "several switches without a clamp are not supported yet"))
    duty = _duty(builder, name, stage)
    if stage.load is not None:
        builder.load_duties[str(stage.load)] = duty
    frequency = builder.span(f"{name} at", stage.frequency)
    if frequency is None and left_blank:
        frequency = frequency_of(builder, name, stage, switches[0].ref)
    builder.chopped[switches[0].ref] = (duty, frequency)


def _duty(builder: Builder, name: str, stage: StageNote) -> Param:
    given = builder.span(f"{name} duty", stage.duty)
    if given is None:
        ref = str((stage.switch or stage.high)[0])
        return builder.gap(ref, f"stages.{name}.duty", 1.0, 1.0 - GAP_DUTY, "ratio")
    return given


def _load_return(builder: Builder, name: str, stage: StageNote) -> str | None:
    load = builder.mode.loads.get(str(stage.load)) if stage.load is not None else None
    if load is None:
        raise InputError(Fault(stage.mark, f"stage {name} names no load",
                               "write load: NAME, a name under loads:, or current: ..."))
    return builder.board.net(load.return_) if load.return_ else None


def _add_pair(builder: Builder, name: str, stage: StageNote, x: str, main: list[BoardPart], free: list[BoardPart],
              outward: int) -> str:
    """Add the pair; the net at the far end of its freewheeling side."""
    key, owner = f"stage {name}", main[0].ref
    if not any(map(is_switch, main)):
        raise InputError(Fault(stage.mark, f"{owner} of stage {name} cannot switch", "name the switch and the diode the other way round"))
    duty, frequency = _duty(builder, name, stage), frequency_of(builder, name, stage, owner)
    ends, positions = [], []
    for parts, freewheels in ((main, False), (free, True)):
        position, end = _with_shunts(builder, stage, position_of(builder, name, stage, parts, freewheels), parts, x)
        positions.append(position)
        ends.append(end)
    dead = dead_time_of(builder, name, stage, positions[1], owner)
    switches, frees = [p for p in main if is_switch(p)], free if positions[1].free else [p for p in free if p.kind in DIODES]
    builder.add(HalfBridge(key, x, *ends, *positions, duty, outward, frequency, dead, edges_of(builder, switches, frees)))
    add_switch_probes(builder, key, [*main, *free], x, tuple(ends if outward > 0 else ends[::-1]), frequency)
    for leg in (leg for position in positions for leg in position.shunts):
        add_group_probe(builder, key, builder.parts[leg.part])
    return ends[1]


def _with_shunts(builder: Builder, stage: StageNote, position: Position, parts: list[BoardPart], x: str) -> tuple[Position, str]:
    """The position with the shunts in series with it, and the net at their far end."""
    end = other_net(parts[0], x)
    stiff = {*builder.board.grounds, *(builder.board.net(name) for name in builder.mode.rails)}
    for shunt in parts_named(builder, stage.shunts):
        if end in conducting_nets(shunt) and x not in conducting_nets(shunt) and end not in stiff:
            if not _carries_pulses_of(builder, end, {p.ref for p in parts} | {shunt.ref}):
                builder.lack(shunt.ref, "what else its inner end carries (its rms current is known for one switch pair alone)")
                continue
            position = replace(position, shunts=(*position.shunts, shunt_leg(builder, shunt)))
            end = other_net(shunt, end)
    return position, end


def _carries_pulses_of(builder: Builder, net: str, refs: set[str]) -> bool:
    """Whether a shunt's inner end carries the pulses of these parts alone: nothing else conducts there, nothing smooths them."""
    for part in [builder.parts[node.ref] for node in builder.board.netlist.nets[net].nodes if node.ref not in refs]:
        read = parse_value_field(part.part.value, "capacitance") if part.kind == "capacitor" else None
        if part.kind in TRANSISTORS | DIODES or (read is not None and read.span.max >= SMOOTHING_F):
            return False
    return True


def add_chopped(builder: Builder, ref: str) -> None:
    """A switch that interrupts its load without a freewheel path: duty-weighted, with its two edges."""
    part = builder.parts[ref]
    duty, frequency = builder.chopped[ref]
    ends = two_ends(builder, part, "drain", "source")
    if ends is None:
        return
    r = on_resistance(builder, part, part.note.gate)
    builder.add(Resistive(ref, *ends, r, ref, rds_scale(part), duty),
                Probe(ref, part.kind, "switching", *ends, ((ref, 1.0),), duty, gate=gate_of(builder, part), pulsed=True,
                      overshoot=builder.span(f"{ref} overshoot", part.note.overshoot)))
    if frequency is not None:
        builder.gap(ref, "the edge loss of a switch without a freewheel path (name its clamp)", 0.0, GAP_W, "power")
