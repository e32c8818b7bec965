"""What every record of an input file has in common: it is frozen, and knows where each of its keys was written."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from types import MappingProxyType
from typing import Any, ClassVar, Self

from pydantic import BaseModel, ConfigDict, PrivateAttr, ValidationError, model_validator
from pydantic_core import InitErrorDetails, PydanticCustomError

from ..faults import Fault, InputError, Mark
from .suggest import nearest
from .tree import Blank, Branch
from .values import NOWHERE, Text

_NO_SOURCES: Mapping[str, Mark] = MappingProxyType({})


def complaint(mark: Mark, found: str, instead: str = "") -> PydanticCustomError:
    """The error that a reader raises; `faults_of` turns it into a `Fault`."""
    return PydanticCustomError("fault", "{found}", {"mark": mark, "found": found, "instead": instead})


def together(complaints: Iterable[PydanticCustomError]) -> ValidationError:
    """Several complaints as one error, for a reader that does not stop at the first."""
    return ValidationError.from_exception_data(
        "input", [InitErrorDetails(type=each, loc=(), input=None) for each in complaints]
    )


def complaints_of(error: ValidationError) -> list[PydanticCustomError]:
    """The complaints inside an error that a nested reader raised."""
    return [complaint(**row["ctx"]) for row in error.errors(include_url=False, include_input=False)]


def faults_of(error: ValidationError) -> tuple[Fault, ...]:
    """Every complaint as a `Fault`, in the order of the file."""
    return tuple(sorted(Fault(**each.context) for each in complaints_of(error)))


class Record(BaseModel):
    """A mapping of an input file. Attributes mirror its keys; a key left out is None or empty.

    `-` in a key becomes `_`, and a key that Python reserves takes a `_` at its end (`return_`, `from_`).
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
    _mark: Mark = PrivateAttr(NOWHERE)
    _sources: Mapping[str, Mark] = PrivateAttr(_NO_SOURCES)

    @classmethod
    def of(cls, mark: Mark = NOWHERE, **values: Any) -> Self:
        """A record from values already read, as attributes; what is not given stays at its default."""
        record = cls.model_construct(**values)
        record._mark = mark
        record._sources = MappingProxyType(dict.fromkeys(values, mark))
        return record

    @property
    def mark(self) -> Mark:
        """Where the mapping begins."""
        return self._mark

    @property
    def written(self) -> tuple[str, ...]:
        """The attributes that the file gives, in its order."""
        return tuple(self._sources)

    def source_of(self, key: str) -> Mark:
        """Where the value of one key was written; the record's own mark if it was not."""
        return self._sources.get(key, self._mark)

    def over(self, base: Self) -> Self:
        """This record laid over `base`, key by key: what is written here wins."""
        changes = {key: getattr(self, key) for key in self.written}
        merged = base.model_copy(update=changes)
        merged._sources = MappingProxyType({**base._sources, **self._sources})
        merged._mark = self._mark if base._mark == NOWHERE else base._mark
        return merged

    @classmethod
    def keys(cls) -> dict[str, str]:
        """The keys that the file may use, each with its attribute."""
        return {name.rstrip("_"): name for name in cls.model_fields}

    @classmethod
    def allowed(cls, branch: Branch) -> Iterable[str]:
        """The keys allowed in this very mapping; a record of several kinds narrows them."""
        return cls.keys()

    def check(self) -> Iterable[PydanticCustomError]:
        """What is wrong between keys that are each right on their own."""
        return ()

    @model_validator(mode="wrap")
    @classmethod
    def _read(cls, data: Any, handler: Any) -> Self:
        if isinstance(data, cls):
            return data
        branch = _as_branch(data, cls.IS)
        complaints = [*_unknown_keys(cls, branch), *_missing_keys(cls, branch)]
        try:
            known = {key: value for key, value in branch.items() if key in cls.keys()}
            record = handler(known)
        except ValidationError as error:
            raise together([*complaints, *complaints_of(error)]) from None
        attributes = cls.keys()
        record._mark = branch.mark
        record._sources = MappingProxyType({attributes[key]: branch.marks[key] for key in known})
        complaints += record.check()
        if complaints:
            raise together(complaints)
        return record

    @classmethod
    def read(cls, data: Any) -> Self:
        """The record of a tree. Raises `InputError` with every fault of it."""
        try:
            return cls.model_validate(data)
        except ValidationError as error:
            raise InputError(*faults_of(error)) from None


def _as_branch(data: Any, what: str) -> Branch:
    if isinstance(data, Branch):
        return data
    if isinstance(data, Blank):
        return Branch(data.mark)
    mark = getattr(data, "mark", NOWHERE)
    raise complaint(mark, f"{what} is written as {describe(data)}", "write a mapping, {key: value, ...}")


def describe(data: Any) -> str:
    """What a piece of a tree is, in words."""
    if isinstance(data, Branch):
        return "a mapping"
    if isinstance(data, Blank):
        return "nothing"
    if isinstance(data, Text):
        return f"the text {shorten(data)!r}"
    return "a list"


def shorten(text: str, width: int = 40) -> str:
    """The text, cut where a message would grow too long."""
    return text if len(text) <= width else text[: width - 3] + "..."


def _unknown_keys(cls: type[Record], branch: Branch) -> list[PydanticCustomError]:
    allowed = list(cls.allowed(branch))
    return [
        complaint(key.mark, f"{shorten(key)!r} is not a key of {cls.IS}", nearest(key, allowed))
        for key in branch
        if key not in allowed
    ]


def _missing_keys(cls: type[Record], branch: Branch) -> list[PydanticCustomError]:
    return [
        complaint(branch.mark, f"{cls.IS} has no {key!r}", f"add {key}: ...")
        for key in cls.NEEDS
        if key not in branch
    ]
