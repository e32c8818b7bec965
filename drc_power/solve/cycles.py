"""A charge moved from one net to another in every switching cycle: gate drive, RC snubber."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from functools import cached_property
from types import MappingProxyType

import numpy as np

from .branches import Leg
from .groups import Law, Loss, Numbers, PartReading, Reading, Unknowns
from .variables import ZERO, Param

GATE, SNUBBER = "gate", "snubber"

FORMULAS = {
    GATE: ("P_gate", "V · Q_g · f", "{} · {} · {}", "all of the gate drive's energy counted in the driver, common practice"),
    SNUBBER: ("P_snub", "C · V² · f", "{} · {} · {}", "charged and discharged in full once a cycle, Rashid, Power Electronics, example 4.5, both edges"),
}
"""By what moves the charge: name, formula and source of its loss; the factors are V, the charge and f."""


@dataclass(frozen=True)
class Cycled:
    """Charge from `a` to `b` every cycle: a gate's own, or that of a capacitance charged to the voltage between them."""

    key: str
    a: str
    b: str
    kind: str
    part: str
    hertz: Param
    coulomb: Param = ZERO
    farad: Param = ZERO

    currents = ("mean",)
    ports = (("a", "mean", 1.0), ("b", "mean", -1.0))
    start = MappingProxyType({})
    legs: tuple[Leg, ...] = field(default=())

    @property
    def nodes(self) -> dict[str, str]:
        return {"a": self.a, "b": self.b}

    @cached_property
    def params(self) -> dict[str, Param]:
        return {"hertz": self.hertz, "coulomb": self.coulomb, "farad": self.farad}

    def law(self, u: Unknowns, p: Numbers) -> Law:
        v = u["a"] - u["b"]
        charge = (p["coulomb"] * (v.value > 0.0)) + p["farad"] * v
        name, formula, numbers, source = FORMULAS[self.kind]
        loss = Loss(self.part, name, v * charge * p["hertz"], formula, numbers, (v, charge, p["hertz"]), source)
        return Law({"mean": u["mean"] - charge * p["hertz"]}, (loss,))

    def regime(self, u: Unknowns, p: Numbers) -> Iterator[np.ndarray]:
        yield u["a"].value > u["b"].value

    def read(self, u: Unknowns, p: Numbers) -> Reading:
        """A snubber's resistor carries pulses whose shape is not followed: its peak and rms are not known."""
        if self.kind == GATE:
            return Reading({})
        unknown = np.full_like(u["mean"].value, np.nan)
        volts = np.abs(u["a"].value - u["b"].value)
        return Reading({self.part: PartReading(np.zeros_like(volts), unknown, unknown, volts, volts)})
