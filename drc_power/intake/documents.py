"""From the bytes of a file to a record, with every fault of it at once."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from typing import TypeVar

from ..faults import Fault, InputError, Mark
from .not_built import not_built
from .record import Record
from .tree import MOST_FAULTS, tree_of

R = TypeVar("R", bound=Record)


def refuse(*groups: Iterable[Fault]) -> None:
    """Raise `InputError` with every fault once, in the order of the file; nothing happens if there is none."""
    faults = sorted({fault for group in groups for fault in group})
    if len(faults) > MOST_FAULTS:
        rest = Fault(Mark(faults[-1].mark.file), f"at least {len(faults) - MOST_FAULTS} more faults", "put these right first")
        faults = [*faults[:MOST_FAULTS], rest]
    if faults:
        raise InputError(*faults)


def record_from(
    cls: type[R], data: bytes, name: str, kind: str, further: Callable[[R], Iterable[Fault]] = lambda record: ()
) -> R:
    """The record of one file; `kind` is its row in `NOT_BUILT`, `further` finds faults in the finished record.

    Raises `InputError` with all of them.
    """
    root, faults = tree_of(data, name)
    faults += not_built(root, kind)
    try:
        record = cls.read(root)
    except InputError as error:
        refuse(faults, error.faults)
        raise
    refuse(faults, further(record))
    return record
