"""A YAML file of the user's, as text with the places of its entries: what it speaks of, and where to put more.

PyYAML's events give the places; the text itself is never written anew, only cut where something goes in between.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from functools import lru_cache

import yaml

from drc_power.draft.writing import Entry, scalar
from drc_power.faults import Fault, InputError, Mark
from drc_power.intake.tree import tree_of
from drc_power.text import printable

_COMMENT_LINE = re.compile(r"[ \t]*#")
_COMMENTED_ENTRY = re.compile(r"""[ \t]*#[ \t]*("(?:[^"\\]|\\.)*"|'(?:[^']|'')*'|[^\s"'#:{}\[\],-][^:#{}\[\],]*):(?:\s|$)""")
_COMMENTS = re.compile(r"(^|\s)#[^\r\n]*")


@dataclass(slots=True)
class Node:
    """A piece of the file: kind is scalar, alias, mapping or list. Offsets are in characters; `end` is past its last one."""

    kind: str
    start: int
    end: int
    column: int
    text: str = ""
    flow: bool = False
    children: list[Node] = field(default_factory=list)

    @property
    def items(self) -> list[tuple[Node, Node]]:
        """The keys and values of a mapping."""
        return list(zip(self.children[::2], self.children[1::2], strict=True))

    def scalars(self) -> Iterator[str]:
        """Every scalar inside, keys too."""
        yield from (self.text,) if self.kind == "scalar" else (text for child in self.children for text in child.scalars())


def nodes_of(text: str) -> Node | None:
    """The root of a document that is known to be right; None if there is nothing in it."""
    stack: list[Node] = [Node("list", 0, 0, 0)]
    for event in yaml.parse(text, Loader=yaml.SafeLoader):
        start, end = getattr(event, "start_mark", None), getattr(event, "end_mark", None)
        if isinstance(event, (yaml.ScalarEvent, yaml.AliasEvent)):
            kind = "scalar" if isinstance(event, yaml.ScalarEvent) else "alias"
            stack[-1].children.append(Node(kind, start.index, end.index, start.column, getattr(event, "value", "")))
        elif isinstance(event, yaml.CollectionStartEvent):
            kind = "mapping" if isinstance(event, yaml.MappingStartEvent) else "list"
            stack.append(Node(kind, start.index, end.index, start.column, flow=bool(event.flow_style)))
        elif isinstance(event, yaml.CollectionEndEvent):
            node = stack.pop()
            node.end = end.index if node.flow else max([node.end, *(child.end for child in node.children)])
            stack[-1].children.append(node)
    return stack[0].children[0] if stack[0].children else None


@dataclass(frozen=True, slots=True)
class Statement:
    """What a section says in one place: an entry with its key, its scalars and its text, or a comment line alone.

    The key of a comment is that of the entry which it seems to take out: `# Q1: {gate: 10 V}` has the key Q1.
    """

    key: str
    scalars: frozenset[str]
    text: str
    is_comment: bool = False

    def speaks_of(self, name: str) -> bool:
        """Whether it holds a name, as a value of its own or as a word."""
        return name in self.scalars or bool(_word(name).search(self.text))


def comment(line: str) -> Statement:
    """The statement of a line that is a comment alone.

    >>> comment('  # "+5V": {voltage: }').key, comment("# see U1").key
    ('+5V', '')
    """
    match = _COMMENTED_ENTRY.match(line)
    return Statement(_unquoted(match[1]) if match else "", frozenset(), line, True)


def _unquoted(text: str) -> str:
    if text.startswith('"'):
        return re.sub(r"\\(.)", r"\1", text[1:-1])
    return text[1:-1].replace("''", "'") if text.startswith("'") else text


@lru_cache(maxsize=8192)
def _word(name: str) -> re.Pattern[str]:
    written = "|".join(re.escape(each) for each in dict.fromkeys((printable(name), scalar(name).strip('"'))))
    return re.compile(rf"(?:^|[\s\"'(\[{{,:#])(?:{written})(?=$|[\s\"')\]}},:;]|\.(?:\s|$))")


class Page:
    """One file. `insert` gives its text with more in it; what was there stays as it was, byte for byte."""

    def __init__(self, text: str, path: str) -> None:
        _, faults = tree_of(text.encode(), path)
        if faults:
            raise InputError(*faults)
        self.text, self.path = text, path
        self._newline = "\r\n" if "\r\n" in text else "\n"
        root = nodes_of(text)
        self._root = None if root is not None and root.kind == "scalar" and not root.text else root
        if self._root is not None and (self._root.kind != "mapping" or self._root.flow):
            raise self._refused(self._root, "the file is not a mapping with a line for each key", "write key: value, one below the other")
        self._sections = {key.text: (key, value) for key, value in (self._root.items if self._root else ())}

    def __contains__(self, section: str) -> bool:
        return section in self._sections

    def value(self, section: str) -> Node | None:
        """What stands under a key of the file."""
        return self._sections[section][1] if section in self._sections else None

    def words(self, section: str) -> list[str]:
        """The text or the list of texts under a key."""
        node = self.value(section)
        return [text for text in node.scalars() if text] if node is not None and node.kind in ("scalar", "list") else []

    def entries(self, section: str) -> dict[str, Node]:
        """The entries of a section by name."""
        node = self.value(section)
        return {key.text: value for key, value in node.items} if node is not None and node.kind == "mapping" else {}

    def statements(self, section: str) -> list[Statement]:
        """Every entry and every comment line of a section, in order."""
        if section not in self._sections:
            return []
        key, value = self._sections[section]
        found, inside = [], []
        for name, node in value.items if value.kind == "mapping" else ():
            stop = min(self._line_end(node.end), value.end if value.flow else len(self.text))
            inside.append((name.start, stop))
            found.append(Statement(name.text, frozenset(node.scalars()), self.text[name.start : stop]))
        for start, stop in self._lines(key.end, self._next_section(key)):
            line = self.text[start:stop]
            if _COMMENT_LINE.match(line) and not any(a <= start < b for a, b in inside):
                found.append(comment(line))
        return found

    def comments(self) -> list[Statement]:
        """Every line of the file that is a comment alone."""
        return [comment(line) for line in self.text.splitlines() if _COMMENT_LINE.match(line)]

    def insert(self, additions: Mapping[str, Sequence[Entry]], blocks: Sequence[str] = ()) -> str:
        """The text with entries added to their sections, which are there, and blocks of lines at its end."""
        cuts = [cut for section, entries in additions.items() if entries for cut in self._cuts(section, entries)]
        cuts += [(self._last_place(), self._newline + self._indented(block, self._column())) for block in blocks]
        text = self.text
        for place, addition in reversed(sorted(cuts, key=lambda cut: cut[0])):
            text = text[:place] + self._on_a_new_line(place, addition) + text[place:]
        return text

    def _on_a_new_line(self, place: int, addition: str) -> str:
        """Whole lines need the end of a line before them, which a text may lack at its end."""
        whole_lines = addition.endswith(self._newline) and not addition.startswith(self._newline)
        return self._newline + addition if whole_lines and place and self.text[place - 1] != "\n" else addition

    def _column(self) -> int:
        return self._root.column if self._root else 0

    def _cuts(self, section: str, entries: Sequence[Entry]) -> list[tuple[int, str]]:
        """Where to cut the text for more entries of a section, and what to put there."""
        key, value = self._sections[section]
        if value.kind == "mapping" and not value.flow:
            return [(self._below(value.end, value.column), "".join(self._indented(entry.text, value.column) for entry in entries))]
        if value.kind == "scalar" and not value.text and value.start == value.end:
            indent = self._column() + 2
            return [(self._below(key.end, indent), "".join(self._indented(entry.text, indent) for entry in entries))]
        if value.kind == "mapping":
            return self._cuts_in_braces(value, entries)
        raise self._refused(value, f"{section}: does not hold names with values of their own",
                            "leave nothing after the colon, or write name: value below it")

    def _cuts_in_braces(self, value: Node, entries: Sequence[Entry]) -> list[tuple[int, str]]:
        brace, indent = value.end - 1, self._column() + 4
        if any("\n" in entry.text for entry in entries):
            raise self._refused(value, "a mapping in braces, which has no room for more", "write its entries one below the other")
        lines = "".join(self._indented(entry.text if entry.is_comment else f"{entry.body},{entry.remark}", indent) for entry in entries)
        line_start = self.text.rfind("\n", 0, brace) + 1
        alone = not self.text[line_start:brace].strip()
        cut = (line_start, lines) if alone else (brace, self._newline + lines + " " * (indent - 2))
        last = value.children[-1].end if value.children else None
        needs_comma = last is not None and "," not in _COMMENTS.sub("", self.text[last:brace])
        return [(last, ","), cut] if needs_comma else [cut]

    def _indented(self, text: str, column: int) -> str:
        return "".join(" " * column * bool(line) + line + self._newline for line in text.split("\n"))

    def _below(self, end: int, column: int) -> int:
        """The place below the line of `end` and the comment lines that follow it as deep as `column`."""
        place = self._line_end(end)
        for start, stop in self._lines(place, len(self.text)):
            line = self.text[start:stop]
            if not _COMMENT_LINE.match(line) or len(line) - len(line.lstrip()) < column:
                break
            place = stop
        return place

    def _last_place(self) -> int:
        """The end of the text, or the line that ends the document."""
        end = self._line_end(self._root.end) if self._root else 0
        marks = (start for start, stop in self._lines(end, len(self.text)) if self.text[start:stop].startswith("..."))
        return next(marks, len(self.text))

    def _line_end(self, offset: int) -> int:
        """Past the line that an offset ends on; the offset itself where it is at the start of a line already."""
        if offset and self.text[offset - 1] == "\n":
            return offset
        found = self.text.find("\n", offset)
        return len(self.text) if found < 0 else found + 1

    def _lines(self, start: int, stop: int) -> Iterator[tuple[int, int]]:
        while start < stop:
            end = self.text.find("\n", start)
            end = len(self.text) if end < 0 else end + 1
            yield start, end
            start = end

    def _next_section(self, key: Node) -> int:
        return min((other.start for other, _ in self._sections.values() if other.start > key.start), default=len(self.text))

    def mark(self, node: Node) -> Mark:
        """Where a piece of the file stands."""
        before = self.text[: node.start]
        return Mark(self.path, before.count("\n") + 1, len(before) - before.rfind("\n"))

    def _refused(self, node: Node, found: str, instead: str) -> InputError:
        return InputError(Fault(self.mark(node), found, instead))
