"""Groups of parts that one law describes: converters, bridges, rectifiers.

A group is a record with the nodes, unknown currents, numbers and legs it has, and a `law`: residuals and losses as
`Dual` numbers of its unknowns, one group at a time over all samples. `Groups` makes a family of them for the network.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Protocol

import numpy as np

from .branches import Leg
from .duals import Dual, value_of
from .families import Entries, Heats, Residuals, Values
from .layout import Layout
from .variables import Param, values_of

Unknowns = Mapping[str, Dual]
Numbers = Mapping[str, np.ndarray]


@dataclass(frozen=True, slots=True)
class Loss:
    """One kind of loss in one part: `ref` None where the power leaves the board.

    formula in symbols; numbers with a place for each of the factors; source says where the formula comes from.
    """

    ref: str | None
    name: str
    power: Dual | np.ndarray
    formula: str = ""
    numbers: str = ""
    factors: tuple = ()
    source: str = ""

    @property
    def power_w(self) -> np.ndarray:
        """The loss [W], shape (sample,)."""
        return np.asarray(value_of(self.power))

    def written(self, k: int) -> str:
        """The formula with the numbers of one sample in it."""
        at = [float(np.broadcast_to(value_of(f), self.power_w.shape)[k]) for f in self.factors]
        return self.numbers.format(*(f"{number:.6g}" for number in at))


@dataclass(frozen=True, slots=True)
class Law:
    """What a group asks of its unknowns, and what its parts burn. `given` is power that it brings into the network."""

    residuals: Mapping[str, Dual]
    losses: tuple[Loss, ...]
    given: Dual | None = None


@dataclass(frozen=True, slots=True)
class PartReading:
    """One part of a group, shape (sample,) each: current mean, rms and peak, voltage while it conducts and while it blocks."""

    mean_a: np.ndarray
    rms_a: np.ndarray
    peak_a: np.ndarray
    on_v: np.ndarray
    block_v: np.ndarray


@dataclass(frozen=True, slots=True)
class Ripple:
    """An alternating current [A rms] that the capacitors between two nets carry for a group, shape (sample,)."""

    net: str
    back: str
    rms_a: np.ndarray
    group: str


@dataclass(frozen=True, slots=True)
class RippleVoltage:
    """How far the voltage of a net falls below and rises above its mean within a period [V], shape (sample,) each."""

    net: str
    below_v: np.ndarray
    above_v: np.ndarray


@dataclass(frozen=True, slots=True)
class Reading:
    """What a group's parts carry, and what it asks of the capacitors around it."""

    parts: Mapping[str, PartReading]
    ripples: tuple[Ripple, ...] = ()
    voltages: tuple[RippleVoltage, ...] = ()


class Group(Protocol):
    """One group. `nodes` and `currents` name its unknowns, `ports` say which current leaves (+1) which node.

    start: currents to begin Newton's method with [A], 0 for those not named.
    """

    key: str
    nodes: Mapping[str, str]
    currents: tuple[str, ...]
    ports: tuple[tuple[str, str, float], ...]
    start: Mapping[str, float]
    legs: tuple[Leg, ...]
    params: Mapping[str, Param]

    def law(self, u: Unknowns, p: Numbers) -> Law: ...
    def regime(self, u: Unknowns, p: Numbers) -> Iterator[np.ndarray]: ...
    def read(self, u: Unknowns, p: Numbers) -> Reading: ...


@dataclass(slots=True)
class Groups:
    """A family of groups: the interface of `families.Family` over `Group` records."""

    branches: Sequence[Group]
    layout: Layout
    places: list[dict[str, int]] = field(default_factory=list)
    _last: tuple = (None, None, ())

    def __post_init__(self) -> None:
        for group in self.branches:
            at = {slot: self.layout.unknown("node", net) for slot, net in group.nodes.items()}
            self.places.append(at | {slot: self.layout.unknown("current", key_of(group, slot)) for slot in group.currents})

    def follow_temperature(self, layout: Layout) -> None:
        for group, at in zip(self.branches, self.places, strict=True):
            for leg in group.legs:
                at[temperature_of(leg)] = layout.unknown("temperature", leg.part)

    def parameters(self, points: np.ndarray) -> Values:
        return {f"{group.key}|{name}": values_of((param,), points)
                for group in self.branches for name, param in group.params.items()}

    def flows(self, p: Values):
        rows = [(at[node], at[current], sign) for group, at in zip(self.branches, self.places, strict=True)
                for node, current, sign in group.ports]
        nodes, currents, signs = (np.array(column) for column in zip(*rows, strict=True))
        return [(nodes.astype(np.intp), currents.astype(np.intp), signs[:, None])]

    def unknowns(self, k: int, x: np.ndarray) -> Unknowns:
        """The unknowns of one group at x, each with its slope."""
        return {slot: Dual.unknown(slot, x[at]) for slot, at in self.places[k].items()}

    def numbers(self, k: int, p: Values) -> Numbers:
        """The numbers of one group, shape (sample,) each."""
        group = self.branches[k]
        return {name: p[f"{group.key}|{name}"][0] for name in group.params}

    def laws(self, x: np.ndarray, p: Values) -> tuple[Law, ...]:
        """The law of every group at x; kept for the next question about the same array."""
        if self._last[0] is not x or self._last[1] is not p:
            with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
                found = tuple(group.law(self.unknowns(k, x), self.numbers(k, p)) for k, group in enumerate(self.branches))
            self._last = x, p, found
        return self._last[2]

    def equations(self, x: np.ndarray, p: Values) -> tuple[Residuals, Entries]:
        residuals, entries = [], []
        for law, at in zip(self.laws(x, p), self.places, strict=True):
            for slot, residual in law.residuals.items():
                row = np.array([at[slot]])
                residuals.append((row, _row(residual.value, x)))
                entries += [(row, np.array([at[name]]), _row(slope, x)) for name, slope in residual.slopes.items()]
        return residuals, entries

    def heats(self, x: np.ndarray, p: Values) -> Heats:
        found = []
        for law, at in zip(self.laws(x, p), self.places, strict=True):
            for loss in law.losses:
                slopes = loss.power.slopes.items() if isinstance(loss.power, Dual) else ()
                found.append(((loss.ref,), _row(value_of(loss.power), x),
                              [(np.array([at[name]]), _row(slope, x)) for name, slope in slopes]))
        return found

    def given_w(self, x: np.ndarray, p: Values) -> np.ndarray:
        """Power that the groups bring into the network [W], shape (sample,)."""
        return sum((law.given.value for law in self.laws(x, p) if law.given is not None), np.zeros(x.shape[1]))

    def regime(self, x: np.ndarray, p: Values) -> Iterator[np.ndarray]:
        for k, group in enumerate(self.branches):
            with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
                bits = list(group.regime(self.unknowns(k, x), self.numbers(k, p)))
            yield from bits

    def readings(self, x: np.ndarray, p: Values) -> Iterator[tuple[Group, Reading]]:
        """What every group's parts carry."""
        for k, group in enumerate(self.branches):
            with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
                yield group, group.read(self.unknowns(k, x), self.numbers(k, p))


def key_of(group: Group, slot: str) -> str:
    """The name of one of a group's currents in the network."""
    return group.key if slot == group.currents[0] else f"{group.key} {slot}"


def temperature_of(leg: Leg) -> str:
    """The name of a leg's junction temperature among its group's unknowns."""
    return f"T {leg.part}"


def _row(values, x: np.ndarray) -> np.ndarray:
    return np.broadcast_to(np.asarray(values, dtype=float), (1, x.shape[1]))
