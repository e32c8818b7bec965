"""The nearest right name to a wrong one."""

from __future__ import annotations

import difflib
from collections.abc import Iterable


MOST_ADVISED = 20
"""Wrong names of one place that get a suggestion; looking for the nearest takes time."""


def nearest(wrong: str, right: Iterable[str]) -> str:
    """Advice for a misspelt name: the nearest right one, or the choice when there is none near.

    >>> nearest("drows", ["draws", "power"])
    "write 'draws'"
    >>> nearest("colour", ["draws", "power"])
    'choose from draws, power'
    """
    choice = list(dict.fromkeys(right))
    by_fold = {name.casefold().replace("-", "_"): name for name in choice}
    folded = wrong[:80].casefold().replace("-", "_")
    near = difflib.get_close_matches(folded, by_fold, n=1, cutoff=0.6 if len(folded) > 3 else 0.5)
    if near:
        return f"write {by_fold[near[0]]!r}"
    return _choice(choice)


def _choice(names: list[str], at_most: int = 20) -> str:
    if not names:
        return ""
    shown = ", ".join(names[:at_most])
    return f"choose from {shown}" + (f" and {len(names) - at_most} more" if len(names) > at_most else "")
