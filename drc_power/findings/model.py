"""The immutable records that checking produces and every writer reads."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

VERDICTS = ("met", "waived", "close", "unproven", "exceeded")
"""From the mildest to the gravest. `fails_from` takes close, unproven or exceeded."""


@dataclass(frozen=True, slots=True)
class Step:
    """One line of the calculation behind a finding: symbol = formula = numbers = value unit (source)."""

    symbol: str
    formula: str
    numbers: str
    value: float | None
    unit: str
    source: str


@dataclass(frozen=True, slots=True)
class InputUsed:
    """One input of a finding and where it came from: netlist line, annotation line, device entry or default."""

    name: str
    value: str
    source: str


@dataclass(frozen=True, slots=True)
class Sensitivity:
    """How far one input moves a finding's value over its span, in the finding's own unit."""

    name: str
    span: str
    moves_by: float
    unit: str


@dataclass(frozen=True, slots=True)
class Finding:
    """One judgement: one rule on one subject in one mode or event, at its worst corner. SI units, °C."""

    id: str
    rule: str
    stress: str | None
    verdict: str
    was: str | None
    ref: str | None
    uuid: str | None
    sheet: str | None
    net: str | None
    mode: str | None
    event: str | None
    corner: str | None
    quantity: str
    value: float | None
    allowed: float | None
    rated: float | None
    unit: str
    margin: float | None
    text: str
    remedy: str
    inputs_used: tuple[InputUsed, ...] = ()
    sensitivity: tuple[Sensitivity, ...] = ()
    samples: Mapping[str, Any] | None = None
    workings: tuple[Step, ...] = ()
    file: str = ""
    line: int = 0


@dataclass(frozen=True, slots=True)
class OperatingPoint:
    """One solved element in one mode at one corner. `current_a` is the mean, along conduction."""

    mode: str
    corner: str
    ref: str
    role: str
    voltage_v: float | None
    current_a: float | None
    rms_a: float | None
    power_w: float | None
    tj_c: float | None
    case_c: float | None


@dataclass(frozen=True, slots=True)
class NetPoint:
    """One solved net in one mode at one corner. `current_a` is what flows into the net."""

    mode: str
    corner: str
    net: str
    voltage_v: float | None
    current_a: float | None


@dataclass(frozen=True, slots=True)
class PartRow:
    """A part of the board as far as a reviewer needs it."""

    ref: str
    uuid: str
    sheet: str
    value: str
    device: str | None
    role: str


@dataclass(frozen=True, slots=True)
class InputFile:
    """One file that was read. `role` is netlist, annotations, devices, rules or waivers."""

    role: str
    path: str
    sha256: str


@dataclass(frozen=True, slots=True)
class Outside:
    """A part deliberately left out, and the reason the user gave."""

    ref: str
    because: str


@dataclass(frozen=True, slots=True)
class Coverage:
    """How much of the power paths was judged."""

    elements: int
    judged: int
    unproven: tuple[str, ...]
    outside: tuple[Outside, ...]
    not_fitted: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Result:
    """Everything one run found. Writers read this and nothing else."""

    board_name: str
    board_revision: str
    netlist: str
    n_parts: int
    n_nets: int
    inputs: tuple[InputFile, ...]
    findings: tuple[Finding, ...]
    coverage: Coverage
    today: str | None = None
    parts: tuple[PartRow, ...] = ()
    rails: tuple[Mapping[str, Any], ...] = ()
    loads: tuple[Mapping[str, Any], ...] = ()
    rules: tuple[Mapping[str, Any], ...] = ()
    operating_points: tuple[OperatingPoint, ...] = ()
    nets: tuple[NetPoint, ...] = ()
    notes: tuple[str, ...] = ()
    fails_from: str = "unproven"
    extra: Mapping[str, Any] = field(default_factory=dict)
