"""Records of device data: what a team knows of the parts it uses, shared across boards."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Annotated, Any, ClassVar

from pydantic import Field

from ..faults import Mark
from .fields import *  # noqa
from .record import Record
from .values import Quantity, SourceFile, Table, Text

Curve = Table


class Conduction(Record):
    """How the part conducts; which keys a kind takes is in `KINDS`.

    `rds` maps gate voltage in V (None: `at_gate`, or not said) to the resistance at 25 °C.
    `forward` maps junction temperature in °C to a (current, voltage) curve.
    `efficiency` is rows of (input voltage in V or None, a `Quantity` or a (current, ratio) curve).
    """

    IS: ClassVar[str] = "conduction"
    rds: Mapping[float | None, Quantity] = {}
    rds_scale: Curve | None = None
    at_gate: Voltage | None = None
    saturation: Voltage | None = None
    slope: Resistance | None = None
    gain: Factor | None = None
    knee: Voltage | None = None
    knee_tempco: Any = None
    forward: Mapping[float, Curve] = {}
    leakage: Curve | None = None
    clamp: Curve | None = None
    standoff: Voltage | None = None
    dropout: Voltage | None = None
    quiescent: Current | None = None
    reference: Voltage | None = None
    minimum_load: Current | None = None
    current_limit: Current | None = None
    efficiency: tuple[tuple[float | None, Quantity | Table], ...] = ()
    resistance: Resistance | None = None
    tempco: Any = None
    winding: Resistance | None = None
    primary: Resistance | None = None
    secondary: Resistance | None = None
    ratio: Factor | None = None
    esr: Resistance | None = None


class Gate(Record):
    """Gate of a mosfet: total charge, threshold, edge times."""

    IS: ClassVar[str] = "gate"
    charge: Charge | None = None
    threshold: Voltage | None = None
    rise: Time | None = None
    fall: Time | None = None


class Switching(Record):
    """Edge times of a bjt or igbt."""

    IS: ClassVar[str] = "switching"
    rise: Time | None = None
    fall: Time | None = None


class StoredCharge(Record):
    """Charges that every switching cycle moves: output and reverse recovery, at a voltage."""

    IS: ClassVar[str] = "charge"
    output: Charge | None = None
    recovery: Charge | None = None
    at: Voltage | None = None


class Body(Record):
    """Body diode: V = knee + slope · I."""

    IS: ClassVar[str] = "body"
    knee: Voltage | None = None
    slope: Resistance | None = None


class Transfer(Record):
    """`alpha` is the temperature coefficient of the drain current [A/K] over drain current [A], gate voltage constant."""

    IS: ClassVar[str] = "transfer"
    alpha: Curve | None = None


class Thermal(Record):
    """From junction to case (bottom, top), board and ambient. `zth_jc` is (s, K/W), `foster` (K/W, s), `cauer` (K/W, J/K)."""

    IS: ClassVar[str] = "thermal"
    rth_jc: ThermalResistance | None = None
    rth_jc_top: ThermalResistance | None = None
    rth_jb: ThermalResistance | None = None
    rth_ja: ThermalResistance | None = None
    capacity: HeatCapacity | None = None
    zth_jc: Curve | None = None
    foster: Curve | None = None
    cauer: Curve | None = None


class Envelope(Record):
    """Digitised safe-area curves, case at 25 °C, as (V, A). `pulses` runs from the shortest length [s]."""

    IS: ClassVar[str] = "envelope"
    dc: Curve | None = None
    pulses: tuple[tuple[float, Curve], ...] = ()


class Device(Record):
    """One device. `limits` holds magnitudes, as `Quantity` or, where the contract has a curve, `Table`."""

    IS: ClassVar[str] = "a device"
    kind: Word
    channel: Text | None = None
    matches: tuple[Mapping[str, Text], ...] = ()
    source: Word | None = None
    limits: Mapping[str, Quantity | Table] = {}
    conduction: Conduction = Field(default_factory=Conduction.of)
    gate: Gate = Field(default_factory=Gate.of)
    switching: Switching = Field(default_factory=Switching.of)
    charge: StoredCharge = Field(default_factory=StoredCharge.of)
    body: Body = Field(default_factory=Body.of)
    transfer: Transfer = Field(default_factory=Transfer.of)
    thermal: Thermal = Field(default_factory=Thermal.of)
    envelope: Envelope = Field(default_factory=Envelope.of)

    @property
    def name(self) -> str:
        raise NotImplementedError

    def entry(self, path: str) -> Mark:
        """Where one entry was written, such as `entry("limits.vds")`; the device's own mark if it is not there."""
        raise NotImplementedError

    def source_text(self, path: str) -> str:
        """The `source:` that holds for an entry: its own if it has one, else the device's, else ""."""
        raise NotImplementedError

    def matches_part(self, value: str, fields: Mapping[str, str]) -> bool:
        """Whether `matches` names a part of this value and these fields (`value` among the keys is the part's value)."""
        raise NotImplementedError


def read_devices(paths: Iterable[Text | str], folder: str) -> DeviceLibrary:
    """Read device files, or every *.yaml of a folder. Raises `InputError` with every fault of all of them."""
    raise NotImplementedError


class DeviceLibrary:
    """All devices by name, and the files they came from."""

    devices: Mapping[str, Device]
    files: tuple[SourceFile, ...]

    def matching(self, value: str, fields: Mapping[str, str]) -> tuple[Device, ...]:
        """Every device whose `matches` fits; more than one is for the caller to refuse."""
        raise NotImplementedError
