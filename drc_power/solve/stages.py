"""Groups of parts that work together: the pulsed pair of a half bridge or a freewheeling switch, and the class-AB pair."""

from __future__ import annotations

import math
from dataclasses import replace

from ..board import BoardPart, StageNote
from ..faults import Fault, InputError
from ..quantity import Span, parse_value_field
from .branches import Buck, Leg, Pulsed, Resistive
from .circuit import Builder, Probe, PushPull
from .parts import GAP_OHM, forward_drop, gate_of, on_resistance, rds_scale, regulator_ground, resistance, saturation_drop, two_ends, value_resistance
from .variables import ZERO, Param

GAP_DUTY = 0.01
GAP_HZ = 1e3
GAP_S = 1e-9


def add_stages(builder: Builder) -> None:
    """Every annotated stage that changes how its parts conduct; their own branches are then not drawn again."""
    for name, stage in builder.mode.view.stages.items():
        maker = {"half-bridge": _half_bridge, "low-side": _single_switch, "high-side": _single_switch,
                 "push-pull": _push_pull, "buck": _buck}.get(str(stage.kind))
        if maker is not None and _is_running(builder, stage):
            maker(builder, name, stage)


def _is_running(builder: Builder, stage: StageNote) -> bool:
    """A stage with a blocked switch does not switch: its parts stand on their own."""
    refs = [str(ref) for key in ("high", "low", "switch", "pair") for ref in getattr(stage, key)]
    return not any(str(builder.parts[ref].note.state) == "blocked" for ref in refs if builder.parts[ref].note.state)


def _half_bridge(builder: Builder, name: str, stage: StageNote) -> None:
    if len(stage.high) != 1 or len(stage.low) != 1:
        raise InputError(Fault(stage.mark, f"stage {name} needs one high and one low part",
                               "write high: Q1, low: D1; several in parallel are not supported yet"))
    high, low = builder.parts[str(stage.high[0])], builder.parts[str(stage.low[0])]
    x = _shared_net(builder, name, stage, high, low)
    back = _load_return(builder, name, stage, x)
    outward = back != _other_net(high, x)
    main, free = (high, low) if outward else (low, high)
    _add_pair(builder, name, stage, x, main, free, 1 if outward else -1)


def _single_switch(builder: Builder, name: str, stage: StageNote) -> None:
    """A switch that chops its load: with a diode across the load the current goes on, without one it stops."""
    if stage.frequency is None and stage.duty is None:
        return
    switch = builder.parts[str(stage.switch[0])]
    clamp = builder.parts[str(stage.clamp[0])] if stage.clamp else None
    if clamp is not None and clamp.kind in ("diode", "led", "mosfet"):
        x = _shared_net(builder, name, stage, switch, clamp)
        _add_pair(builder, name, stage, x, switch, clamp, 1 if str(stage.kind) == "high-side" else -1)
        return
    duty = _duty(builder, name, stage)
    if stage.load is not None:
        builder.load_duties[str(stage.load)] = duty
    builder.chopped[switch.ref] = (duty, builder.span(f"{name} at", stage.frequency))


def _duty(builder: Builder, name: str, stage: StageNote) -> Param:
    given = builder.span(f"{name} duty", stage.duty)
    if given is None:
        ref = str((stage.switch or stage.high)[0])
        return builder.gap(ref, f"stages.{name}.duty", 1.0, 1.0 - GAP_DUTY, "ratio")
    return given


def _shared_net(builder: Builder, name: str, stage: StageNote, one: BoardPart, other: BoardPart) -> str:
    """The net where the two parts of a pair meet, and the load hangs."""
    shared = [net for net in dict.fromkeys(conducting_nets(one)) if net in conducting_nets(other)]
    load = builder.mode.loads.get(str(stage.load)) if stage.load is not None else None
    on_load = [net for net in shared if load is not None and builder.board.net(load.net) == net]
    if not (on_load or shared):
        raise InputError(Fault(stage.mark, f"{one.ref} and {other.ref} of stage {name} share no net",
                               "name the two parts that meet where the load is"))
    return (on_load or shared)[0]


def conducting_nets(part: BoardPart) -> tuple[str, ...]:
    """The two nets that a switch or a diode conducts between."""
    names = ("drain", "source", "collector", "emitter", "anode", "cathode", "a", "b")
    return tuple(net for terminal, net in part.terminals.items() if terminal in names)


def _other_net(part: BoardPart, net: str) -> str:
    return next((other for other in conducting_nets(part) if other != net), net)


def _load_return(builder: Builder, name: str, stage: StageNote, x: str) -> str | None:
    load = builder.mode.loads.get(str(stage.load)) if stage.load is not None else None
    if load is None:
        raise InputError(Fault(stage.mark, f"stage {name} names no load", "write load: NAME, a name under loads:"))
    return builder.board.net(load.return_) if load.return_ else None


def _add_pair(builder: Builder, name, stage: StageNote, x: str, main: BoardPart, free: BoardPart, outward: int) -> None:
    duty = _duty(builder, name, stage)
    frequency = builder.span(f"{name} at", stage.frequency)
    if frequency is None:
        frequency = builder.gap(main.ref, f"stages.{name}.frequency", 0.0, GAP_HZ, "frequency")
    key, main_node, free_node = f"stage {name}", _other_net(main, x), _other_net(free, x)
    edge, charge = _edges(builder, main), _charges(builder, main, free)
    builder.add(Pulsed(key, x, main_node, free_node, _leg(builder, main), _leg(builder, free), duty, outward,
                       frequency, edge, charge))
    for part, share in ((main, duty), (free, None)):
        rest = builder.complement(f"{name} duty", duty) if share is None else share
        builder.probes[part.ref] = Probe(
            part.ref, part.kind, "switching", x, _other_net(part, x), ((key, 1.0),), rest, (main_node, free_node),
            gate=gate_of(builder, part) if part.kind == "mosfet" else None, pulsed=True,
            overshoot=builder.span(f"{part.ref} overshoot", part.note.overshoot))
        builder.staged.add(part.ref)


def _leg(builder: Builder, part: BoardPart) -> Leg:
    if part.kind == "mosfet":
        return Leg(part.ref, on_resistance(builder, part, part.note.gate), rds_scale(part))
    if part.kind in ("bjt", "igbt"):
        return Leg(part.ref, drop=saturation_drop(builder, part))
    return Leg(part.ref, drop=forward_drop(builder, part))


def _edges(builder: Builder, main: BoardPart) -> Param:
    """Half the sum of rise and fall time: the overlap energy is ½ · V · I · (t_rise + t_fall)."""
    data = main.device and (main.device.gate if main.kind == "mosfet" else main.device.switching)
    if not data or data.rise is None or data.fall is None:
        where = "gate" if main.kind == "mosfet" else "switching"
        return builder.gap(main.ref, f"{where}.rise and {where}.fall", 0.0, GAP_S, "time")
    rise, fall = data.rise.span, data.fall.span
    span = Span((rise.min + fall.min) / 2, (rise.typ + fall.typ) / 2, (rise.max + fall.max) / 2)
    return builder.box.param(f"{main.ref} edge time", span, "time", data.rise.mark)


def _charges(builder: Builder, main: BoardPart, free: BoardPart) -> Param:
    """Output charge of the main switch and recovery charge of the freewheeling part, moved once a cycle."""
    output = main.device.charge.output if main.device else None
    recovery = free.device.charge.recovery if free.device else None
    if output is None and main.kind == "mosfet":
        builder.gap(main.ref, "charge.output", 0.0, 1e-9, "charge")
    if recovery is None:
        builder.gap(main.ref, f"charge.recovery of {free.ref}", 0.0, 1e-9, "charge")
    given = [q.span for q in (output, recovery) if q is not None]
    total = Span(sum(s.min for s in given), sum(s.typ for s in given), sum(s.max for s in given))
    if output is None or recovery is None:
        name = f"{main.ref} charge.output" if output is None else f"{main.ref} charge.recovery of {free.ref}"
        return builder.box.gap(name, total.max, total.max + 1e-9, "charge", name, builder.board.where(main))
    return builder.box.param(f"{main.ref} switched charge", total, "charge", builder.board.where(main))


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
        builder.gap(ref, "the edge loss of a switch without a freewheel path (name its clamp)", 0.0, GAP_OHM, "power")


def _buck(builder: Builder, name: str, stage: StageNote) -> None:
    """A converter chip with its freewheeling part or its inductor outside: they take their share of its loss."""
    if len(stage.chip) != 1 or stage.high or len(stage.low) > 1 or len(stage.inductor) > 1:
        raise InputError(Fault(stage.mark, f"stage {name} is not one chip with at most one low part and one inductor",
                               "write chip: U1, low: D1, inductor: L1; switches outside the chip are not supported yet"))
    chip = builder.parts[str(stage.chip[0])]
    ends = (chip.terminals.get("input", ""), regulator_ground(builder, chip))
    low, inductor = (builder.parts[str(refs[0])] if refs else None for refs in (stage.low, stage.inductor))
    frequency = builder.span(f"{name} at", stage.frequency)
    henry = parse_value_field(inductor.part.value, "inductance") if inductor else None
    builder.bucks[chip.ref] = Buck(
        _leg(builder, low) if low else None, inductor.ref if inductor else None,
        resistance(builder, inductor) if inductor else ZERO,
        builder.box.param(f"{inductor.ref} inductance", henry.span, "inductance", stage.mark) if henry else None, frequency)
    for part, role in ((low, "free"), (inductor, "inductor")):
        if part is not None:
            builder.probes[part.ref] = Probe(
                part.ref, part.kind, "switching", *ends, ((chip.ref, 1.0),), blocks=ends, pulsed=role == "free", buck=role,
                gate=gate_of(builder, part) if part.kind == "mosfet" else None,
                overshoot=builder.span(f"{part.ref} overshoot", part.note.overshoot))
            builder.staged.add(part.ref)


def _push_pull(builder: Builder, name: str, stage: StageNote) -> None:
    """The pair swings between its supplies; what it draws lies between its worst output, 2/π of the swing, and full output."""
    pair = [builder.parts[str(ref)] for ref in stage.pair]
    rails = {("plus" if _is_upper(part) else "minus"): part.terminals.get("collector" if part.kind != "mosfet" else "drain")
             for part in pair}
    if len(pair) != 2 or rails.keys() != {"plus", "minus"} or None in rails.values():
        raise InputError(Fault(stage.mark, f"stage {name} needs an npn or n-channel and a pnp or p-channel part",
                               "write pair: [Q1, Q2] with their device data or pins given"))
    load, phase = _load_and_phase(builder, name, stage)
    ohm = stage.load.span if hasattr(stage.load, "span") else builder.mode.loads[str(stage.load)].resistance.span
    drawn = Span(2 * math.pi * ohm.min, math.pi**2 * ohm.typ, math.pi**2 * ohm.max)
    as_load = builder.box.param(f"{name} supply load at", drawn, "resistance", stage.mark)
    builder.add(Resistive(f"stage {name}", rails["plus"], rails["minus"], as_load, load=name))
    swing = PushPull(rails["plus"], rails["minus"], load, phase)
    for part in pair:
        make = Probe(part.ref, part.kind, "push-pull", rails["plus"], rails["minus"], push_pull=swing)
        builder.probes[part.ref] = make
        builder.staged.add(part.ref)
    _emitter_resistors(builder, pair, swing)


def _load_and_phase(builder: Builder, name: str, stage: StageNote) -> tuple[Param, Param]:
    if hasattr(stage.load, "span"):
        load = builder.span(f"{name} load", stage.load)
    else:
        note = builder.mode.loads.get(str(stage.load)) if stage.load is not None else None
        if note is None or note.resistance is None:
            raise InputError(Fault(stage.mark, f"stage {name} names no load with a resistance", "write load: 8 ohm"))
        load = builder.span(f"{stage.load} at", note.resistance)
    return load, builder.span(f"{name} phase", stage.phase) or ZERO


def _is_upper(part: BoardPart) -> bool:
    return part.channel in ("npn", "n")


def _emitter_resistors(builder: Builder, pair: list[BoardPart], swing: PushPull) -> None:
    """Resistors between the emitters and the output carry a half wave each, not the direct current of the network."""
    for part in pair:
        emitter = part.terminals.get("emitter") or part.terminals.get("source")
        others = {p.terminals.get("emitter") or p.terminals.get("source") for p in pair}
        for ref in {node.ref for node in builder.board.netlist.nets[emitter].nodes} if emitter and len(others) == 2 else ():
            resistor = builder.parts[ref]
            span = value_resistance(resistor) if resistor.kind == "resistor" else None
            if span is None or resistor.note.resistance is not None:
                continue
            ohm = builder.box.param(f"{ref} resistance", span, "resistance", builder.board.where(resistor))
            builder.probes[ref] = Probe(ref, "resistor", "push-pull", *conducting_nets(resistor),
                                        push_pull=replace(swing, resistor_ohm=ohm))
            builder.staged.add(ref)

