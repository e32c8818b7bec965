"""Buck and boost stages: which nets they lie between, which rail they hold, and what of them is outside the chip."""

from __future__ import annotations

from dataclasses import dataclass

from ..board import BoardPart, StageNote
from ..faults import Fault, InputError
from ..quantity import parse_value_field
from .branches import CurrentLoad
from .circuit import Builder, Probe
from .converters import Chip, Converter
from .edges import Edges
from .parts import (
    block_mosfet,
    efficiency_of,
    regulator_ground,
    resistance,
    state_of,
    supply_nets,
)
from .position import Position
from .stage_parts import (
    DIODES,
    add_group_probe,
    add_switch_probes,
    conducting_nets,
    dead_time_of,
    edges_of,
    is_switch,
    other_net,
    parts_named,
    position_of,
    shared_net,
)
from .variables import ZERO, Param

INDUCTANCE_H, INDUCTANCE_PROBE_H = 1.0, 1e-3
"""Without an inductance: no ripple to speak of, and what is tried to see what depends on it."""

RIPPLE_HZ, RIPPLE_PROBE_HZ, EDGE_PROBE_HZ = 1e6, 1e5, 1e3
"""Without a frequency: likewise, for the ripple, which it lowers, and for the edges, which it multiplies."""

SENSE_OHM = 1.0
"""A resistor up to here between a converter's output and a rail is a shunt: the rail beyond it is the one held."""


@dataclass(frozen=True, slots=True)
class Ports:
    """Where a converter lies: switched net, input, output, and the parts of its two sides."""

    x: str
    a: str
    b: str
    ground: str
    main: list[BoardPart]
    free: list[BoardPart]
    inductor: BoardPart | None
    chip: BoardPart | None


def converter_stages(builder: Builder):
    """The buck and boost stages of the mode that run."""
    for name, stage in builder.mode.view.stages.items():
        if str(stage.kind) in ("buck", "boost"):
            yield name, stage


def is_running(builder: Builder, stage: StageNote) -> bool:
    """A stage with a blocked switch or chip does not switch: its parts stand on their own."""
    refs = [str(ref) for key in ("chip", "high", "low", "switch", "pair") for ref in getattr(stage, key)]
    return not any(state_of(builder.parts[ref]) == "blocked" for ref in refs)


def note_converters(builder: Builder) -> None:
    """Say which rails are held by converters whose switches are outside the chip, before the rails are laid."""
    for name, stage in converter_stages(builder):
        if _switches_outside(builder, stage) and is_running(builder, stage):
            rail = _rail_of(builder, stage, _ports(builder, name, stage).b)
            if rail is not None:
                builder.stage_rails[rail] = name


def _switches_outside(builder: Builder, stage: StageNote) -> bool:
    """Whether the switch that takes turns with the freewheeling part is a part of its own."""
    mains = stage.high if str(stage.kind) == "buck" else stage.low
    return any(is_switch(part) for part in parts_named(builder, mains))


def _rail_of(builder: Builder, stage: StageNote, output: str) -> str | None:
    """The rail that a converter holds: the one that names it, that of its output, or one behind a shunt."""
    refs = {str(ref) for key in ("chip", "high", "low", "inductor") for ref in getattr(stage, key)}
    held = {name: builder.board.net(name) for name, rail in builder.mode.rails.items() if rail.voltage and not rail.source}
    named = [name for name in held if str(builder.mode.rails[name].held_by) in refs]
    own = [name for name, net in held.items() if net == output and not builder.mode.rails[name].held_by]
    behind = [name for name, net in held.items() if net in _behind_shunts(builder, output)
              and not builder.mode.rails[name].held_by]
    return next(iter((*named, *own, *behind)), None)


def _behind_shunts(builder: Builder, net: str) -> set[str]:
    found = set()
    for ref in {node.ref for node in builder.board.netlist.nets[net].nodes}:
        part = builder.parts[ref]
        read = parse_value_field(part.part.value, "resistance") if part.kind == "resistor" else None
        if part.kind in ("ferrite", "fuse", "net-tie") or (read is not None and read.span.max <= SENSE_OHM):
            found.add(other_net(part, net))
    return found


def _ports(builder: Builder, name: str, stage: StageNote) -> Ports:
    """Find the nets of a converter. Raises InputError where its parts do not meet as such a converter's do."""
    high, low, coils, chips = (parts_named(builder, refs) for refs in (stage.high, stage.low, stage.inductor, stage.chip))
    if len(coils) > 1 or len(chips) > 1:
        raise InputError(Fault(stage.mark, f"stage {name} has several inductors or chips", "write a stage for each"))
    coil, chip = next(iter(coils), None), next(iter(chips), None)
    is_buck = str(stage.kind) == "buck"
    main, free = (high, low) if is_buck else (low, high)
    if any(map(is_switch, main)):
        if not free or coil is None:
            raise InputError(Fault(stage.mark, f"stage {name} lacks its {'low' if is_buck else 'high'} part or its inductor",
                                   "write high: Q1, low: Q2 or a diode, inductor: L1"))
        x = shared_net(stage, name, main, free, [coil])
        a, b = (other_net(high[0], x), other_net(coil, x)) if is_buck else (other_net(coil, x), other_net(high[0], x))
        return Ports(x, a, b, other_net(low[0], x), main, free, coil, chip)
    if chip is None or main:
        raise InputError(Fault(stage.mark, f"stage {name} has neither a chip nor a switch that is driven",
                               "write chip: U1, or high: Q1, low: D1, inductor: L1"))
    x = _switched_net(chip, free, coil)
    a = chip.terminals.get("input", "") if is_buck else other_net(coil, x) if coil else chip.terminals.get("input", "")
    return Ports(x, a, builder.held_net(chip) or "", regulator_ground(builder, chip), main, free, coil, chip)


def _switched_net(chip: BoardPart, free: list[BoardPart], coil: BoardPart | None) -> str:
    """The net that a converter chip switches: that of its inductor and diode, its own terminal, or not its input."""
    nets = conducting_nets(coil) if coil is not None else ()
    on_diode = [net for net in nets if free and net in conducting_nets(free[0])]
    own = [net for net in nets if net == chip.terminals.get("switch_node")]
    rest = [net for net in nets if net != chip.terminals.get("input")]
    return next(iter((*own, *on_diode, *rest)), chip.terminals.get("switch_node", ""))


def add_converter(builder: Builder, name: str, stage: StageNote) -> None:
    """A converter that runs; where nobody gives the voltage it holds, its parts are unproven."""
    ports, outside = _ports(builder, name, stage), _switches_outside(builder, stage)
    setpoint = builder.stage_setpoints.get(name) if outside else builder.setpoints.get(ports.chip.ref)
    key = f"stage {name}"
    if setpoint is None:
        _leave_unproven(builder, name, key, ports)
        return
    owner = (ports.main or [ports.chip])[0].ref
    ripple_hz, edge_hz = _frequencies(builder, name, stage, owner)
    free = position_of(builder, name, stage, ports.free, freewheels=True) if ports.free else Position(())
    main = position_of(builder, name, stage, ports.main, freewheels=False) if ports.main else Position(())
    switches = [part for part in ports.main if is_switch(part)]
    frees = ports.free if free.free else [part for part in ports.free if part.kind in DIODES]
    held = builder.board.net(next(r for r, s in builder.stage_rails.items() if s == name)) if outside else ports.b
    builder.add(Converter(
        key, str(stage.kind), ports.a, ports.b, ports.ground, held, setpoint, main, free,
        ports.inductor.ref if ports.inductor else None, resistance(builder, ports.inductor) if ports.inductor else ZERO,
        _inductance(builder, name, ports, owner), ripple_hz, edge_hz, dead_time_of(builder, name, stage, free, owner),
        edges_of(builder, switches, frees) if outside else Edges(), _chip(builder, ports, outside)))
    add_switch_probes(builder, key, [*ports.main, *ports.free], ports.x,
                      (ports.a if str(stage.kind) == "buck" else ports.b, ports.ground), edge_hz)
    if ports.inductor is not None:
        add_group_probe(builder, key, ports.inductor)
    if ports.chip is not None:
        _add_chip(builder, key, ports, outside)


def _frequencies(builder: Builder, name: str, stage: StageNote, owner: str) -> tuple[Param, Param]:
    given = builder.span(f"{name} at", stage.frequency)
    if given is not None:
        return given, given
    datum = f"stages.{name}.frequency"
    return (builder.gap(owner, datum, RIPPLE_HZ, RIPPLE_PROBE_HZ, "frequency"),
            builder.gap(owner, f"{datum} (its edges)", 0.0, EDGE_PROBE_HZ, "frequency"))


def _inductance(builder: Builder, name: str, ports: Ports, owner: str) -> Param:
    """The inductance that the inductor's schematic value gives."""
    if ports.inductor is None:
        return builder.gap(owner, f"stages.{name}.inductor", INDUCTANCE_H, INDUCTANCE_PROBE_H, "inductance")
    read = parse_value_field(ports.inductor.part.value, "inductance")
    if read is None:
        return builder.gap(ports.inductor.ref, "an inductance as its value", INDUCTANCE_H, INDUCTANCE_PROBE_H, "inductance")
    return builder.box.param(f"{ports.inductor.ref} inductance", read.span, "inductance", builder.board.where(ports.inductor))


def _chip(builder: Builder, ports: Ports, outside: bool) -> Chip | None:
    """The chip where its efficiency says what the whole converter loses."""
    chip = ports.chip
    data = chip.device.conduction if chip is not None and chip.device else None
    if chip is None or (outside and not (data and data.efficiency)):
        return None
    quiescent = builder.span(f"{chip.ref} quiescent", data.quiescent if data else None)
    return Chip(chip.ref, efficiency_of(builder, chip), quiescent or ZERO)


def _add_chip(builder: Builder, key: str, ports: Ports, outside: bool) -> None:
    """The chip's probe: it carries the converter's output where its switches are inside, else it only draws."""
    chip, supply = ports.chip, next(iter(supply_nets(builder, ports.chip)), "")
    builder.staged.add(chip.ref)
    if not outside:
        builder.probes[chip.ref] = Probe(chip.ref, chip.kind, "conducting", ports.a, ports.b, ((key, 1.0),), ground=ports.ground)
        return
    builder.probes[chip.ref] = Probe(chip.ref, chip.kind, "conducting", supply, "", ground=ports.ground)
    data = chip.device.conduction if chip.device else None
    if chip.kind == "switching-regulator" and not (data and data.efficiency) and supply:
        quiescent = builder.span(f"{chip.ref} quiescent", data.quiescent if data else None)
        if quiescent is None:
            quiescent = builder.gap(chip.ref, "conduction.quiescent", 0.0, 1e-3, "current")
        builder.add(CurrentLoad(f"{chip.ref} draw", supply, regulator_ground(builder, chip), quiescent, chip.ref))


def _leave_unproven(builder: Builder, name: str, key: str, ports: Ports) -> None:
    """Probes that read nothing, so that no part of a converter without a set voltage passes."""
    datum = f'rails: {{"{ports.b or "NET"}": {{voltage: ...}}}} for stage {name}'
    for part in (*ports.main, *ports.free, *((ports.inductor,) if ports.inductor else ())):
        builder.lack(part.ref, datum)
        builder.probes[part.ref] = Probe(part.ref, part.kind, "switching", ports.x, other_net(part, ports.x), group=key,
                                         pulsed=part is not ports.inductor)
        builder.staged.add(part.ref)


def add_stopped_converter(builder: Builder, name: str, stage: StageNote) -> None:
    """A converter that does not switch: its MOSFETs block, its diodes and inductor carry what flows by itself."""
    for part in parts_named(builder, (*stage.high, *stage.low)):
        if part.kind == "mosfet" and {"drain", "source"} <= part.terminals.keys():
            ends = part.terminals["drain"], part.terminals["source"]
            forward = ends if part.channel != "p" else ends[::-1]
            block_mosfet(builder, part, Probe(part.ref, part.kind, "blocked", *forward))
            builder.staged.add(part.ref)
