"""The `components` section: what each part is, before its pins' nets are known."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from types import MappingProxyType

from drc_power.faults import Fault, InputError
from drc_power.netlist.clauses import contradiction, is_set, only_value, plain, says_yes
from drc_power.netlist.model import Part
from drc_power.netlist.natural import natural_key
from drc_power.netlist.sexpr import Clause
from drc_power.netlist.source import Source, printable, shown
from drc_power.netlist.symbols import Jumpers, Symbol, Symbols, read_jumpers

_ANNOTATE = "annotate the schematic and export the netlist again"
_MARKS = ("dnp", "exclude_from_bom", "exclude_from_board", "exclude_from_sim")
_SHEET_FIELDS = frozenset({"Sheetname", "Sheetfile", "Sheet name", "Sheet file"})
_NOTHING = Clause("", 0)


@dataclass(frozen=True, slots=True)
class Component:
    """A part as its own clause and its symbol describe it, still without pins. `pins` gives
    (name, type) by number, `unit_of_pin` the unit of the pins that belong to one of several."""

    part: Part
    pins: Mapping[str, tuple[str, str]]
    jumpers: Jumpers
    unit_of_pin: Mapping[str, str]
    at: int


def read_components(source: Source, comps: Iterable[Clause], symbols: Symbols) -> dict[str, Component]:
    """The parts by reference, without power symbols (`#PWR1`), which are no parts.

    Raises InputError for a part without a reference and for a reference used for two parts."""
    components: dict[str, Component] = {}
    for comp in comps:
        ref = only_value(source, comp, "ref")
        if not ref:
            raise InputError(source.fault(comp.at, "a part without a reference", _ANNOTATE))
        if ref.startswith("#"):
            continue
        component = _component(source, ref, comp, symbols)
        known = components.setdefault(ref, component)
        if known is not component and not _same(known, component):
            raise InputError(_reused(source, known, component))
    return components


def _same(one: Component, other: Component) -> bool:
    return (replace(one.part, line=0), one.jumpers) == (replace(other.part, line=0), other.jumpers)


def _reused(source: Source, known: Component, again: Component) -> Fault:
    found = f"reference {shown(known.part.ref)} stands for two parts, the other at line {known.part.line}"
    return source.fault(again.at, found, _ANNOTATE)


def _component(source: Source, ref: str, comp: Clause, symbols: Symbols) -> Component:
    libsource, sheetpath = _one(comp, "libsource"), _one(comp, "sheetpath")
    library, name = libsource.value("lib"), libsource.value("part")
    symbol = symbols.get((library, name), Symbol())
    properties, marks = _properties(source, ref, comp)
    fields = _fields(source, ref, comp, properties)
    if fields.get("Sim.Enable") == "0":  # how KiCad 7 marks it
        marks.add("exclude_from_sim")
    descriptions = comp.value("description"), fields.get("Description"), libsource.value("description")
    units = comp.each_in("units", "unit")
    uuids = _uuids(comp)
    part = Part(
        ref=ref,
        value=plain(only_value(source, comp, "value")),
        footprint=only_value(source, comp, "footprint") or fields.get("Footprint", ""),
        library=library,
        symbol=name,
        description=next(filter(None, descriptions), symbol.description),
        keywords=properties.get("ki_keywords", ""),
        fields=MappingProxyType(fields),
        sheet=sheetpath.value("names") or "/",
        uuid=_uuid_path(sheetpath.value("tstamps"), uuids),
        uuids=uuids,
        units=tuple(sorted((unit.value("name") for unit in units), key=natural_key)),
        **{mark: mark in marks or is_set(comp, mark) for mark in _MARKS},
        line=source.line(comp.at),
    )
    return Component(part, symbol.pins, symbol.jumpers | read_jumpers(comp), _unit_of_pin(units), comp.at)


def _one(comp: Clause, name: str) -> Clause:
    return next((clause for clause in comp.clauses if clause.name == name), _NOTHING)


def _properties(source: Source, ref: str, comp: Clause) -> tuple[dict[str, str], set[str]]:
    """The part's own properties that are not empty, and the names of the marks that are set.

    A mark is a property without a value. KiCad lists the sheet's properties after the part's,
    `Sheetname` and `Sheetfile` first: what follows them says nothing about the part."""
    own: dict[str, str] = {}
    marks: set[str] = set()
    of_sheet = False
    for clause in comp.each("property"):
        values = dict(clause.values)
        name, value = values.get("name", ""), values.get("value")
        of_sheet = of_sheet or name in _SHEET_FIELDS
        if name in _MARKS and (value is None or says_yes(value)):
            marks.add(name)
        elif value and (not of_sheet or name.startswith("ki_")):
            _put(source, ref, own, clause, name, value)
    return own, marks


def _fields(source: Source, ref: str, comp: Clause, properties: Mapping[str, str]) -> dict[str, str]:
    """The part's fields in order of name: those under `fields`, then what only a property says."""
    fields: dict[str, str] = {}
    for clause in comp.each_in("fields", "field"):
        if name := clause.value("name"):
            _put(source, ref, fields, clause, name, plain(clause.text))
    own = {name: value for name, value in properties.items() if not name.startswith("ki_")}
    datasheet = plain(comp.value("datasheet"))
    written_apart = {"Datasheet": datasheet} if datasheet else {}
    return dict(sorted((written_apart | own | fields).items()))


def _put(source: Source, ref: str, known: dict[str, str], clause: Clause, name: str, value: str) -> None:
    if known.setdefault(name, value) != value:
        raise contradiction(source, clause, f"{printable(ref)}'s field {shown(name)}", known[name], value)


def _uuids(comp: Clause) -> tuple[str, ...]:
    """The UUIDs of the part's units, sorted: KiCad's own order follows the drawing."""
    stamps = (text for key, text in comp.values if key in ("tstamps", "tstamp"))
    return tuple(sorted({uuid for text in stamps for uuid in text.split()}))


def _uuid_path(sheet_uuids: str, uuids: tuple[str, ...]) -> str:
    return f"{sheet_uuids.rstrip('/')}/{uuids[0]}" if uuids else ""


def _unit_of_pin(units: Sequence[Clause]) -> dict[str, str]:
    """The unit of each pin, where there are several units and the pin belongs to one of them."""
    owners: dict[str, set[str]] = {}
    for unit in units if len(units) > 1 else ():
        for pin in unit.each_in("pins", "pin"):
            owners.setdefault(pin.value("num"), set()).add(unit.value("name"))
    return {pin: names.pop() for pin, names in owners.items() if len(names) == 1}
