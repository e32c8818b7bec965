"""Reading values out of the clauses of a netlist, by the conventions that KiCad 4 to 10 share."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping

from drc_power.faults import InputError
from drc_power.netlist.sexpr import Clause
from drc_power.netlist.source import Source, shown

Inside = Mapping[str, list[Clause]]
"""The clauses inside one clause, by name."""

_TRUE_WORDS = frozenset({"1", "yes", "true"})


def plain(text: str) -> str:
    """A value without KiCad's way of writing an empty one, which is a lone `~`."""
    return "" if text == "~" else text


def text_of(inside: Inside, name: str) -> str:
    """The value of the first clause of that name, "" if there is none."""
    found = inside.get(name)
    return plain(found[0].text) if found else ""


def only_text_of(source: Source, inside: Inside, name: str) -> str:
    """As `text_of`, but InputError if the clause is written again with another value."""
    for again in inside.get(name, ())[1:]:
        if again.text != inside[name][0].text:
            raise contradiction(source, again, f"({name} ...)", inside[name][0].text, again.text)
    return text_of(inside, name)


def is_set(inside: Inside, name: str) -> bool:
    """Whether a mark such as `(dnp)` or `(dnp "yes")` is there and says yes."""
    return any(not clause.words or says_yes(clause.text) for clause in inside.get(name, ()))


def says_yes(text: str) -> bool:
    """Whether the value of a mark means yes."""
    return text.strip().casefold() in _TRUE_WORDS


def each(name: str, sections: Iterable[Clause]) -> Iterator[Clause]:
    """Every clause of that name directly inside any of the sections."""
    return (clause for section in sections for clause in section.clauses if clause.name == name)


def contradiction(source: Source, again: Clause, what: str, one: str, other: str) -> InputError:
    """The error for something written twice with different values."""
    found = f"{what} is written twice, as {shown(one)} and as {shown(other)}"
    return InputError(source.fault(again.at, found, "keep one of them in the schematic and export again"))
