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
from drc_power.netlist.components import Component, read_components
from drc_power.netlist.foreign import not_a_netlist
from drc_power.netlist.joins import JoinedNames
from drc_power.netlist.model import Netlist, Part, Pin
from drc_power.netlist.natural import natural_key
from drc_power.netlist.nets import Connection, connections_of_parts, join_nets, joined_names, read_nets
from drc_power.netlist.sexpr import Clause, collector_paused, parse_clauses
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
        return _built(source, parse_clauses(source))


def _built(source: Source, export: Clause) -> Netlist:
    _need_sections(source, export)
    symbols = read_symbols(export.each_in("libparts", "libpart"))
    components = read_components(source, export.each_in("components", "comp"), symbols)
    written = read_nets(source, export.each_in("nets", "net"))
    connections = connections_of_parts(source, written, components)
    names = joined_names(source, connections, components)
    in_order = sorted(components, key=natural_key)
    return Netlist(
        path=source.path,
        sha256=source.sha256,
        **_heading(export),
        parts=MappingProxyType({ref: _part(components[ref], connections[ref], names) for ref in in_order}),
        nets=MappingProxyType(join_nets(source, written, names)),
    )


def _need_sections(source: Source, export: Clause) -> None:
    present = {clause.name for clause in export.clauses} | {name for name, _ in export.values}
    for name in _NEEDED_SECTIONS:
        if name not in present:
            found = f"the netlist has no ({name} ...) section"
            raise InputError(source.fault(export.at, found, "export the netlist again"))


def _heading(export: Clause) -> dict[str, str]:
    """Version, tool, source, and the title and revision of the first sheet."""
    design = next(iter(export.each("design")), Clause("design", 0))
    sheets = sorted(design.each("sheet"), key=lambda sheet: natural_key(sheet.value("number")))
    title_blocks = [title_block for sheet in sheets[:1] for title_block in sheet.each("title_block")]
    title_block = next(iter(title_blocks), Clause("title_block", 0))
    return {
        "version": export.value("version"),
        "tool": design.value("tool"),
        "source": design.value("source"),
        "title": title_block.value("title"),
        "revision": title_block.value("rev"),
    }


def _part(component: Component, connections: Mapping[str, list[Connection]], names: JoinedNames) -> Part:
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
