"""What holds in each mode: the mode's changes laid over those it is like, over the base."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import TypeVar

from ..faults import Fault, InputError, Mark
from .documents import refuse
from .notes import DEMANDS, DEMANDS_OF_A_MOTOR, AnnotationFile, LoadNote, ModeNote, PartNote, RailNote, StageNote, Surroundings
from .parts import resolve
from .record import Record, shorten
from .suggest import nearest

R = TypeVar("R", bound=Record)

THE_ONLY_MODE = "run"
"""The mode of a file that names none."""


@dataclass(frozen=True, slots=True)
class ModeView:
    """One mode with everything merged: what solving reads. `part_layers` runs from the base to the mode itself."""

    name: str
    mark: Mark
    rails: Mapping[str, RailNote]
    loads: Mapping[str, LoadNote]
    stages: Mapping[str, StageNote]
    surroundings: Surroundings
    part_layers: tuple[Mapping[str, PartNote], ...]

    def resolve_parts(self, refs: Iterable[str]) -> dict[str, PartNote]:
        """The note of every part that some pattern names, merged; `refs` are the parts of the netlist.

        Exact beats glob, a mode beats the base. Raises `InputError` for a pattern that fits no part, and for two
        patterns of equal rank that set one key differently.
        """
        return resolve(self.part_layers, refs)


def view_of(file: AnnotationFile, name: str) -> ModeView:
    """One mode of the file, merged. Raises `InputError` for an unknown mode, a cycle of `like`, a load without demand."""
    chain = _chain(file, name)
    view = ModeView(
        name=name,
        mark=chain[-1].mark if chain else file.mark,
        rails=_laid_over(file.rails, [mode.rails for mode in chain]),
        loads=_laid_over(file.loads, [mode.loads for mode in chain]),
        stages=_laid_over(file.stages, [mode.stages for mode in chain]),
        surroundings=_surroundings(file, chain),
        part_layers=tuple(layer for layer in (file.parts, *(mode.parts for mode in chain)) if layer),
    )
    refuse(_incomplete(view, file), _foreign_stage_keys(view))
    return view


def _chain(file: AnnotationFile, name: str) -> list[ModeNote]:
    """The modes that hold, from the farthest that it is like down to itself."""
    if not file.modes and name == THE_ONLY_MODE:
        return []
    chain: list[ModeNote] = []
    seen: list[str] = []
    word: str | None = name
    while word is not None:
        if word in seen:
            raise InputError(Fault(_mark(word, file), f"the mode {shorten(name)!r} is like itself, by {' > '.join(seen)}", "break the circle"))
        if word not in file.modes:
            raise InputError(Fault(_mark(word, file), f"there is no mode {shorten(word)!r}", nearest(word, file.modes)))
        seen.append(word)
        chain.insert(0, file.modes[word])
        word = file.modes[word].like
    return chain


def _mark(word: str, file: AnnotationFile) -> Mark:
    return getattr(word, "mark", file.mark)


def _laid_over(base: Mapping[str, R], layers: list[Mapping[str, R]]) -> dict[str, R]:
    merged = dict(base)
    for layer in layers:
        for name, note in layer.items():
            merged[name] = _one_over(note, merged[name]) if name in merged else note
    return merged


def _one_over(note: R, base: R) -> R:
    """One note over another; a load's new demand takes the place of the old, a motor's resistance stands beside it."""
    if isinstance(note, LoadNote) and isinstance(base, LoadNote):
        demands = DEMANDS_OF_A_MOTOR if base.is_motor else DEMANDS
        base = base.without(*demands) if set(demands) & set(note.written) else base
    return note.over(base)


def _surroundings(file: AnnotationFile, chain: list[ModeNote]) -> Surroundings:
    merged = file.surroundings
    for mode in chain:
        merged = mode.surroundings.over(merged) if mode.surroundings else merged
    return merged


def _incomplete(view: ModeView, file: AnnotationFile) -> Iterator[Fault]:
    """Loads and stages that still lack what they need with everything merged."""
    for name, load in view.loads.items():
        if not load.net and not load.between:
            yield _lacking("load", name, load, "net", file.loads)
        elif not load.demands and not load.lacks_demand:
            found = f"the load {shorten(name)!r} has no demand in mode {view.name}"
            yield Fault(load.mark, found, "give draws, power or resistance; 0 A if it takes nothing")
    for name, stage in view.stages.items():
        if not stage.kind:
            yield _lacking("stage", name, stage, "kind", file.stages)


def _lacking(what: str, name: str, note: Record, key: str, known: Mapping[str, Record]) -> Fault:
    """A note without a key that it needs: misspelt where no base note has its name, else short of that key."""
    mark = getattr(name, "mark", note.mark)
    if name in known:
        return Fault(note.mark, f"the {what} {shorten(name)!r} has no {key}", f"add {key}: ...")
    return Fault(mark, f"there is no {what} {shorten(name)!r} to change, and no {key} to make one", nearest(name, known))


def _foreign_stage_keys(view: ModeView) -> Iterator[Fault]:
    for stage in view.stages.values():
        for each in stage.complaints_for(stage.kind) if stage.kind else ():
            yield Fault(**each.context)
