"""House rules: limits, methods and field names, and the chain of packs that they come from. `read_rules` gives a `RulePack`."""

import functools
import os
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from typing import Annotated, Any, ClassVar

from pydantic import Field, PrivateAttr

from ..faults import Fault, InputError, Mark
from .documents import record_from, refuse
from .fields import Files, Named, Word, Words, as_branch, choice, collected, one_of, reader
from .files import inside, read_file
from .limits import VERDICTS_THAT_FAIL, Limit, LimitPart
from .record import Reads, Record, shorten, together, unknown_keys
from .suggest import nearest
from .values import Quantity, SourceFile, Text

__all__ = ["METHODS", "FieldNames", "Limit", "LimitPart", "RuleFile", "RulePack", "read_rules", "shipped_packs"]

SHIPPED = "shipped/"
"""How the name of a pack begins that comes with the tool."""

METHODS: Mapping[str, tuple[str, ...]] = {
    "track": ("ipc-2221", "ipc-2152", "qft-in-0113"),
    "envelope_scaling": ("current", "power"),
    "derived_envelope": ("unproven", "accepted"),
}
"""The choices of method that a house may make; the first of each is what holds without one."""

DEFAULT_CLOSE_AT = 0.9
DEFAULT_FAILS_FROM = "unproven"


def _methods(node: Any) -> dict[str, Text]:
    branch = as_branch(node)
    known = [key for key in branch if key in METHODS]
    chosen, complaints = collected(lambda key: choice(*METHODS[key])(branch[key]), known)
    complaints += unknown_keys(branch, METHODS, "methods")
    if complaints:
        raise together(complaints)
    return dict(zip(map(str, known), chosen, strict=True))


class FieldNames(Record):
    """The schematic fields that hold a rating, by stress, and those that mark a part as not fitted, each with its value."""

    IS: ClassVar[str] = "fields"
    voltage: Words = ()
    current: Words = ()
    power: Words = ()
    temperature: Words = ()
    not_fitted: Named[Word] = {}


class RuleFile(Record):
    """One pack as written."""

    IS: ClassVar[str] = "a rule pack"
    NEEDS: ClassVar[tuple[str, ...]] = ("format", "name")
    format: Annotated[Text, one_of("1")] | None = None
    name: Word | None = None
    based_on: Files = ()
    limits: Named[Limit] = {}
    methods: Annotated[Mapping[str, Text], Reads(_methods)] = {}
    fields: FieldNames = Field(default_factory=FieldNames.of)
    close_at: Annotated[Quantity, Reads(reader("ratio", above=0, most=1))] | None = None
    fails_from: Annotated[Text, one_of(*VERDICTS_THAT_FAIL)] | None = None
    _file: SourceFile = PrivateAttr(SourceFile("rules", "", ""))


@dataclass(frozen=True, slots=True)
class RulePack:
    """The rules in force, from all packs laid over each other. `packs` names them from the first read to the last.

    `limits` is by name; where a later pack gives a locked limit's name again, both stay in force, the later one under
    `NAME of PACK`, so that it can tighten and never loosen. `overridden` holds what later packs took out of force.
    """

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
    """Read rule packs and what they are based on, named as seen from the project folder.

    `shipped/NAME` is a pack that comes with the tool. Raises `InputError` with every fault of all packs: a circle of
    `based_on`, a path that leaves the project, two packs of one name.
    """
    chain = _Chain(folder)
    for named in paths:
        chain.add(named, folder, ())
    refuse(chain.faults, _same_names(chain.packs))
    return _laid_over_each_other(list(chain.packs.values()))


@dataclass(slots=True)
class _Chain:
    """The packs in the order in which they lie over each other, each once, what it is based on before it."""

    folder: str
    packs: dict[str, RuleFile] = field(default_factory=dict)
    faults: list[Fault] = field(default_factory=list)

    def add(self, named: Text | str, beside: str, under: tuple[str, ...]) -> None:
        """One pack with all that it is based on; faults are gathered."""
        try:
            path, shown = self._place(named, beside)
            if path in under:
                raise InputError(Fault(_mark_of(named), f"the pack {shorten(named)!r} is based on itself", "break the circle"))
            if path in self.packs:
                return
            pack = _read_pack(path, shown, self.folder, _mark_of(named))
        except InputError as error:
            self.faults += error.faults
            return
        for base in pack.based_on:
            self.add(base, os.path.dirname(path), (*under, path))
        self.packs[path] = pack

    def _place(self, named: Text | str, beside: str) -> tuple[str, str]:
        """Where a pack is, and what messages call it."""
        if not named.startswith(SHIPPED):
            path = inside(named, beside, self.folder)
            return path, path
        known = shipped_packs()
        name = named.removeprefix(SHIPPED)
        if name not in known:
            raise InputError(Fault(_mark_of(named), f"no pack {shorten(named)!r} comes with the tool", nearest(named, [SHIPPED + each for each in known])))
        return known[name], str(named)


def _mark_of(named: Text | str) -> Mark:
    return getattr(named, "mark", Mark(str(named)))


def _read_pack(path: str, shown: str, folder: str, named_at: Mark) -> RuleFile:
    data, file = read_file(path, "rules", folder, named_at)
    pack = record_from(RuleFile, data, shown, "rules")
    pack._file = file if shown == path else SourceFile(file.role, shown, file.sha256)
    for name, limit in pack.limits.items():
        limit._name, limit._pack = str(name), str(pack.name)
    return pack


@functools.cache
def shipped_packs() -> Mapping[str, str]:
    """The packs that come with the tool: name to file."""
    folder = _shipped_folder()
    return {name.removesuffix(".yaml"): os.path.join(folder, name) for name in sorted(os.listdir(folder)) if name.endswith(".yaml")}


@functools.cache
def _shipped_folder() -> str:
    """Where packs lie that come with the tool: beside the package, or in the checkout that it runs from."""
    here = os.path.dirname(os.path.abspath(__file__))
    installed = os.path.join(here, "..", "rules")
    return os.path.normpath(installed if os.path.isdir(installed) else os.path.join(here, "..", "..", "rules"))


def _same_names(packs: Mapping[str, RuleFile]) -> Iterator[Fault]:
    first: dict[str, RuleFile] = {}
    for pack in packs.values():
        other = first.setdefault(str(pack.name), pack)
        if other is not pack:
            found = f"two packs are called {shorten(pack.name)!r}, the other in {other.name.mark.file}"
            yield Fault(pack.name.mark, found, "give each a name of its own")


def _laid_over_each_other(packs: list[RuleFile]) -> RulePack:
    """Later packs win, key by key, except over what is locked."""
    limits: dict[str, Limit] = {}
    overridden: list[Limit] = []
    for name, limit in ((name, limit) for pack in packs for name, limit in pack.limits.items()):
        before = limits.get(name)
        if before is not None and before.locked:
            limits[f"{name} of {limit.pack}"] = limit
            continue
        overridden += [before] if before is not None else []
        limits[str(name)] = limit
    return RulePack(
        name=str(packs[-1].name) if packs else "",
        packs=tuple(str(pack.name) for pack in packs),
        limits=limits,
        overridden=tuple(overridden),
        methods={key: word for pack in packs for key, word in pack.methods.items()},
        fields=functools.reduce(lambda below, above: above.over(below), (pack.fields for pack in packs), FieldNames.of()),
        close_at=next((pack.close_at.typ for pack in reversed(packs) if pack.close_at), DEFAULT_CLOSE_AT),
        fails_from=next((str(pack.fails_from) for pack in reversed(packs) if pack.fails_from), DEFAULT_FAILS_FROM),
        files=tuple(pack._file for pack in packs),
    )
