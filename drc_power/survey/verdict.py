"""What the survey decides about one conduit: a group on the power path, or the reason why it is only signal."""

from __future__ import annotations

from typing import NamedTuple


class Verdict(NamedTuple):
    """`group` is pass, switch, clamp or load; "" means signal, and then the first of `because` is the reason."""

    group: str
    because: tuple[str, ...]
    confidence: float = 0.9

    @property
    def on_path(self) -> bool:
        return bool(self.group)


def signal(reason: str) -> Verdict:
    """Not on a power path, and why."""
    return Verdict("", (reason,))
