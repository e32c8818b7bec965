"""What a file names and the netlist does not have any more."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from drc_power.faults import Mark
from drc_power.intake.parts import expand
from drc_power.intake.tree import Branch, Row
from drc_power.intake.values import Text
from drc_power.netlist.model import Netlist
from drc_power.text import printable

_PLACES = {
    "net": ("grounds", "rails.*.return", "loads.*.net", "loads.*.return", "loads.*.between", "events.*.net"),
    "part": ("rails.*.source", "rails.*.held_by", "loads.*.heats", "events.*.part", "events.*.parts",
             *(f"stages.*.{key}" for key in "chip high low switch pair parts controller inductor shunts clamp bridge reservoir".split())),
    "pattern": ("outside.*.parts",),
}
"""Where names of nets and parts are values; `*` is any name or any place of a list. All hold inside `modes.*` as well."""

_KEYS = {"net": ("rails", "copper.tracks"), "pattern": ("parts",)}
"""Sections whose keys are names."""


def gone(root: Any, netlist: Netlist) -> Iterator[tuple[Mark, str]]:
    """Every name that stands for nothing, in the order of the file: its place, and what to say of it."""
    found = {(word.mark, what, str(word)) for what, word in _names(root) if not _is_there(what, word, netlist)}
    for mark, what, word in sorted(found):
        yield mark, f"the netlist has no {'net' if what == 'net' else 'part'} {printable(word)!r} any more"


def _is_there(what: str, word: Text, netlist: Netlist) -> bool:
    if what == "net":
        return netlist.net_named(word) is not None
    return word in netlist.parts if what == "part" else not expand([word], netlist.parts)[1]


def _names(root: Any) -> Iterator[tuple[str, Text]]:
    for prefix in ("", "modes.*."):
        for what, paths in _PLACES.items():
            for path in paths:
                yield from ((what, word) for node in _reached(root, f"{prefix}{path}".split(".")) for word in _words(node))
        for what, paths in _KEYS.items():
            for path in paths:
                for node in _reached(root, f"{prefix}{path}".split(".")):
                    for key in node if isinstance(node, Branch) else ():
                        yield from ((what, word) for word in ((key,) if what == "net" else _split(key)))


def _split(key: Text) -> Iterator[Text]:
    return (Text(word, key.mark) for word in key.split())


def _reached(node: Any, steps: list[str]) -> Iterator[Any]:
    if not steps:
        yield node
    elif isinstance(node, Branch):
        for key, below in node.items():
            if steps[0] in ("*", key):
                yield from _reached(below, steps[1:])
    elif isinstance(node, Row) and steps[0] == "*":
        for below in node:
            yield from _reached(below, steps[1:])


def _words(node: Any) -> Iterator[Text]:
    if isinstance(node, Row):
        yield from (word for word in node if isinstance(word, Text) and word)
    elif isinstance(node, Text) and node:
        yield node
