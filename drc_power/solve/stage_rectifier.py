"""Rectifier stages: which alternating rail feeds the diodes, and what lies between them and it."""

from __future__ import annotations

from ..board import BoardPart, StageNote
from ..faults import Fault, InputError
from ..quantity import parse_value_field
from .branches import Drop, Leg, Source
from .circuit import Builder, Probe, SourceProbe, Unfed
from .parts import forward_drop, resistance
from .rectifier import Rectifier
from .stage_parts import conducting_nets, parts_named
from .variables import ZERO, Param

IN_SERIES = ("fuse", "resistor", "thermistor", "inductor", "ferrite", "switch", "relay", "net-tie")
FREQUENCY_HZ, FREQUENCY_PROBE_HZ = 50.0, 45.0
RESERVOIR_F, RESERVOIR_PROBE_F = 1.0, 1e-3
UNKNOWN_PROBE_V = 12.0
"""What stands in for a missing datum in the number shown beside `unproven`, and what is tried in its place."""


def add_rectifier(builder: Builder, name: str, stage: StageNote) -> None:
    """A bridge in one part, four diodes, or a single one, with the capacitors named as its reservoir."""
    diodes = parts_named(builder, stage.bridge)
    plus, minus, ac = _ends(name, stage, diodes)
    rail = next((r for r in builder.mode.rails if builder.mode.rails[r].ac and _series(builder, r, ac) is not None), None)
    if rail is None:
        builder.unfed[plus] = Unfed(plus, f"no rail with an alternating voltage feeds stage {name}",
                                    f'write rails: {{"{min(ac)}": {{ac: 12 V, frequency: 50 Hz, source: PART}}}}', stage.mark)
        datum = f'rails: {{"{min(ac)}": {{ac: ...}}}}'
        builder.add(Source(f"stage {name}", plus, minus, builder.gap(diodes[0].ref, datum, 0.0, UNKNOWN_PROBE_V, "voltage")))
        for part in diodes:
            builder.lack(part.ref, datum)
            builder.probes[part.ref] = Probe(part.ref, part.kind, "conducting", plus, minus, group=f"stage {name}", pulsed=True)
            builder.staged.add(part.ref)
        return
    note, series, key = builder.mode.rails[rail], _series(builder, rail, ac) or [], f"stage {name}"
    in_one = diodes[0].kind == "bridge"
    owner = diodes[0].ref
    legs = tuple(Leg(part.ref, drop=_line(builder, part)) for part in diodes)
    builder.add(Rectifier(
        key, minus, plus, legs, tuple(Leg(part.ref, resistance(builder, part)) for part in series),
        2 if in_one or len(diodes) == 4 else 1, 2 if in_one or len(diodes) == 4 else 1,
        builder.span(f"{rail} at", note.ac), builder.span(f"{rail} source resistance", note.resistance) or ZERO,
        _frequency(builder, name, stage, rail, owner), _reservoir(builder, name, stage, owner)))
    for part in diodes:
        builder.probes[part.ref] = Probe(part.ref, part.kind, "conducting", plus, minus, group=key, pulsed=True,
                                         overshoot=builder.span(f"{part.ref} overshoot", part.note.overshoot) or ZERO)
        builder.staged.add(part.ref)
    for part in series:
        builder.probes[part.ref] = Probe(part.ref, part.kind, "conducting", "", "", group=key)
        builder.staged.add(part.ref)
    limit = builder.span(f"{rail} limit", note.limit)
    builder.sources.append(SourceProbe(rail, builder.board.net(rail), f"{key} ac", limit, note.mark))


def _ends(name: str, stage: StageNote, diodes: list[BoardPart]) -> tuple[str, str, set[str]]:
    """Plus, minus and the alternating nets of a rectifier."""
    if len(diodes) == 1 and diodes[0].kind == "bridge" and {"plus", "minus", "ac1", "ac2"} <= diodes[0].terminals.keys():
        nets = diodes[0].terminals
        return nets["plus"], nets["minus"], {nets["ac1"], nets["ac2"]}
    if all({"anode", "cathode"} <= part.terminals.keys() for part in diodes):
        anodes, cathodes = ([part.terminals[end] for part in diodes] for end in ("anode", "cathode"))
        plus = {net for net in cathodes if cathodes.count(net) == 2}
        minus = {net for net in anodes if anodes.count(net) == 2}
        ac = set(anodes) & set(cathodes)
        if len(diodes) == 4 and len(plus) == len(minus) == 1 and len(ac) == 2:
            return plus.pop(), minus.pop(), ac
    raise InputError(Fault(stage.mark, f"stage {name} is not a bridge with its pins known, nor four diodes that make one",
                           "write bridge: BR1 with pins: {plus: ..., minus: ..., ac1: ..., ac2: ...}; other rectifiers are not supported yet"))


def _series(builder: Builder, rail: str, ac: set[str]) -> list[BoardPart] | None:
    """The parts between an alternating rail and the diodes; None where none leads there."""
    back = builder.mode.rails[rail].return_
    targets, start = ac - ({builder.board.net(back)} if back else set()), builder.board.net(rail)
    queue: list[tuple[str, list[BoardPart]]] = [(start, [])]
    seen = {start}
    while queue:
        net, passed = queue.pop(0)
        if net in targets:
            return passed
        for ref in sorted({node.ref for node in builder.board.netlist.nets[net].nodes}):
            part = builder.parts[ref]
            for other in conducting_nets(part) if part.kind in IN_SERIES and ref not in builder.board.not_fitted else ():
                if other not in seen and other not in builder.board.grounds:
                    seen.add(other)
                    queue.append((other, [*passed, part]))
    return None


def _line(builder: Builder, part: BoardPart) -> Drop:
    """The diodes' forward line; curves over the current are not followed within the pulse."""
    drop = forward_drop(builder, part)
    if drop.lines:
        builder.lack(part.ref, "conduction.knee and conduction.slope (curves are not followed within a charging pulse yet)")
        return Drop(Param(float(drop.lines[0][1].ys[-1])))
    return drop


def _frequency(builder: Builder, name: str, stage: StageNote, rail: str, owner: str) -> Param:
    given = builder.span(f"{rail} frequency", stage.frequency or builder.mode.rails[rail].frequency)
    return given or builder.gap(owner, f"stages.{name}.frequency", FREQUENCY_HZ, FREQUENCY_PROBE_HZ, "frequency")


def _reservoir(builder: Builder, name: str, stage: StageNote, owner: str) -> tuple[Param, ...]:
    """The capacitances that the schematic values of the reservoir give."""
    found = []
    for part in parts_named(builder, stage.reservoir):
        read = parse_value_field(part.part.value, "capacitance")
        mark = builder.board.where(part)
        found.append(builder.box.param(f"{part.ref} capacitance", read.span, "capacitance", mark) if read else
                     builder.gap(part.ref, "a capacitance as its value", RESERVOIR_F, RESERVOIR_PROBE_F, "capacitance"))
    return tuple(found) or (builder.gap(owner, f"stages.{name}.reservoir", RESERVOIR_F, RESERVOIR_PROBE_F, "capacitance"),)
