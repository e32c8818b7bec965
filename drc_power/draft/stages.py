"""Stages: as the survey proposes them where the check takes their kind and shape, else as comments."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass

from drc_power.draft.alternating import rectified_nets
from drc_power.draft.wiring import DIODES, SWITCHES, Wiring
from drc_power.draft.writing import BLANK, Entry, commented, entry, listed, scalar, slug
from drc_power.intake.not_built import NOT_BUILT
from drc_power.netlist.model import Netlist
from drc_power.survey.model import Stage, Survey


@dataclass(frozen=True, slots=True)
class Shape:
    """What a kind of stage looks like in the file.

    keys: its part keys. sides: those whose parts take turns at one net, the switched one. blanks: what the user fills
    in. needs: keys without which the check refuses it. rules: what else it refuses, each with the reason or "".
    """

    keys: tuple[str, ...]
    sides: tuple[str, ...] = ()
    blanks: tuple[str, ...] = ()
    needs: tuple[str, ...] = ()
    rules: tuple[Callable[[Stage, Wiring], str], ...] = ()


def stage_entries(survey: Survey, netlist: Netlist, load_of: Mapping[str | tuple[str, ...], str]) -> Iterator[Entry]:
    """The entries of the stages. `load_of`: the name of the load that each part, or each set of phases, stands for."""
    wiring = Wiring(survey, netlist)
    for stage in survey.stages:
        if stage.kind in SHAPES:
            yield _entry(stage, SHAPES[stage.kind], load_of, wiring)


def switched_parts(survey: Survey) -> frozenset[str]:
    """The parts that take turns at a switched net."""
    kinds = ((stage, SHAPES[stage.kind]) for stage in survey.stages if stage.kind in SHAPES)
    return frozenset(ref for stage, shape in kinds for side in shape.sides for ref in stage.parts.get(side, ()))


def _entry(stage: Stage, shape: Shape, load_of: Mapping[str | tuple[str, ...], str], wiring: Wiring) -> Entry:
    bearers = [wiring.phases(stage)] if stage.kind == "three-phase" else stage.parts.get("load", ())
    loads = list(dict.fromkeys(load_of[each] for each in bearers if each in load_of))
    values = {"kind": stage.kind} | {key: listed(stage.parts[key]) for key in shape.keys if stage.parts.get(key)}
    if len(loads) == 1 and stage.kind != "push-pull":
        values["load"] = scalar(loads[0])
    problem = _problem(stage, shape, values, wiring)
    if problem and "load" in shape.needs:
        values.setdefault("load", BLANK)
    values |= dict.fromkeys(shape.blanks, BLANK)
    if len(shape.sides) == 2 and all(wiring.switches(stage.parts.get(side, ())) for side in shape.sides):
        values["dead_time"] = BLANK
    parts = [ref for key in shape.keys if key not in ("controller", "reservoir") for ref in stage.parts.get(key, ())]
    name = f"{slug(parts[0])}-{stage.kind}" if parts else stage.kind
    return commented(name, values, problem, names=parts) if problem else entry(name, values, names=parts)


def _problem(stage: Stage, shape: Shape, values: Mapping[str, str], wiring: Wiring) -> str:
    """Why the check would not take this stage, "" if it does."""
    if NOT_BUILT["annotations"].get(f"stages.*.kind={stage.kind}"):
        return f"{stage.kind} stages are not supported yet"
    if missing := [key for key in shape.needs if key not in values]:
        return f"give {' and '.join(missing)} and take out the #"
    return next((problem for rule in shape.rules if (problem := rule(stage, wiring))), "")


def _at_most_one_diode(stage: Stage, wiring: Wiring) -> str:
    sides = [stage.parts.get(side, ()) for side in SHAPES[stage.kind].sides]
    mixed = [refs for refs in sides if len(wiring.of(refs, DIODES)) > 1 or len(wiring.of(refs, SWITCHES | DIODES)) < len(refs)]
    return "a side is switches in parallel with at most one diode" if mixed else ""


def _one_switch_or_a_clamp(stage: Stage, wiring: Wiring) -> str:
    several = len(stage.parts["switch"]) > 1 and not stage.parts.get("clamp")
    return "several switches without a clamp are not supported yet" if several else ""


def _carries_on(*sides: str) -> Callable[[Stage, Wiring], str]:
    """The current goes on through these sides while the other is off: they must carry it backwards."""

    def rule(stage: Stage, wiring: Wiring) -> str:
        one_way = [refs for side in sides if (refs := stage.parts.get(side)) and not wiring.carries_back(refs)]
        return f"name the diode beside {one_way[0][0]} in the same list" if one_way else ""

    return rule


def _meet(*keys: str) -> Callable[[Stage, Wiring], str]:
    """All the parts of these keys meet at one net, where more than one key has any."""

    def rule(stage: Stage, wiring: Wiring) -> str:
        groups = [refs for key in keys if (refs := stage.parts.get(key))]
        nets = [wiring.nets(ref) for refs in groups for ref in refs]
        return "its parts share no net" if len(groups) > 1 and not frozenset.intersection(*nets) else ""

    return rule


def _converts(stage: Stage, wiring: Wiring) -> str:
    """A converter switches by a chip, or by a side of its own that takes turns with the other at the inductor."""
    high, low, coils, chips = (stage.parts.get(key, ()) for key in ("high", "low", "inductor", "chip"))
    main, free = (high, low) if stage.kind == "buck" else (low, high)
    if len(coils) > 1 or len(chips) > 1:
        return "write a stage for each chip and inductor"
    if not wiring.switches(main):
        return "" if chips and not main else "name the chip or the switch that is driven"
    if not free or not coils:
        return "name both sides and the inductor"
    return _meet("high", "low", "inductor")(stage, wiring)


def _has_three_legs(stage: Stage, wiring: Wiring) -> str:
    return "" if wiring.phases(stage) else "three legs of MOSFETs are due, with a shunt in each foot or none"


def _rectifies(stage: Stage, wiring: Wiring) -> str:
    known = rectified_nets(stage, wiring.survey, wiring.netlist)
    return "" if known else "a bridge with its pins known, or four diodes that make one, is due"


def _shape(keys: str, sides: str = "", blanks: str = "", needs: str = "", rules: tuple = ()) -> Shape:
    return Shape(*(tuple(words.split()) for words in (keys, sides, blanks, needs)), rules)


def _converter(free: str) -> Shape:
    return _shape("chip high low inductor", "high low", "frequency", "", (_at_most_one_diode, _converts, _carries_on(free)))


_SWITCH = _shape("switch clamp", "switch clamp", "frequency duty", "switch",
                 (_at_most_one_diode, _one_switch_or_a_clamp, _carries_on("clamp"), _meet("switch", "clamp")))
_GROUP = _shape("parts controller", needs="parts")

SHAPES: Mapping[str, Shape] = {
    "buck": _converter("low"), "boost": _converter("high"), "low-side": _SWITCH, "high-side": _SWITCH,
    "half-bridge": _shape("high low shunts", "high low", "frequency duty", "high low load",
                          (_at_most_one_diode, _carries_on("high", "low"), _meet("high", "low"))),
    "three-phase": _shape("high low shunts", "high low", "frequency modulation power_factor", "high low load", (_has_three_legs,)),
    "push-pull": _shape("pair", needs="pair load"),
    "rectifier": _shape("bridge reservoir", needs="bridge", rules=(_rectifies,)),
    "or-ing": _GROUP, "hot-plug": _GROUP, "linear-pass": _GROUP, "load-switch": _GROUP,
}
