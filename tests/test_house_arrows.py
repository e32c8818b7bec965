"""The arrows of the house: which room may import which. The table stands in DEVELOPERS.md as well."""

from __future__ import annotations

import ast
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parents[1] / "drc_power"

MAY_IMPORT = {
    "faults": set(),
    "text": set(),
    "quantity": set(),
    "physics": set(),
    "netlist": {"faults", "text"},
    "survey": {"netlist", "text", "quantity"},
    "draft": {"survey", "intake", "netlist", "faults", "text", "quantity"},
    "intake": {"quantity", "faults", "text"},
    "board": {"quantity", "netlist", "survey", "intake", "faults", "text"},
    "solve": {"board", "physics", "quantity", "faults"},
    "checks": {"board", "solve", "physics", "findings", "faults", "text", "quantity"},
    "findings": {"text"},
    "report": {"findings", "faults", "text"},
}
"""Rooms and what they may import of ours; `run`, `cli` and `__main__` may import everything."""

HEAVY = {"scipy", "matplotlib", "jinja2", "kinparse", "pandas"}


def rooms_of(path: Path) -> str:
    return path.relative_to(PACKAGE).parts[0].removesuffix(".py")


def imports_of(path: Path, top_level_only: bool = False):
    tree = ast.parse(path.read_text())
    package = ("drc_power", *path.relative_to(PACKAGE).parts[:-1])
    for node in tree.body if top_level_only else ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from (name.name for name in node.names)
        elif isinstance(node, ast.ImportFrom):
            base = list(package[: len(package) - node.level + 1]) if node.level else []
            stem = ".".join([*base, node.module] if node.module else base)
            yield stem
            if stem == "drc_power":
                yield from (f"drc_power.{name.name}" for name in node.names)


FILES = sorted(PACKAGE.rglob("*.py"))


@pytest.mark.parametrize("path", FILES, ids=lambda p: str(p.relative_to(PACKAGE)))
def test_rooms_import_only_what_their_row_allows(path):
    room = rooms_of(path)
    if room not in MAY_IMPORT:
        return
    wanted = {name.split(".")[1] for name in imports_of(path) if name.startswith("drc_power.")} - {"__version__"}
    assert wanted - {room} <= MAY_IMPORT[room]


@pytest.mark.parametrize("path", FILES, ids=lambda p: str(p.relative_to(PACKAGE)))
def test_heavy_libraries_are_imported_late(path):
    assert not {name.split(".")[0] for name in imports_of(path, top_level_only=True)} & HEAVY


def test_every_room_has_a_row():
    rooms = {rooms_of(path) for path in FILES} - {"__init__", "__main__", "cli", "run", "sizing", "charting"}
    assert rooms <= MAY_IMPORT.keys()
