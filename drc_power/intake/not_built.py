"""Keys of the contract that are not built yet: refused by name, never ignored. To build one, remove its row."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from ..faults import Fault, Mark
from .tree import Branch, Row
from .values import Text

NOT_BUILT: dict[str, dict[str, bool]] = {
    "annotations": {
        "copper.board": True,
    },
    "devices": {},
    "rules": {},
}
"""By kind of file: path of keys, `*` for any name, `=word` for one value, `=!word` for every other value.

Rows of `annotations` hold inside `modes.*` as well.
"""


def not_built(root: Any, kind: str) -> list[Fault]:
    """A fault for everything in the tree that the table refuses."""
    rows = [path for path, refused in NOT_BUILT[kind].items() if refused]
    if kind == "annotations":
        rows += [f"modes.*.{path}" for path in rows]
    return [
        Fault(mark, f"{text!r} is not supported yet", "leave it out")
        for path in rows
        for mark, text in _found(root, path.split("."))
    ]


def _found(node: Any, steps: list[str]) -> Iterator[tuple[Mark, str]]:
    """The places that a path leads to, each with what stands there."""
    key, _, value = steps[0].partition("=")
    for name, below in _children(node):
        if key not in ("*", name):
            continue
        if len(steps) > 1:
            yield from _found(below, steps[1:])
        elif not value:
            yield name.mark, str(name)
        elif isinstance(below, Text) and _is(below, value):
            yield below.mark, f"{name}: {below}"


def _children(node: Any) -> list[tuple[Text, Any]]:
    if isinstance(node, Branch):
        return list(node.items())
    return [(Text("", each.mark), each) for each in node] if isinstance(node, Row) else []


def _is(text: str, value: str) -> bool:
    return text != value[1:] if value.startswith("!") else text == value
