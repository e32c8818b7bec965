"""What every record of an input file has in common: it is frozen, and knows where each of its keys was written."""

from __future__ import annotations

import functools
import itertools
from collections.abc import Callable, Iterable, Mapping
from typing import Any, ClassVar, Self

from pydantic import BaseModel, ConfigDict, PrivateAttr, ValidationError, model_validator
from pydantic_core import InitErrorDetails, PydanticCustomError, core_schema

from ..faults import Fault, InputError, Mark
from .suggest import MOST_ADVISED, nearest
from .tree import MOST_FAULTS, Blank, Branch
from .values import NOWHERE, Text

MOST_COMPLAINTS = 1_000
"""Complaints that are carried along; far more than is shown, so that a hostile file costs little."""


def complaint(mark: Mark, found: str, instead: str = "") -> PydanticCustomError:
    """The error that a reader raises; `faults_of` turns it into a `Fault`."""
    return PydanticCustomError("fault", "{found}", {"mark": mark, "found": found, "instead": instead})


def together(complaints: Iterable[PydanticCustomError]) -> ValidationError:
    """Several complaints as one error, for a reader that does not stop at the first."""
    rows = [InitErrorDetails(type=each, loc=(), input=None) for each in itertools.islice(complaints, MOST_COMPLAINTS)]
    return ValidationError.from_exception_data("input", rows)


def complaints_of(error: ValidationError) -> list[PydanticCustomError]:
    """The complaints inside an error that a nested reader raised."""
    rows = error.errors(include_url=False, include_input=False)
    return [complaint(**row["ctx"]) for row in rows[:MOST_COMPLAINTS]]


def faults_of(error: ValidationError) -> list[Fault]:
    """Every complaint as a `Fault`, in the order of the file, each once."""
    return sorted({Fault(**each.context) for each in complaints_of(error)})


def describe(node: Any) -> str:
    """What a piece of a tree is, in words."""
    if isinstance(node, Branch):
        return "a mapping"
    if isinstance(node, Blank):
        return "nothing"
    if isinstance(node, Text):
        return repr(shorten(node))
    return "a list" if node else "an empty list"


def shorten(text: str, width: int = 40) -> str:
    """The text, cut where a message would grow too long."""
    return str(text) if len(text) <= width else text[: width - 3] + "..."


class Reads:
    """Makes a reader the whole of a field's schema: `Annotated[Quantity, Reads(read_quantity)]`."""

    def __init__(self, reader: Callable[[Any], Any]) -> None:
        self.reader = reader

    def __get_pydantic_core_schema__(self, source: Any, handler: Any) -> Any:
        return core_schema.no_info_plain_validator_function(self.reader)


class Record(BaseModel):
    """A mapping of an input file. Attributes mirror its keys; a key left out is None or empty.

    A key that Python reserves takes a `_` at its end: `return_`, `from_`, `with_`. A key of `MAY_BE_BLANK` may stand
    with nothing after its colon: it is written, its attribute is as if left out, and `blank` names it.
    """

    model_config = ConfigDict(
        frozen=True,
        arbitrary_types_allowed=True,
        defer_build=True,
        alias_generator=lambda name: name.rstrip("_"),
        populate_by_name=True,
    )
    IS: ClassVar[str] = "a record"
    NEEDS: ClassVar[tuple[str, ...]] = ()
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset()
    _mark: Mark = PrivateAttr(NOWHERE)
    _sources: Mapping[str, Mark] = PrivateAttr(default_factory=dict)
    _blank: frozenset[str] = PrivateAttr(frozenset())

    @classmethod
    def of(cls, mark: Mark = NOWHERE, **values: Any) -> Self:
        """A record from values already read, as attributes; what is not given stays at its default."""
        record = cls.model_construct(**values)
        record._mark = mark
        record._sources = dict.fromkeys(values, mark)
        return record

    @classmethod
    def read(cls, node: Any) -> Self:
        """The record of a tree. Raises `InputError` with every fault of it."""
        try:
            return cls.model_validate(node)
        except ValidationError as error:
            raise InputError(*faults_of(error)) from None

    @property
    def mark(self) -> Mark:
        """Where the mapping begins."""
        return self._mark

    @property
    def written(self) -> tuple[str, ...]:
        """The attributes that the file gives, in its order."""
        return tuple(self._sources)

    @property
    def blank(self) -> frozenset[str]:
        """The attributes that the file names and leaves to be filled in."""
        return self._blank

    def source_of(self, key: str) -> Mark:
        """Where the value of one key was written; the record's own mark if it was not."""
        return self._sources.get(key, self._mark)

    def over(self, base: Self) -> Self:
        """This record laid over `base`, key by key: what is written here wins."""
        merged = base.model_copy(update={key: getattr(self, key) for key in self.written})
        merged._sources = {**base._sources, **self._sources}
        merged._blank = base._blank - set(self.written) | self._blank
        merged._mark = base._mark if base.written else self._mark
        return merged

    def without(self, *keys: str) -> Self:
        """This record as if some keys were not written."""
        defaults = type(self).of()
        changed = self.model_copy(update={key: getattr(defaults, key) for key in keys})
        changed._sources = {key: mark for key, mark in self._sources.items() if key not in keys}
        changed._blank = self._blank - set(keys)
        return changed

    @classmethod
    @functools.cache
    def attributes(cls) -> Mapping[str, str]:
        """The attribute of every key that the file may use."""
        return {name.rstrip("_"): name for name in cls.model_fields}

    @classmethod
    def complaints_about_keys(cls, branch: Branch) -> list[PydanticCustomError]:
        """The keys of a mapping that do not belong, and those that are missing."""
        return [*unknown_keys(branch, cls.attributes(), cls.IS), *missing_keys(branch, cls.NEEDS, cls.IS)]

    def complaints_between_keys(self) -> Iterable[PydanticCustomError]:
        """What is wrong between keys that are each right on their own."""
        return ()

    @model_validator(mode="wrap")
    @classmethod
    def _from_tree(cls, data: Any, handler: Any) -> Self:
        if isinstance(data, cls):
            return data
        branch = as_mapping(data, cls.IS)
        complaints = cls.complaints_about_keys(branch)
        known = {key: value for key, value in branch.items() if key in cls.attributes()}
        blank = {key for key, value in known.items() if isinstance(value, Blank) and key in cls.MAY_BE_BLANK}
        try:
            record = handler({key: value for key, value in known.items() if key not in blank})
        except ValidationError as error:
            raise together([*complaints, *complaints_of(error)]) from None
        record._mark = branch.mark
        record._sources = {cls.attributes()[key]: branch.marks[key] for key in known}
        record._blank = frozenset(cls.attributes()[key] for key in blank)
        complaints = complaints or list(record.complaints_between_keys())
        if complaints:
            raise together(complaints)
        return record


def as_mapping(node: Any, what: str) -> Branch:
    """The mapping that a record is read from; nothing at all is an empty one."""
    if isinstance(node, Branch):
        return node
    if isinstance(node, Blank):
        return Branch(node.mark)
    raise complaint(node.mark, f"{what} is due here as a mapping, found {describe(node)}", "write {key: value, ...}")


def unknown_keys(branch: Branch, allowed: Iterable[str], what: str) -> list[PydanticCustomError]:
    """A complaint for each key that is not allowed, with the nearest that is."""
    names = list(allowed)
    wrong = itertools.islice((key for key in branch if key not in names), MOST_FAULTS + 1)
    return [
        complaint(key.mark, f"{shorten(key)!r} is not a key of {what}", nearest(key, names) if n < MOST_ADVISED else "")
        for n, key in enumerate(wrong)
    ]


def missing_keys(branch: Branch, needed: Iterable[str], what: str) -> list[PydanticCustomError]:
    """A complaint for each key that is not there and must be."""
    return [complaint(branch.mark, f"{what} without {key!r}", f"add {key}: ...") for key in needed if key not in branch]
