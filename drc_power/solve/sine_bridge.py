"""Bridges whose duty follows a sine: one leg or three, averaged over the period of their output.

| symbol | here | meaning |
|---|---|---|
| Î, M, cos φ | `i`, `m`, `cos` | amplitude of the load current; phase amplitude over half the supply; power factor |
| δ | `delta` | one dead time over the switching period |

A position that conducts both ways carries Î²/4 in the mean square whatever M and φ, since its duty (1 + M · sin θ)/2
averages to a half; less δ · Î²/2 in the dead times, in which the diode beside it carries Î/π on 2 · δ of its half wave.
A switch that conducts one way only shares with its diode by the formulas of `physics.waveforms`. Ripple at the
switching frequency is left out of the load current; the losses come from the supply on top of the delivered power.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property
from types import MappingProxyType

import numpy as np

from ..physics.waveforms import three_phase_input_rms_a
from .branches import Leg
from .duals import Dual, constant, maximum
from .edges import Edges
from .families import LINK_OHM
from .groups import (
    Law,
    Loss,
    Numbers,
    PartReading,
    Reading,
    Ripple,
    Unknowns,
    temperature_of,
)
from .position import JOULE, Position, legs_of, params_of
from .variables import ZERO, Param

LEAST_V = 1.0
"""Below this supply the bridge stands still."""

OVER_SINE = "mean over the sine, common practice for drives"


@dataclass(frozen=True)
class SineBridge:
    """Legs of a high and a low position between `a` and `b`; `edges` of each position, in the order of `positions`.

    `drive` says how the amplitude is given: "current" itself, "power" of the whole load, "resistance" per phase in
    star. `shunt` is one in the bridge's common foot.
    """

    key: str
    a: str
    b: str
    positions: Mapping[str, Position]
    edges: Mapping[str, Edges]
    drive: str
    demand: Param
    modulation: Param
    power_factor: Param
    frequency_hz: Param
    dead_s: Param = ZERO
    load_part: str | None = None
    shunt: Leg | None = None

    currents = ("dc",)
    ports = (("a", "dc", 1.0), ("b", "dc", -1.0))
    start = MappingProxyType({})

    @property
    def nodes(self) -> dict[str, str]:
        return {"a": self.a, "b": self.b}

    @cached_property
    def n_legs(self) -> int:
        return len(self.positions) // 2

    @cached_property
    def legs(self) -> tuple[Leg, ...]:
        return (*legs_of(tuple(self.positions.values())), *((self.shunt,) if self.shunt else ()))

    @cached_property
    def params(self) -> dict[str, Param]:
        own = {"demand": self.demand, "m": self.modulation, "cos": self.power_factor, "hertz": self.frequency_hz,
               "dead": self.dead_s, "shunt": self.shunt.r_ohm if self.shunt else ZERO}
        edges = {name: param for side, edges in self.edges.items() for name, param in edges.params(side).items()}
        return own | edges | params_of(self.positions)

    def _amplitude(self, v: Dual, p: Numbers) -> Dual:
        """Amplitude of the load current at a supply voltage."""
        if self.drive == "current":
            return constant(p["demand"]) + 0.0 * v
        if self.drive == "power":
            return p["demand"] * 4.0 / (self.n_legs * p["m"] * p["cos"]) / v
        return v * (p["m"] * p["cos"] / 2.0 / p["demand"])

    def law(self, u: Unknowns, p: Numbers) -> Law:
        v = maximum(u["a"] - u["b"], LEAST_V)
        on = np.where(u["a"].value - u["b"].value > LEAST_V, 1.0, 0.0)
        i = self._amplitude(v, p) * on
        losses = [Loss(self.load_part, "P_out", self.n_legs * p["m"] * p["cos"] / 4.0 * v * i)]
        for side in self.positions:
            losses += self._position_losses(side, i, v, u, p)
        if self.shunt is not None:
            square = (self._foot_rms_per_a(p) * i) ** 2
            losses.append(Loss(self.shunt.part, "P_cond", p["shunt"] * square, "I_rms² · R", "{} · {}", (square, p["shunt"]), "Joule's law"))
        total = sum((loss.power for loss in losses), constant(np.zeros_like(i.value)))
        return Law({"dc": u["dc"] - total / v}, tuple(losses))

    def regime(self, u: Unknowns, p: Numbers) -> Iterator[np.ndarray]:
        yield u["a"].value - u["b"].value > LEAST_V

    def _foot_rms_per_a(self, p: Numbers) -> np.ndarray:
        """Rms current in the common return for an amplitude of 1 A."""
        if self.n_legs == 3:
            return three_phase_input_rms_a(1.0, p["m"], np.arccos(p["cos"]))
        return np.full_like(p["m"], 0.5)

    def _position_losses(self, side: str, i: Dual, v: Dual, u: Unknowns, p: Numbers) -> Iterator[Loss]:
        position, delta = self.positions[side], p["dead"] * p["hertz"]
        mean_i = 2.0 / np.pi * i
        carrying = position.at(side, mean_i, u, p)
        square = i * i * (0.25 - delta / 2.0)
        for leg, share in zip(position.legs, carrying.shares, strict=True):
            if leg.drop is None:
                yield Loss(leg.part, "P_cond", share * carrying.ohm * square, "(Î²/4 − δ · Î²/2) · R_DS(on)(Tj) · share",
                           "{} · {} · {}", (square, carrying.ohm, share), JOULE)
            else:
                yield self._one_way(leg, f"{side} 0", 1.0, i, u, p)
        if carrying.has_diode and any(leg.drop is not None for leg in position.legs):
            yield self._one_way(position.free, f"{side} free", -1.0, i, u, p)
        elif position.free is not None:
            yield from carrying.dead_for(2.0 * delta, i / np.pi, i * i / 4.0, _line(position.free, f"{side} free", u, p))
        for k, leg in enumerate(position.shunts):
            ohm = np.maximum(p[f"{side} shunt {k} ohm"], LINK_OHM)
            yield Loss(leg.part, "P_cond", ohm * i * i / 4.0, "Î²/4 · R", "{}²/4 · {}", (i, ohm), "Joule's law")
        yield from self.edges[side].losses(carrying, v, mean_i, mean_i, p["hertz"], p, side, cycles=0.5)

    def _one_way(self, leg: Leg, name: str, sign: float, i: Dual, u: Unknowns, p: Numbers) -> Loss:
        """A switch (+1) or the diode beside it (−1) that conducts in one direction."""
        knee, slope = _line(leg, name, u, p)
        mean, square = _one_way_currents(sign, i, p)
        return Loss(leg.part, "P_cond", knee * mean + slope * square, "V_0 · I_av + r · I_rms²", "{} · {} + {} · {}",
                    (knee, mean, slope, square), OVER_SINE)

    def read(self, u: Unknowns, p: Numbers) -> Reading:
        v = np.maximum(u["a"].value - u["b"].value, 0.0)
        i = self._amplitude(maximum(u["a"] - u["b"], LEAST_V), p).value * (v > LEAST_V)
        parts: dict[str, PartReading] = {}
        for side, position in self.positions.items():
            parts |= self._position_reading(side, position, i, v, u, p)
        foot = self._foot_rms_per_a(p) * i
        if self.shunt is not None:
            parts[self.shunt.part] = PartReading(u["dc"].value, foot, i, p["shunt"] * foot, p["shunt"] * foot)
        mean = self.n_legs * p["m"] * p["cos"] / 4.0 * i
        ripple = Ripple(self.a, self.b, np.sqrt(np.maximum(foot**2 - mean**2, 0.0)), self.key)
        return Reading(parts, (ripple,))

    def _position_reading(self, side: str, position: Position, i, v, u: Unknowns, p: Numbers) -> dict[str, PartReading]:
        delta, found = p["dead"] * p["hertz"], {}
        carrying = position.at(side, constant(i), u, p)
        both_ways = all(leg.drop is None for leg in position.legs)
        for leg, share in zip(position.legs, carrying.shares, strict=True):
            k, drop_v = share.value, carrying.volts.value
            if both_ways:
                found[leg.part] = PartReading(p["m"] * p["cos"] / 4.0 * i * k, i / 2.0 * k, i * k, drop_v, v)
            else:
                mean, square = _one_way_currents(1.0, constant(i), p)
                found[leg.part] = PartReading(mean.value, np.sqrt(square.value), i, drop_v, v)
        if carrying.has_diode:
            mean, square = _one_way_currents(-1.0, constant(i), p)
            rest = PartReading(2.0 * delta * i / np.pi, i * np.sqrt(delta / 2.0), i, carrying.free[0].value, v)
            found[position.free.part] = rest if both_ways else PartReading(mean.value, np.sqrt(square.value), i, carrying.free[0].value, v)
        for k, leg in enumerate(position.shunts):
            drop_v = p[f"{side} shunt {k} ohm"] * i / 2.0
            found[leg.part] = PartReading(p["m"] * p["cos"] / 4.0 * i, i / 2.0, i, drop_v, drop_v)
        return found


def _one_way_currents(sign: float, i: Dual, p: Numbers) -> tuple[Dual, Dual]:
    """Mean and mean square of a switch's (+1) or its diode's (−1) half of the current."""
    depth = sign * p["m"] * p["cos"]
    return i * (1.0 / (2.0 * np.pi) + depth / 8.0), i * i * (1.0 / 8.0 + depth / (3.0 * np.pi))


def _line(leg: Leg, name: str, u: Unknowns, p: Numbers) -> tuple[Dual, np.ndarray]:
    """Knee and slope of a one-way leg at its temperature."""
    return p[f"{name} knee"] + leg.drop.knee_v_per_k * (u[temperature_of(leg)] - 25.0), p[f"{name} slope"]
