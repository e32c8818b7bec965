"""Device data: what a team knows of the parts it uses, shared across boards. `read_devices` gives a `DeviceLibrary`."""

import fnmatch
import os
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from typing import Annotated, Any, ClassVar

from pydantic import BeforeValidator, Field, PrivateAttr
from pydantic_core import PydanticCustomError

from ..faults import Fault, InputError, Mark
from .device_kinds import KINDS, LIMITS, SECTIONS_OF_ALL, Kind
from .device_sections import (
    FROM_ZERO, TEMPERATURE, Body, Conduction, Envelope, Gate, StoredCharge, Switching, Thermal, Transfer, gather_pulses,
)
from .documents import record_from, refuse
from .fields import Named, Word, as_branch, collected, each, one_of, read_word, table
from .files import inside, read_file
from .record import Reads, Record, complaint, shorten, together, unknown_keys
from .tree import Blank, Branch, Row
from .values import Quantity, SourceFile, Table, Text


class Limits(dict):
    """The limits by name; `blank` names those that are left to be filled in."""

    def __init__(self, values: Mapping[str, Quantity | Table], blank: Iterable[str] = ()) -> None:
        super().__init__(values)
        self.blank = frozenset(blank)


def _limits(node: Any) -> Limits:
    """The limits of a device. A `source` among them is handed to each that has none of its own."""
    branch = as_branch(node)
    blank = [str(key) for key, value in branch.items() if key in LIMITS and isinstance(value, Blank)]
    known = [key for key in branch if key in LIMITS and key not in blank]
    values, complaints = collected(lambda key: LIMITS[key](branch[key]), known)
    complaints += unknown_keys(branch, (*LIMITS, "source"), "limits")
    if complaints:
        raise together(complaints)
    source = read_word(branch["source"]) if branch.get("source") else None
    return Limits({str(key): _sourced(value, source) for key, value in zip(known, values, strict=True)}, blank)


def _sourced(value: Quantity | Table, source: Text | None) -> Quantity | Table:
    return replace(value, source=source) if source and not value.source else value


def _matches(node: Any) -> tuple[dict[str, Text], ...]:
    """What part values and fields the device stands for: one mapping or a list of them."""
    rows = node if isinstance(node, Row) else [node]
    return tuple(each(_one_match, rows))


def _one_match(node: Any) -> dict[str, Text]:
    branch = as_branch(node)
    if not branch:
        raise complaint(branch.mark, "an empty match, which would fit every part", "write {value: ...} or {FIELD: ...}")
    return dict(each(lambda key: (str(key), read_word(branch[key])), branch))


class Device(Record):
    """One device. `limits` holds magnitudes, as `Quantity` or, where the contract has a curve, `Table`."""

    IS: ClassVar[str] = "a device"
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset({"source", "leakage"})
    NEEDS: ClassVar[tuple[str, ...]] = ("kind",)
    kind: Annotated[Text, one_of(*KINDS)] | None = None
    channel: Annotated[Text, one_of("n", "p", "npn", "pnp")] | None = None
    matches: Annotated[tuple[Mapping[str, Text], ...], Reads(_matches)] = ()
    source: Word | None = None
    limits: Annotated[Mapping[str, Quantity | Table], Reads(_limits)] = {}
    conduction: Conduction = Field(default_factory=Conduction.of)
    gate: Gate = Field(default_factory=Gate.of)
    switching: Switching = Field(default_factory=Switching.of)
    charge: StoredCharge = Field(default_factory=StoredCharge.of)
    body: Body = Field(default_factory=Body.of)
    transfer: Transfer = Field(default_factory=Transfer.of)
    thermal: Thermal = Field(default_factory=Thermal.of)
    envelope: Annotated[Envelope, BeforeValidator(gather_pulses)] = Field(default_factory=Envelope.of)
    leakage: Annotated[Table, table(TEMPERATURE, FROM_ZERO["current"])] | None = None
    _name: Text = PrivateAttr(Text(""))

    @property
    def name(self) -> Text:
        """The name that annotations use."""
        return self._name

    @classmethod
    def complaints_about_keys(cls, branch: Branch) -> list[PydanticCustomError]:
        general = super().complaints_about_keys(branch)
        kind = KINDS.get(str(branch.get("kind", "")))
        return [*general, *_foreign_keys(branch, kind), *_idle_current_left_blank(branch)] if kind else general

    @property
    def blank_limits(self) -> frozenset[str]:
        """The limits that are left to be filled in."""
        return getattr(self.limits, "blank", frozenset())

    def entry(self, path: str) -> Mark:
        """Where one entry was written, such as `entry("limits.vds")`; the device's own mark if it is not there."""
        section, _, key = path.partition(".")
        if section == "limits" and key in self.limits:
            return self.limits[key].mark
        part = getattr(self, section, None)
        if key and isinstance(part, Record) and key in part.written:
            return part.source_of(key)
        return self.source_of(section) if not key or section in self.written else self.mark

    def source_text(self, path: str) -> str:
        """Where the number of an entry was read: as the entry says, else its section, else the device, else ""."""
        section, _, key = path.partition(".")
        part = getattr(self, section, None)
        value = self.limits.get(key) if section == "limits" else getattr(part, key, None)
        found = (getattr(value, "source", None), getattr(part, "source", None), self.source)
        return next((str(source) for source in found if source), "")

    def matches_part(self, value: str, fields: Mapping[str, str]) -> bool:
        """Whether `matches` names a part of this value and these fields; `value` among its keys is the part's value."""
        known = {**fields, "value": value}
        return any(all(fnmatch.fnmatchcase(known.get(key, ""), glob) for key, glob in row.items()) for row in self.matches)


def _idle_current_left_blank(branch: Branch) -> Iterator[PydanticCustomError]:
    """A switching regulator's current without load counts as none where it is left out, so a blank must not pass for it."""
    conduction = branch.get("conduction")
    if branch["kind"] == "switching-regulator" and isinstance(conduction, Branch) and isinstance(conduction.get("quiescent"), Blank):
        yield complaint(conduction["quiescent"].mark, "quiescent is left blank", "give it, or leave the key out for none")


def _foreign_keys(branch: Branch, kind: Kind) -> Iterator[PydanticCustomError]:
    """Keys that exist, but not for a device of this kind."""
    what = f"a device of kind {branch['kind']}"
    top = (*SECTIONS_OF_ALL, *kind.sections)
    yield from _known_but_foreign(branch, top, Device.attributes(), what)
    for section, allowed, all_keys in (
        ("limits", kind.limits, LIMITS),
        ("conduction", kind.conduction, Conduction.attributes()),
        ("charge", kind.charge, StoredCharge.attributes()),
    ):
        if section in top and isinstance(branch.get(section), Branch):
            yield from _known_but_foreign(branch[section], (*allowed, "source"), all_keys, f"the {section} of {what}")
    channel = branch.get("channel")
    if isinstance(channel, Text) and channel not in kind.channels:
        advice = f"write {' or '.join(kind.channels)}" if kind.channels else "leave it out"
        yield complaint(channel.mark, f"the channel {shorten(channel)!r} for {what}", advice)


def _known_but_foreign(branch: Branch, allowed: Iterable[str], known: Iterable[str], what: str) -> Iterator[PydanticCustomError]:
    foreign = Branch(branch.mark)
    for key, value in branch.items():
        if key in known and key not in allowed:
            foreign.put(key, value)
    return iter(unknown_keys(foreign, allowed, what))


class DeviceFile(Record):
    """One file of device data."""

    IS: ClassVar[str] = "a file of device data"
    NEEDS: ClassVar[tuple[str, ...]] = ("format", "devices")
    format: Annotated[Text, one_of("1")] | None = None
    devices: Named[Device] = {}


@dataclass(frozen=True, slots=True)
class DeviceLibrary:
    """All devices by name, and the files they came from."""

    devices: Mapping[str, Device]
    files: tuple[SourceFile, ...]

    def matching(self, value: str, fields: Mapping[str, str]) -> tuple[Device, ...]:
        """Every device whose `matches` fits; more than one is for the caller to refuse."""
        return tuple(device for device in self.devices.values() if device.matches_part(value, fields))


def read_devices(paths: Iterable[Text | str], folder: str) -> DeviceLibrary:
    """Read device files, or every *.yaml of a folder, named as seen from the project folder.

    Raises `InputError` with every fault of all of them: a name given twice, a path that leaves the project.
    """
    faults: list[Fault] = []
    devices: dict[str, Device] = {}
    files: list[SourceFile] = []
    for path, named_at in _files_of(paths, folder, faults):
        try:
            found, file = _read_one(path, folder, named_at)
        except InputError as error:
            faults += error.faults
            continue
        files.append(file)
        faults += _twice(found, devices)
        devices = {**found, **devices}
    refuse(faults)
    return DeviceLibrary(devices, tuple(files))


def _files_of(paths: Iterable[Text | str], folder: str, faults: list[Fault]) -> list[tuple[str, Mark]]:
    """The files that the paths stand for, each once, in the order named and by name inside a folder."""
    found: dict[str, Mark] = {}
    for named in paths:
        mark = getattr(named, "mark", Mark(str(named)))
        try:
            for path in _listed(inside(named, folder, folder), named, mark, folder):
                found.setdefault(path, mark)
        except InputError as error:
            faults += error.faults
    return list(found.items())


def _listed(path: str, named: str, mark: Mark, folder: str) -> list[str]:
    if not os.path.isdir(path):
        return [path]
    names = sorted(name for name in os.listdir(path) if name.endswith(".yaml") and not name.startswith("."))
    if not names:
        raise InputError(Fault(mark, f"the folder {str(named)!r} has no file of device data", "put a NAME.yaml into it"))
    return [inside(Text(os.path.join(named, name), mark), folder, folder) for name in names]


def _read_one(path: str, folder: str, named_at: Mark) -> tuple[dict[str, Device], SourceFile]:
    data, file = read_file(path, "devices", folder, named_at)
    found = record_from(DeviceFile, data, path, "devices")
    for name, device in found.devices.items():
        device._name = name
    return {str(name): device for name, device in found.devices.items()}, file


def _twice(found: Mapping[str, Device], before: Mapping[str, Device]) -> Iterator[Fault]:
    for name in found.keys() & before.keys():
        first = before[name].name.mark
        yield Fault(found[name].name.mark, f"the device {shorten(name)!r} stands twice, first in {first}", "keep one of them")
