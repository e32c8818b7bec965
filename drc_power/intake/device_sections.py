"""The sections of device data that say how a part behaves: conduction, gate, charge, heat, safe area."""

from collections.abc import Callable, Iterable, Mapping
from typing import Annotated, Any, ClassVar, TypeVar

from pydantic_core import PydanticCustomError

from .fields import (
    Charge, Current, CurrentRating, EdgeTime, Factor, HeatCapacity, Resistance, TemperatureCoefficient,
    ThermalResistanceAboveZero, Voltage, VoltageCoefficient, VoltageMagnitude, VoltageRating, Word, as_branch,
    each, reader, table, table_reader,
)
from .record import Reads, Record, complaint, missing_keys, together, unknown_keys
from .tree import Branch, Row
from .values import Quantity, Table, Text

V = TypeVar("V")

POSITIVE = {name: reader(name, above=0) for name in
             ("voltage", "current", "time", "power", "thermal_resistance", "thermal_capacity")}
FROM_ZERO = {name: reader(name, least=0) for name in ("voltage", "current")}
TEMPERATURE = reader("temperature")
_EFFICIENCY = reader("ratio", above=0, most=1)


class Section(Record):
    """One section of a device. `source` is where its numbers were read, if that is not the device's own."""

    source: Word | None = None


def _keyed(node: Any, key_reader: Callable[[Any], Quantity], value_reader: Callable[[Any], V]) -> dict[float, V]:
    """A mapping whose keys are quantities, by their SI values, in rising order."""
    branch = as_branch(node)
    keys = each(key_reader, branch)
    values = each(lambda key: value_reader(branch[key]), branch)
    rows = {key.typ: value for key, value in zip(keys, values, strict=True)}
    if len(rows) < len(keys):
        raise complaint(node.mark, f"two rows for one {keys[0].dimension}", "keep one of them")
    if not rows:
        raise complaint(node.mark, "a mapping without a row", "add a row, or leave the key out")
    return dict(sorted(rows.items(), key=lambda row: row[0]))


def _by_gate_voltage(node: Any) -> dict[float | None, Quantity]:
    """On-resistance: one value, or one for each gate voltage."""
    read = reader("resistance", above=0)
    if isinstance(node, Branch) and not set(node) & {"min", "typ", "max"}:
        return _keyed(node, POSITIVE["voltage"], read)
    return {None: read(node)}


def _by_temperature(node: Any) -> dict[float, Table]:
    """Forward curves: for each junction temperature, voltage over current."""
    return _keyed(node, TEMPERATURE, table_reader(FROM_ZERO["current"], POSITIVE["voltage"]))


def _efficiency(node: Any) -> tuple[tuple[float | None, Quantity | Table], ...]:
    """A value, a curve over output current, or curves by input voltage."""
    curve = table_reader(POSITIVE["current"], _EFFICIENCY)
    if not isinstance(node, Row):
        return ((None, _EFFICIENCY(node)),)
    if not all(isinstance(row, Branch) for row in node) or not node:
        return ((None, curve(node)),)
    rows = each(lambda row: _efficiency_at(row, curve), node)
    voltages = [vin_v for vin_v, _ in rows]
    if len(set(voltages)) < len(voltages):
        raise complaint(node.mark, "two efficiency curves for one input voltage", "keep one of them")
    return tuple(sorted(rows, key=lambda row: row[0]))


def _efficiency_at(row: Branch, curve: Any) -> tuple[float, Quantity | Table]:
    keys, what = ("vin", "at"), "an efficiency curve"
    wrong = [*unknown_keys(row, keys, what), *missing_keys(row, keys, what)]
    if wrong:
        raise together(wrong)
    at = curve(row["at"]) if isinstance(row["at"], Row) else _EFFICIENCY(row["at"])
    return POSITIVE["voltage"](row["vin"]).typ, at


class Conduction(Section):
    """How the part conducts; which keys a kind takes is in `KINDS`.

    `rds` maps gate voltage in V (None where one value is given) to the resistance at 25 °C. `forward` maps junction
    temperature in °C to a curve of voltage over current. `efficiency` is rows of input voltage in V (None for any)
    and a `Quantity` or a curve of efficiency over output current.
    """

    IS: ClassVar[str] = "conduction"
    # Not rds_scale, at_gate, slope, tempco, knee_tempco: left out they have a meaning, for which a blank must not pass.
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset(
        "rds saturation knee forward clamp standoff dropout quiescent reference efficiency resistance winding primary secondary "
        "esr source".split())
    rds: Annotated[Mapping[float | None, Quantity], Reads(_by_gate_voltage)] = {}
    rds_scale: Annotated[Table, table(TEMPERATURE, reader("number", above=0))] | None = None
    at_gate: VoltageRating | None = None
    saturation: VoltageMagnitude | None = None
    slope: Resistance | None = None
    gain: Factor | None = None
    knee: VoltageMagnitude | None = None
    knee_tempco: VoltageCoefficient | None = None
    forward: Annotated[Mapping[float, Table], Reads(_by_temperature)] = {}
    clamp: Annotated[Table, table(FROM_ZERO["current"], POSITIVE["voltage"])] | None = None
    standoff: VoltageRating | None = None
    dropout: VoltageMagnitude | None = None
    quiescent: Current | None = None
    reference: Voltage | None = None
    minimum_load: Current | None = None
    current_limit: CurrentRating | None = None
    efficiency: Annotated[tuple[tuple[float | None, Quantity | Table], ...], Reads(_efficiency)] = ()
    resistance: Resistance | None = None
    tempco: TemperatureCoefficient | None = None
    winding: Resistance | None = None
    primary: Resistance | None = None
    secondary: Resistance | None = None
    ratio: Annotated[Quantity, Reads(reader("number", above=0))] | None = None
    esr: Resistance | None = None

    def complaints_between_keys(self) -> Iterable[PydanticCustomError]:
        if self.at_gate and self.rds and None not in self.rds:
            yield complaint(self.source_of("at_gate"), "at_gate beside rds by gate voltage", "leave at_gate out")
        if self.forward and (self.knee or self.slope):
            yield complaint(self.source_of("forward"), "forward beside knee and slope", "give the curves or the line")


class Gate(Section):
    """Gate of a mosfet: total charge, threshold, edge times."""

    IS: ClassVar[str] = "gate"
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset({"charge", "threshold", "rise", "fall", "source"})
    charge: Charge | None = None
    threshold: Voltage | None = None
    rise: EdgeTime | None = None
    fall: EdgeTime | None = None


class Switching(Section):
    """Edge times of a bjt or igbt."""

    IS: ClassVar[str] = "switching"
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset({"rise", "fall", "source"})
    rise: EdgeTime | None = None
    fall: EdgeTime | None = None


class StoredCharge(Section):
    """Charges that every switching cycle moves: output and reverse recovery, at a voltage."""

    IS: ClassVar[str] = "charge"
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset({"output", "recovery", "source"})
    output: Charge | None = None
    recovery: Charge | None = None
    at: VoltageRating | None = None


class Body(Section):
    """Body diode: V = knee + slope · I."""

    IS: ClassVar[str] = "body"
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset({"knee", "source"})
    knee: VoltageMagnitude | None = None
    slope: Resistance | None = None


class Transfer(Section):
    """`alpha`: temperature coefficient of the drain current [A/K] over drain current [A], at constant gate voltage."""

    IS: ClassVar[str] = "transfer"
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset({"alpha", "source"})
    alpha: Annotated[Table, table(FROM_ZERO["current"], reader("current_tempco"))] | None = None


class Thermal(Section):
    """From junction to case (bottom, top), board and ambient. `zth_jc` is (s, K/W), `foster` (K/W, s), `cauer` (K/W, J/K)."""

    IS: ClassVar[str] = "thermal"
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset({"rth_jc", "rth_jc_top", "rth_jb", "rth_ja", "zth_jc", "foster", "cauer", "source"})
    rth_jc: ThermalResistanceAboveZero | None = None
    rth_jc_top: ThermalResistanceAboveZero | None = None
    rth_jb: ThermalResistanceAboveZero | None = None
    rth_ja: ThermalResistanceAboveZero | None = None
    capacity: HeatCapacity | None = None
    zth_jc: Annotated[Table, table(POSITIVE["time"], POSITIVE["thermal_resistance"])] | None = None
    foster: Annotated[Table, table(POSITIVE["thermal_resistance"], POSITIVE["time"], rising=False)] | None = None
    cauer: Annotated[Table, table(POSITIVE["thermal_resistance"], POSITIVE["thermal_capacity"], rising=False)] | None = None

    def complaints_between_keys(self) -> Iterable[PydanticCustomError]:
        given = [key for key in ("zth_jc", "foster", "cauer") if key in self.written and key not in self.blank]
        if len(given) > 1:
            yield complaint(self.source_of(given[1]), f"{' and '.join(given)} in one device", "keep one of them")


def gather_pulses(node: Any) -> Any:
    """The mapping of an envelope, its pulse lengths gathered under one key."""
    if not isinstance(node, Branch):
        return node
    gathered, pulses = Branch(node.mark), Branch(node.mark)
    for key, value in node.items():
        (gathered if key in ("dc", "source") else pulses).put(key, value)
    if pulses:
        gathered.put(Text("pulses", node.mark), pulses)
    return gathered


def _by_length(node: Any) -> tuple[tuple[float, Table], ...]:
    return tuple(_keyed(node, POSITIVE["time"], table_reader(POSITIVE["voltage"], POSITIVE["current"])).items())


class Envelope(Section):
    """Digitised safe-area curves, case at 25 °C, as (V, A). `pulses` runs from the shortest length [s]."""

    IS: ClassVar[str] = "an envelope"
    MAY_BE_BLANK: ClassVar[frozenset[str]] = frozenset({"dc", "source"})
    dc: Annotated[Table, table(POSITIVE["voltage"], POSITIVE["current"])] | None = None
    pulses: Annotated[tuple[tuple[float, Table], ...], Reads(_by_length)] = ()
