"""The annotation file, read and checked within itself: `read_annotations`."""

import os
from collections.abc import Iterable, Iterator
from typing import Any

from pydantic import PrivateAttr

from ..faults import Fault, InputError
from .documents import record_from
from .files import read_file
from .modes import THE_ONLY_MODE, ModeView, view_of
from .notes import AnnotationFile, PartNote
from .parts import lay_file_over_fields, part_note_from_fields, resolve
from .record import shorten
from .suggest import nearest
from .values import SourceFile, Text

MOST_MODES = 200

__all__ = ["Annotations", "ModeView", "lay_file_over_fields", "part_note_from_fields", "read_annotations"]


class Annotations(AnnotationFile):
    """What one annotation file says, and what it means in each mode. All keys of the file are attributes."""

    _path: str = PrivateAttr("")
    _file: SourceFile = PrivateAttr(SourceFile("annotations", "", ""))

    @property
    def path(self) -> str:
        """The file as the caller named it."""
        return self._path

    @property
    def folder(self) -> str:
        """The project folder: where the file is, as the caller named it."""
        return os.path.dirname(self._path) or "."

    @property
    def source_file(self) -> SourceFile:
        """Role, path and hash, for the list of inputs."""
        return self._file

    @property
    def sha256(self) -> str:
        """The hash of the file's bytes."""
        return self._file.sha256

    @property
    def board_name(self) -> str:
        """What the board is called, or ""."""
        return str(self.board.name or "") if self.board else ""

    @property
    def board_revision(self) -> str:
        """The board's revision, or ""."""
        return str(self.board.revision or "") if self.board else ""

    @property
    def mode_names(self) -> tuple[str, ...]:
        """The modes in the order of the file; without any, one mode, run."""
        return tuple(str(name) for name in self.modes) or (THE_ONLY_MODE,)

    def in_mode(self, name: str) -> ModeView:
        """Everything that holds in one mode, merged key by key over the base and over `like`."""
        return view_of(self, name)

    def resolve_parts(self, refs: Iterable[str]) -> dict[str, PartNote]:
        """The base's note of every part that some pattern names; see `ModeView.resolve_parts`."""
        return resolve([self.parts], refs)


def read_annotations(path: str | os.PathLike[str]) -> Annotations:
    """Read and check one annotation file. Raises `InputError` with every fault of it."""
    name = os.fspath(path)
    data, file = read_file(name, "annotations", os.path.dirname(name))
    return annotations_from(data, name, file)


def annotations_from(data: bytes, name: str, file: SourceFile) -> Annotations:
    """The annotations of a file's bytes. Raises `InputError` with every fault of them."""
    notes = record_from(Annotations, data, name, "annotations", _faults_between)
    notes._path, notes._file = name, file
    return notes


def _faults_between(notes: Annotations) -> Iterator[Fault]:
    if len(notes.modes) > MOST_MODES:
        yield Fault(notes.source_of("modes"), f"{len(notes.modes)} modes", f"{MOST_MODES} are the most that are read")
        return
    yield from _unknown_names(notes)
    yield from _faults_of_modes(notes)


def _faults_of_modes(notes: Annotations) -> Iterator[Fault]:
    for mode in notes.mode_names:
        try:
            notes.in_mode(mode)
        except InputError as error:
            yield from error.faults


def _unknown_names(notes: Annotations) -> Iterator[Fault]:
    """Names that one part of the file uses and no other part gives."""
    for word, what, known in _uses(notes):
        if word is not None and word not in known:
            advice = nearest(word, known) or f"give it under {what}s:"
            yield Fault(getattr(word, "mark", notes.mark), f"there is no {what} {shorten(word)!r}", advice)


def _uses(notes: Annotations) -> Iterator[tuple[Any, str, Iterable[str]]]:
    """Every use of a name inside the file: the word, what it names, and the names there are."""
    patches = notes.copper.patches if notes.copper else {}
    loads = {*notes.loads, *(name for mode in notes.modes.values() for name in mode.loads)}
    for layer in (notes, *notes.modes.values()):
        for part in layer.parts.values():
            if part.heat:
                yield part.heat.sink, "sink", notes.sinks
                yield part.heat.copper, "copper patch", patches
        for stage in layer.stages.values():
            if isinstance(stage.load, Text):
                yield stage.load, "load", loads
    for event in notes.events.values():
        yield event.load, "load", loads
        yield event.to, "mode", notes.mode_names
        yield from ((mode, "mode", notes.mode_names) for mode in event.from_)
