"""Records of the annotation file: what the netlist cannot know. Attributes mirror its keys."""

from collections.abc import Iterable
from typing import Annotated, Any, ClassVar

from pydantic import BeforeValidator, Field
from pydantic_core import PydanticCustomError

from .fields import (
    ENDS, Altitude, Area, Count, Current, CurrentRating, Files, Flag, Frequency, HeatCapacity, Length, Listed, Named, Power, Ratio,
    Resistance, ResistanceAboveZero, Share, Temperature, TemperatureRise, ThermalConductivity, ThermalResistance, Voltage,
    VoltageMagnitude, Word, Words, one_of, quantity_from, read_word, reader,
)
from .record import Reads, Record, complaint
from .stage_notes import EventNote, StageNote
from .tree import Blank, Branch, Row
from .values import Quantity, Text


class EnclosureNote(Record):
    """A box around the board: the rise of its air given, or the box described."""

    IS: ClassVar[str] = "an enclosure"
    rise: TemperatureRise | None = None
    sealed: Flag | None = None
    faces: Area | None = None
    vents: Area | None = None

    def complaints_between_keys(self) -> Iterable[PydanticCustomError]:
        if self.rise is not None and (self.faces is not None or self.vents is not None or self.sealed):
            yield complaint(self.source_of("rise"), "an enclosure with a rise and a description", "give one of them")
        if self.sealed and self.vents is not None:
            yield complaint(self.source_of("sealed"), "a sealed enclosure with vents", "leave one of them out")
        if self.rise is None and self.faces is None and self.vents is None:
            yield complaint(self.mark, "an enclosure that nothing leaves", "write rise: 10 K, or faces: 600 cm², or vents: 20 cm²")


def _air(node: Any) -> Text | Quantity:
    return read_word(node) if node == "still" else reader("speed", above=0)(node)


class Surroundings(Record):
    """The air that the board stands in. `air` is the text "still" or a speed."""

    IS: ClassVar[str] = "surroundings"
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset({"ambient"})
    ambient: Temperature | None = None
    altitude: Altitude | None = None
    air: Annotated[Text | Quantity, Reads(_air)] | None = None
    enclosure: EnclosureNote | None = None


class BoardNote(Record):
    """What the board is called."""

    IS: ClassVar[str] = "a board"
    name: Word | None = None
    revision: Word | None = None


class RailNote(Record):
    """One rail. `source` names the parts that feed it; left out, it is held by the regulator that drives it."""

    IS: ClassVar[str] = "a rail"
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset({"voltage", "ac", "frequency"})
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

DEMANDS_OF_A_MOTOR = ("draws", "power")
"""The same of a motor whose `resistance` is given for a stall."""


class LoadNote(Record):
    """One load. Exactly one of `draws`, `power`, `resistance` is set or blank; `kind: motor` may add `resistance`."""

    IS: ClassVar[str] = "a load"
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset(DEMANDS)
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

    @property
    def lacks_demand(self) -> bool:
        """Whether what the load takes is left to be filled in; a stalled motor's resistance alone does not fill it in."""
        given = set(self.demands) - ({"resistance"} if self.is_motor else set())
        return bool(self.blank & set(DEMANDS)) and not given

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
    interface: Annotated[Quantity | InterfaceNote, Reads(_interface)] | None = None
    copper: Word | None = None
    to_ambient: ThermalResistance | None = None
    case: Temperature | None = None


class PartNote(Record):
    """What the file says of one part. After `resolve_parts`, merged from every pattern that fits."""

    IS: ClassVar[str] = "a part"
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset({"device", "gate", "overshoot"})
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


MATERIALS = ("aluminium", "aluminum", "copper", "brass", "steel", "stainless steel", "zinc")

GEOMETRY = ("fins", "height", "length", "thickness", "spacing", "base", "width", "material", "emissivity", "faces")
"""The keys that say how a heat sink is made."""

FITS_WITHIN = 0.02
"""By how much of its width fins may outgrow their base, for rounded dimensions."""


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
    material: Annotated[Text, one_of(*MATERIALS)] | None = None
    emissivity: Share | None = None
    faces: Annotated[Text, one_of("vertical", "horizontal", "up", "down")] | None = None

    @property
    def is_geometry(self) -> bool:
        """Whether any key says how it is made."""
        return any(getattr(self, key) is not None for key in GEOMETRY)

    def complaints_between_keys(self) -> Iterable[PydanticCustomError]:
        if self.resistance is not None and self.is_geometry:
            yield complaint(self.source_of("resistance"), "a sink with a resistance and a geometry", "give one of them")
        if self.fins is not None and not self.fins.span.is_exact:
            yield complaint(self.source_of("fins"), f"{self.fins.text!r} fins", "write one whole number")
        elif self.fins is not None and self.fins.typ < 2:
            yield complaint(self.source_of("fins"), "a sink of one fin", "two fins at least make a gap")
        if None not in (self.fins, self.thickness, self.spacing, self.width):
            n, fin, gap = self.fins.typ, self.thickness.min, self.spacing.min
            if n * fin + (n - 1) * gap > self.width.max * (1 + FITS_WITHIN):
                found = f"{n:g} fins and their gaps take {1e3 * (n * fin + (n - 1) * gap):.4g} mm of a base {self.width.text} wide"
                yield complaint(self.source_of("width"), found, "check fins, thickness, spacing and width")


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
    NEEDS: ClassVar[tuple[str, ...]] = ("width",)
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
    is_span = isinstance(node, Branch) and node and set(node) <= {*ENDS, "source"}
    if isinstance(node, Blank) or not (isinstance(node, Text) or is_span):
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
    rules: Files = ()
    devices: Files = ()
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
