"""The text of an annotation file: all of it for a new one, or what is new put into the one that is there."""

from __future__ import annotations

import os
from collections.abc import Mapping, Sequence

from drc_power.draft.existing import DEVICE_FOLDER, Existing
from drc_power.draft.page import Page
from drc_power.draft.parts import outside_lines
from drc_power.draft.writing import BLANK, Entry, can_be_named, mapping, scalar
from drc_power.faults import Fault, InputError, Mark
from drc_power.intake.tree import tree_of
from drc_power.netlist.model import Netlist
from drc_power.survey.model import Survey
from drc_power.text import printable

Sections = Mapping[str, Sequence[Entry]]
"""Entries to write, by section."""

SUFFIXES = (".power.yaml", ".yaml", ".yml")

_MISSING = object()
_HEADER = """\
# First annotations, drafted from the netlist. What is blank (nothing after the colon) is yours to fill in; until then
# `drc-power check` calls it unproven, by name. Guesses and ratings in comments were read from names, values and
# descriptions, and nobody has verified them. Drafting again adds what is new and leaves every line of yours alone;
# what you put behind a # stays out."""
_INTRODUCED = {
    "rails": "voltage: as minimum .. typical .. maximum, or 5 V ± 2 %",
    "loads": "draws: a current; or power: or resistance: instead. A load whose line names a part stands for it",
    "stages": "a low-side or high-side switch that is on all the time has no frequency and no duty: take both out",
    "parts": "gate: the gate voltage; overshoot: ringing above the settled voltage; heat: {sink: NAME} or {to_ambient: 40 K/W}",
}


def stem(path: str) -> str:
    """A file's name without its folder and the ends that annotation files have.

    >>> stem("boards/fan.power.yaml"), stem("fan.txt")
    ('fan', 'fan.txt')
    """
    name = os.path.basename(path)
    return next((name[: -len(end)] for end in SUFFIXES if name.endswith(end) and name != end), name)


def beside(path: str, named: str) -> str:
    """A path as a file names it: from its own folder, with forward slashes. Raises InputError if no file can name it."""
    relative = os.path.relpath(named, os.path.dirname(path) or ".").replace(os.sep, "/")
    if not relative.isprintable():
        raise InputError(Fault(Mark(printable(named)), "a path that a file cannot hold", "rename it"))
    return relative


def whole_text(survey: Survey, netlist: Netlist, path: str, sections: Sections) -> str:
    """A new annotation file."""
    board = {"name": scalar(netlist.title if can_be_named(netlist.title) else stem(path))}
    if can_be_named(netlist.revision):
        board["revision"] = scalar(netlist.revision)
    grounds = [net for net in survey.grounds if can_be_named(net)]
    lines = [
        _HEADER, "format: 1", f"netlist: {scalar(beside(path, netlist.path))}", f"board: {mapping(board)}",
        "rules: [shipped/common-practice]   # and the house's own", f"devices: [{DEVICE_FOLDER}]",
        f"surroundings: {mapping({'ambient': BLANK})}   # the air around the board, minimum .. maximum",
        f"grounds: [{', '.join(map(scalar, grounds))}]" if grounds else "# grounds: [NET]   none was found",
    ]
    blocks = [block(name, entries) for name, entries in sections.items() if entries]
    blocks += outside_block(survey, Existing(path, None))
    return "\n".join(lines) + "\n" + "".join(f"\n{each}\n" for each in blocks)


def block(section: str, entries: Sequence[Entry]) -> str:
    """A section with its entries; one that has only comments reads as empty."""
    head = f"{section}:" + (f"   # {_INTRODUCED[section]}" if section in _INTRODUCED else "")
    return "\n".join([head, *(f"  {line}".rstrip() for entry in entries for line in entry.text.split("\n"))])


def outside_block(survey: Survey, existing: Existing) -> list[str]:
    """Suggestions of what to leave out, as comments, without those that a line of the file speaks of already."""
    said = [each for each in (existing.page.comments() if existing.page else ()) if "because:" in each.text]
    lines = outside_lines(survey, lambda ref: existing.is_outside(ref) or any(each.speaks_of(ref) for each in said))
    return ["\n".join(["# outside:   # parts deliberately left out, each with a reason; some to think about:", *lines])] if lines else []


def added_text(survey: Survey, netlist: Netlist, existing: Existing, sections: Sections) -> str:
    """The file that is there with what is new in it."""
    page = existing.page
    basic = {"format": "1", "netlist": scalar(beside(existing.path, netlist.path)), "devices": f"[{DEVICE_FOLDER}]"}
    missing = [f"{key}: {value}" for key, value in basic.items() if key not in page]
    blocks = ["\n".join(missing)] if missing else []
    blocks += [block(name, entries) for name, entries in sections.items() if entries and name not in page]
    blocks += outside_block(survey, existing)
    return inserted(page, {name: entries for name, entries in sections.items() if name in page}, blocks)


def inserted(page: Page, sections: Sections, blocks: Sequence[str]) -> str:
    """The page's text with more in it. Raises InputError if that changed the meaning of anything that was there."""
    text = page.insert(sections, blocks)
    meant, means = _meaning(page.text, page.path), _meaning(text, page.path)
    for section, entries in sections.items():
        there = means.get(section) or {}
        new = {entry.key: there.get(entry.key, _MISSING) for entry in entries if not entry.is_comment}
        meant[section] = {**(meant[section] or {}), **new} or None
    if {key: means.get(key) for key in meant} != meant:
        found = "there is no place in this file where more can be added without changing it"
        raise InputError(Fault(Mark(page.path), found, "write every section with one name to a line, then draft again"))
    return text


def _meaning(text: str, path: str) -> dict:
    """What a file says by key, None for an empty section; nothing if it is not right."""
    try:
        root, faults = tree_of(text.encode(), path)
    except InputError:
        return {}
    return {key: value or None for key, value in root.items()} if isinstance(root, dict) and not faults else {}
