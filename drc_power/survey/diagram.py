"""The power tree as boxes and arrows, for whatever draws it: parallel parts share a box, and so do a net's loads.

Returns are left out of the picture, for every arrow would end there. A net between two elements that is no rail is an
arrow with its name; every other net is a box.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field

from drc_power.survey.model import Element, Rail, Survey
from drc_power.text import printable, shorten

_NAME, _VALUE, _MOST_NAMES = 28, 24, 6
_BARE = ("Net-(", "unconnected-")


@dataclass(frozen=True, slots=True)
class Box:
    """One box: what it is (source, rail, net, pass, switch, load, clamp) and the lines inside it."""

    kind: str
    lines: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Arrow:
    """Power runs from one box to another, by their keys. `dotted`: only now and then, as through a freewheel diode."""

    tail: str
    head: str
    label: str = ""
    dotted: bool = False


@dataclass(slots=True)
class Diagram:
    """Boxes by key and the arrows between them, the supply's way first."""

    boxes: dict[str, Box] = field(default_factory=dict)
    arrows: list[Arrow] = field(default_factory=list)


def power_diagram(survey: Survey, values: Mapping[str, str]) -> Diagram:
    """The diagram of a survey; `values` gives part values by reference. Same survey, same diagram."""
    diagram = Diagram()
    drawing = _Drawing(survey, values, diagram)
    for add in (drawing.sources, drawing.ways, drawing.loads, drawing.clamps):
        add()
    return _with_short_nets(diagram)


class _Drawing:
    """Adds the elements of a survey to a diagram, group by group."""

    def __init__(self, survey: Survey, values: Mapping[str, str], diagram: Diagram) -> None:
        self._survey, self._values, self._diagram = survey, values, diagram
        self._rails = {rail.net: rail for rail in survey.rails}
        self._grounds = frozenset(survey.grounds)

    def sources(self) -> None:
        """Where power comes in, once per net."""
        for net, refs in _gathered((e.to_net, e.ref) for e in self._of("source")).items():
            self._box(f"source {net}", "source", [self._named(ref) for ref in _cut(refs)])
            self._arrow(f"source {net}", self._net(net))

    def ways(self) -> None:
        """What passes and switches power; elements in parallel, and the several ways through one part, in one box."""
        runs = _gathered(((e.from_net, e.to_net, e.group, e.role), e.ref) for e in self._of("pass", "switch"))
        for (from_net, to_net, group, role), refs in runs.items():
            key = f"{group} {' '.join(refs)}"
            from_return = from_net in self._grounds
            self._box(key, group, self._words(refs, role + self._return_words(from_net, to_net)))
            if not from_return:
                self._arrow(self._net(from_net), key)
            if to_net not in self._grounds:
                self._arrow(key, self._net(to_net), dotted=from_return)

    def loads(self) -> None:
        """What draws: one box for all that hangs between a net and a return, one each between two power nets."""
        lone = [e for e in self._of("load") if e.to_net in self._grounds or not e.to_net]
        for net, refs in _gathered((e.from_net, e.ref) for e in lone).items():
            self._box(f"load {net}", "load", [self._named(ref) for ref in _cut(refs)])
            self._arrow(self._net(net), f"load {net}")
        for e in self._between():
            self._box(f"load {e.ref}", "load", [self._named(e.ref)])
            self._arrow(self._net(e.from_net), f"load {e.ref}")
            self._arrow(f"load {e.ref}", self._net(e.to_net))

    def clamps(self) -> None:
        """What limits the voltage of a net."""
        for net, refs in _gathered((_live_end(e, self._grounds), e.ref) for e in self._of("clamp")).items():
            self._box(f"clamp {net}", "clamp", [self._named(ref) for ref in _cut(refs)])
            self._arrow(self._net(net), f"clamp {net}", dotted=True)

    def _of(self, *groups: str) -> Iterator[Element]:
        return (e for e in self._survey.elements if e.group in groups)

    def _between(self) -> list[Element]:
        """Loads between two power nets, each once: from the rail if one end is a rail."""
        chosen: dict[tuple[str, frozenset[str]], Element] = {}
        for e in self._of("load"):
            key = e.ref, frozenset((e.from_net, e.to_net))
            if e.to_net and e.to_net not in self._grounds and (key not in chosen or e.from_net in self._rails):
                chosen[key] = e
        return list(chosen.values())

    def _net(self, net: str) -> str:
        key, rail = f"net {net}", self._rails.get(net)
        self._box(key, "rail" if rail else "net", [shown(net), *_volts(rail)])
        return key

    def _box(self, key: str, kind: str, lines: Iterable[str]) -> None:
        self._diagram.boxes.setdefault(key, Box(kind, tuple(lines)))

    def _arrow(self, tail: str, head: str, dotted: bool = False) -> None:
        arrow = Arrow(tail, head, dotted=dotted)
        if arrow not in self._diagram.arrows:
            self._diagram.arrows.append(arrow)

    def _named(self, ref: str) -> str:
        value = self._values.get(ref, "")
        return shown(ref) + (f" {shorten(printable(value), _VALUE)}" if value not in ("", "~") else "")

    def _words(self, refs: Sequence[str], role: str) -> list[str]:
        if len(refs) == 1:
            return [self._named(refs[0]), role]
        values = dict.fromkeys(self._values.get(ref, "") for ref in refs)
        value = [shorten(printable(next(iter(values))), _VALUE)] if len(values) == 1 and any(values) else []
        return [", ".join(shown(ref) for ref in _cut(refs)), *value, f"{len(refs)} in parallel, {role}"]


    def _return_words(self, from_net: str, to_net: str) -> str:
        """The return that an element ends at, for which there is no box."""
        ends = [f" {word} {shown(net)}" for word, net in (("from", from_net), ("to", to_net)) if net in self._grounds]
        return "".join(ends)


def shown(name: str) -> str:
    """A name as a box has room for it."""
    return shorten(printable(name), _NAME)


def _volts(rail: Rail | None) -> list[str]:
    return [f"{rail.voltage_v:g} V (a guess)"] if rail and rail.voltage_v is not None else []


def _gathered(pairs: Iterable[tuple]) -> dict:
    """Values by key, each once, in order."""
    found: dict = {}
    for key, value in pairs:
        if value not in found.setdefault(key, []):
            found[key].append(value)
    return found


def _cut(refs: Sequence[str]) -> list[str]:
    more = len(refs) - _MOST_NAMES
    return list(refs) if more <= 1 else [*refs[:_MOST_NAMES], f"and {more} more"]


def _live_end(element: Element, grounds: frozenset[str]) -> str:
    return element.to_net if element.from_net in grounds else element.from_net


def _with_short_nets(diagram: Diagram) -> Diagram:
    """The diagram with an arrow in place of every net that only leads from one box to one other."""
    into, out = _gathered((a.head, a) for a in diagram.arrows), _gathered((a.tail, a) for a in diagram.arrows)
    short = {key for key, box in diagram.boxes.items() if box.kind == "net" and len(into.get(key, ())) == len(out.get(key, ())) == 1}
    boxes = {key: box for key, box in diagram.boxes.items() if key not in short}
    arrows = []
    for arrow in diagram.arrows:
        if arrow.head in short:
            onward = out[arrow.head][0]
            name = diagram.boxes[arrow.head].lines[0]
            label = "" if name.startswith(_BARE) else name
            arrows.append(Arrow(arrow.tail, onward.head, label, arrow.dotted or onward.dotted))
        elif arrow.tail not in short:
            arrows.append(arrow)
    return Diagram(boxes, list(dict.fromkeys(arrows)))
