"""What the survey found: rails, grounds, elements, stages and paths, without any annotation."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field


@dataclass(frozen=True, slots=True)
class Identity:
    """What one part is. `kind` is a device kind of the contract ("mosfet", "linear-regulator", ...) or
    one of "net-tie", "source", "battery", "motor", "led", "crystal", "test-point", "mechanical", "unknown".

    `terminals` maps the names that solving uses to pin numbers: mosfet drain gate source; bjt collector
    base emitter; igbt collector gate emitter; diode, zener, tvs anode cathode; bridge plus minus ac1 ac2;
    regulators and load switches input output ground (and switch_node feedback enable control); two-terminal
    parts a b; connector none. A name may be missing when no evidence gives it. `channel` is "n" or "p" for
    a mosfet, "npn" or "pnp" for a bjt, "" when unknown.
    """

    ref: str
    kind: str
    confidence: float
    because: tuple[str, ...]
    terminals: Mapping[str, tuple[str, ...]] = field(default_factory=dict)
    channel: str = ""


@dataclass(frozen=True, slots=True)
class Rail:
    """A supply net. `voltage_v` is a guess from a name until annotated, None if there is none."""

    net: str
    voltage_v: float | None
    because: str
    fed_by: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Element:
    """A part on a power path. `group` is pass, switch, clamp, source or load; `role` the device kind."""

    ref: str
    group: str
    role: str
    from_net: str
    to_net: str
    control: str | None
    confidence: float
    because: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Stage:
    """Parts that work together. `parts` maps the stage's keys in the contract (high, low, pair, ...) to references."""

    kind: str
    parts: Mapping[str, tuple[str, ...]]
    node: str | None


@dataclass(frozen=True, slots=True)
class Signal:
    """A part that is not on a power path, and why."""

    ref: str
    because: str


@dataclass(frozen=True, slots=True)
class Survey:
    """The whole survey of one netlist. `parts` has an Identity for every part of the netlist."""

    netlist: str
    grounds: tuple[str, ...]
    rails: tuple[Rail, ...]
    parts: Mapping[str, Identity]
    elements: tuple[Element, ...]
    stages: tuple[Stage, ...]
    paths: tuple[tuple[str, ...], ...]
    signal: tuple[Signal, ...]
    not_fitted: tuple[str, ...]
