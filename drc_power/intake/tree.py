"""YAML text to a tree of marked text, and nothing more: no tag builds anything, no word changes its meaning.

PyYAML's events become `Branch` (mapping), `Row` (list), `Text` and `Blank` (no value). Scalars stay text, so that
`1e-3`, `off`, `010` and `yes` mean what the schema that reads them says. Anchors are allowed within the bounds below,
which count nodes as if every alias were written out.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field, replace
from typing import Any

import yaml

from ..faults import Fault, InputError, Mark
from .values import Text

MOST_BYTES = 8_000_000
MOST_NODES = 200_000
MOST_DEPTH = 40
MOST_FAULTS = 100

_NOT_TEXT = re.compile("[^\\t\\n\\r\\x20-\\x7e\\x85\\xa0-\\ud7ff\\ue000-\\ufffd\\U00010000-\\U0010ffff]")
"""What YAML does not take for text."""

_LOADER = getattr(yaml, "CSafeLoader", yaml.SafeLoader)


class Blank(Text):
    """A place where a value is due and nothing stands, or YAML's `null` or `~`."""

    __slots__ = ()


class Branch(dict):
    """A mapping. Keys are `Text` with marks of their own; `marks` says where each value begins."""

    __slots__ = ("mark", "marks")

    def __init__(self, mark: Mark) -> None:
        super().__init__()
        self.mark = mark
        self.marks: dict[str, Mark] = {}

    def put(self, key: Text, value: Any) -> None:
        """Add one key."""
        self[key] = value
        self.marks[key] = value.mark


class Row(list):
    """A list."""

    __slots__ = ("mark",)

    def __init__(self, mark: Mark) -> None:
        super().__init__()
        self.mark = mark


def tree_of(data: bytes, file: str) -> tuple[Any, list[Fault]]:
    """The tree of one YAML document, with the faults that left it usable (such as a key given twice).

    Raises `InputError` where nothing more can be read: another encoding, broken YAML, a bound passed.
    """
    return _built(_decoded(data, file), _Builder(file))


def tree_of_text(text: str, mark: Mark) -> Any:
    """The tree of a short text that stands at one place, such as a schematic field. Raises `InputError`."""
    plain = _NOT_TEXT.sub("\ufffd", text)
    root, faults = _built(plain, _Builder(mark.file, at=mark))
    if faults:
        raise InputError(*faults)
    return root


def _built(text: str, builder: _Builder) -> tuple[Any, list[Fault]]:
    try:
        for event in yaml.parse(text, Loader=_LOADER):
            builder.take(event)
    except yaml.YAMLError as error:
        fault = _fault_of(error, text, builder.file)
        raise InputError(*builder.faults, replace(fault, mark=builder.at or fault.mark)) from None
    return builder.root, builder.faults


def _decoded(data: bytes, file: str) -> str:
    if len(data) > MOST_BYTES:
        raise InputError(Fault(Mark(file), f"a file of {len(data)} bytes", f"split it; {MOST_BYTES} is the most that is read"))
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        before = data[: error.start].decode("utf-8-sig", errors="replace")
        raise InputError(Fault(_end_of(before, file), "bytes that are not UTF-8", "save the file as UTF-8 text")) from None
    if control := _NOT_TEXT.search(text):
        found = f"the control character U+{ord(control[0]):04X}"
        raise InputError(Fault(_end_of(text[: control.start()], file), found, "save the file as plain UTF-8 text"))
    return text


def _end_of(before: str, file: str) -> Mark:
    """The place right after a text."""
    return Mark(file, before.count("\n") + 1, len(before) - before.rfind("\n"))


_ADVICE_AT = {
    "\t": "indent with spaces, not with tabs",
    "}": "check the brackets", "]": "check the brackets",
    "@": "put the text in quotes", "`": "put the text in quotes", "%": "put the text in quotes",
}
"""What to write instead, by the character that the parser stumbled over."""

_ADVICE = (
    ("mapping values are not allowed", "put the text that holds ': ' in quotes, or check the indentation"),
    ("could not find expected ':'", "write key: value"),
    ("block end", "check the indentation"),
    ("flow", "check the commas and brackets"),
    ("quoted", "close the quotes"),
)
"""What to write instead, by what the parser says."""


def _fault_of(error: yaml.YAMLError, text: str, file: str) -> Fault:
    """The parser's complaint in one line, at its place."""
    mark = getattr(error, "problem_mark", None) or getattr(error, "context_mark", None)
    place = Mark(file, mark.line + 1, mark.column + 1) if mark else Mark(file)
    said = " ".join(str(part) for part in (getattr(error, "context", ""), getattr(error, "problem", "") or error) if part)
    said = " ".join(said.split())[:160]
    advice = _ADVICE_AT.get(_character_at(text, mark) if mark else "")
    advice = advice or next((advice for sign, advice in _ADVICE if sign in said), "put the text in quotes, or check the indentation")
    return Fault(place, f"this is not YAML: {said}", advice)


def _character_at(text: str, mark: Any) -> str:
    line = text.split("\n")[mark.line : mark.line + 1]
    return line[0][mark.column : mark.column + 1] if line else ""


@dataclass(slots=True)
class _Frame:
    """A mapping or list that is still open. `size` counts its nodes, aliases written out."""

    node: Branch | Row
    anchor: str | None
    key: Text | None = None
    size: int = 1


@dataclass(slots=True)
class _Builder:
    """Takes events one by one; without recursion, so that depth is a number and not a crash."""

    file: str
    at: Mark | None = None
    root: Any = None
    faults: list[Fault] = field(default_factory=list)
    _open: list[_Frame] = field(default_factory=list)
    _anchors: dict[str, tuple[Any, int]] = field(default_factory=dict)
    _documents: int = 0

    def take(self, event: yaml.Event) -> None:
        """One event of the parser."""
        if isinstance(event, yaml.ScalarEvent):
            self._add(self._scalar(event), 1, event.anchor)
        elif isinstance(event, (yaml.MappingStartEvent, yaml.SequenceStartEvent)):
            self._start(event)
        elif isinstance(event, (yaml.MappingEndEvent, yaml.SequenceEndEvent)):
            frame = self._open.pop()
            self._add(frame.node, frame.size, frame.anchor)
        elif isinstance(event, yaml.AliasEvent):
            self._alias(event)
        elif isinstance(event, yaml.DocumentStartEvent):
            self._documents += 1
            if self._documents > 1:
                self._stop(event, "a second document in one file", "keep one; remove the line ---")
        elif isinstance(event, yaml.StreamEndEvent) and self.root is None:
            self.root = Blank("", Mark(self.file))

    def _mark(self, event: yaml.Event) -> Mark:
        return self.at or Mark(self.file, event.start_mark.line + 1, event.start_mark.column + 1)

    def _stop(self, event: yaml.Event, found: str, instead: str) -> None:
        raise InputError(*self.faults, Fault(self._mark(event), found, instead))

    def _blame(self, mark: Mark, found: str, instead: str) -> None:
        self.faults.append(Fault(mark, found, instead))
        if len(self.faults) >= MOST_FAULTS:
            raise InputError(*self.faults)

    def _refuse_tag(self, event: Any) -> None:
        if event.tag is not None:
            self._blame(self._mark(event), f"a tag, {event.tag[:40]!r}", "remove it; values are plain text here")

    def _scalar(self, event: yaml.ScalarEvent) -> Text:
        self._refuse_tag(event)
        blank = not event.style and event.value in ("", "~", "null")
        return (Blank if blank else Text)(event.value, self._mark(event))

    def _start(self, event: Any) -> None:
        self._refuse_tag(event)
        if len(self._open) >= MOST_DEPTH:
            self._stop(event, f"nesting deeper than {MOST_DEPTH} levels", "write it flatter")
        node = (Branch if isinstance(event, yaml.MappingStartEvent) else Row)(self._mark(event))
        self._open.append(_Frame(node, event.anchor))

    def _alias(self, event: yaml.AliasEvent) -> None:
        if event.anchor not in self._anchors:
            self._stop(event, f"the alias *{event.anchor[:40]} has no anchor above it", "put a text that begins with * in quotes")
        node, size = self._anchors[event.anchor]
        self._add(node, size, None, self._mark(event))

    def _add(self, node: Any, size: int, anchor: str | None, at: Mark | None = None) -> None:
        """Put a finished node into the mapping or list that is open, or at the root."""
        if anchor is not None:
            self._anchors[anchor] = (node, size)
        if not self._open:
            self.root = node
            return
        frame = self._open[-1]
        frame.size += size
        if frame.size > MOST_NODES:
            raise InputError(*self.faults, Fault(at or node.mark, f"more than {MOST_NODES} values, aliases written out", "split the file"))
        if isinstance(frame.node, Row):
            frame.node.append(node)
        elif frame.key is None:
            frame.key = self._key(node, at or node.mark)
        else:
            self._put(frame, node)

    def _key(self, node: Any, mark: Mark) -> Text:
        if type(node) is not Text:
            what = "nothing" if isinstance(node, Blank) else "a mapping or a list"
            self._blame(mark, f"{what} where a key is due", "write key: value")
            return Blank("", mark)
        if node == "<<":
            self._blame(mark, "a merge key, '<<'", "write the keys out")
            return Blank("", mark)
        return node

    def _put(self, frame: _Frame, node: Any) -> None:
        key, frame.key = frame.key, None
        if isinstance(key, Blank):
            return
        if key in frame.node:
            first = next(each for each in frame.node if each == key)
            self._blame(key.mark, f"the key {key[:40]!r} stands twice, first in line {first.mark.line}", "keep one of them")
            return
        frame.node.put(key, node)
