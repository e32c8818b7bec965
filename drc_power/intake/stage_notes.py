"""Records of what works together and of what happens: stages and events, with the keys that each kind takes."""

from collections.abc import Iterable
from typing import Annotated, Any, ClassVar

from pydantic_core import PydanticCustomError

from .fields import (
    Angle, Capacitance, Current, CurrentRating, Factor, Frequency, Inductance, Named, PowerRating, Ratio, Resistance,
    Share, Slew, Time, Voltage, Word, Words, one_of, quantity_from, read_word,
)
from .record import Reads, Record, complaint, unknown_keys
from .tree import Branch
from .values import Quantity, Text

STAGE_KEYS = {
    "buck": "chip high low inductor frequency dead_time",
    "boost": "chip high low inductor frequency dead_time",
    "half-bridge": "high low shunts load current frequency duty modulation power_factor dead_time",
    "three-phase": "high low shunts load current frequency duty modulation power_factor dead_time",
    "low-side": "switch load clamp frequency duty",
    "high-side": "switch load clamp frequency duty",
    "push-pull": "pair load phase",
    "or-ing": "parts controller",
    "hot-plug": "parts controller",
    "linear-pass": "parts controller",
    "load-switch": "parts controller",
    "rectifier": "bridge reservoir frequency",
}
"""The keys of each kind of stage."""


def _load_target(node: Any) -> Text | Quantity:
    begins_with_number = isinstance(node, Text) and node[:1].isdigit() and " " in node
    return quantity_from(node, "resistance") if begins_with_number or isinstance(node, Branch) else read_word(node)


class StageNote(Record):
    """A group of parts that work together; `STAGE_KEYS` has the keys that each kind takes.

    A key that names parts holds a tuple, of one part or several. `load` is a load's name or a resistance.
    """

    IS: ClassVar[str] = "a stage"
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset({"frequency", "duty", "dead_time", "modulation", "power_factor"})
    kind: Annotated[Text, one_of(*STAGE_KEYS)] | None = None
    chip: Words = ()
    high: Words = ()
    low: Words = ()
    switch: Words = ()
    pair: Words = ()
    parts: Words = ()
    controller: Words = ()
    inductor: Words = ()
    shunts: Words = ()
    clamp: Words = ()
    bridge: Words = ()
    reservoir: Words = ()
    load: Annotated[Text | Quantity, Reads(_load_target)] | None = None
    current: Current | None = None
    frequency: Frequency | None = None
    duty: Ratio | None = None
    dead_time: Time | None = None
    modulation: Factor | None = None
    power_factor: Share | None = None
    phase: Angle | None = None

    def complaints_for(self, kind: str) -> list[PydanticCustomError]:
        """The keys that a stage of this kind does not take."""
        return _foreign_keys(self, STAGE_KEYS[kind].split(), f"a {kind} stage")

    def complaints_between_keys(self) -> Iterable[PydanticCustomError]:
        return self.complaints_for(self.kind) if self.kind else ()


def _foreign_keys(record: Record, allowed: Iterable[str], what: str) -> list[PydanticCustomError]:
    keys = Branch(record.mark)
    for attribute in record.written:
        keys.put(Text(attribute.rstrip("_"), record.source_of(attribute)), Text("", record.source_of(attribute)))
    return unknown_keys(keys, ("kind", *allowed), what)


EVENT_KEYS = {
    "inrush": "capacitance slew limit power_limit resistance voltage charged_to with",
    "short": "net limit lasts",
    "stall": "load limit resistance lasts",
    "overload": "to lasts",
    "avalanche": "inductance current supply",
    "turn-off": "inductance current clamp",
    "pulse": "voltage current lasts shape",
    "surge": "current lasts",
    "waveform": "file columns scale",
}
"""The keys of each kind of event, besides `EVENT_KEYS_OF_ALL`."""

EVENTS_OF_A_LOAD = ("stall", "overload")
"""Kinds that need name no part: the load, or the mode, says which parts carry it."""

EVENT_KEYS_OF_ALL = ("kind", "part", "parts", "from", "every", "sharing")


def _clamp(node: Any) -> Text | Quantity:
    begins_with_number = isinstance(node, Text) and node[:1].isdigit()
    return quantity_from(node, "voltage") if begins_with_number or isinstance(node, Branch) else read_word(node)


class ColumnNames(Record):
    """The headings of a capture's columns."""

    IS: ClassVar[str] = "columns"
    time: Word | None = None
    voltage: Word | None = None
    current: Word | None = None


class EventNote(Record):
    """Something that happens now and then; `EVENT_KEYS` has the keys that each kind takes.

    Voltage and current are totals at the part. `clamp` is a part or a voltage. `from_` empty is every mode.
    """

    IS: ClassVar[str] = "an event"
    NEEDS: ClassVar[tuple[str, ...]] = ("kind",)
    kind: Annotated[Text, one_of(*EVENT_KEYS)] | None = None
    part: Word | None = None
    parts: Words = ()
    from_: Words = ()
    every: Time | None = None
    sharing: Annotated[Text, one_of("one", "even")] | None = None
    capacitance: Capacitance | None = None
    slew: Slew | None = None
    limit: CurrentRating | None = None
    power_limit: PowerRating | None = None
    resistance: Resistance | None = None
    voltage: Voltage | None = None
    charged_to: Voltage | None = None
    with_: Current | None = None
    net: Word | None = None
    load: Word | None = None
    lasts: Time | None = None
    to: Word | None = None
    inductance: Inductance | None = None
    current: Current | None = None
    supply: Voltage | None = None
    clamp: Annotated[Text | Quantity, Reads(_clamp)] | None = None
    shape: Annotated[Text, one_of("rectangle", "falling", "rising", "triangle", "half-sine")] | None = None
    file: Word | None = None
    columns: ColumnNames | None = None
    scale: Named[Factor] = {}

    def complaints_between_keys(self) -> Iterable[PydanticCustomError]:
        yield from _foreign_keys(self, (*EVENT_KEYS_OF_ALL, *EVENT_KEYS[self.kind].split()), f"an event of kind {self.kind}")
        if self.part and self.parts:
            yield complaint(self.source_of("parts"), "an event with part and parts", "give one of them")
        if not self.part and not self.parts and self.kind not in EVENTS_OF_A_LOAD:
            yield complaint(self.mark, f"an event of kind {self.kind} that names no part", "give part: or parts:")
