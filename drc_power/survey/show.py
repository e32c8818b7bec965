"""The survey for people and programs: a power tree as plain text, and the JSON of the contract."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Mapping
from typing import Any

from drc_power.netlist.model import Netlist
from drc_power.survey.graph import islands
from drc_power.survey.model import Element, Rail, Survey
from drc_power.text import pad, printable, shorten

_DEPTH = 40
_NAME = 40


def survey_json(survey: Survey) -> dict[str, Any]:
    """The survey as the contract's JSON: plain dicts and lists, keys in the contract's order."""
    return {
        "format": 1,
        "netlist": survey.netlist,
        "grounds": list(survey.grounds),
        "rails": [{"net": r.net, "voltage": r.voltage_v, "because": r.because, "fed_by": list(r.fed_by)} for r in survey.rails],
        "elements": [_element_json(e) for e in survey.elements],
        "stages": [{"kind": s.kind, "parts": {key: list(refs) for key, refs in s.parts.items()}, "node": s.node} for s in survey.stages],
        "paths": [list(path) for path in survey.paths],
        "signal": [{"ref": s.ref, "because": s.because} for s in survey.signal],
    }


def _element_json(e: Element) -> dict[str, Any]:
    return {
        "ref": e.ref, "group": e.group, "role": e.role, "from": e.from_net, "to": e.to_net,
        "control": e.control, "device": None, "confidence": e.confidence, "because": list(e.because),
    }


def survey_text(survey: Survey, netlist: Netlist | None = None) -> str:
    """The survey as lines for a terminal: power tree, rails, stages, and what is only signal, by reason.

    `netlist`: where part values are taken from; without it references stand alone.
    """
    values = {ref: part.value for ref, part in netlist.parts.items()} if netlist else {}
    blocks = [_heading(survey), _tree(survey, values), _rails(survey), _stages(survey), _clamps(survey, values), _rest(survey)]
    return "\n\n".join("\n".join(block) for block in blocks if block) + "\n"


def _name(text: str) -> str:
    return shorten(printable(text), _NAME)


def _names(refs: Iterable[str], most: int = 12) -> str:
    shown = [_name(ref) for ref in dict.fromkeys(refs)]
    more = f" and {len(shown) - most} more" if len(shown) > most else ""
    return ", ".join(shown[:most]) + more


def _heading(survey: Survey) -> list[str]:
    on_path = {e.ref for e in survey.elements if e.group in ("pass", "switch", "clamp")}
    return [
        f"{_name(survey.netlist)}: {len(survey.parts)} parts, {len(on_path)} pass, switch or clamp power, {len(survey.rails)} rails",
        f"grounds: {_names(survey.grounds) or 'none found'}",
    ]


def _volts(rail: Rail | None) -> str:
    return f" ({rail.voltage_v:g} V, guessed: {_name(rail.because)})" if rail and rail.voltage_v is not None else ""


class _Tree:
    """Walks the power graph from the sources down, each net once; parallel elements share a line."""

    def __init__(self, survey: Survey, values: Mapping[str, str]) -> None:
        self._rails = {rail.net: rail for rail in survey.rails}
        self._grounds = set(survey.grounds)
        self._values = values
        self._ways: dict[str, dict[tuple[str, str, str], list[Element]]] = {}
        self._draws: dict[str, list[str]] = {}
        self._seen: set[str] = set()
        self.lines: list[str] = []
        for e in survey.elements:
            if e.group in ("pass", "switch"):
                self._ways.setdefault(e.from_net, {}).setdefault((e.to_net, e.role, e.group), []).append(e)
            elif e.group == "load":
                self._draws.setdefault(e.from_net, []).append(e.ref)
                if e.to_net and e.to_net not in self._grounds:
                    self._ways.setdefault(e.from_net, {}).setdefault((e.to_net, e.role, e.group), []).append(e)

    def start(self, refs: list[str], net: str) -> None:
        """A tree of its own under a source, or under a net that no source was found for."""
        head = f"{_names(refs)} -> " if refs else "no source found for "
        self.lines.append(f"{head}{_name(net)}{_volts(self._rails.get(net))}")
        self._down(net, 1)

    def _down(self, net: str, depth: int) -> None:
        if net in self._seen or net in self._grounds or depth > _DEPTH:
            return
        self._seen.add(net)
        indent = "  " * depth
        for (to_net, role, group), elements in self._ways.get(net, {}).items():
            if group == "load" and not self.left_over(to_net):
                continue
            again = " (see above)" if to_net in self._seen else ""
            self.lines.append(f"{indent}{self._label(elements)} {role}{'' if group == 'pass' else f' {group}'} -> {_name(to_net)}{_volts(self._rails.get(to_net))}{again}")
            self._down(to_net, depth + 1)
        if net in self._draws:
            self.lines.append(f"{indent}feeds {_names(self._draws[net])}")

    def _label(self, elements: list[Element]) -> str:
        refs = list(dict.fromkeys(e.ref for e in elements))
        value = self._values.get(refs[0], "")
        return _names(refs) + (f" [{shorten(printable(value), 24)}]" if value else "")

    def left_over(self, net: str) -> bool:
        """Whether elements lead on from a net that no tree has reached."""
        return net in self._ways and net not in self._seen and net not in self._grounds


def _tree(survey: Survey, values: Mapping[str, str]) -> list[str]:
    tree = _Tree(survey, values)
    inlets: dict[str, list[str]] = {}
    for e in survey.elements:
        if e.group == "source":
            inlets.setdefault(e.to_net, []).append(e.ref)
    for net, refs in inlets.items():
        tree.start(refs, net)
    returns = [e for e in survey.elements if e.group == "pass" and e.to_net in survey.grounds]
    for net in (net for island in islands(survey) for net in island):
        if tree.left_over(net) and net not in {e.from_net for e in returns}:
            tree.start([], net)
    if returns:
        tree.lines.append("in returns")
        tree.lines += [f"  {_name(e.ref)} {e.role}: {_name(e.from_net)} -> {_name(e.to_net)}" for e in returns]
    return tree.lines


def _rails(survey: Survey) -> list[str]:
    if not survey.rails:
        return []
    width = min(_NAME, max(len(_name(rail.net)) for rail in survey.rails))
    lines = ["rails (voltages are guesses until annotated)"]
    for rail in survey.rails:
        volts = f"{rail.voltage_v:g} V" if rail.voltage_v is not None else "?"
        lines.append(f"  {pad(_name(rail.net), width)}  {pad(volts, 8, right=True)}  {_name(rail.because)}; fed by {_names(rail.fed_by) or 'nothing found'}")
    return lines


def _stages(survey: Survey) -> list[str]:
    lines = [
        f"  {stage.kind}: " + ", ".join(f"{key} {_names(refs)}" for key, refs in stage.parts.items()) + (f" at {_name(stage.node)}" if stage.node else "")
        for stage in survey.stages
    ]
    return ["stages", *lines] if lines else []


def _clamps(survey: Survey, values: Mapping[str, str]) -> list[str]:
    lines = [
        f"  {_name(e.ref)}" + (f" [{shorten(printable(values[e.ref]), 24)}]" if values.get(e.ref) else "") + f" {e.role}: {_name(e.from_net)} to {_name(e.to_net)}, {e.because[0]}"
        for e in survey.elements
        if e.group == "clamp"
    ]
    return ["clamps", *lines] if lines else []


def _rest(survey: Survey) -> list[str]:
    counted = Counter(signal.because for signal in survey.signal)
    lines = [f"  {count:5d}  {printable(because)}" for because, count in sorted(counted.items(), key=lambda item: (-item[1], item[0]))]
    if survey.not_fitted:
        lines.append(f"  {len(survey.not_fitted):5d}  not fitted: {_names(survey.not_fitted)}")
    return ["not on a power path", *lines] if lines else []
