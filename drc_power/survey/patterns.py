"""Regular expressions written as lists of words, and compiled where they are first needed."""

from __future__ import annotations

import re
from functools import cache


def one_of(words: str) -> str:
    """The alternation of words that white space separates; each word is a regular expression of its own.

    >>> one_of("VCC VDD V[+-]")
    '(?:VCC|VDD|V[+-])'
    """
    return f"(?:{'|'.join(words.split())})"


@cache
def compiled(pattern: str) -> re.Pattern[str]:
    """The pattern, ignoring case; compiled where it is first needed, because start-up time counts."""
    return re.compile(pattern, re.IGNORECASE)
