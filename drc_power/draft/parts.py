"""Parts: everything that needs a verdict, with its device and the blanks that only this board can fill."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator

from drc_power.draft.data_sheet import SHEETS
from drc_power.draft.devices import Library
from drc_power.draft.loads import JUDGED_AS_PARTS
from drc_power.draft.readings import readings_of, told
from drc_power.draft.writing import BLANK, Entry, can_be_named, entry, remark, scalar, unwritable
from drc_power.netlist.model import Netlist
from drc_power.survey.model import Element, Survey

_JUDGED = frozenset({"pass", "switch", "clamp"})
_RINGING = frozenset({"mosfet", "bjt", "igbt", "diode"})
_WHY_OUTSIDE = {"net-tie": "net tie, copper alone", "led": "indicator"}
_UNSURE_BELOW = 0.6
_MOST_VALUES, _MOST_REFS = 3, 12


def judged_elements(survey: Survey) -> dict[str, Element]:
    """The parts that a check gives a verdict on, each with its first element."""
    found: dict[str, Element] = {}
    for e in survey.elements:
        if e.group in _JUDGED or e.group == "load" and e.role in JUDGED_AS_PARTS:
            found.setdefault(e.ref, e)
    return found


def part_entries(survey: Survey, netlist: Netlist, elements: Iterable[Element], library: Library,
                 in_stages: frozenset[str]) -> Iterator[Entry]:
    """One entry for each part, for parallel parts of one kind together. `in_stages`: parts of stages that switch."""
    groups: dict[tuple, list[Element]] = {}
    for e in elements:
        values = _values(survey, netlist, e, library, in_stages)
        place = (e.from_net, e.to_net, e.control) if values and BLANK in values.values() else ()
        groups.setdefault((e.role, tuple(values.items()), place if values else e.ref), []).append(e)
    for (_, values, _), together in groups.items():
        for start in range(0, len(together), _MOST_REFS):
            some = together[start : start + _MOST_REFS]
            yield _entry(netlist, [e.ref for e in some], dict(values), some[0])


def _values(survey: Survey, netlist: Netlist, e: Element, library: Library, in_stages: frozenset[str]) -> dict[str, str]:
    """What stands in the entry; empty for a part that no device data describes."""
    if survey.parts[e.ref].kind not in SHEETS:
        return {}
    device = library.device_of(netlist.parts[e.ref], survey.parts[e.ref])
    values = {"device": scalar(device)} if device else {}
    if e.role == "mosfet":
        values["gate"] = BLANK
    if e.ref in in_stages and e.role in _RINGING:
        values["overshoot"] = BLANK
    return values


def _entry(netlist: Netlist, refs: list[str], values: dict[str, str], e: Element) -> Entry:
    valued = ", ".join(list(dict.fromkeys(netlist.parts[ref].value for ref in refs))[:_MOST_VALUES])
    what = f"{valued} {e.role}" + (f", {e.from_net or '?'} to {e.to_net or '?'}" if len(refs) == 1 else "")
    if not _can_be_a_key(refs):
        return unwritable(refs)
    if not values:
        line = f"# {scalar(refs[0])}:{remark(what, 'no device data for this kind: leave it out under outside')}"
        return Entry(line, names=frozenset(refs))
    return entry(" ".join(refs), values, what, told(readings_of(netlist.parts[refs[0]])), names=refs)


def _can_be_a_key(refs: Iterable[str]) -> bool:
    """Whether references can be named together; a blank would part them, and these signs make a pattern."""
    return can_be_named(*refs) and not any(c.isspace() or c in "*?[" for ref in refs for c in ref)


def outside_lines(survey: Survey, is_known: Callable[[str], bool]) -> list[str]:
    """Suggestions of what to leave out, as comments: kinds without data, then what the survey is least sure of."""
    doubts, lines = {}, []
    for ref, e in judged_elements(survey).items():
        kind = survey.parts[ref].kind
        if is_known(ref) or not can_be_named(ref):
            continue
        if kind in _WHY_OUTSIDE:
            doubts.setdefault(_WHY_OUTSIDE[kind], []).append(ref)
        elif e.confidence < _UNSURE_BELOW:
            doubt = remark(f"the survey is least sure of it: {e.role}, {e.because[0] if e.because else ''}")
            lines.append(f"#   - {{parts: [{scalar(ref)}], because: }}{doubt}")
    return [f"#   - {{parts: [{', '.join(map(scalar, refs))}], because: {scalar(why)}}}" for why, refs in doubts.items()] + lines
