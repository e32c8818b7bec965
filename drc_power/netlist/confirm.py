"""The second reader: the same file read again by kinparse, an independent library, and compared.

kinparse reads what KiCad 4 to 9 write. It is slow (minutes for a large board) and would decode files
as Latin-1, so it is given the decoded text. Its texts keep their escapes, and runs of blanks count
as one blank here because its parser expands tabs.
"""

from __future__ import annotations

import io
import warnings
from collections.abc import Iterator
from itertools import chain
from typing import Any

from drc_power.faults import Fault, InputError, Mark
from drc_power.netlist.clauses import plain
from drc_power.netlist.model import Netlist, Part
from drc_power.netlist.natural import natural_key
from drc_power.netlist.sexpr import unescape
from drc_power.netlist.source import Source, printable, read_source, shown

_REPORT = "one of the two readers is wrong: please report it with the netlist"
_UNREAD = "it reads what KiCad 4 to 9 write: check without the second reader, or export with one of these"

Difference = tuple[int, str]
"""The line of the file that it is about, and what differs."""


def confirm_netlist(netlist: Netlist) -> None:
    """Compare parts, values, footprints, fields and the pins of nets with what kinparse reads.

    Raises InputError at the first difference, and if kinparse cannot read the file or the file has
    changed since `netlist` was read."""
    source = read_source(netlist.path)
    if source.sha256 != netlist.sha256:
        raise InputError(Fault(Mark(netlist.path), "the file changed while it was read", "run the check again"))
    second = _read_again(source, netlist.tool)
    for line, difference in chain(_part_differences(netlist, second), _net_differences(netlist, second)):
        raise InputError(Fault(Mark(netlist.path, line), f"the second reader differs: {difference}", _REPORT))


def _read_again(source: Source, tool: str) -> Any:
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # kinparse calls its parser by names that are on their way out
        import kinparse

        try:
            return kinparse.parse_netlist(io.StringIO(source.text))
        except Exception as error:  # whatever it raises, it has not read the file
            written_by = f", which {printable(tool)} wrote" if tool else ""
            found = f"the second reader cannot read this netlist{written_by} ({type(error).__name__})"
            raise InputError(Fault(Mark(source.path), found, _UNREAD)) from None


def _part_differences(netlist: Netlist, second: Any) -> Iterator[Difference]:
    theirs = {ref: part for part in second.parts if not (ref := _raw(part.ref)).startswith("#")}
    for ref in sorted(theirs.keys() - netlist.parts.keys(), key=natural_key):
        yield 0, f"it finds a part {shown(ref)}, which is missing here"
    for ref, part in netlist.parts.items():
        if ref not in theirs:
            yield part.line, f"part {shown(ref)} is missing there"
            continue
        for what, here, there in _values(part, theirs[ref]):
            if _blanks(here) not in there:
                yield part.line, f"{what} of {printable(ref)} is {shown(here)} here and {_listed(there)} there"


def _values(part: Part, theirs: Any) -> Iterator[tuple[str, str, list[str]]]:
    """What is compared of a part: its name, the text here, and the texts there that agree with it."""
    own = {_blanks(name): value for name, value in part.fields.items()}
    fields = [(_raw(field.name), _text(field.value)) for field in theirs.fields]
    elsewhere = [(_raw(each.name), _text(each.value)) for each in theirs.properties]
    elsewhere.append(("Datasheet", _text(theirs.datasheet)))
    footprints = [_text(theirs.footprint)] if theirs.footprint else [v for n, v in fields if n == "Footprint"] or [""]
    yield "the value", part.value, [_text(theirs.value)]
    yield "the footprint", part.footprint, footprints
    for name, value in fields:
        yield f"field {shown(name)}", own.get(name, ""), [value]
    for name, value in own.items():
        yield f"field {shown(name)}", value, [v for n, v in fields + elsewhere if n == name]


def _net_differences(netlist: Netlist, second: Any) -> Iterator[Difference]:
    joined: dict[str, set[tuple[str, str]]] = {name: set() for name in netlist.nets}
    for net in second.nets:
        name = _raw(net.name) or f"N-00000{net.code}"
        known = netlist.net_named(name)
        if known is None:
            yield 0, f"it finds a net {shown(name)}, which is missing here"
            continue
        joined[known.name] |= {(_raw(pin.ref), _raw(pin.num)) for pin in net.pins if not pin.ref.startswith("#")}
    for name, net in netlist.nets.items():
        here = {(node.ref, node.pin) for node in net.nodes}
        for ref, pin in sorted(here ^ joined[name]):
            where = "here only" if (ref, pin) in here else "there only"
            yield net.line, f"pin {printable(pin)} of {printable(ref)} is on net {shown(name)} {where}"


def _listed(texts: list[str]) -> str:
    return " or ".join(shown(text) for text in texts) or "missing"


def _raw(text: str) -> str:
    return _blanks(unescape(text))


def _text(text: str) -> str:
    return plain(_raw(text))


def _blanks(text: str) -> str:
    return " ".join(text.split())
