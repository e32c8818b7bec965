"""What each kind of part is in the network: one small function per kind, looked up in `MAKERS`."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from ..board import BoardPart, Quantity
from ..quantity import parse_value_field
from .branches import Curve, Drop, Efficiency, Linear, OneWay, Resistive, Switching
from .circuit import Builder, Probe
from .variables import ONE, ZERO, Param

GAP_OHM = 1e-3
GAP_V = 0.05
GAP_A = 1e-3
GAP_SHARE = -0.01
"""How far a missing datum is moved to see what depends on it: small beside any real value, large beside rounding."""

TEMPERATURES_C = np.array([-300.0, 2000.0])
"""The ends of a straight line over temperature."""


def curve_of(table) -> Curve:
    """A table of two columns as a curve."""
    return Curve(np.array(table.column(0)), np.array(table.column(1)))


def two_ends(builder: Builder, part: BoardPart, first: str = "a", second: str = "b") -> tuple[str, str] | None:
    """The nets at two terminals; None, with the lack noted, where no evidence gives them."""
    nets = part.terminals
    if first in nets and second in nets:
        return nets[first], nets[second]
    builder.lack(part.ref, f"pins: {{{first}: ..., {second}: ...}}")
    return None


def resistance(builder: Builder, part: BoardPart) -> Param:
    """The resistance of a two-terminal part: annotated, from the device, from the schematic value, or missing."""
    device = part.device.conduction if part.device else None
    given = part.note.resistance or (device and (device.resistance or device.winding))
    if given is not None:
        return builder.span(f"{part.ref} resistance", given)
    written = value_resistance(part)
    if written is not None:
        mark = builder.board.where(part)
        return builder.box.param(f"{part.ref} resistance", written, "resistance", mark)
    return builder.gap(part.ref, MISSING_RESISTANCE.get(part.kind, "conduction.resistance"), 0.0, GAP_OHM, "resistance")


MISSING_RESISTANCE = {"inductor": "conduction.winding", "ferrite": "conduction.winding",
                      "resistor": "a resistance as its value"}


def value_resistance(part: BoardPart):
    """The resistance that a schematic value gives: of a resistor itself, of an inductor's winding; else None."""
    if part.kind in ("resistor", "thermistor", "potentiometer"):
        read = parse_value_field(part.part.value, "resistance")
        return read.span if read else None
    if part.kind in ("inductor", "ferrite"):
        read = parse_value_field(part.part.value, "inductance")
        return read.winding_ohm and type(read.span).exact(read.winding_ohm) if read else None
    return None


def tempco_scale(part: BoardPart) -> Curve | None:
    """1 + α·(T − 25 °C) for a resistor with a temperature coefficient."""
    tempco = part.device.conduction.tempco if part.device else None
    if tempco is None:
        return None
    return Curve(TEMPERATURES_C, 1.0 + tempco.typ * (TEMPERATURES_C - 25.0))


def make_resistive(builder: Builder, part: BoardPart) -> None:
    """Resistors, fuses, windings, beads, contacts: a straight line through zero."""
    ends = two_ends(builder, part)
    if ends is None:
        return
    probe = Probe(part.ref, part.kind, state_of(part), *ends)
    if state_of(part) == "blocked":
        builder.probes[part.ref] = probe
        return
    branch = Resistive(part.ref, *ends, resistance(builder, part), part.ref, tempco_scale(part))
    builder.add(branch, _with_current(probe))


def make_load_switch(builder: Builder, part: BoardPart) -> None:
    """A load switch: its on-resistance from input to output."""
    ends = two_ends(builder, part, "input", "output") if "input" in part.terminals else two_ends(builder, part)
    if ends is None:
        return
    probe = Probe(part.ref, part.kind, state_of(part), *ends)
    if state_of(part) == "blocked":
        builder.probes[part.ref] = probe
        return
    builder.add(Resistive(part.ref, *ends, resistance(builder, part), part.ref), _with_current(probe))


def make_net_tie(builder: Builder, part: BoardPart) -> None:
    """A net tie: an ideal link."""
    ends = two_ends(builder, part)
    if ends is not None:
        builder.add(Resistive(part.ref, *ends, ZERO, part.ref), _with_current(Probe(part.ref, part.kind, "conducting", *ends)))


def forward_drop(builder: Builder, part: BoardPart) -> Drop:
    """The forward law of a diode, or of a body diode, from the device data."""
    data = part.device.conduction if part.device else None
    if data and data.forward:
        lines = tuple((t, curve_of(table)) for t, table in sorted(data.forward.items()))
        return Drop(lines=lines)
    if data and data.knee is not None:
        tempco = data.knee_tempco.typ if data.knee_tempco is not None else 0.0
        slope = builder.span(f"{part.ref} slope", data.slope) or ZERO
        return Drop(builder.span(f"{part.ref} knee", data.knee), slope, tempco)
    return Drop(builder.gap(part.ref, "conduction.knee", 0.0, GAP_V, "voltage"))


def make_diode(builder: Builder, part: BoardPart) -> None:
    """A diode, anode to cathode; what it holds off in reverse is its own voltage."""
    ends = two_ends(builder, part, "anode", "cathode")
    if ends is None:
        return
    probe = Probe(part.ref, part.kind, state_of(part), *ends)
    builder.add(OneWay(part.ref, *ends, forward_drop(builder, part), part.ref), _with_current(probe))


def make_bridge(builder: Builder, part: BoardPart) -> None:
    """Four diodes from ac1 and ac2 to plus and from minus to them."""
    nets = part.terminals
    if not {"plus", "minus", "ac1", "ac2"} <= nets.keys():
        builder.lack(part.ref, "pins: {plus: ..., minus: ..., ac1: ..., ac2: ...}")
        return
    drop = forward_drop(builder, part)
    pairs = [("ac1", "plus"), ("ac2", "plus"), ("minus", "ac1"), ("minus", "ac2")]
    for a, b in pairs:
        builder.add(OneWay(f"{part.ref} {a} {b}", nets[a], nets[b], drop, part.ref))
    upper = tuple((f"{part.ref} {a} plus", 1.0) for a in ("ac1", "ac2"))
    builder.probes[part.ref] = Probe(part.ref, part.kind, "conducting", nets["plus"], nets["minus"], upper)


def make_clamp(builder: Builder, part: BoardPart) -> None:
    """A Zener or surge diode: from cathode to anode it conducts at its clamping voltage only."""
    ends = two_ends(builder, part, "cathode", "anode")
    if ends is None:
        return
    data = part.device.conduction if part.device else None
    if data and data.clamp is not None:
        drop = Drop(lines=((25.0, curve_of(data.clamp)),))
    elif data and data.standoff is not None:
        drop = Drop(builder.span(f"{part.ref} standoff", data.standoff))
    else:
        builder.lack(part.ref, "conduction.clamp")
        builder.probes[part.ref] = Probe(part.ref, part.kind, "conducting", *ends)
        return
    builder.add(OneWay(part.ref, *ends, drop, part.ref), _with_current(Probe(part.ref, part.kind, "conducting", *ends)))


def on_resistance(builder: Builder, part: BoardPart, gate: Quantity | None) -> Param:
    """The channel's resistance at 25 °C for the gate voltage on this board, from the row it can rely on.

    A row holds from its gate voltage upward; without a known gate voltage the part is taken as driven as its
    weakest row says. Below every row the resistance is missing.
    """
    if part.note.resistance is not None:
        return builder.span(f"{part.ref} on-resistance", part.note.resistance)
    data = part.device.conduction if part.device else None
    if data is None or not data.rds:
        return builder.gap(part.ref, "conduction.rds", 0.0, GAP_OHM, "resistance")
    at = {key if key is not None else (data.at_gate.typ if data.at_gate else 0.0): row for key, row in data.rds.items()}
    usable = [v for v in at if gate is None or v <= gate.min * (1.0 + 1e-9)]
    if not usable:
        wanted = f"conduction.rds for a gate voltage of {gate.text} (its lowest row is for {min(at):g} V)"
        return builder.gap(part.ref, wanted, at[min(at)].max, at[min(at)].max + GAP_OHM, "resistance")
    row = at[max(usable)] if gate is not None else at[min(usable)]
    return builder.span(f"{part.ref} on-resistance", row)


def rds_scale(part: BoardPart) -> Curve | None:
    """The factor on the on-resistance over junction temperature."""
    table = part.device.conduction.rds_scale if part.device else None
    return curve_of(table) if table is not None and part.note.resistance is None else None


def make_mosfet(builder: Builder, part: BoardPart) -> None:
    """A MOSFET: its channel when it conducts, its body diode when it is blocked."""
    ends = two_ends(builder, part, "drain", "source")
    if ends is None:
        return
    state = state_of(part)
    forward = ends if part.channel != "p" else ends[::-1]
    probe = Probe(part.ref, part.kind, state, *forward, gate=gate_of(builder, part),
                  overshoot=builder.span(f"{part.ref} overshoot", part.note.overshoot))
    if state == "blocked":
        block_mosfet(builder, part, probe)
    elif state == "linear":
        _pass_element(builder, part, probe)
    elif part.ref in builder.ideal_diodes:
        drop = Drop(slope_ohm=on_resistance(builder, part, part.note.gate), scale=rds_scale(part))
        builder.add(OneWay(part.ref, probe.b, probe.a, drop, part.ref), _with_current(probe, ((part.ref, -1.0),)))
    else:
        r = on_resistance(builder, part, part.note.gate)
        duty = builder.span(f"{part.ref} duty", part.note.duty) or ONE
        builder.add(Resistive(part.ref, *forward, r, part.ref, rds_scale(part), duty),
                    _with_current(probe, duty=duty))


def block_mosfet(builder: Builder, part: BoardPart, probe: Probe) -> None:
    body = part.device.body if part.device else None
    if body and body.knee is not None:
        knee = builder.span(f"{part.ref} body knee", body.knee)
        drop = Drop(knee, builder.span(f"{part.ref} body slope", body.slope) or ZERO)
    else:
        drop = Drop(builder.gap(part.ref, "body.knee", 0.0, GAP_V, "voltage"))
    key = f"{part.ref} body"
    builder.add(OneWay(key, probe.b, probe.a, drop, part.ref), _with_current(probe, ((key, -1.0),)))


def gate_of(builder: Builder, part: BoardPart) -> Param | tuple[str, str] | None:
    """The gate voltage: annotated, or between the nets of gate and source if both end up in the network."""
    given = builder.span(f"{part.ref} gate", part.note.gate)
    if given is not None:
        return given
    nets = part.terminals
    return (nets["gate"], nets["source"]) if {"gate", "source"} <= nets.keys() else None


def make_bipolar(builder: Builder, part: BoardPart) -> None:
    """A bipolar transistor or IGBT: saturated when it conducts, open when blocked, or a linear pass element."""
    ends = two_ends(builder, part, "collector", "emitter")
    if ends is None:
        return
    state, forward = state_of(part), ends if part.channel != "pnp" else ends[::-1]
    probe = Probe(part.ref, part.kind, state, *forward,
                  overshoot=builder.span(f"{part.ref} overshoot", part.note.overshoot))
    if state == "blocked":
        builder.probes[part.ref] = probe
    elif state == "linear":
        _pass_element(builder, part, probe)
    else:
        duty = builder.span(f"{part.ref} duty", part.note.duty) or ONE
        builder.add(OneWay(part.ref, *forward, saturation_drop(builder, part), part.ref, duty),
                    _with_current(probe, duty=duty))


def saturation_drop(builder: Builder, part: BoardPart) -> Drop:
    """A saturated transistor: saturation voltage and slope."""
    data = part.device.conduction if part.device else None
    if data is None or data.saturation is None:
        return Drop(builder.gap(part.ref, "conduction.saturation", 0.0, GAP_V, "voltage"))
    return Drop(builder.span(f"{part.ref} saturation", data.saturation),
                builder.span(f"{part.ref} slope", data.slope) or ZERO)


def _pass_element(builder: Builder, part: BoardPart, probe: Probe) -> None:
    """A transistor in linear mode takes what is left between its supply and the voltage it holds."""
    setpoint = builder.setpoints.get(part.ref)
    if setpoint is None:
        builder.lack(part.ref, f"a rail with a voltage and held_by: {part.ref}")
        builder.probes[part.ref] = probe
        return
    ground = builder.board.grounds[0]
    builder.add(Linear(part.ref, probe.a, probe.b, ground, setpoint, part=part.ref),
                _with_current(probe, ((part.ref, 1.0),)))


def make_linear_regulator(builder: Builder, part: BoardPart) -> None:
    """A linear regulator: input current = output current + quiescent current."""
    ends = two_ends(builder, part, "input", "output")
    if ends is None:
        return
    ground = regulator_ground(builder, part)
    probe = Probe(part.ref, part.kind, state_of(part), *ends, ground=ground)
    setpoint = builder.setpoints.get(part.ref)
    if setpoint is None or probe.state == "blocked":
        builder.probes[part.ref] = probe
        return
    data = part.device.conduction if part.device else None
    quiescent = builder.span(f"{part.ref} quiescent", data.quiescent if data else None)
    if quiescent is None:
        quiescent = builder.gap(part.ref, "conduction.quiescent", 0.0, GAP_A, "current")
    dropout = builder.span(f"{part.ref} dropout", data.dropout if data else None) or ZERO
    builder.add(Linear(part.ref, *ends, ground, setpoint, dropout, quiescent, part.ref), _with_current(probe))


def regulator_ground(builder: Builder, part: BoardPart) -> str:
    """The ground terminal's net where it is a ground; an adjustable part's reference hangs on the board's ground."""
    own = part.terminals.get("ground")
    return own if own in builder.board.grounds else builder.board.grounds[0]


def make_switching_regulator(builder: Builder, part: BoardPart) -> None:
    """A switching regulator: it holds its rail, and draws the power that the rail takes over the efficiency."""
    if "input" not in part.terminals:
        builder.lack(part.ref, "pins: {input: ...}")
        return
    held = builder.held_net(part)
    if held is None or part.ref not in builder.setpoints or state_of(part) == "blocked":
        builder.probes[part.ref] = Probe(part.ref, part.kind, "blocked", part.terminals["input"], held or "",
                                         ground=regulator_ground(builder, part))
        return
    a, ground = part.terminals["input"], regulator_ground(builder, part)
    quiescent = part.device.conduction.quiescent if part.device else None
    branch = Switching(part.ref, a, held, ground, builder.setpoints[part.ref], efficiency_of(builder, part),
                       builder.span(f"{part.ref} quiescent", quiescent) or ZERO, part.ref)
    builder.add(branch, _with_current(Probe(part.ref, part.kind, "conducting", a, held, ground=ground)))


def efficiency_of(builder: Builder, part: BoardPart) -> Efficiency:
    """The efficiency over load and input voltage; 1 with a gap where the device gives none."""
    rows = part.device.conduction.efficiency if part.device else ()
    if not rows:
        factor = builder.gap(part.ref, "conduction.efficiency", 1.0, 1.0 + GAP_SHARE, "ratio")
        return Efficiency((0.0,), (Curve(np.array([0.0]), np.array([1.0])),), factor)
    if len(rows) == 1 and isinstance(rows[0][1], Quantity):
        factor = builder.span(f"{part.ref} efficiency", rows[0][1])
        return Efficiency((0.0,), (Curve(np.array([0.0]), np.array([1.0])),), factor)
    inputs = tuple(float(v or 0.0) for v, _ in rows)
    curves = tuple(Curve(np.array([0.0]), np.array([row.typ])) if isinstance(row, Quantity) else curve_of(row)
                   for _, row in rows)
    return Efficiency(inputs, curves)


def make_quiescent(builder: Builder, part: BoardPart) -> None:
    """A chip that only draws: its heat is what its supply pins take, by `draws`, a load that heats it, or quiescent."""
    nets = supply_nets(builder, part)
    builder.probes[part.ref] = Probe(part.ref, part.kind, "conducting", nets[0] if len(nets) == 1 else "", "")


def supply_nets(builder: Builder, part: BoardPart) -> list[str]:
    """The nets of a chip's supply pins, grounds left out."""
    named = [part.terminals[name] for name in ("input", "supply") if name in part.terminals]
    nets = named or [p.net for p in part.part.pins if p.type.startswith("power_in") and p.net]
    return [net for net in dict.fromkeys(nets) if net not in builder.board.grounds]


def make_open(builder: Builder, part: BoardPart) -> None:
    """A part that carries no direct current: only the voltage across it is read."""
    ends = two_ends(builder, part)
    if ends is not None:
        builder.probes[part.ref] = Probe(part.ref, part.kind, "conducting", *ends)


def make_connector(builder: Builder, part: BoardPart) -> None:
    """A connector: the current of the rails it feeds."""
    builder.probes[part.ref] = Probe(part.ref, part.kind, "conducting", "", "")


def state_of(part: BoardPart) -> str:
    return str(part.note.state) if part.note.state else "conducting"


def _with_current(probe: Probe, currents=None, duty: Param | None = None) -> Probe:
    return replace(probe, currents=currents or ((probe.ref, 1.0),), duty=duty or probe.duty)


MAKERS: dict[str, Callable[[Builder, BoardPart], None]] = {
    "resistor": make_resistive, "thermistor": make_resistive, "potentiometer": make_resistive,
    "inductor": make_resistive, "ferrite": make_resistive, "fuse": make_resistive,
    "relay": make_resistive, "switch": make_resistive, "net-tie": make_net_tie, "load-switch": make_load_switch,
    "diode": make_diode, "led": make_diode, "bridge": make_bridge, "zener": make_clamp, "tvs": make_clamp,
    "mosfet": make_mosfet, "bjt": make_bipolar, "igbt": make_bipolar,
    "linear-regulator": make_linear_regulator, "switching-regulator": make_switching_regulator,
    "capacitor": make_open, "connector": make_connector, "ic": make_quiescent, "gate-driver": make_quiescent,
    "optocoupler": make_quiescent,
}
"""How each kind enters the network. A kind without a row is `unproven`."""
