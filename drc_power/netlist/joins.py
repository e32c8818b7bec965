"""Nets that jumper pins inside a part make one: KiCad 10 marks such pins in the part's symbol."""

from __future__ import annotations

from collections.abc import Iterable

from drc_power.netlist.natural import NaturalKey, natural_key

_AUTOMATIC = ("Net-(", "unconnected-(", "N-0000")
"""How the names begin that KiCad gives to nets nobody named."""


class JoinedNames:
    """Sets of names that mean the same net, each spoken for by one of them (union-find)."""

    def __init__(self) -> None:
        self._better: dict[str, str] = {}

    def join(self, names: Iterable[str]) -> None:
        """Make all the given names one net."""
        spokesman = None
        for name in names:
            found = self.spokesman(name)
            if spokesman is not None and found != spokesman:
                found, worse = sorted((found, spokesman), key=_preference)
                self._better[worse] = found
            spokesman = found

    def spokesman(self, name: str) -> str:
        """The name that stands for the net: one that somebody gave goes before an automatic one,
        one of the whole design before one of a sheet, and then the natural order decides."""
        better = self._better
        while name in better:
            better[name] = better.get(better[name], better[name])  # halves the way for the next
            name = better[name]
        return name


def _preference(name: str) -> tuple[bool, bool, NaturalKey]:
    return name.startswith(_AUTOMATIC), name.startswith("/"), natural_key(name)
