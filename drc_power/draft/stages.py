"""Stages: as the survey proposes them where the check takes their kind and shape, else as comments."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from drc_power.draft.alternating import rectified_nets
from drc_power.draft.loads import phases_of
from drc_power.draft.writing import BLANK, Entry, commented, entry, listed, scalar, slug
from drc_power.intake.not_built import NOT_BUILT
from drc_power.netlist.model import Netlist
from drc_power.survey.model import Stage, Survey

_SWITCHES = frozenset({"mosfet", "bjt", "igbt"})
_MOSFETS = frozenset({"mosfet"})
_DIODES = frozenset({"diode", "led"})
_ENDS = ("drain", "source", "collector", "emitter", "anode", "cathode", "a", "b")


@dataclass(frozen=True, slots=True)
class Shape:
    """What a kind of stage looks like in the file.

    keys: its part keys. sides: those whose parts take turns at one net, the switched one. blanks: what the user fills
    in. needs: keys without which the check refuses it.
    """

    keys: tuple[str, ...]
    sides: tuple[str, ...] = ()
    blanks: tuple[str, ...] = ()
    needs: tuple[str, ...] = ()


def _shape(keys: str, sides: str = "", blanks: str = "", needs: str = "") -> Shape:
    return Shape(*(tuple(words.split()) for words in (keys, sides, blanks, needs)))


_CONVERTER = _shape("chip high low inductor", "high low", "frequency")
_SWITCH = _shape("switch clamp", "switch clamp", "frequency duty", "switch")
_GROUP = _shape("parts controller", needs="parts")

SHAPES: Mapping[str, Shape] = {
    "buck": _CONVERTER, "boost": _CONVERTER, "low-side": _SWITCH, "high-side": _SWITCH,
    "half-bridge": _shape("high low shunts", "high low", "frequency duty", "high low load"),
    "three-phase": _shape("high low shunts", "high low", "frequency modulation power_factor", "high low load"),
    "push-pull": _shape("pair", needs="pair load"),
    "rectifier": _shape("bridge reservoir", needs="bridge"),
    "or-ing": _GROUP, "hot-plug": _GROUP, "linear-pass": _GROUP, "load-switch": _GROUP,
}


def stage_entries(survey: Survey, netlist: Netlist, load_of: Mapping[str, str]) -> Iterator[Entry]:
    """The entries of the stages. `load_of`: the name of the load that each part stands for."""
    wiring = _Wiring(survey, netlist)
    for stage in survey.stages:
        if stage.kind in SHAPES:
            yield _entry(stage, SHAPES[stage.kind], load_of, wiring)


def switched_parts(survey: Survey) -> frozenset[str]:
    """The parts that take turns at a switched net."""
    kinds = ((stage, SHAPES[stage.kind]) for stage in survey.stages if stage.kind in SHAPES)
    return frozenset(ref for stage, shape in kinds for side in shape.sides for ref in stage.parts.get(side, ()))


def _entry(stage: Stage, shape: Shape, load_of: Mapping[str, str], wiring: _Wiring) -> Entry:
    loads = list(dict.fromkeys(load_of[ref] for ref in stage.parts.get("load", ()) if ref in load_of))
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


def _problem(stage: Stage, shape: Shape, values: Mapping[str, str], wiring: _Wiring) -> str:
    """Why the check would not take this stage, "" if it does."""
    if NOT_BUILT["annotations"].get(f"stages.*.kind={stage.kind}"):
        return f"{stage.kind} stages are not supported yet"
    if missing := [key for key in shape.needs if key not in values]:
        return f"give {' and '.join(missing)} and take out the #"
    if stage.kind == "three-phase":
        return _three_phase_problem(stage, wiring)
    sides = [stage.parts.get(side, ()) for side in shape.sides]
    if any(len(wiring.of(refs, _DIODES)) > 1 or len(wiring.of(refs, _SWITCHES | _DIODES)) < len(refs) for refs in sides):
        return "a side is switches in parallel with at most one diode"
    if shape is _SWITCH and not stage.parts.get("clamp") and len(stage.parts["switch"]) > 1:
        return "several switches without a clamp are not supported yet"
    if stage.kind == "rectifier":
        return "" if wiring.is_rectifier(stage) else "a bridge with its pins known, or four diodes that make one, is due"
    return _converter_problem(stage, wiring) if shape is _CONVERTER else _meeting_problem(sides, wiring)


def _three_phase_problem(stage: Stage, wiring: _Wiring) -> str:
    """Three legs of MOSFETs, whose low parts lead to one net or have a shunt each."""
    high, low, shunts = (stage.parts.get(key, ()) for key in ("high", "low", "shunts"))
    if not wiring.phases(stage) or len(wiring.of((*high, *low), _MOSFETS)) < len((*high, *low)):
        return "write high: [Q1, Q3, Q5], low: [Q2, Q4, Q6] with the diode beside each transistor that is no MOSFET"
    feet = {net for ref in low for net in wiring.nets(ref)} - set(wiring.phases(stage))
    return "name the shunt in each foot as shunts" if len(feet) > 1 and len(shunts) < len(feet) else ""


def _converter_problem(stage: Stage, wiring: _Wiring) -> str:
    """A converter switches by a chip, or by a side of its own that takes turns with the other at the inductor."""
    high, low, coils, chips = (stage.parts.get(key, ()) for key in ("high", "low", "inductor", "chip"))
    main, free = (high, low) if stage.kind == "buck" else (low, high)
    if len(coils) > 1 or len(chips) > 1:
        return "write a stage for each chip and inductor"
    if not wiring.switches(main):
        return "" if chips and not main else "name the chip or the switch that is driven"
    if not free or not coils:
        return "name both sides and the inductor"
    return _meeting_problem([main, free, coils], wiring)


def _meeting_problem(groups: Sequence[Sequence[str]], wiring: _Wiring) -> str:
    nets = [wiring.nets(ref) for refs in groups for ref in refs]
    together = len([refs for refs in groups if refs]) > 1
    return "its parts share no net" if together and not frozenset.intersection(*nets) else ""


class _Wiring:
    """Kinds of parts, and the nets that they conduct between."""

    def __init__(self, survey: Survey, netlist: Netlist) -> None:
        self._survey, self._netlist = survey, netlist

    def of(self, refs: Sequence[str], kinds: frozenset[str]) -> list[str]:
        """Those of some parts that are of a kind."""
        return [ref for ref in refs if self._survey.parts[ref].kind in kinds]

    def switches(self, refs: Sequence[str]) -> list[str]:
        """Those of some parts that switch."""
        return self.of(refs, _SWITCHES)

    def phases(self, stage: Stage) -> tuple[str, ...]:
        """The three nets that a three-phase bridge drives."""
        return phases_of(stage, self._survey)

    def is_rectifier(self, stage: Stage) -> bool:
        """Whether the alternating nets of a rectifier are known."""
        return bool(rectified_nets(stage, self._survey, self._netlist))

    def nets(self, ref: str) -> frozenset[str]:
        """The nets at the ends of a part, all of them where nothing says which pins they are."""
        part, terminals = self._netlist.parts[ref], self._survey.parts[ref].terminals
        ends = [nets[0] for name in _ENDS if (nets := part.nets_of(*terminals.get(name, ("",))))]
        return frozenset(ends or part.nets_of())
