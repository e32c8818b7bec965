"""Reading values out of the clauses of a netlist, by the conventions that KiCad 4 to 10 share."""

from __future__ import annotations

from drc_power.faults import InputError
from drc_power.netlist.sexpr import Clause
from drc_power.netlist.source import Source, shown

_YES = frozenset({"1", "yes", "true"})


def plain(text: str) -> str:
    """A value without KiCad's way of writing an empty one, which is a lone `~`."""
    return "" if text == "~" else text


def only_value(source: Source, clause: Clause, name: str) -> str:
    """As `clause.value(name)`, but InputError if it is written again with another value."""
    first, *others = [text for key, text in clause.values if key == name] or [""]
    for other in others:
        if other != first:
            raise contradiction(source, clause, f"({name} ...)", first, other)
    return first


def is_set(clause: Clause, mark: str) -> bool:
    """Whether a mark such as `(dnp)` or `(dnp "yes")` is there and says yes."""
    return any(key == mark and (not text or says_yes(text)) for key, text in clause.values)


def says_yes(text: str) -> bool:
    """Whether the value of a mark means yes."""
    return text.strip().casefold() in _YES


def contradiction(source: Source, where: Clause, what: str, one: str, other: str) -> InputError:
    """The error for something written twice with different values."""
    found = f"{what} is written twice, as {shown(one)} and as {shown(other)}"
    return InputError(source.fault(where.at, found, "keep one of them in the schematic and export again"))
