"""Records of house rules, and the chain of packs that they come from."""

from __future__ import annotations

import datetime
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any, ClassVar

from ..faults import Mark
from .record import Record
from .values import Quantity, SourceFile, Table, Text


class LimitPart(Record):
    """How far a stress may go: one of `at_most`, `at_least`, `below_rating_by`; a share of the rating has dimension "ratio"."""

    IS: ClassVar[str] = "a limit"
    at_most: Any = None  # Quantity | Table over temperature
    at_least: Any = None
    below_rating_by: Any = None  # Quantity
    against: Any = None  # "ambient", "case", "junction"
    full_until: Any = None  # temperature Quantity
    zero_at: Any = None


class Limit(LimitPart):
    """One house rule. `applies_to` maps kind, device, parts, nets, modes, events to the words or globs allowed."""

    applies_to: Mapping[str, tuple[Text, ...]] = {}
    stress: Any = None
    lowest_of: tuple[LimitPart, ...] = ()
    locked: bool = False
    fails_from: Any = None
    source: Any = None
    # properties: name, pack


@dataclass(frozen=True, slots=True)
class FieldNames:
    """Which schematic fields hold a rating, per dimension word, and which mark a part as not fitted."""

    voltage: tuple[str, ...] = ()
    power: tuple[str, ...] = ()
    current: tuple[str, ...] = ()
    not_fitted: Mapping[str, str] | None = None


@dataclass(frozen=True, slots=True)
class RulePack:
    """The rules in force: the packs in the order read, later ones on top."""

    name: str
    packs: tuple[str, ...]
    limits: Mapping[str, Limit]
    overridden: tuple[Limit, ...]
    methods: Mapping[str, Text]
    fields: FieldNames
    close_at: float
    fails_from: str
    files: tuple[SourceFile, ...]


def read_rules(paths: Iterable[Text | str], folder: str) -> RulePack:
    """Read rule packs and what they are based on; `shipped/NAME` is a pack that comes with the tool."""
    raise NotImplementedError
