"""Pieces of YAML text: names in quotes where they need them, one-line mappings, and comments that stay comments."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from drc_power.text import printable, shorten

_PLAIN = re.compile(r"[A-Za-z][A-Za-z0-9_.-]*")
_READS_AS_MORE = frozenset({"null", "true", "false", "yes", "no", "on", "off", "y", "n"})
_LONGEST_NAME, _LONGEST_COMMENT = 200, 140
_ESCAPES = {'"': '\\"', "\\": "\\\\"}

BLANK = ""
"""The value of a key that is left for the user to fill in."""


@dataclass(frozen=True, slots=True)
class Entry:
    """One thing to write under a section.

    body: its lines without their indentation. key: its name in the section, "" if it is only a comment. names: parts
    and nets that whatever stands for it in the user's file speaks of. remark: the comment behind it, sign and all.
    """

    body: str
    key: str = ""
    names: frozenset[str] = frozenset()
    remark: str = ""

    @property
    def text(self) -> str:
        """What stands in the file."""
        return self.body + self.remark

    @property
    def is_comment(self) -> bool:
        """Whether the entry says something and sets nothing."""
        return not self.key

    @property
    def can_be_written(self) -> bool:
        """Whether there is something to write: a file cannot hold every name that a netlist can."""
        return bool(self.body)


def can_be_named(*names: str) -> bool:
    """Whether names can be written in a file at all: on one line, with nothing invisible, not endless, no merge sign."""
    return all(name.strip() and name.isprintable() and len(name) <= _LONGEST_NAME and name != "<<" for name in names)


def scalar(text: str) -> str:
    """A text as YAML takes it for just that text.

    >>> scalar("Q1"), scalar("+5V"), scalar("no"), scalar('say "x"')
    ('Q1', '"+5V"', '"no"', '"say \\\\"x\\\\""')
    """
    if _PLAIN.fullmatch(text) and text.casefold() not in _READS_AS_MORE:
        return text
    return '"' + "".join(_ESCAPES.get(c, c) for c in text) + '"'


def listed(names: Iterable[str]) -> str:
    """One name, or a list of them.

    >>> listed(["Q1"]), listed(["Q1", "Q2"])
    ('Q1', '[Q1, Q2]')
    """
    written = [scalar(name) for name in names]
    return written[0] if len(written) == 1 else f"[{', '.join(written)}]"


def mapping(values: Mapping[str, str]) -> str:
    """A one-line mapping of keys to text that is YAML already.

    >>> mapping({"voltage": BLANK, "source": "J1"}), mapping({"gate": BLANK})
    ('{voltage: , source: J1}', '{gate: }')
    """
    return "{" + ", ".join(f"{key}: {value}" for key, value in values.items()) + "}"


def remark(*texts: str) -> str:
    """A comment behind an entry, nothing if there is nothing to say."""
    words = "; ".join(text for text in texts if text)
    return f"   # {shorten(printable(words), _LONGEST_COMMENT)}" if words else ""


def entry(key: str, values: Mapping[str, str], *remarks: str, names: Iterable[str]) -> Entry:
    """An entry of one line; one without a body if no file can hold its names."""
    known, written = frozenset(names), mapping(values)
    if not can_be_named(key, *known) or not written.isprintable():
        return unwritable(known)
    return Entry(f"{scalar(key)}: {written}", key, known, remark(*remarks))


def commented(key: str, values: Mapping[str, str], *remarks: str, names: Iterable[str]) -> Entry:
    """The same as `entry`, taken out by a `#` in front."""
    active = entry(key, values, *remarks, names=names)
    return Entry(f"# {active.text}" if active.can_be_written else "", names=active.names)


def unwritable(names: Iterable[str]) -> Entry:
    """What stands for an entry whose names no file can hold."""
    return Entry("", names=frozenset(names))


def slug(text: str, otherwise: str = "part") -> str:
    """A name of small letters, digits and dashes.

    >>> slug("+24V_IN"), slug("LM317_TO-220"), slug("/Net (A)/"), slug("+")
    ('24v-in', 'lm317-to-220', 'net-a', 'part')
    """
    return re.sub(r"[^a-z0-9]+", "-", text.casefold())[:60].strip("-") or otherwise


def free_name(wanted: str, taken: set[str]) -> str:
    """A name that is not taken, which it then is."""
    number, name = 1, wanted
    while name in taken:
        number += 1
        name = f"{wanted}-{number}"
    taken.add(name)
    return name
