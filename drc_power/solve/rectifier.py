"""A rectifier with its reservoir in the network: a source whose mean voltage falls with the load, by its periodic state.

The network is solved with the mean voltage and a load current that is constant over the period, so that every mean
loss is right; how far the voltage swings below and above is handed on for the checks that need its ends.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from types import MappingProxyType

import numpy as np

from ..physics.rectifier import Rectified, rectified
from .branches import Leg
from .duals import Dual, constant
from .groups import (
    Law,
    Loss,
    Numbers,
    PartReading,
    Reading,
    Ripple,
    RippleVoltage,
    Unknowns,
    temperature_of,
)
from .position import Position, params_of
from .variables import Param

STEP = 1e-5
"""Slopes of the periodic state are central differences over this share of a quantity."""


@dataclass(frozen=True)
class Rectifier:
    """Diodes between an alternating source and a reservoir from `a` (its minus) to `b` (its plus).

    diodes: one leg for each part; `n_path` of their drops lie in the path of each charging pulse, of which there are
    `n_pulses` a period. A bridge in one part takes the drops of two, separate diodes one each. series: legs on the
    alternating side.
    """

    key: str
    a: str
    b: str
    diodes: tuple[Leg, ...]
    series: tuple[Leg, ...]
    n_path: int
    n_pulses: int
    rms_v: Param
    source_ohm: Param
    frequency_hz: Param
    reservoir_f: tuple[Param, ...]

    currents = ("dc", "ac")
    ports = (("b", "dc", -1.0), ("a", "dc", 1.0))
    start = MappingProxyType({})

    @property
    def nodes(self) -> dict[str, str]:
        return {"a": self.a, "b": self.b}

    @property
    def legs(self) -> tuple[Leg, ...]:
        return (*self.diodes, *self.series)

    @cached_property
    def params(self) -> dict[str, Param]:
        own = {"rms": self.rms_v, "source": self.source_ohm, "hertz": self.frequency_hz}
        own |= {f"farad {k}": param for k, param in enumerate(self.reservoir_f)}
        return own | params_of({"diode": Position(self.diodes), "series": Position(self.series)})

    @property
    def share(self) -> float:
        """Of the diodes' total loss what one part takes: all in one bridge, else in equal parts."""
        return 1.0 / len(self.diodes)

    def _state(self, u: Unknowns, p: Numbers) -> _State:
        """Drops, resistances and the periodic state at the unknowns."""
        knees = [p[f"diode {k} knee"] + leg.drop.knee_v_per_k * (u[temperature_of(leg)] - 25.0) for k, leg in enumerate(self.diodes)]
        knee = sum(knees[1:], knees[0]) * (self.n_path * self.share)
        slope = sum(p[f"diode {k} slope"] for k in range(len(self.diodes))) * (self.n_path * self.share)
        series = [p[f"series {k} ohm"] for k in range(len(self.series))]
        r_ohm = slope + p["source"] + sum(series)
        farads = sum(p[f"farad {k}"] for k in range(len(self.reservoir_f)))
        return _State(self, u["dc"], knee, slope, series, r_ohm, farads, np.sqrt(2.0) * p["rms"], p)

    def law(self, u: Unknowns, p: Numbers) -> Law:
        state = self._state(u, p)
        mean_v, square = state.dual("mean_v"), state.dual("square_a2")
        diodes = state.knee * u["dc"] + state.slope * square
        losses = [Loss(leg.part, "P_cond", self.share * diodes, "V_F0 · I + r_d · I_rms², over the parts",
                       "({} · {} + {} · {}²) · {}", (state.knee, u["dc"], state.slope, np.sqrt(square.value), constant(self.share)),
                       "periodic state of the reservoir") for leg in self.diodes]
        losses += [Loss(leg.part, "P_cond", ohm * square, "I_rms² · R", "{}² · {}", (np.sqrt(square.value), ohm), "Joule's law")
                   for leg, ohm in zip(self.series, state.series, strict=True)]
        losses.append(Loss(None, "P_source", p["source"] * square))
        given = (u["b"] - u["a"]) * u["dc"] + sum((loss.power for loss in losses), constant(np.zeros_like(u["dc"].value)))
        rms = np.sqrt(np.maximum(square.value, 1e-18))
        return Law({"dc": u["b"] - u["a"] - mean_v, "ac": u["ac"] - square.through(rms, 0.5 / rms)}, tuple(losses), given)

    def regime(self, u: Unknowns, p: Numbers) -> Iterator[np.ndarray]:
        return iter(())

    def read(self, u: Unknowns, p: Numbers) -> Reading:
        state = self._state(u, p)
        at, i = state.at, u["dc"].value
        rms, knee_v = np.sqrt(at.square_a2), state.knee.value / self.n_path
        one = len(self.diodes) == 1
        mean_a, rms_a = (i, rms) if one or self.n_pulses == 1 else (i / 2.0, rms / np.sqrt(2.0))
        peak_in_v = np.sqrt(2.0) * p["rms"]
        block_v = at.peak_v + knee_v if self.n_pulses == 2 else at.peak_v + peak_in_v
        parts = {leg.part: PartReading(mean_a, rms_a, at.peak_a, knee_v * (2.0 if one and self.n_path == 2 else 1.0), block_v)
                 for leg in self.diodes}
        parts |= {leg.part: PartReading(np.zeros_like(i), rms, at.peak_a, ohm * rms, ohm * rms)
                  for leg, ohm in zip(self.series, state.series, strict=True)}
        ripple = Ripple(self.b, self.a, np.sqrt(np.maximum(at.square_a2 - i**2, 0.0)), self.key)
        around = RippleVoltage(self.b, at.mean_v - at.valley_v, at.peak_v - at.mean_v)
        return Reading(parts, (ripple,), (around,))


@dataclass(slots=True)
class _State:
    """The periodic state of one rectifier at its load current and drop, with their slopes."""

    rectifier: Rectifier
    i: Dual
    knee: Dual
    slope: np.ndarray
    series: list[np.ndarray]
    r_ohm: np.ndarray
    farads: np.ndarray
    peak_v: np.ndarray
    p: Numbers
    _found: Rectified | None = None

    @property
    def _all(self) -> Rectified:
        """The state at the point itself, and a step to either side in current and in drop, shape (5, sample)."""
        if self._found is None:
            i, knee = np.maximum(self.i.value, 0.0), self.knee.value
            steps_i, steps_v = self.steps
            currents = np.array([i, i + steps_i, i - steps_i, i, i])
            drops = np.array([knee, knee, knee, knee + steps_v, knee - steps_v])
            self._found = rectified(self.peak_v, drops, self.r_ohm, self.farads, currents, self.p["hertz"], self.rectifier.n_pulses)
        return self._found

    @property
    def steps(self) -> tuple[np.ndarray, np.ndarray]:
        return STEP * np.maximum(self.i.value, 1e-3), STEP * np.maximum(self.peak_v, 1e-3)

    @property
    def at(self) -> Rectified:
        return Rectified(*(rows[0] for rows in self._all))

    def dual(self, name: str) -> Dual:
        """One quantity of the state with its slopes over current and drop."""
        rows, (steps_i, steps_v) = getattr(self._all, name), self.steps
        over_i, over_v = (rows[1] - rows[2]) / (2.0 * steps_i), (rows[3] - rows[4]) / (2.0 * steps_v)
        return self.i.through(rows[0], over_i) + self.knee.through(np.zeros_like(rows[0]), over_v)
