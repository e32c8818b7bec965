"""What the user has already: the annotation file as a page, and the devices of the files that it names.

Device files are read for names and matches alone, so that a file that is not finished yet does not stop a draft.
"""

from __future__ import annotations

import fnmatch
import os
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from drc_power.draft.devices import Known
from drc_power.draft.loads import Consumer
from drc_power.draft.page import Page, Statement
from drc_power.draft.writing import Entry
from drc_power.faults import InputError
from drc_power.intake.files import inside, read_file
from drc_power.intake.tree import Branch, Row, tree_of
from drc_power.intake.values import Text

DEVICE_FOLDER = "devices"


def read_text(path: str) -> str | None:
    """The text of a file, byte order mark and line ends as they are; None where there is no file."""
    if not os.path.lexists(path):
        return None
    data, _ = read_file(path, "draft", os.path.dirname(path))
    tree_of(data, path)
    return data.decode("utf-8")


@dataclass(frozen=True)
class Existing:
    """The annotation file that is there, or nothing. `aliases`: other names of nets that have some."""

    path: str
    page: Page | None
    aliases: Mapping[str, tuple[str, ...]] = field(default_factory=dict)
    _statements: dict[str, list[Statement]] = field(default_factory=dict)

    @property
    def folder(self) -> str:
        """The project folder."""
        return os.path.dirname(self.path) or "."

    def has(self, section: str) -> bool:
        """Whether a key stands in the file."""
        return self.page is not None and section in self.page

    def statements(self, section: str) -> list[Statement]:
        """Entries and comment lines of a section."""
        if section not in self._statements:
            self._statements[section] = self.page.statements(section) if self.page else []
        return self._statements[section]

    def has_rail(self, net: str) -> bool:
        """Whether a net stands under `rails` by one of its names, in a comment that takes it out too."""
        return any(s.key in self._names_of(net) for s in self.statements("rails"))

    def loads_of(self, found: Mapping[Consumer, str]) -> dict[Consumer, str]:
        """The loads that stand for consumers, given with their usual names.

        That is the load that speaks of the part and the net, or bears the usual name on that net; else a load between
        the same nets that stands for nobody yet, one for one consumer.
        """
        entries = [s for s in self.statements("loads") if not s.is_comment]
        names = {}
        for consumer, usual in found.items():
            there = [s for s in entries if all(s.scalars & set(self._names_of(net)) for net in consumer.nets)]
            own = [s.key for s in there if s.speaks_of(consumer.ref)]
            named = [s.key for s in there if s.key == usual]
            names |= {consumer: key for key in [*own, *named][:1]}
        refs = {consumer.ref for consumer in found}
        free = [s.key for s in entries if s.key not in names.values() and not any(s.speaks_of(ref) for ref in refs)]
        for consumer in found:
            fitting = [key for key in free if consumer not in names and self._is_between(key, consumer)]
            for key in fitting[:1]:
                names[consumer] = key
                free.remove(key)
        return names

    def _is_between(self, load: str, consumer: Consumer) -> bool:
        node = self.page.entries("loads")[load] if self.page else None
        ends = {key.text: value.text for key, value in node.items} if node is not None and node.kind == "mapping" else {}
        back = ends.get("return", "")
        return ends.get("net") in self._names_of(consumer.net) and (not back or back == consumer.back)

    def keeps_out(self, section: str, names: Iterable[str]) -> bool:
        """Whether an entry that a comment takes out speaks of all the names."""
        wanted = [self._names_of(name) for name in names]
        return bool(wanted) and any(s.is_comment and s.key and all(any(s.speaks_of(each) for each in same) for same in wanted)
                                    for s in self.statements(section))

    def _names_of(self, net: str) -> tuple[str, ...]:
        return net, *self.aliases.get(net, ())

    def covers_part(self, ref: str) -> bool:
        """Whether a part stands under `parts`, by name, by pattern or in a comment line, or is left out."""
        patterns = [word for s in self.statements("parts") for word in s.key.split()]
        return _fits(ref, patterns) or self.is_outside(ref)

    def has_entry(self, ref: str) -> bool:
        """Whether an entry under `parts` holds for a part."""
        return _fits(ref, [word for s in self.statements("parts") if not s.is_comment for word in s.key.split()])

    def is_outside(self, ref: str) -> bool:
        """Whether a part is left out."""
        node = self.page.value("outside") if self.page else None
        rows = node.children if node is not None and node.kind == "list" else ()
        patterns = [word for row in rows if row.kind == "mapping" for key, value in row.items if key.text == "parts" for word in value.scalars()]
        return _fits(ref, patterns)

    def in_a_stage(self, refs: Iterable[str]) -> bool:
        """Whether one of the parts has a stage already, or a comment line about stages speaks of all of them."""
        wanted = frozenset(refs)
        return any(wanted & s.scalars for s in self.statements("stages")) or self.keeps_out("stages", wanted)

    def device_named_for(self, ref: str) -> str:
        """The device that an entry under `parts` names for a part, "" if none does."""
        if self.page is None:
            return ""
        exact_last = sorted(self.page.entries("parts").items(), key=lambda row: ref in row[0].split())
        named = [value.text for key, node in exact_last if _fits(ref, key.split()) and node.kind == "mapping"
                 for name, value in node.items if name.text == "device"]
        return named[-1] if named else ""

    def device_paths(self) -> list[str]:
        """The files and folders of device data, as the file names them; the usual folder where it names none."""
        return (self.page.words("devices") if self.page else []) or [DEVICE_FOLDER]


def _fits(ref: str, patterns: Iterable[str]) -> bool:
    return any(pattern == ref or fnmatch.fnmatchcase(ref, pattern) for pattern in patterns)


def device_files(existing: Existing) -> list[str]:
    """The device files that there are, in order. Raises InputError for a path that leaves the project."""
    found: dict[str, None] = {}
    for named in existing.device_paths():
        path = inside(named, existing.folder, existing.folder)
        names = sorted(n for n in os.listdir(path) if n.endswith(".yaml") and not n.startswith(".")) if os.path.isdir(path) else None
        for file in [path] if names is None else [os.path.join(path, name) for name in names]:
            if os.path.isfile(file):
                found[os.path.normpath(file)] = None
    return list(found)


def target_file(existing: Existing, stem: str) -> str:
    """Where new device entries go: a file of the draft's own in the first folder that is named, else the first file."""
    paths = [inside(named, existing.folder, existing.folder) for named in existing.device_paths()]
    folders = [path for path in paths if not path.endswith((".yaml", ".yml"))]
    return os.path.normpath(os.path.join(folders[0], f"{stem}.yaml") if folders else paths[0])


def known_devices(files: Iterable[str], folder: str) -> list[Known]:
    """The devices of some files, as far as they can be made out."""
    found = []
    for path in files:
        data, _ = read_file(path, "devices", folder)
        root, faults = tree_of(data, path)
        if faults:
            raise InputError(*faults)
        devices = root.get("devices") if isinstance(root, Branch) else None
        found += [_known(name, node) for name, node in devices.items()] if isinstance(devices, Branch) else []
    return found


def _known(name: Text, node: object) -> Known:
    branch: Mapping = node if isinstance(node, Branch) else {}
    rows = branch.get("matches", ())
    rows = rows if isinstance(rows, Row) else [rows]
    matches = tuple({str(k): str(v) for k, v in row.items()} for row in rows if isinstance(row, Branch))
    return Known(str(name), str(branch.get("kind", "")), matches)
