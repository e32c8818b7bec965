"""Naming what a file is when it is not the netlist that was asked for."""

from __future__ import annotations

import os
import re

from drc_power.faults import Fault
from drc_power.netlist.source import Source, shown

_FIRST_NAME = re.compile(r"(?:\s|^[ \t]*#.*$)*+\(\s*+([^\s()]*+)", re.MULTILINE)

_BY_FIRST_NAME = {
    "kicad_sch": "a KiCad schematic",
    "kicad_pcb": "a KiCad board",
    "kicad_symbol_lib": "a KiCad symbol library",
    "kicad_wks": "a KiCad drawing sheet",
    "footprint": "a KiCad footprint",
    "module": "a KiCad footprint",
    "{": "a netlist in the format of KiCad before version 4",
}

_BY_BEGINNING = (
    (r"<\?xml|<export", "an XML file, such as KiCad's intermediate netlist"),
    (r"EESchema Schematic", "a schematic of KiCad 5 or older"),
    (r"# EESchema Netlist", "a netlist in the format of KiCad before version 4"),
    (r"PK\x03\x04", "a ZIP archive"),
    (r"[{\[]", "a JSON file"),
    (r"[.*]", "a SPICE netlist"),
)


def not_a_netlist(source: Source) -> Fault | None:
    """The fault that says what the file looks like, or None if it begins as a netlist does."""
    beginning = source.text.lstrip()
    if not beginning:
        return source.fault(0, "the file is empty", _export_line(source.path))
    for pattern, kind in _BY_BEGINNING:
        if re.match(pattern, beginning):
            return source.fault(0, f"this is {kind}, not a netlist", _export_line(source.path))
    first = _FIRST_NAME.match(source.text)
    if first and first[1] == "export":
        return None
    if first and (kind := _BY_FIRST_NAME.get(first[1])):
        return source.fault(first.start(1), f"this is {kind}, not a netlist", _export_line(source.path))
    found = f"this is not a netlist: it begins with {shown(beginning.split(maxsplit=1)[0])}"
    return source.fault(len(source.text) - len(beginning), found, _export_line(source.path))


def _export_line(path: str) -> str:
    stem = os.path.splitext(os.path.basename(path))[0] or "NAME"
    return f"export one with: kicad-cli sch export netlist -o {stem}.net {stem}.kicad_sch"
