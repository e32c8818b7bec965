"""Text of unknown origin as Markdown that shows it literally and does nothing else.

A name goes into a code span, because there no platform looks for markup, links, mentions or issue numbers. A sentence
stays a sentence, and only those of its words that could mean something to a platform go into a code span.
"""

from __future__ import annotations

import re
import string
from collections.abc import Iterable

from drc_power.text import printable, shorten

NAME_LIMIT = 48
SENTENCE_LIMIT = 600
_WORD_LIMIT = 64

_NEEDS_ENTITIES = re.compile(r"[`|]|^\s|\s$|\\$")
_ENTITIES = {ord(c): f"&#{ord(c)};" for c in string.punctuation}
# Some platforms make an address out of text around "@" even when it was written as an entity, but not across elements.
_ENTITIES[ord("@")] = "<span>&#64;</span>"

_RISKY = re.compile(
    r"""[`|<>\\&*_\[\]{}~@#$]|[!%][\w"\[]|:.*:|://|www\.|mailto:|xmpp:|\bGH-\d|^[0-9a-f]{7,40}$""", re.IGNORECASE
)
_LOOKS_LIKE_BLOCK = re.compile(r"[-+=]+|\d+[.)]")
_LONE = {"<": "&lt;", ">": "&gt;", "&": "&amp;", "|": "&#124;", "*": "&#42;"}
_CORE_AND_STOP = re.compile(r"(.*?)([.,;:]*)", re.DOTALL)


def code(text: str, limit: int = NAME_LIMIT) -> str:
    """A name as a code span that is safe in a table too, shortened in the middle; nothing at all shows as (no name).

    >>> code("Q3"), code("a|b")
    ('`Q3`', '<code>a&#124;b</code>')
    """
    shown = shorten(printable(text), limit)
    if not shown.strip():
        return "(no name)"
    if _NEEDS_ENTITIES.search(shown):
        return f"<code>{shown.translate(_ENTITIES)}</code>"
    return f"`{shown}`"


def prose(text: str, limit: int = SENTENCE_LIMIT) -> str:
    """A sentence as one line of Markdown text, safe in a table, a list and a paragraph; cut at the end when long.

    >>> prose("Net /A_B: ask @crew, 3 < 4")
    'Net `/A_B`: ask `@crew`, 3 &lt; 4'
    """
    words, length = [], 0
    for word in text.split():
        word = shorten(word, _WORD_LIMIT)
        length += len(word) + 1
        if length > limit + 1:
            words.append("…")
            break
        words.append(_word(printable(word)) if words else _first_word(printable(word)))
    return " ".join(words)


def _first_word(word: str) -> str:
    """A word where a line may start, and a dash or a number with a point would open a list."""
    if _LOOKS_LIKE_BLOCK.fullmatch(word):
        return "".join(f"\\{c}" if c in string.punctuation else c for c in word)
    return _word(word)


def _word(word: str) -> str:
    if word in _LONE:
        return _LONE[word]
    if not _RISKY.search(word):
        return word
    core, stop = _CORE_AND_STOP.fullmatch(word).groups()
    return code(core, _WORD_LIMIT) + stop if core else code(word, _WORD_LIMIT)


def table_row(cells: Iterable[str]) -> str:
    """One row of a table. The cells are Markdown already."""
    return f"| {' | '.join(cells)} |"


def table_head(**columns: str) -> list[str]:
    """The two lines that open a table; each column's alignment is "left" or "right"."""
    rules = {"left": "---", "right": "---:"}
    return [table_row(columns), table_row(rules[side] for side in columns.values())]


def folded(summary: str, lines: Iterable[str]) -> list[str]:
    """Lines that show only when the reader opens them. The summary is Markdown-free text of our own."""
    return ["<details>", f"<summary>{summary}</summary>", "", *lines, "", "</details>", ""]
