"""Which note holds for which part: names, lists and globs laid over each other, and the schematic's own fields."""

from __future__ import annotations

import fnmatch
import functools
import re
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from ..faults import Fault, Mark
from .documents import refuse
from .notes import PartNote
from .record import Record, shorten
from .suggest import MOST_ADVISED, nearest
from .tree import Branch, tree_of_text
from .values import Quantity, Text

PREFIX = "Pwr."
"""How the names of schematic fields begin that this tool reads."""


def is_glob(pattern: str) -> bool:
    """Whether a pattern may name more than one part."""
    return any(sign in pattern for sign in "*?[")


@dataclass(frozen=True, slots=True)
class _Claim:
    """One pattern of one layer, the references it names, and its note."""

    pattern: Text
    refs: tuple[str, ...]
    note: PartNote


def expand(patterns: Iterable[Text], refs: Iterable[str]) -> tuple[dict[str, tuple[str, ...]], list[Fault]]:
    """The references that each name or glob stands for, and a fault for each that stands for none."""
    known = dict.fromkeys(refs)
    found: dict[str, tuple[str, ...]] = {}
    faults: list[Fault] = []
    for pattern in patterns:
        named = _named(pattern, known)
        found[pattern] = named
        if not named:
            advice = nearest(pattern, known) if len(faults) < MOST_ADVISED else ""
            faults.append(Fault(pattern.mark, f"{shorten(pattern)!r} names no part of the netlist", advice))
    return found, faults


def _named(pattern: str, known: Mapping[str, None]) -> tuple[str, ...]:
    if not is_glob(pattern):
        return (pattern,) if pattern in known else ()
    match = re.compile(fnmatch.translate(pattern)).match
    return tuple(ref for ref in known if match(ref))


def resolve(layers: Iterable[Mapping[str, PartNote]], refs: Iterable[str]) -> dict[str, PartNote]:
    """The merged note of every part that some layer names, later layers over earlier ones, in the order of `refs`.

    Within a layer exact beats glob. Raises `InputError` for a name or glob that fits no part, and for two of equal
    rank that set one key differently.
    """
    known = list(refs)
    faults: list[Fault] = []
    merged: dict[str, PartNote] = {}
    for layer in layers:
        claims = _claims(layer, known, faults)
        for ref, note in _resolved_layer(claims, faults).items():
            merged[ref] = note.over(merged[ref]) if ref in merged else note
    refuse(faults)
    return {ref: merged[ref] for ref in known if ref in merged}


def _claims(layer: Mapping[str, PartNote], known: list[str], faults: list[Fault]) -> list[_Claim]:
    claims = []
    for key, note in layer.items():
        mark = getattr(key, "mark", note.mark)
        patterns = [Text(word, mark) for word in key.split()]
        found, missing = expand(patterns, known)
        faults += missing
        claims += [_Claim(pattern, found[pattern], note) for pattern in patterns]
    return claims


def _resolved_layer(claims: list[_Claim], faults: list[Fault]) -> dict[str, PartNote]:
    """One layer's note per part: globs first, exact names over them."""
    notes: dict[str, PartNote] = {}
    for ref, group in _by_ref(claims).items():
        exact = [claim for claim in group if not is_glob(claim.pattern)]
        globs = [claim for claim in group if is_glob(claim.pattern)]
        settled = {key for claim in exact for key in claim.note.written}
        faults += [*_contradictions(ref, exact, set()), *_contradictions(ref, globs, settled)]
        notes[ref] = functools.reduce(lambda below, note: note.over(below), [claim.note for claim in (*globs, *exact)])
    return notes


def _by_ref(claims: list[_Claim]) -> dict[str, list[_Claim]]:
    groups: dict[str, list[_Claim]] = {}
    for claim in claims:
        for ref in claim.refs:
            groups.setdefault(ref, []).append(claim)
    return groups


def _contradictions(ref: str, group: list[_Claim], settled: set[str]) -> list[Fault]:
    """Keys that two patterns of equal rank set differently, besides those that are settled over them."""
    faults = []
    first: dict[str, _Claim] = {}
    for claim in group:
        for key in set(claim.note.written) - settled:
            other = first.setdefault(key, claim)
            if not same(getattr(claim.note, key), getattr(other.note, key)):
                found = f"{str(other.pattern)!r} and {str(claim.pattern)!r} both set {key} of {ref}, differently"
                faults.append(Fault(claim.note.source_of(key), found, f"give {ref} an entry of its own"))
    return faults


def same(a: Any, b: Any) -> bool:
    """Whether two values mean the same, wherever and however they were written."""
    if isinstance(a, Quantity) and isinstance(b, Quantity):
        return (a.span, a.dimension) == (b.span, b.dimension)
    if isinstance(a, Record) and isinstance(b, Record):
        return set(a.written) == set(b.written) and all(same(getattr(a, key), getattr(b, key)) for key in a.written)
    return a == b


def part_note_from_fields(fields: Mapping[str, str], mark: Mark) -> PartNote:
    """What the schematic says of a part in its fields `Pwr.device`, `Pwr.draws`, `Pwr.heat` ...; empty if nothing.

    `Pwr.heat` and `Pwr.pins` are written as in the file, `{sink: rail-sink}`. Raises `InputError` at `mark`.
    """
    branch = Branch(mark)
    for name, text in fields.items():
        if name.startswith(PREFIX) and text.strip():
            branch.put(Text(name.removeprefix(PREFIX), mark), _value_of_field(text.strip(), mark))
    return PartNote.read(branch) if branch else PartNote.of(mark)


def _value_of_field(text: str, mark: Mark) -> Any:
    return tree_of_text(text, mark) if text[0] in "{[" else Text(text, mark)


def lay_file_over_fields(ref: str, file: PartNote | None, fields: PartNote) -> tuple[PartNote, tuple[str, ...]]:
    """One note from both; the file wins, and each conflict gives a sentence that says so."""
    if file is None:
        return fields, ()
    return file.over(fields), tuple(_conflicts(ref, file, fields))


def _conflicts(ref: str, file: PartNote, fields: PartNote) -> Iterator[str]:
    for key in file.written:
        if key in fields.written and not same(getattr(file, key), getattr(fields, key)):
            yield f"{ref}: {key} in {file.source_of(key)} wins over the schematic's field {PREFIX}{key.rstrip('_')}"
