"""The order in which people list references and nets: R2 before R10, whatever the case."""

from __future__ import annotations

import re
from functools import lru_cache

_DIGITS = re.compile(r"([0-9]+)")

NaturalKey = tuple[tuple[str | tuple[int, str], ...], str]


@lru_cache(maxsize=1 << 16)
def natural_key(text: str) -> NaturalKey:
    """A sort key that compares runs of digits as numbers. Total: equal keys mean equal texts.

    >>> sorted(["R10", "r2", "R2", "R02"], key=natural_key)
    ['R02', 'R2', 'r2', 'R10']
    """
    pieces: list[str | tuple[int, str]] = list(_DIGITS.split(text.casefold()))
    for index in range(1, len(pieces), 2):
        digits = str(pieces[index]).lstrip("0")
        pieces[index] = (len(digits), digits)  # orders as the number does, at any length
    return tuple(pieces), text
