"""Where annotated tracks lie in the network: between what feeds a net and what it feeds, or before one part.

A stretch without `to` carries all of its net: what feeds the net is moved to a node of its own before it, and the net's
name stays with what the net feeds. A stretch with `to` lies between the net and that part's own pins. Stretches of one
place follow each other.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, fields, replace

import numpy as np

from ..board import TrackNote
from ..faults import Fault, InputError, Mark
from ..physics import copper
from ..physics.range import OutsideRange
from .branches import CurrentLoad, Linear, PowerLoad, Resistive, Source, Switching
from .bridges import HalfBridge
from .circuit import Builder
from .converters import Converter
from .cooling import FOIL_M, LAMINATE_M, PLATING_M, least
from .rectifier import Rectifier
from .track_family import Track

FEEDS = {Source: ("a",), Linear: ("b",), Switching: ("b",), Converter: ("b", "held"), HalfBridge: ("x",), Rectifier: ("b",)}
"""The ends of branches and groups that feed the net they lie on."""

NODES = ("a", "b", "ground", "held", "x", "main_node", "free_node")

GAP_M = 0.01
"""How far a missing length is moved to see what depends on it."""


@dataclass(frozen=True, slots=True)
class TrackProbe:
    """One stretch as the rules read it: its branch, the net it is of, the part it leads to, and what was assumed."""

    name: str
    net: str
    to: str | None
    note: TrackNote
    track: Track
    assumed: tuple[str, ...] = ()

    @property
    def vias(self) -> tuple[float, float] | None:
        """Section of one via [m²], and how many there are."""
        vias = self.note.vias
        if vias is None:
            return None
        return float(copper.via_area_m2(least(vias.drill), least(vias.plating, PLATING_M))), vias.count.span.min

    def melts_at_a(self, lasts_s: np.ndarray, start_c: np.ndarray) -> np.ndarray:
        """The current that melts the copper within a time, from a temperature [A]; NaN beyond 10 s (Onderdonk)."""
        area_m2 = self.track.area_m2 if self.vias is None else min(self.track.area_m2, self.vias[0] * self.vias[1])
        return copper.onderdonk_current_a(area_m2, lasts_s, start_c)


def add_tracks(builder: Builder) -> None:
    """Every annotated track. Raises InputError for one that the netlist leaves no place for."""
    notes = builder.board.annotations.copper
    for name, stretches in (notes.tracks if notes else {}).items():
        net = builder.board.net(name)
        if net not in builder.nets():
            continue
        _add_net(builder, net, stretches)


def _add_net(builder: Builder, net: str, stretches: Iterable[TrackNote]) -> None:
    places: dict[str | None, list[TrackNote]] = {}
    for note in stretches:
        places.setdefault(str(note.to) if note.to else None, []).append(note)
    for ref, notes in places.items():
        if ref is None:
            node = f"{net} before its track"
            _move(builder, net, node, _fed_by(builder, net, notes[0].mark))
            _chain(builder, net, None, notes, node, net)
        else:
            node = f"{net} at {ref}"
            _move(builder, net, node, _of_part(builder, net, ref, notes[0].to.mark))
            _chain(builder, net, ref, notes, net, node)


Ends = Callable[[object], tuple[str, ...]]
"""For a branch or a group, which of its fields move to the other end of a track."""


def _chain(builder: Builder, net: str, to: str | None, notes: list[TrackNote], first: str, last: str) -> None:
    """The stretches one after the other, from the source on."""
    nodes = [first, *(f"{last}, stretch {k}" for k in range(2, len(notes) + 1)), last]
    for k, note in enumerate(notes):
        number = f" {k + 1}" if len(notes) > 1 else ""
        name = f"{net}{f' to {to}' if to else ''}{number}"
        track, assumed = _track(builder, name, note, nodes[k], nodes[k + 1])
        builder.branches.append(track)
        builder.tracks.append(TrackProbe(name, net, to, note, track, assumed))


def _track(builder: Builder, name: str, note: TrackNote, a: str, b: str) -> tuple[Track, tuple[str, ...]]:
    rules, assumed = builder.board.rules.methods, []
    if note.thickness is None:
        assumed.append(f"copper of {FOIL_M * 1e6:.0f} µm")
    if note.layer is None:
        assumed.append("an inner layer, which the relation takes for the hotter")
    length = builder.span(f"length of track {name}", note.length)
    if length is None:
        length = builder.box.gap(f"length of track {name}", 0.0, GAP_M, "length", f"length of copper.tracks.{name}", note.mark)
    if note.vias is not None and note.vias.plating is None:
        assumed.append(f"plating of {PLATING_M * 1e6:.0f} µm")
    return Track(f"track {name}", a, b, length, least(note.width), least(note.thickness, FOIL_M), str(rules.get("track", "ipc-2221")),
                 note.layer != "outer", builder.ambient_c, _vias_per_m(note, note.mark)), tuple(assumed)


def _vias_per_m(note: TrackNote, mark: Mark) -> float:
    if note.vias is None:
        return 0.0
    missing = [key for key in ("count", "drill") if getattr(note.vias, key) is None]
    if missing:
        raise InputError(Fault(mark, f"vias without {' and '.join(missing)}", "write vias: {count: 4, drill: 0.3 mm, plating: 25 um}"))
    try:
        area_m2 = copper.via_area_m2(least(note.vias.drill), least(note.vias.plating, PLATING_M))
    except OutsideRange as error:
        raise InputError(Fault(mark, str(error), "check the dimensions")) from None
    return LAMINATE_M / float(area_m2 * note.vias.count.span.min)


def _fed_by(builder: Builder, net: str, mark: Mark) -> Ends:
    """What feeds a net: sources and regulators, else parts of the power path that lead to it, else what returns to it."""
    if net in builder.board.grounds:
        raise InputError(Fault(mark, f"{net} is a ground, which no part feeds", "give the track of each part by to: PART"))
    leading = {e.ref for e in builder.board.survey.elements if e.to_net == net and e.from_net != net}
    ways: tuple[Ends, ...] = (
        lambda b: tuple(end for end in FEEDS.get(type(b), ()) if getattr(b, end) == net),
        lambda b: tuple(end for end in ("a", "b") if getattr(b, "part", None) in leading and getattr(b, end, None) == net),
        lambda b: ("b",) if _is_load(b) and b.b == net else (),
    )
    for way in ways:
        if any(way(branch) for branch in builder.branches):
            return way
    raise InputError(Fault(mark, f"nothing is known to feed {net}", "give the track of each part by to: PART"))


def _of_part(builder: Builder, net: str, ref: str, mark: Mark) -> Ends:
    """What of a part lies on a net; of a connector, the sources it brings and the loads that leave the board there."""
    own: Ends = lambda b: _ends_on(b, net) if getattr(b, "part", None) == ref else ()  # noqa: E731
    if any(own(branch) for branch in builder.branches):
        return own
    sourced = {f"rail {name}" for name, rail in builder.mode.rails.items() if ref in {str(r) for r in rail.source}}
    leaving: Ends = lambda b: _ends_on(b, net) if b.key in sourced or _leaves(b) else ()  # noqa: E731
    on_net = ref in builder.parts and net in builder.parts[ref].part.nets_of()
    if on_net and builder.parts[ref].kind == "connector" and any(leaving(branch) for branch in builder.branches):
        return leaving
    raise InputError(Fault(mark, f"nothing that the network holds of {ref} lies on {net}", "name the part that the track leads to"))


def _ends_on(branch: object, net: str) -> tuple[str, ...]:
    names = {field.name for field in fields(branch)}
    return tuple(name for name in NODES if name in names and getattr(branch, name) == net)


def _is_load(branch: object) -> bool:
    return isinstance(branch, (CurrentLoad, PowerLoad)) or (isinstance(branch, Resistive) and branch.load is not None)


def _leaves(branch: object) -> bool:
    """Whether a branch is a load whose power leaves the board."""
    return _is_load(branch) and branch.part is None


def _move(builder: Builder, net: str, node: str, ends: Ends) -> None:
    """Move ends of branches, and what is read of their parts and loads, from a net to a node of its own."""
    moved = {}
    for k, branch in enumerate(builder.branches):
        names = ends(branch)
        if names:
            builder.branches[k] = replace(branch, **dict.fromkeys(names, node))
            moved[branch.key] = names
    for ref, probe in builder.probes.items():
        if ref in moved or any(key in moved for key, _ in probe.currents):
            builder.probes[ref] = replace(probe, **{end: node for end in ("a", "b") if getattr(probe, end) == net})
    for k, load in enumerate(builder.loads):
        if load.key in moved:
            builder.loads[k] = replace(load, **{end: node for end in ("a", "b") if getattr(load, end) == net})


def current_of(probe: TrackProbe, solution) -> np.ndarray:
    """The current that heats a stretch [A], shape (sample,): the network's, or the rms of the part it leads to if more."""
    carried = np.abs(solution.current_a(probe.track.key))
    if probe.to is None or probe.to not in solution.parts:
        return carried
    return np.fmax(carried, solution.parts[probe.to].rms_a)

