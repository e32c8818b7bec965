"""Device data: which distinct parts have none yet, and an entry for each of them with its numbers left blank."""

from __future__ import annotations

import fnmatch
import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from drc_power.draft.data_sheet import SHEETS, Row
from drc_power.draft.readings import Reading, readings_of, told
from drc_power.draft.writing import Entry, can_be_named, free_name, mapping, remark, scalar, slug
from drc_power.netlist.model import Netlist, Part
from drc_power.quantity import parse_value_field
from drc_power.survey.model import Identity, Survey

_NUMBER_FIELDS = ("MPN", "Mpn", "mpn", "Manufacturer Part Number", "Manufacturer_Part_Number", "Part Number", "PartNumber", "Mfr. Part No.")
_BY_SIZE = frozenset({"resistor"})
_SIZE = re.compile(r"_(?P<size>\d{4}|Axial_DIN\d{4}|[A-Z0-9-]+)(?=_|$)")
_DIMENSIONS = ("resistance", "capacitance", "inductance", "impedance", "current", "voltage", "power", "frequency")
_COMMENT_COLUMN = 15
_PART_NUMBER = re.compile(r"(?=.*[A-Za-z])(?=.*\d)[\w./+-]{4,60}")


@dataclass(frozen=True, slots=True)
class Known:
    """A device that some file has already: its kind and the rows of its `matches`."""

    name: str
    kind: str
    matches: tuple[Mapping[str, str], ...] = ()

    def fits(self, part: Part) -> bool:
        """Whether one of the rows names the part by its value and fields."""
        own = {**part.fields, "value": part.value}
        return any(row and all(fnmatch.fnmatchcase(own.get(key, ""), glob) for key, glob in row.items()) for row in self.matches)


@dataclass(frozen=True, slots=True)
class Wanted:
    """A distinct part without data: its entry's name and match, and the references that it stands for."""

    name: str
    kind: str
    match: tuple[tuple[str, str], ...]
    refs: tuple[str, ...]


def distinct(part: Part, kind: str) -> tuple[str, tuple[tuple[str, str], ...]]:
    """A name for the device that a part is, and the match that finds its like; () if nothing tells them apart.

    By part number if a field gives one; resistors by size, for that is what their data depends on; else by value.
    """
    for field in _NUMBER_FIELDS:
        if part.fields.get(field, "").strip():
            return slug(part.fields[field]), ((field, part.fields[field]),)
    if kind in _BY_SIZE:
        return _by_size(part, kind)
    if _PART_NUMBER.fullmatch(part.value) and not any(parse_value_field(part.value, d) for d in _DIMENSIONS):
        return slug(part.value), (("value", part.value),)
    what = part.value if any(c.isdigit() for c in part.value) else part.symbol
    return f"{kind}-{slug(what)}" if slug(what) != kind else kind, ()


def _by_size(part: Part, kind: str) -> tuple[str, tuple[tuple[str, str], ...]]:
    footprint = part.footprint.rpartition(":")[2]
    size = _SIZE.search(footprint)
    if size is None:
        return (f"{kind}-{slug(footprint)}" if footprint else kind), ()
    return f"{kind}-{slug(size['size'])}", ()


class Library:
    """The devices that files have, and those that a draft adds."""

    def __init__(self, known: Iterable[Known]) -> None:
        self._known = {device.name: device for device in known}
        self._taken = set(self._known)
        self._wanted: dict[tuple, tuple[str, list[str]]] = {}

    def device_of(self, part: Part, identity: Identity, named: str = "") -> str:
        """The name of a part's device: as named, or that of a file if its match fits, or a new one that is noted as wanted."""
        if named in self._known:
            return named
        if not named and self.finds(part):
            fitting = [device.name for device in self._known.values() if device.fits(part)]
            return fitting[0] if len(fitting) == 1 else ""
        return self._new(part, identity.kind, named)

    def finds(self, part: Part) -> bool:
        """Whether the match of a device that some file has names the part."""
        return any(device.fits(part) for device in self._known.values())

    def _new(self, part: Part, kind: str, named: str) -> str:
        name, match = distinct(part, kind)
        key = (named, ()) if named else (kind, name, match)
        if key not in self._wanted:
            again = self._known.get(name)
            if not named and again and again.kind == kind and not again.matches:
                return name
            self._wanted[key] = (named or free_name(name, self._taken), [])
        self._wanted[key][1].append(part.ref)
        return self._wanted[key][0]

    def wanted(self, survey: Survey, netlist: Netlist) -> list[Wanted]:
        """The devices to write, in the order of their first part; a match only where it finds nothing else."""
        found = []
        for key, (name, refs) in self._wanted.items():
            kind, match = survey.parts[refs[0]].kind, key[-1]
            found.append(Wanted(name, kind, match if self._is_safe(match, kind, survey, netlist) else (), tuple(refs)))
        return found

    def _is_safe(self, match: tuple[tuple[str, str], ...], kind: str, survey: Survey, netlist: Netlist) -> bool:
        """Whether a match finds only parts of this kind that are this device, and none that another device claims."""
        if not match or not can_be_named(*(text for row in match for text in row)) or any(set(glob) & set("*?[") for _, glob in match):
            return False
        others = [device for device in self._known.values() if device.matches]
        claimed = [part for part in netlist.parts.values()
                   if all((part.value if key == "value" else part.fields.get(key)) == text for key, text in match)]
        return all(survey.parts[part.ref].kind == kind and distinct(part, kind)[1] == match
                   and not any(other.fits(part) for other in others) for part in claimed)


def device_entry(wanted: Wanted, survey: Survey, netlist: Netlist, switching: bool) -> Entry:
    """The entry of one device: its kind, its match, and every key blank with a word on where to find it."""
    part, identity = netlist.parts[wanted.refs[0]], survey.parts[wanted.refs[0]]
    readings = readings_of(part)
    lines = [f"{scalar(wanted.name)}:{remark(f'{_listed_refs(wanted.refs)} {part.value}', part.description)}", f"  kind: {wanted.kind}"]
    if identity.channel:
        lines.append(_aligned(f"  channel: {identity.channel}", "by its symbol"))
    if wanted.match:
        lines.append(f"  matches: [{mapping({scalar(key): scalar(value) for key, value in wanted.match})}]")
    lines.append(_aligned("  source:", "data sheet, its revision, the tables and figures that were read"))
    for section in SHEETS[wanted.kind]:
        rows = [row for row in section.rows if switching or not row.switching]
        if rows:
            lines.append(_aligned(f"  {section.section}:", section.place))
            lines += [_line(row, readings) for row in rows]
    return Entry("\n".join(lines), wanted.name, frozenset({wanted.name}))


def _line(row: Row, readings: Sequence[Reading]) -> str:
    if row.aside:
        return f"    # {row.key}: {row.hint}"
    own = tuple(reading for reading in readings if reading.unit == row.measures)
    return _aligned(f"    {row.key}:", row.hint, told(own))


def _aligned(line: str, *remarks: str) -> str:
    """A line with its comment in the column of the others."""
    return (line.ljust(_COMMENT_COLUMN) + remark(*remarks)).rstrip()


def _listed_refs(refs: Sequence[str], most: int = 6) -> str:
    shown = ", ".join(refs[:most])
    return shown + (f" and {len(refs) - most} more" if len(refs) > most else "")
