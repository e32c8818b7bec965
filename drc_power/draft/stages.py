"""Stages: as the survey proposes them where the check takes their kind and shape, else as comments."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from drc_power.draft.writing import BLANK, Entry, commented, entry, listed, scalar, slug
from drc_power.intake.not_built import NOT_BUILT
from drc_power.survey.model import Stage, Survey


@dataclass(frozen=True, slots=True)
class Shape:
    """What a kind of stage looks like in the file.

    keys: its part keys. single: those of them that take one part. blanks: what the user fills in. needs: keys without
    which the check refuses it. meet: two keys whose parts must share a net.
    """

    keys: tuple[str, ...]
    single: tuple[str, ...] = ()
    blanks: tuple[str, ...] = ()
    needs: tuple[str, ...] = ()
    meet: tuple[str, str] | None = None


def _shape(keys: str, single: str = "", blanks: str = "", needs: str = "", meet: tuple[str, str] | None = None) -> Shape:
    return Shape(*(tuple(words.split()) for words in (keys, single, blanks, needs)), meet)


_CONVERTER = _shape("chip high low inductor", "chip low inductor", "frequency", "chip")
_SWITCH = _shape("switch clamp", "switch clamp", "frequency duty", "switch", ("switch", "clamp"))
_GROUP = _shape("parts controller", needs="parts")

SHAPES: Mapping[str, Shape] = {
    "buck": _CONVERTER, "boost": _CONVERTER, "low-side": _SWITCH, "high-side": _SWITCH,
    "half-bridge": _shape("high low shunts", "high low", "frequency duty", "high low load", ("high", "low")),
    "three-phase": _shape("high low shunts", "", "frequency modulation power_factor current", "high low load"),
    "push-pull": _shape("pair", needs="pair load"),
    "rectifier": _shape("bridge reservoir", "bridge", "frequency", "bridge"),
    "or-ing": _GROUP, "hot-plug": _GROUP, "linear-pass": _GROUP, "load-switch": _GROUP,
}


def stage_entries(survey: Survey, load_of: Mapping[str, str]) -> Iterator[Entry]:
    """The entries of the stages. `load_of`: the name of the load that each part stands for."""
    ends = {}
    for e in survey.elements:
        ends.setdefault(e.ref, set()).update((e.from_net, e.to_net))
    for stage in survey.stages:
        if stage.kind in SHAPES:
            yield _entry(stage, SHAPES[stage.kind], load_of, ends)


def main_parts(stage: Stage) -> list[str]:
    """The parts that make the stage what it is, without its load and what controls it."""
    shape = SHAPES[stage.kind]
    return [ref for key in shape.keys if key not in ("controller", "reservoir") for ref in stage.parts.get(key, ())]


def _entry(stage: Stage, shape: Shape, load_of: Mapping[str, str], ends: Mapping[str, set[str]]) -> Entry:
    loads = list(dict.fromkeys(load_of[ref] for ref in stage.parts.get("load", ()) if ref in load_of))
    values = {"kind": stage.kind} | {key: listed(stage.parts[key]) for key in shape.keys if stage.parts.get(key)}
    if len(loads) == 1 and stage.kind != "push-pull":
        values["load"] = scalar(loads[0])
    problem = _problem(stage, shape, values, ends)
    if problem and "load" in shape.needs:
        values.setdefault("load", BLANK)
    values |= dict.fromkeys(shape.blanks, BLANK)
    parts = main_parts(stage)
    name = f"{slug(parts[0])}-{stage.kind}" if parts else stage.kind
    if problem:
        return commented(name, values, problem, names=parts)
    return entry(name, values, names=parts)


def _problem(stage: Stage, shape: Shape, values: Mapping[str, str], ends: Mapping[str, set[str]]) -> str:
    """Why the check would not take this stage, "" if it does."""
    if NOT_BUILT["annotations"].get(f"stages.*.kind={stage.kind}"):
        return f"{stage.kind} stages are not supported yet"
    several = [key for key in shape.single if len(stage.parts.get(key, ())) > 1]
    if several:
        return f"several parts as {' and '.join(several)} are not supported yet"
    if shape.keys[:1] == ("chip",) and stage.parts.get("high"):
        return "switches outside the chip are not supported yet"
    if missing := [key for key in shape.needs if key not in values]:
        return f"give {' and '.join(missing)} and take out the #"
    if shape.meet and all(stage.parts.get(key) for key in shape.meet) and not _meet(stage, shape.meet, ends):
        return f"{' and '.join(shape.meet)} share no net"
    return ""


def _meet(stage: Stage, keys: tuple[str, str], ends: Mapping[str, set[str]]) -> bool:
    one, other = (ends.get(stage.parts[key][0], set()) for key in keys)
    return bool(one & other)
