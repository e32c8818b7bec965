"""Groups of parts that work together: which maker builds each kind of stage, and the class-AB pair."""

from __future__ import annotations

import math
from dataclasses import replace

from ..board import BoardPart, StageNote
from ..faults import Fault, InputError
from ..quantity import Span
from .branches import Resistive
from .circuit import Builder, Probe, PushPull
from .parts import value_resistance
from .stage_converters import add_converter, add_stopped_converter, is_running
from .stage_pairs import add_half_bridge, add_single_switch
from .stage_parts import conducting_nets
from .stage_rectifier import add_rectifier
from .stage_sine import add_sine_bridge
from .supply import is_sinusoidal
from .variables import ZERO, Param


def add_stages(builder: Builder) -> None:
    """Every annotated stage that changes how its parts conduct; their own branches are then not drawn again."""
    for name, stage in builder.mode.view.stages.items():
        makers = MAKERS if is_running(builder, stage) else STOPPED
        if str(stage.kind) in makers:
            makers[str(stage.kind)](builder, name, stage)


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


def _or_ing(builder: Builder, name: str, stage: StageNote) -> None:
    """A MOSFET of an or-ing stage conducts along its body diode only: its controller opens it to a reverse current."""
    builder.ideal_diodes |= {str(ref) for ref in stage.parts}


def _half_bridge(builder: Builder, name: str, stage: StageNote) -> None:
    """A half bridge with a steady duty, or one whose duty follows a sine."""
    (add_sine_bridge if is_sinusoidal(stage) else add_half_bridge)(builder, name, stage)


MAKERS = {"half-bridge": _half_bridge, "low-side": add_single_switch, "high-side": add_single_switch,
          "three-phase": add_sine_bridge, "push-pull": _push_pull, "buck": add_converter, "boost": add_converter, "or-ing": _or_ing, "rectifier": add_rectifier}
"""How each kind of stage enters the network while it runs. The others group parts that conduct by themselves; those of
a linear-pass stage are in state linear already (see `Board.in_mode`)."""

STOPPED = {"buck": add_stopped_converter, "boost": add_stopped_converter}
"""And with a blocked switch or chip; other kinds leave their parts on their own."""
