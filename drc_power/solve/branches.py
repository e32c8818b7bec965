"""The branches of a power network as records: what is connected where, and the law each obeys.

Voltages are against the reference ground; a current is positive along conduction, from `a` to `b`.
`part` is the reference of the part that takes the branch's heat, None where it leaves the board.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from ..physics.tables import StraightLines
from .variables import ONE, ZERO, Param


@dataclass(frozen=True)
class Curve:
    """A table of straight lines: xs rising, ys the values, each of shape (point,)."""

    xs: np.ndarray
    ys: np.ndarray

    @cached_property
    def extended(self) -> StraightLines:
        """Past its last point on along the last slope, as a device's curves over temperature and current."""
        return StraightLines(self.xs, self.ys, above="extend")

    @cached_property
    def held(self) -> StraightLines:
        """Past its last point the last value, as an efficiency over load."""
        return StraightLines(self.xs, self.ys, above="hold")


@dataclass(frozen=True, slots=True)
class Resistive:
    """v_a − v_b = R · s(Tj) · i. `scale` is s over junction temperature; `duty` the share of time it conducts."""

    key: str
    a: str
    b: str
    r_ohm: Param
    part: str | None = None
    scale: Curve | None = None
    duty: Param = ONE
    load: str | None = None


@dataclass(frozen=True)
class Drop:
    """The forward law of a one-way branch: knee + slope·s(Tj)·i, or measured lines of (temperature, volts over amperes)."""

    knee_v: Param = ZERO
    slope_ohm: Param = ZERO
    knee_v_per_k: float = 0.0
    lines: tuple[tuple[float, Curve], ...] = ()
    scale: Curve | None = None

    @cached_property
    def extended(self) -> tuple[tuple[float, StraightLines], ...]:
        return tuple((t_c, curve.extended) for t_c, curve in self.lines)


@dataclass(frozen=True, slots=True)
class OneWay:
    """A diode: v_a − v_b = drop(i) for i > 0, no current below it. Also a saturated bipolar transistor."""

    key: str
    a: str
    b: str
    drop: Drop
    part: str | None = None
    duty: Param = ONE


@dataclass(frozen=True, slots=True)
class Source:
    """v_a − v_b = V − R · i, the current i delivered out of `a`."""

    key: str
    a: str
    b: str
    voltage_v: Param
    resistance_ohm: Param = ZERO


@dataclass(frozen=True, slots=True)
class Linear:
    """A linear regulator or linear pass element holding `b` against `ground`; input current = i + quiescent."""

    key: str
    a: str
    b: str
    ground: str
    setpoint_v: Param
    dropout_v: Param = ZERO
    quiescent_a: Param = ZERO
    part: str | None = None


@dataclass(frozen=True)
class Efficiency:
    """Efficiency over output current: one curve per input voltage; one entry holds at every input voltage."""

    input_v: tuple[float, ...]
    curves: tuple[Curve, ...]
    factor: Param = ONE

    @cached_property
    def lines(self) -> tuple[tuple[float, StraightLines], ...]:
        return tuple((v_in, curve.held) for v_in, curve in zip(self.input_v, self.curves, strict=True))


@dataclass(frozen=True, slots=True)
class Leg:
    """One part of a switched group while it carries the current: a resistive channel or a one-way drop."""

    part: str
    r_ohm: Param | None = None
    scale: Curve | None = None
    drop: Drop | None = None


@dataclass(frozen=True, slots=True)
class Switching:
    """A switching regulator holding `b`: v_in · i_in = v_out · i / η(i, v_in), never below v_in · quiescent more."""

    key: str
    a: str
    b: str
    ground: str
    setpoint_v: Param
    efficiency: Efficiency
    quiescent_a: Param = ZERO
    part: str | None = None


@dataclass(frozen=True, slots=True)
class CurrentLoad:
    """A constant current that falls to nothing below COLLAPSE_V."""

    key: str
    a: str
    b: str
    current_a: Param
    part: str | None = None
    duty: Param = ONE


@dataclass(frozen=True, slots=True)
class PowerLoad:
    """A constant power on the higher-voltage branch; below `floor_v` it behaves as a resistor."""

    key: str
    a: str
    b: str
    power_w: Param
    floor_v: float
    part: str | None = None
    duty: Param = ONE


Branch = Resistive | OneWay | Source | Linear | Switching | CurrentLoad | PowerLoad
