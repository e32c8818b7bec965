"""The annotation file, read and put in order: `read_annotations`, and what holds in each mode."""

from __future__ import annotations

import os
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from types import MappingProxyType

from ..faults import Mark
from .notes import AnnotationFile, LoadNote, ModeNote, PartNote, RailNote, StageNote, Surroundings
from .values import SourceFile, Text


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
        globs that set one key differently.
        """
        raise NotImplementedError


class Annotations(AnnotationFile):
    """What one annotation file says, and what it means in each mode. All keys of the file are attributes."""

    @property
    def path(self) -> str:
        """The file as the caller named it."""
        raise NotImplementedError

    @property
    def folder(self) -> str:
        """The project folder: where the file is."""
        raise NotImplementedError

    @property
    def sha256(self) -> str:
        raise NotImplementedError

    @property
    def source_file(self) -> SourceFile:
        raise NotImplementedError

    @property
    def board_name(self) -> str:
        raise NotImplementedError

    @property
    def board_revision(self) -> str:
        raise NotImplementedError

    @property
    def mode_names(self) -> tuple[str, ...]:
        """The modes in the order of the file; without any, one mode, run."""
        return tuple(self.modes) or ("run",)

    def in_mode(self, name: str) -> ModeView:
        """Everything that holds in one mode, merged key by key over the base and over `like:`."""
        raise NotImplementedError

    def resolve_parts(self, refs: Iterable[str]) -> dict[str, PartNote]:
        """As `ModeView.resolve_parts`, for the base alone."""
        raise NotImplementedError


def part_note_from_fields(fields: Mapping[str, str], mark: Mark) -> PartNote:
    """What the schematic says of a part in its fields `Pwr.device`, `Pwr.draws`, `Pwr.heat` ..."""
    raise NotImplementedError


def lay_file_over_fields(ref: str, file: PartNote | None, fields: PartNote) -> tuple[PartNote, tuple[str, ...]]:
    """One note from both; the file wins, and each conflict gives a sentence that says so."""
    raise NotImplementedError


def read_annotations(path: str | os.PathLike[str]) -> Annotations:
    """Read and check one annotation file. Raises `InputError` with every fault of it."""
    raise NotImplementedError
