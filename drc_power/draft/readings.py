"""What the schematic itself says of a part's ratings: hints beside the blanks, never values."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass

from drc_power.netlist.model import Part

_NUMBER = re.compile(
    r"(?<![\w.,-])-?(?P<number>\d+(?:[.,]\d+)?)\s?(?P<unit>[kmuµ]?(?:V|A|W|Ω)|[kmuµ]?[Oo]hms?|m?R)(?P<what>\s(?:V[A-Za-z]{2,4}|I[A-Za-z]{1,3}|R[A-Za-z()]{2,7}))?(?![\w])")
_FIELDS = re.compile(r"volt|power|current|rating|watt|amp", re.IGNORECASE)
_UNIT = {"V": "V", "A": "A", "W": "W", "Ω": "ohm", "m": "ohm", "s": "ohm", "R": "ohm"}
_MOST = 3


@dataclass(frozen=True, slots=True)
class Reading:
    """A number as the schematic writes it, what it measures (V, A, W, ohm), and where it stands."""

    text: str
    unit: str
    place: str


def readings_of(part: Part) -> tuple[Reading, ...]:
    """The numbers with a unit in a part's value, in fields named as ratings, and in its description.

    >>> [r.text for r in readings_of(Part("Q1", description="33A Id, 100V Vds, N-Channel MOSFET, TO-220"))]
    ['33A Id', '100V Vds']
    """
    found = [reading for place, text in _places(part) for reading in _read(text, place)]
    return tuple({(reading.text, reading.unit): reading for reading in reversed(found)}.values())[::-1]


def _places(part: Part) -> Iterator[tuple[str, str]]:
    yield "value", part.value
    yield from ((f"field {name}", text) for name, text in part.fields.items() if _FIELDS.search(name))
    yield "description", part.description


def _read(text: str, place: str) -> Iterator[Reading]:
    for match in list(_NUMBER.finditer(re.sub(r"[/;_=|]", " ", text)))[:_MOST]:
        yield Reading(match[0].strip(), _UNIT[match["unit"][-1]], place)


def told(readings: tuple[Reading, ...]) -> str:
    """The readings as the end of a remark, each place named once."""
    places = dict.fromkeys(reading.place for reading in readings)
    words = [f"{', '.join(r.text for r in readings if r.place == place)} ({place})" for place in places]
    return f"unverified: {', '.join(words)}" if words else ""
