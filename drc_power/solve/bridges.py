"""Half bridges and freewheeling switches: one switch pair with a steady duty on a load that keeps its current."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from functools import cached_property
from types import MappingProxyType

import numpy as np

from .branches import Leg
from .duals import constant, maximum
from .edges import Edges
from .groups import Law, Numbers, Reading, Ripple, Unknowns
from .position import Position, legs_of, params_of
from .variables import ZERO, Param

RUNNING_A = 1e-12
"""A load current below this is none: nothing is commutated."""


@dataclass(frozen=True)
class HalfBridge:
    """An averaged switch pair: `x` is tied to `main_node` for the share `duty`, to `free_node` for the rest.

    The current of the load at `x` is continuous; `outward` +1 when it leaves `x` (high-side main switch), −1 when it
    enters (low-side main switch). During both dead times the free side's diode carries it.
    """

    key: str
    x: str
    main_node: str
    free_node: str
    main: Position
    free: Position
    duty: Param
    outward: int
    frequency_hz: Param = ZERO
    dead_s: Param = ZERO
    edges: Edges = field(default_factory=Edges)

    currents = ("load", "switched")
    start = MappingProxyType({})

    @property
    def ports(self) -> tuple[tuple[str, str, float], ...]:
        sign = float(self.outward)
        return (("x", "load", -sign), ("main", "switched", sign), ("free", "load", sign), ("free", "switched", -sign))

    @property
    def nodes(self) -> dict[str, str]:
        return {"x": self.x, "main": self.main_node, "free": self.free_node}

    @cached_property
    def legs(self) -> tuple[Leg, ...]:
        return legs_of((self.main, self.free))

    @cached_property
    def params(self) -> dict[str, Param]:
        own = {"duty": self.duty, "hertz": self.frequency_hz, "dead": self.dead_s}
        return own | self.edges.params() | params_of({"main": self.main, "free": self.free})

    def _dead(self, p: Numbers) -> np.ndarray:
        """Both dead times over the period; none without a diode beside the free switch."""
        return np.minimum(2.0 * p["dead"] * p["hertz"], 1.0 - p["duty"]) if self.free.free is not None else 0.0 * p["duty"]

    def law(self, u: Unknowns, p: Numbers) -> Law:
        i, on, dead = maximum(u["load"], 0.0), p["duty"], self._dead(p)
        rest, sign = 1.0 - on, float(self.outward)
        main, free = self.main.at("main", i, u, p), self.free.at("free", i, u, p)
        blocked = sign * (u["main"] - u["free"])
        running = np.where(u["load"].value > RUNNING_A, 1.0, 0.0)
        per_volt = self.edges.losses(main, 1.0, i, i, p["hertz"] * running, p)
        moved = sum((loss.power for loss in per_volt), constant(np.zeros_like(i.value)))
        level = (on * (u["main"] - sign * main.total_v) + (rest - dead) * (u["free"] - sign * free.total_v)
                 + dead * (u["free"] - sign * free.dead_v))
        losses = (*main.conduction(on, 0.0), *main.shunted(on, 0.0), *free.conduction(rest - dead, 0.0),
                  *free.shunted(rest, 0.0), *free.dead(dead),
                  *self.edges.losses(main, blocked, i, i, p["hertz"] * running, p))
        return Law({"load": u["x"] - level, "switched": u["switched"] - (on * u["load"] + moved)}, losses)

    def regime(self, u: Unknowns, p: Numbers) -> Iterator[np.ndarray]:
        yield u["load"].value > RUNNING_A

    def read(self, u: Unknowns, p: Numbers) -> Reading:
        i, on, dead = maximum(u["load"], 0.0), p["duty"], self._dead(p)
        main, free = self.main.at("main", i, u, p), self.free.at("free", i, u, p)
        blocked, none = np.abs(u["main"].value - u["free"].value), np.zeros_like(i.value)
        parts = dict(main.readings(on, none, i.value, 0.0, blocked))
        parts |= dict(free.readings(1.0 - on - dead, dead, i.value, 0.0, blocked))
        rms_a = i.value * np.sqrt(on * (1.0 - on))
        return Reading(parts, (Ripple(self.main_node, self.free_node, rms_a, self.key),))
