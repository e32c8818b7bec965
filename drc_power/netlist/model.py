"""What a netlist says, as immutable records. Nothing here knows what a part is for."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

_EMPTY: Mapping[str, str] = MappingProxyType({})


@dataclass(frozen=True, slots=True)
class Pin:
    """One pin of a part. `net` is the net's name as `Netlist.nets` knows it, "" if it is on none.

    `type` is KiCad's electrical type; a pin with a no-connect flag has `+no_connect` after it.
    `unit` is the unit of a multi-unit part that the pin belongs to, "" if unknown or shared."""

    number: str
    name: str = ""
    type: str = ""
    net: str = ""
    unit: str = ""


@dataclass(frozen=True, slots=True)
class Part:
    """One component. `uuids` are those of its units, sorted; `uuid` is the symbol's UUID path: the
    sheet's, then the first of `uuids`. `fields` are in order of name."""

    ref: str
    value: str = ""
    footprint: str = ""
    library: str = ""
    symbol: str = ""
    description: str = ""
    keywords: str = ""
    fields: Mapping[str, str] = field(default_factory=lambda: _EMPTY)
    sheet: str = "/"
    uuid: str = ""
    uuids: tuple[str, ...] = ()
    units: tuple[str, ...] = ()
    dnp: bool = False
    exclude_from_bom: bool = False
    exclude_from_board: bool = False
    exclude_from_sim: bool = False
    pins: tuple[Pin, ...] = ()
    line: int = 0

    def nets_of(self, *pin_numbers: str) -> tuple[str, ...]:
        """The distinct nets of the given pins (of all pins if none is given), in pin order."""
        wanted = [p.net for p in self.pins if p.net and (not pin_numbers or p.number in pin_numbers)]
        return tuple(dict.fromkeys(wanted))


@dataclass(frozen=True, slots=True)
class Node:
    """One pin as a net lists it."""

    ref: str
    pin: str


@dataclass(frozen=True, slots=True)
class Net:
    """One net. `aliases` holds the names of other nets joined to it by jumper pins inside a part."""

    name: str
    code: str = ""
    net_class: str = ""
    nodes: tuple[Node, ...] = ()
    aliases: tuple[str, ...] = ()
    line: int = 0


@dataclass(frozen=True, slots=True)
class Netlist:
    """A whole netlist. Parts and nets are in natural order of name, whatever the file's order."""

    path: str
    sha256: str
    version: str
    tool: str
    source: str
    title: str
    revision: str
    parts: Mapping[str, Part]
    nets: Mapping[str, Net]
    _net_by_alias: Mapping[str, Net] = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        by_alias = {alias: net for net in self.nets.values() for alias in net.aliases}
        object.__setattr__(self, "_net_by_alias", MappingProxyType(by_alias))

    def net_named(self, name: str) -> Net | None:
        """The net of that name or alias, or None."""
        return self.nets.get(name) or self._net_by_alias.get(name)
