"""S-expressions as KiCad writes them, read in one pass of one regular expression.

`(name word ... (clause) ...)`: words are bare or quoted; KiCad 4 and 5 leave bare what needs no
quotes, later ones quote everything. Most of a netlist is clauses of one word such as `(pin "3")`,
and these are taken in a single match: that is what makes the reader fast.
"""

from __future__ import annotations

import gc
import re
from collections.abc import Iterator
from contextlib import contextmanager
from itertools import islice

from drc_power.faults import InputError
from drc_power.netlist.source import Source, printable, shown

MAX_DEPTH = 200
"""A netlist nests to depth 8; a file nested deeper than this is damaged or hostile."""

MAX_TOKEN_CHARS = 2**20
"""The longest text a symbol field carries is a pasted simulation model of some kilobytes."""

MAX_TOKENS = 5_000_000
"""Fourteen times what 1,507 parts in 8.6 MB need; holds the tree to about 1 GB of memory."""

_BARE = r'[^\s()"][^\s()]{0,%d}+(?![^\s()])' % (MAX_TOKEN_CHARS - 1)
_TOKEN = re.compile(
    rf"""
      \( \s*+ (?P<leaf>{_BARE}) \s++ (?: "(?P<quoted>[^"\\\n]{{0,{MAX_TOKEN_CHARS}}}+)" | (?P<bare>{_BARE}) ) \s*+ \)
    | \( \s*+ (?P<name>{_BARE}|)
    | (?P<close>\))
    | ^[ \t]*+ (?P<comment>\#.*+)
    | "(?P<text>(?:[^"\\\n]++|\\.)*+)"
    | (?P<word>{_BARE})
    | (?P<bad>\S)
    """,
    re.VERBOSE | re.MULTILINE,
)
_LEAF, _QUOTED, _BARE_LEAF, _NAME, _CLOSE, _COMMENT, _TEXT, _WORD, _BAD = range(1, _TOKEN.groups + 1)

_ESCAPE = re.compile(r"\\(x[0-9a-fA-F]{1,2}|[0-7]{1,3}|.)", re.DOTALL)
_CONTROLS = {"a": "\a", "b": "\b", "f": "\f", "n": "\n", "r": "\r", "t": "\t", "v": "\v"}


class Clause:
    """`(name word ... (clause) ...)`; `at` is the offset of its opening parenthesis.

    A clause that holds no clause, such as `(pin "3")` or `(dnp)`, is a value of the one around it:
    `values` are pairs of name and text. `clauses` are those that hold some themselves."""

    __slots__ = ("name", "at", "words", "values", "clauses")

    def __init__(self, name: str, at: int) -> None:
        self.name, self.at = name, at
        self.words: list[str] = []
        self.values: list[tuple[str, str]] = []
        self.clauses: list[Clause] = []

    @property
    def text(self) -> str:
        """The words as one text."""
        return " ".join(self.words)

    def value(self, name: str) -> str:
        """The first value of that name, "" if there is none."""
        for key, text in self.values:
            if key == name:
                return text
        return ""

    def each(self, name: str) -> list[Clause]:
        """The clauses of that name directly inside."""
        return [clause for clause in self.clauses if clause.name == name]

    def each_in(self, section: str, name: str) -> list[Clause]:
        """The clauses of that name inside any section of that name directly inside."""
        return [clause for part in self.each(section) for clause in part.each(name)]


def unescape(text: str) -> str:
    r"""The text that a quoted word stands for, with the escapes of the C language undone.

    >>> unescape(r'5\" \\ tall')
    '5" \\ tall'
    """
    return _ESCAPE.sub(_unescaped, text) if "\\" in text else text


def _unescaped(match: re.Match[str]) -> str:
    code = match[1]
    if code[0] == "x" and len(code) > 1:
        return chr(int(code[1:], 16))
    return chr(int(code, 8)) if code[0] in "01234567" else _CONTROLS.get(code, code)


@contextmanager
def collector_paused() -> Iterator[None]:
    """Hold the cycle collector: a tree has no cycles, and walking it costs four times its parsing."""
    was_enabled = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was_enabled:
            gc.enable()


def parse_clauses(source: Source) -> Clause:
    """The one clause that a file holds. Raises InputError if the file is anything else."""
    root = current = Clause("", 0)
    outer: list[Clause] = []
    match = None
    for match in islice(_TOKEN.finditer(source.text), MAX_TOKENS):
        kind = match.lastindex
        if kind == _QUOTED or kind == _BARE_LEAF:
            current.values.append((match[_LEAF], match[kind]))
        elif kind == _NAME:
            outer.append(current)
            current = Clause(match[_NAME], match.start())
            if len(outer) > MAX_DEPTH:
                raise _damaged(source, current.at, f"parentheses nest deeper than {MAX_DEPTH}")
        elif kind == _CLOSE:
            if not outer:
                raise _damaged(source, match.start(), "a closing parenthesis too many")
            closed, current = current, outer.pop()
            if closed.values or closed.clauses:
                current.clauses.append(closed)
            else:
                current.values.append((closed.name, closed.text))
        elif kind == _TEXT and match.end() - match.start() <= MAX_TOKEN_CHARS:
            current.words.append(unescape(match[_TEXT]))
        elif kind == _WORD:
            current.words.append(match[_WORD])
        elif kind != _COMMENT:
            raise _bad_token(source, match.start())
    _check_end(source, root, current, match.end() if match else 0)
    return root.clauses[0]


def _check_end(source: Source, root: Clause, current: Clause, end: int) -> None:
    """The file ended where it should: at the close of its one clause, with nothing around it."""
    if rest := _TOKEN.search(source.text, end):
        raise _damaged(source, rest.start(), f"more than {MAX_TOKENS} words and parentheses")
    if current is not root:
        line = source.line(current.at)
        found = f"the file ends inside the clause ({printable(current.name)} ...) of line {line}"
        raise InputError(source.fault(len(source.text), found, "it is cut short: export it again"))
    if len(root.clauses) > 1:
        raise _damaged(source, root.clauses[1].at, "a second clause after the end of the first")
    if root.words or root.values or not root.clauses:
        raise _damaged(source, 0, "text around the one clause that a netlist is")


def _bad_token(source: Source, offset: int) -> InputError:
    """The fault at a token that no rule takes: a quote that is not closed, or a text without end."""
    line_end = source.text.find("\n", offset)
    line = source.text[offset : line_end if line_end >= 0 else len(source.text)]
    if len(line) > MAX_TOKEN_CHARS:
        return _damaged(source, offset, f"a text longer than {MAX_TOKEN_CHARS} characters")
    found = f"a quoted text that does not end on its line: {shown(line)}"
    return InputError(source.fault(offset, found, 'close it with ", and write line breaks as \\n'))


def _damaged(source: Source, offset: int, found: str) -> InputError:
    return InputError(source.fault(offset, found, "the file is damaged: export it again"))
