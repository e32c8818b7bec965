"""Waivers: findings that somebody accepted, until a day and at a value. `read_waivers` gives `Waivers`."""

import os
from dataclasses import dataclass
from typing import Annotated, Any, ClassVar


from ..faults import Mark
from ..quantity import DIMENSIONS
from .documents import refuse
from .fields import Day, Word, as_row, collected, one_value
from .files import read_file
from .record import Reads, Record, faults_of, together
from .tree import tree_of
from .values import Quantity, SourceFile, Text


def _value(node: Any) -> Quantity:
    return one_value(node, tuple(DIMENSIONS))


class Waiver(Record):
    """One accepted finding. It counts to the end of the day `until`, and while the finding is not worse than `value`."""

    IS: ClassVar[str] = "a waiver"
    NEEDS: ClassVar[tuple[str, ...]] = ("finding", "because", "by", "until", "value")
    finding: Word | None = None
    because: Word | None = None
    by: Word | None = None
    until: Day | None = None
    value: Annotated[Quantity, Reads(_value)] | None = None


@dataclass(frozen=True, slots=True)
class Waivers:
    """Every waiver of a file, in its order."""

    waivers: tuple[Waiver, ...]
    files: tuple[SourceFile, ...]


def read_waivers(path: Text | str, folder: str) -> Waivers:
    """Read a list of waivers, named as seen from the project folder. Raises `InputError` with every fault of it."""
    name = os.path.normpath(os.path.join(folder, path))
    data, file = read_file(name, "waivers", folder, getattr(path, "mark", Mark(name)))
    root, faults = tree_of(data, name)
    rows, wrong = collected(as_row, [root])
    waivers, complaints = collected(Waiver.model_validate, rows[0] if rows else ())
    complaints += wrong
    faults += faults_of(together(complaints)) if complaints else []
    refuse(faults)
    return Waivers(tuple(waivers), (file,))
