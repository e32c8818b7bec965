"""Records of waivers: findings that somebody accepted, for a time and at a value."""

from __future__ import annotations

import datetime
from typing import Any, ClassVar

from .fields import Day, Word, quantity
from .record import Record
from .values import Quantity, SourceFile, Text


class Waiver(Record):
    """One accepted finding. It counts until the day `until`, and while the finding is not worse than `value`."""

    IS: ClassVar[str] = "a waiver"
    NEEDS: ClassVar[tuple[str, ...]] = ("finding", "because", "by", "until", "value")
    finding: Word | None = None
    because: Word | None = None
    by: Word | None = None
    until: Day | None = None
    value: Quantity | None = None


class Waivers:
    """Every waiver of one file."""

    waivers: tuple[Waiver, ...]
    file: SourceFile


def read_waivers(path: Text | str, folder: str) -> Waivers:
    raise NotImplementedError
