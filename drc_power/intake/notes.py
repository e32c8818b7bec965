"""Records of the annotation file: what the netlist cannot know. Attributes mirror its keys."""

from collections.abc import Iterable
from typing import Annotated, Any, ClassVar

from pydantic import BeforeValidator, Field, PlainValidator
from pydantic_core import PydanticCustomError

from .fields import (
    Altitude, Angle, Area, Capacitance, Count, Current, CurrentRating, Factor, Flag, Frequency, HeatCapacity, Inductance,
    Length, Listed, Named, Power, PowerRating, Ratio, Resistance, ResistanceAboveZero, Share, Slew, Temperature,
    TemperatureRise, ThermalConductivity, ThermalResistance, Time, Voltage, VoltageMagnitude, Word, Words,
    one_of, quantity_from, read_word, reader,
)
from .record import Record, complaint, unknown_keys
from .tree import Blank, Branch, Row
from .values import Quantity, Text


class EnclosureNote(Record):
    """A box around the board: the rise of its air given, or the box described."""

    IS: ClassVar[str] = "an enclosure"
    rise: TemperatureRise | None = None
    sealed: Flag | None = None
    faces: Area | None = None
    vents: Area | None = None


def _air(node: Any) -> Text | Quantity:
    return read_word(node) if node == "still" else reader("speed", above=0)(node)


class Surroundings(Record):
    """The air that the board stands in. `air` is the text "still" or a speed."""

    IS: ClassVar[str] = "surroundings"
    ambient: Temperature | None = None
    altitude: Altitude | None = None
    air: Annotated[Text | Quantity, PlainValidator(_air)] | None = None
    enclosure: EnclosureNote | None = None


class BoardNote(Record):
    """What the board is called."""

    IS: ClassVar[str] = "a board"
    name: Word | None = None
    revision: Word | None = None


class RailNote(Record):
    """One rail. `source` names the parts that feed it; left out, it is held by the regulator that drives it."""

    IS: ClassVar[str] = "a rail"
    voltage: Voltage | None = None
    source: Words = ()
    return_: Word | None = None
    resistance: Resistance | None = None
    limit: CurrentRating | None = None
    ac: VoltageMagnitude | None = None
    frequency: Frequency | None = None
    held_by: Word | None = None


DEMANDS = ("draws", "power", "resistance")
"""The keys that say what a load takes: exactly one is given."""


class LoadNote(Record):
    """One load. Exactly one of `draws`, `power`, `resistance` is set; `kind: motor` may add `resistance`."""

    IS: ClassVar[str] = "a load"
    net: Word | None = None
    between: Words = ()
    return_: Word | None = None
    draws: Current | None = None
    power: Power | None = None
    resistance: ResistanceAboveZero | None = None
    kind: Annotated[Text, one_of("motor")] | None = None
    needs: Voltage | None = None
    heats: Word | None = None

    @property
    def is_motor(self) -> bool:
        """Whether `resistance` may stand beside a demand, for the stalled motor."""
        return self.kind == "motor"

    @property
    def demands(self) -> tuple[str, ...]:
        """The keys that say what the load takes; a motor's resistance is one only where no other is given."""
        given = tuple(key for key in DEMANDS if getattr(self, key) is not None)
        return given[:1] if self.is_motor and given[1:] == ("resistance",) else given

    def complaints_between_keys(self) -> Iterable[PydanticCustomError]:
        if len(self.demands) > 1:
            yield complaint(self.mark, f"a load with {' and '.join(self.demands)}", "give one of draws, power, resistance")
        if self.net and self.between:
            yield complaint(self.source_of("between"), "a load with net and between", "give one of them")
        if len(self.between) == 1:
            yield complaint(self.source_of("between"), "a load between one net alone", "write between: [A, B]")


class InterfaceNote(Record):
    """A pad between case and sink, by what it is made of."""

    IS: ClassVar[str] = "an interface"
    NEEDS: ClassVar[tuple[str, ...]] = ("thickness", "conductivity", "area")
    thickness: Length | None = None
    conductivity: ThermalConductivity | None = None
    area: Area | None = None


def _interface(node: Any) -> Any:
    made_of = isinstance(node, Branch) and not set(node) & {"min", "typ", "max"}
    return InterfaceNote.model_validate(node) if made_of else reader("thermal_resistance", least=0)(node)


class HeatNote(Record):
    """The way the heat takes, from the part outward. `interface` is a `Quantity` or an `InterfaceNote`."""

    IS: ClassVar[str] = "heat"
    sink: Word | None = None
    interface: Annotated[Quantity | InterfaceNote, PlainValidator(_interface)] | None = None
    copper: Word | None = None
    to_ambient: ThermalResistance | None = None
    case: Temperature | None = None


class PartNote(Record):
    """What the file says of one part. After `resolve_parts`, merged from every pattern that fits."""

    IS: ClassVar[str] = "a part"
    device: Word | None = None
    resistance: Resistance | None = None
    state: Annotated[Text, one_of("conducting", "blocked", "switching", "linear")] | None = None
    duty: Ratio | None = None
    frequency: Frequency | None = None
    gate: Voltage | None = None
    overshoot: VoltageMagnitude | None = None
    pins: Named[Words] = {}
    heat: HeatNote | None = None
    draws: Current | None = None
    fitted: Flag | None = None


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
    load: Annotated[Text | Quantity, PlainValidator(_load_target)] | None = None
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
    clamp: Annotated[Text | Quantity, PlainValidator(_clamp)] | None = None
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


class SinkNote(Record):
    """A heat sink, by its resistance or by its geometry."""

    IS: ClassVar[str] = "a sink"
    resistance: ThermalResistance | None = None
    capacity: HeatCapacity | None = None
    fins: Count | None = None
    height: Length | None = None
    length: Length | None = None
    thickness: Length | None = None
    spacing: Length | None = None
    base: Length | None = None
    width: Length | None = None
    material: Word | None = None
    emissivity: Share | None = None
    faces: Annotated[Text, one_of("vertical", "horizontal", "up", "down")] | None = None


class ViasNote(Record):
    """Vias of one kind, side by side."""

    IS: ClassVar[str] = "vias"
    count: Count | None = None
    drill: Length | None = None
    plating: Length | None = None


class PatchNote(Record):
    """Copper under a part that carries heat; `area` is per layer."""

    IS: ClassVar[str] = "a patch"
    area: Area | None = None
    thickness: Length | None = None
    layers: Count | None = None
    vias: ViasNote | None = None


class TrackNote(Record):
    """One stretch of copper of a net; `to` is the part it leads to where a net has several."""

    IS: ClassVar[str] = "a track"
    width: Length | None = None
    thickness: Length | None = None
    layer: Annotated[Text, one_of("outer", "inner")] | None = None
    length: Length | None = None
    to: Word | None = None
    vias: ViasNote | None = None


def _as_list(node: Any) -> Any:
    return node if isinstance(node, Row) else [node]


class CopperNote(Record):
    """The board's copper: a board file to read it from, patches by name, tracks by net."""

    IS: ClassVar[str] = "copper"
    board: Word | None = None
    patches: Named[PatchNote] = {}
    tracks: Named[Annotated[tuple[TrackNote, ...], BeforeValidator(_as_list)]] = {}


class OutsideNote(Record):
    """Parts deliberately left out, as names and globs, and why."""

    IS: ClassVar[str] = "an entry of outside"
    NEEDS: ClassVar[tuple[str, ...]] = ("parts", "because")
    parts: Words = ()
    because: Word | None = None


def _load_in_mode(node: Any) -> Any:
    """In a mode a bare quantity means draws, power or resistance by its unit."""
    if not isinstance(node, Text) or isinstance(node, Blank):
        return node
    key = {"current": "draws", "power": "power", "resistance": "resistance"}
    branch = Branch(node.mark)
    branch.put(Text(key[quantity_from(node, *key).dimension], node.mark), node)
    return branch


class ModeNote(Record):
    """One steady operating condition as written: only what it changes. See `Annotations.in_mode`."""

    IS: ClassVar[str] = "a mode"
    like: Word | None = None
    rails: Named[RailNote] = {}
    loads: Named[Annotated[LoadNote, BeforeValidator(_load_in_mode)]] = {}
    parts: Named[PartNote] = {}
    stages: Named[StageNote] = {}
    surroundings: Surroundings | None = None


class AnnotationFile(Record):
    """The whole file."""

    IS: ClassVar[str] = "an annotation file"
    NEEDS: ClassVar[tuple[str, ...]] = ("format", "netlist")
    format: Annotated[Text, one_of("1")] | None = None
    netlist: Word | None = None
    board: BoardNote | None = None
    rules: Words = ()
    devices: Words = ()
    waivers: Word | None = None
    surroundings: Surroundings = Field(default_factory=Surroundings.of)
    grounds: Words | None = None
    rails: Named[RailNote] = {}
    loads: Named[LoadNote] = {}
    modes: Named[ModeNote] = {}
    parts: Named[PartNote] = {}
    stages: Named[StageNote] = {}
    events: Named[EventNote] = {}
    sinks: Named[SinkNote] = {}
    copper: CopperNote | None = None
    outside: Listed[OutsideNote] = ()
