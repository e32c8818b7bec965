"""Rails and loads: where power enters the network, which regulator holds which net, and what draws."""

from __future__ import annotations

from collections.abc import Iterator

from ..board import BoardPart, LoadNote, RailNote, StageNote
from ..faults import Fault, InputError
from .branches import CurrentLoad, PowerLoad, Resistive, Source
from .circuit import Builder, LoadProbe, SourceProbe, Unfed
from .parts import GAP_A, state_of, supply_nets
from .variables import ONE, ZERO

REGULATORS = ("linear-regulator", "switching-regulator")

FLOOR_SHARE = 0.05
"""A constant-power load falls back to a resistor below this share of the highest rail."""


def add_rails(builder: Builder) -> None:
    """Sources of rails fed from outside; set voltages of the regulators that hold the others."""
    for name, rail in builder.mode.rails.items():
        net = builder.board.net(name)
        if rail.ac is not None or "ac" in rail.blank:
            continue  # an alternating rail enters the network through its rectifier
        if rail.source:
            _add_source(builder, name, net, rail)
        elif rail.voltage is not None:
            _hold(builder, name, net, rail)
    _note_unset_regulators(builder)
    _note_blank_rails(builder)


def _note_blank_rails(builder: Builder) -> None:
    """Rails whose voltage is left to be filled in, besides those that a source or a regulator has spoken for already."""
    for name, rail in builder.mode.rails.items():
        net = builder.board.net(name)
        for key in sorted({"voltage", "ac"} & rail.blank) if net not in builder.unfed else ():
            builder.unfed[net] = Unfed(net, f"the voltage of {name} is left blank{_guess(builder, net)}",
                                       f'write rails: {{"{name}": {{{key}: ...}}}}', rail.mark)


def reference_of(builder: Builder) -> str:
    """The ground that all voltages are measured against: the return of the first rail fed from outside."""
    for rail in builder.mode.rails.values():
        if rail.source and rail.ac is None and "ac" not in rail.blank:
            return builder.board.net(rail.return_) if rail.return_ else _source_ground(builder, rail)
    return builder.board.grounds[0]


def _source_ground(builder: Builder, rail: RailNote) -> str:
    grounds = builder.board.grounds
    own = [net for ref in rail.source for net in builder.parts[str(ref)].part.nets_of() if net in grounds]
    return own[0] if own else grounds[0]


def _add_source(builder: Builder, name: str, net: str, rail: RailNote) -> None:
    if rail.voltage is None:
        builder.unfed[net] = Unfed(net, f"the voltage of {name} is not given",
                                   f'write rails: {{"{name}": {{voltage: ...}}}}', rail.mark)
        return
    ground = builder.board.net(rail.return_) if rail.return_ else _source_ground(builder, rail)
    at, key = _stiff_net(builder, net, rail), f"rail {name}"
    voltage = builder.span(f"{name} at", rail.voltage)
    resistance = builder.span(f"{name} source resistance", rail.resistance) or ZERO
    builder.add(Source(key, at, ground, voltage, resistance))
    limit = builder.span(f"{name} limit", rail.limit)
    builder.sources.append(SourceProbe(name, net, key, limit, rail.mark))


def _stiff_net(builder: Builder, net: str, rail: RailNote) -> str:
    """Where the source holds the voltage: on the rail if the source has a pin there, else on the source's own supply net."""
    grounds, survey = builder.board.grounds, builder.board.survey
    own = dict.fromkeys(n for ref in rail.source for n in builder.parts[str(ref)].part.nets_of() if n not in grounds)
    if net in own or not own:
        return net
    powered = {e.from_net for e in survey.elements} | {e.to_net for e in survey.elements}
    supplies = [n for n in own if n in powered]
    return supplies[0] if len(supplies) == 1 else net


def _hold(builder: Builder, name: str, net: str, rail: RailNote) -> None:
    setpoint = builder.span(f"{name} at", rail.voltage)
    if name in builder.stage_rails:
        builder.stage_setpoints[builder.stage_rails[name]] = setpoint
        return
    holders = [str(rail.held_by)] if rail.held_by else list(drivers_of(builder, net))
    if holders:
        builder.setpoints[holders[0]] = setpoint
        builder.held[holders[0]] = net
    if len(holders) == 1:
        return
    ground = builder.board.net(rail.return_) if rail.return_ else builder.board.grounds[0]
    if not holders:
        builder.add(Source(f"rail {name}", net, ground, setpoint))
    what = f"{' and '.join(holders)} both drive it" if holders else "nothing on the board is known to feed it"
    builder.unfed[net] = Unfed(net, f"{name} has a voltage, but {what}; what it draws is counted nowhere else",
                               f'write rails: {{"{name}": {{held_by: PART}}}} or source: PART', rail.mark)


def drivers_of(builder: Builder, net: str) -> Iterator[str]:
    """The regulators, or transistors in linear mode, whose output is this net."""
    fed_by = {ref for rail in builder.board.survey.rails if rail.net == net for ref in rail.fed_by}
    for ref, part in builder.parts.items():
        if not is_active(builder, part):
            continue
        outputs = {part.terminals.get(name) for name in ("output", "source", "drain", "collector", "emitter")}
        if part.kind in REGULATORS and (part.terminals.get("output") == net or ref in fed_by) or state_of(part) == "linear" and part.kind not in REGULATORS and net in outputs:
            yield ref


def is_sinusoidal(stage: StageNote) -> bool:
    """A stage whose duty follows a sine: three phases, or one with a modulation. Its load is its own affair."""
    return str(stage.kind) == "three-phase" or (stage.duty is None and stage.modulation is not None)


def is_active(builder: Builder, part: BoardPart) -> bool:
    """On the board, and not left out."""
    return part.ref not in builder.board.not_fitted and part.ref not in builder.board.outside


def _note_unset_regulators(builder: Builder) -> None:
    """A regulator whose output has no annotated voltage: its rail is unproven, and what it draws is a gap."""
    for ref in builder.board.elements:
        part = builder.parts[ref]
        if part.kind not in REGULATORS or ref in builder.setpoints or state_of(part) == "blocked":
            continue
        net = part.terminals.get("output") or next(
            (rail.net for rail in builder.board.survey.rails if ref in rail.fed_by), None)
        datum = f'rails: {{"{net or "NET"}": {{voltage: ...}}}}'
        if net is not None and net not in builder.unfed:
            builder.unfed[net] = Unfed(net, f"the voltage that {ref} holds on {net} is not given{_guess(builder, net)}",
                                       f"write {datum}", builder.board.where(part))
        draw = builder.gap(ref, datum, 0.0, GAP_A, "current")
        if "input" in part.terminals:
            builder.add(CurrentLoad(f"{ref} unknown draw", part.terminals["input"], builder.board.grounds[0], draw))


def _guess(builder: Builder, net: str) -> str:
    """What the survey guessed, as a hint only."""
    rails = (rail for rail in builder.board.survey.rails if rail.net == net and rail.voltage_v is not None)
    return next((f" (its {rail.because} suggests {rail.voltage_v:g} V)" for rail in rails), "")


def add_loads(builder: Builder) -> None:
    """The annotated loads, and the parts that draw a current of their own."""
    floor_v = FLOOR_SHARE * max([abs(rail.voltage.max) for rail in builder.mode.rails.values() if rail.voltage] or [1.0])
    sinusoidal = {str(stage.load) for stage in builder.mode.view.stages.values() if is_sinusoidal(stage)}
    for name, load in builder.mode.loads.items():
        if load.between and name not in sinusoidal:
            raise InputError(Fault(load.mark, f"load {name} lies between several nets, and no three-phase stage names it",
                                   f"write stages: {{NAME: {{kind: three-phase, load: {name}, ...}}}}"))
        if name not in sinusoidal:
            _add_load(builder, name, load, floor_v)
    for ref, part in builder.parts.items():
        if is_active(builder, part):
            _add_own_draw(builder, ref, part)


def _add_load(builder: Builder, name: str, load: LoadNote, floor_v: float) -> None:
    net = builder.board.net(load.net)
    back = builder.board.net(load.return_) if load.return_ else ground_of(builder, net)
    part = str(load.heats) if load.heats else None
    duty, key = builder.load_duties.get(name, ONE), f"load {name}"
    if load.lacks_demand:
        unknown = builder.box.gap(f"{name} at", 0.0, GAP_A, "current", f"loads.{name}.draws", load.mark, either_way=True)
        builder.add(CurrentLoad(key, net, back, unknown, part, duty))
    elif load.draws is not None:
        builder.add(CurrentLoad(key, net, back, builder.span(f"{name} at", load.draws), part, duty))
    elif load.power is not None:
        builder.add(PowerLoad(key, net, back, builder.span(f"{name} at", load.power), floor_v, part, duty))
    elif load.resistance is not None:
        builder.add(Resistive(key, net, back, builder.span(f"{name} at", load.resistance), part, None, duty, name))
    needs = None
    if load.needs is not None:
        exact = load.needs.span
        needs = (builder.constant(exact.min), builder.constant(exact.max))
    builder.loads.append(LoadProbe(name, net, back, key, needs, load.mark))


def ground_of(builder: Builder, net: str) -> str:
    """The ground that most of the parts on a net share; the first ground where none of them has one."""
    grounds = builder.board.grounds
    counts = dict.fromkeys(grounds, 0)
    for node in builder.board.netlist.nets[net].nodes:
        for other in builder.board.netlist.parts[node.ref].nets_of():
            if other in counts:
                counts[other] += 1
    return max(grounds, key=lambda ground: counts[ground])


def _add_own_draw(builder: Builder, ref: str, part: BoardPart) -> None:
    """`draws` of a part, or a chip's quiescent current where no load stands for it: heat of its own."""
    heated = any(str(load.heats) == ref for load in builder.mode.loads.values() if load.heats)
    data = part.device.conduction if part.device else None
    quiescent = data.quiescent if data and part.kind not in REGULATORS and not heated else None
    draws = part.note.draws or quiescent
    left_blank = data is not None and "quiescent" in data.blank and part.kind not in REGULATORS and not heated
    if draws is None and not left_blank:
        return
    nets = supply_nets(builder, part)
    if len(nets) != 1:
        builder.lack(ref, "pins: {input: ...} (its supply pins are on no net or on several)")
        return
    current = builder.span(f"{ref} draw", draws) or builder.gap(ref, "conduction.quiescent", 0.0, GAP_A, "current")
    builder.add(CurrentLoad(f"{ref} draw", nets[0], ground_of(builder, nets[0]), current, ref))
