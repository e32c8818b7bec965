"""Reading a KiCad netlist, as KiCad 4 to 10 export it (versions D and E), into a `Netlist`.

    source.py ─► sexpr.py ─► symbols.py, components.py, nets.py (with joins.py) ─► here
"""

from __future__ import annotations

import hashlib
import os
from collections.abc import Mapping, Sequence
from dataclasses import replace
from types import MappingProxyType

from drc_power.faults import InputError
from drc_power.netlist.clauses import Inside, text_of
from drc_power.netlist.components import Component, read_components
from drc_power.netlist.foreign import not_a_netlist
from drc_power.netlist.joins import JoinedNames
from drc_power.netlist.model import Netlist, Part, Pin
from drc_power.netlist.natural import natural_key
from drc_power.netlist.nets import Connection, connections_of_parts, join_nets, joined_names, read_nets
from drc_power.netlist.sexpr import collector_paused, parse_clauses
from drc_power.netlist.source import Source, read_source
from drc_power.netlist.symbols import read_symbols

_NEEDED_SECTIONS = ("components", "nets")


def read_netlist(path: str | os.PathLike[str]) -> Netlist:
    """Read a netlist file. Raises InputError, with file, line and column, for whatever is wrong with it."""
    return _netlist(read_source(path))


def parse_netlist(text: str, path: str, sha256: str = "") -> Netlist:
    """Read a netlist from its text. `path` is what faults name; the SHA-256 is the text's own if not given."""
    digest = sha256 or hashlib.sha256(text.encode("utf-8", "surrogatepass")).hexdigest()
    return _netlist(Source(path, text, digest))


def _netlist(source: Source) -> Netlist:
    if fault := not_a_netlist(source):
        raise InputError(fault)
    with collector_paused():
        sections = parse_clauses(source).by_name()
        for name in _NEEDED_SECTIONS:
            if name not in sections:
                raise InputError(source.fault(0, f"the netlist has no ({name} ...)", "export it again"))
        components = read_components(source, sections["components"], read_symbols(sections.get("libparts", ())))
        written = read_nets(source, sections["nets"])
        connections = connections_of_parts(source, written, components)
        names = joined_names(source, connections, components)
        parts = {
            ref: _with_pins(components[ref], connections[ref], names) for ref in sorted(components, key=natural_key)
        }
        return Netlist(
            path=source.path,
            sha256=source.sha256,
            **_heading(sections),
            parts=MappingProxyType(parts),
            nets=MappingProxyType(join_nets(source, written, names)),
        )


def _heading(sections: Inside) -> dict[str, str]:
    """Version, tool, source, and the title and revision of the first sheet."""
    design = next((clause.by_name() for clause in sections.get("design", ())), {})
    sheets = (sheet.by_name() for sheet in design.get("sheet", ()))
    first = min(sheets, key=lambda sheet: natural_key(text_of(sheet, "number")), default={})
    title_block = next((clause.by_name() for clause in first.get("title_block", ())), {})
    return {
        "version": text_of(sections, "version"),
        "tool": text_of(design, "tool"),
        "source": text_of(design, "source"),
        "title": text_of(title_block, "title"),
        "revision": text_of(title_block, "rev"),
    }


def _with_pins(component: Component, connections: Mapping[str, list[Connection]], names: JoinedNames) -> Part:
    """The part with the pins that its symbol has and those that nets name, in natural order."""
    numbers = sorted({*component.pins, *connections}, key=natural_key)
    return replace(component.part, pins=tuple(_pin(component, n, connections.get(n, ()), names) for n in numbers))


def _pin(component: Component, number: str, on_pin: Sequence[Connection], names: JoinedNames) -> Pin:
    name, electrical_type = component.pins.get(number, ("", ""))
    unit = component.unit_of_pin.get(number, "")
    if not on_pin:
        return Pin(number, name, electrical_type, unit=unit)
    said = min(on_pin, key=lambda connection: (connection.function, connection.type))
    function = name if said.function in _plain_functions(component, number) else said.function
    return Pin(number, function, said.type or electrical_type, names.spokesman(said.net), unit)


def _plain_functions(component: Component, number: str) -> tuple[str, ...]:
    """What a net says of a pin's function when it says no more than the symbol does: nothing, or,
    since KiCad 10, the pin's name with its number after it."""
    if number not in component.pins:
        return ("",)
    name, _ = component.pins[number]
    return "", f"{name}_{number}" if name else number
