"""Buck and boost converters by their averaged inductor: duty from volt-second balance, ripple from the inductance.

| symbol | here | meaning |
|---|---|---|
| I_L, I | `i_l`, `i` | mean inductor current; its mean while it flows, I_L/s |
| s | `s` | share of the period in which the inductor carries current: 1, or less with a diode at light load |
| δ | `delta` | share of that time in which the main switch conducts, D = s · δ |
| ΔI | `ripple` | ripple of the inductor, peak to peak |
| d | `dead` | both dead times over the period |

The main switch is the high one of a buck, the low one of a boost; the other carries the inductor current for the rest.
The input current follows from the power: output and every loss.
Valid for straight ripple: an inductor's time constant and the capacitors' ripple are not followed within the period.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from functools import cached_property
from types import MappingProxyType
from typing import NamedTuple

import numpy as np

from .branches import Efficiency, Leg
from .duals import Dual, constant, maximum, sqrt, value_of, where
from .edges import Edges
from .families import between_lines
from .groups import Law, Loss, Numbers, PartReading, Reading, Ripple, Unknowns
from .position import Carrying, Position, legs_of, params_of
from .variables import ZERO, Param

START_V = 1.0
"""Below this input the converter is off and carries nothing."""

LEAST_A = 1e-9
"""Light load never counts as less: the current while it flows goes with the root of the mean."""


@dataclass(frozen=True, slots=True)
class Chip:
    """A converter chip with an efficiency: it takes the converter's loss less that of the parts outside."""

    part: str
    efficiency: Efficiency
    quiescent_a: Param = ZERO


@dataclass(frozen=True)
class Converter:
    """One buck or boost converter: input `a`, output `b`, `held` the net whose voltage it holds against `ground`.

    An empty `main` or `free` is inside the chip. The frequency counts twice: for the ripple, and for edges and dead
    times, which a missing frequency moves opposite ways.
    """

    key: str
    kind: str
    a: str
    b: str
    ground: str
    held: str
    setpoint_v: Param
    main: Position
    free: Position
    inductor: str | None
    winding_ohm: Param
    inductance_h: Param
    frequency_hz: Param
    edge_hz: Param
    dead_s: Param = ZERO
    edges: Edges = field(default_factory=Edges)
    chip: Chip | None = None

    currents = ("out", "in", "flowing")
    start = MappingProxyType({"out": 1.0, "in": 1.0, "flowing": 1.0})
    ports = (("a", "in", 1.0), ("b", "out", -1.0), ("g", "in", -1.0), ("g", "out", 1.0))

    @property
    def nodes(self) -> dict[str, str]:
        return {"a": self.a, "b": self.b, "g": self.ground, "held": self.held}

    @cached_property
    def legs(self) -> tuple[Leg, ...]:
        return legs_of((self.main, self.free))

    @cached_property
    def params(self) -> dict[str, Param]:
        own = {"set": self.setpoint_v, "winding": self.winding_ohm, "henry": self.inductance_h, "hertz": self.frequency_hz,
               "edge hertz": self.edge_hz, "dead": self.dead_s}
        chip = {"factor": self.chip.efficiency.factor, "quiescent": self.chip.quiescent_a} if self.chip else {}
        return own | chip | self.edges.params() | params_of({"main": self.main, "free": self.free})

    @property
    def is_buck(self) -> bool:
        return self.kind == "buck"

    @property
    def gaps(self) -> bool:
        """Whether the inductor current can pause: only a diode keeps it from flowing back."""
        return any(leg.drop is not None for leg in self.free.legs)

    def _cycle(self, u: Unknowns, p: Numbers) -> _Cycle:
        """One period at the unknowns: duty, ripple, drops."""
        v_in = maximum(u["a"] - u["g"], START_V)
        v_out, i = u["b"] - u["g"], maximum(u["flowing"], LEAST_A)
        main, free = self.main.at("main", i, u, p), self.free.at("free", i, u, p)
        dead = 2.0 * p["dead"] * p["edge hertz"] if self.free.free is not None else 0.0 * p["hertz"]
        coil_v, dead_v = p["winding"] * i, dead * (free.dead_v - free.total_v)
        if self.is_buck:
            delta = (v_out + free.total_v + coil_v + dead_v) / maximum(v_in - main.total_v + free.total_v, 1e-3)
            across = maximum(v_in - main.total_v - v_out - coil_v, 0.0)
            blocked = v_in
        else:
            blocked = maximum(v_out, START_V)
            delta = (v_out + free.total_v - v_in + coil_v + dead_v) / (blocked + free.total_v - main.total_v)
            across = maximum(v_in - coil_v - main.total_v, 0.0)
        travel = 1.0 - delta if self.is_buck else delta
        delta = maximum(delta, 0.0)
        i_l = u["out"] if self.is_buck else u["in"]
        lf = p["henry"] * p["hertz"]
        # With a diode at light load the current pauses: ΔI = 2 I says for how long.
        paused_a = sqrt(maximum(i_l, LEAST_A) * maximum(delta * across, 1e-9) / (2.0 * lf))
        s = maximum(i_l, LEAST_A) / maximum(i_l, paused_a) if self.gaps else constant(np.ones_like(i.value))
        ripple = across * s * delta / lf
        return _Cycle(v_in, v_out, i, i_l, s, delta, travel, ripple, paused_a, blocked, dead, main, free)

    def law(self, u: Unknowns, p: Numbers) -> Law:
        c = self._cycle(u, p)
        losses = tuple(self._losses(c, u, p))
        lost = sum((loss.power for loss in losses), constant(np.zeros_like(c.i.value)))
        balance = u["in"] - (c.v_out * u["out"] + lost) / c.v_in
        flowing = u["flowing"] - (maximum(c.i_l, c.paused_a) if self.gaps else c.i_l)
        off = self._is_off(u)
        hold, stuck = self._holds(c, u, p)
        residuals = {"out": where(off, u["out"], where(stuck, c.travel, hold)),
                     "in": where(off, u["in"], balance),
                     "flowing": where(off, u["flowing"] - LEAST_A, flowing)}
        return Law(residuals, tuple(_silenced(loss, off) for loss in losses))

    def _is_off(self, u: Unknowns) -> np.ndarray:
        return u["a"].value - u["g"].value < START_V

    def _holds(self, c: _Cycle, u: Unknowns, p: Numbers) -> tuple[Dual, np.ndarray]:
        """Held voltage against the set one, in shares of it, and where the duty stands at its end instead."""
        scale = np.maximum(np.abs(p["set"]), 1e-3)
        hold = (u["held"] - u["g"] - p["set"]) / scale
        slack = (-hold.value) if self.is_buck else hold.value
        return hold, c.travel.value < slack

    def regime(self, u: Unknowns, p: Numbers) -> Iterator[np.ndarray]:
        c = self._cycle(u, p)
        yield self._is_off(u)
        yield self._holds(c, u, p)[1]
        yield c.delta.value > 0.0
        if self.gaps:
            yield c.paused_a.value > c.i_l.value

    def _losses(self, c: _Cycle, u: Unknowns, p: Numbers) -> Iterator[Loss]:
        on, rest = c.s * c.delta, c.s * (1.0 - c.delta)
        outside = [*c.main.conduction(on, c.ripple), *c.main.shunted(on, c.ripple),
                   *c.free.conduction(maximum(rest - c.dead, 0.0), c.ripple), *c.free.shunted(rest, c.ripple), *c.free.dead(c.dead)]
        if self.main.legs:
            valley, peak = maximum(c.i - c.ripple / 2.0, 0.0), c.i + c.ripple / 2.0
            outside += self.edges.losses(c.main, c.blocked, valley, peak, p["edge hertz"], p)
        if self.inductor is not None:
            square = c.i * c.i + c.ripple * c.ripple / 12.0
            outside.append(Loss(self.inductor, "P_cond", c.s * p["winding"] * square, "s · (I² + ΔI²/12) · R",
                                "{} · ({}² + {}²/12) · {}", (c.s, c.i, c.ripple, p["winding"]), "Joule's law, winding at 25 °C"))
        yield from outside
        if self.chip is not None:
            yield self._chip_loss(c, u, p, outside)

    def _chip_loss(self, c: _Cycle, u: Unknowns, p: Numbers, outside: list[Loss]) -> Loss:
        """The converter's loss less what the parts outside take of it."""
        i = maximum(u["out"], 0.0)
        v_in = u["a"] - u["g"]
        eta, per_amp, per_volt = (n * p["factor"] for n in between_lines(
            self.chip.efficiency.lines, *np.broadcast_arrays(i.value, v_in.value)))
        slopes = {name: per_amp * s for name, s in i.slopes.items()}
        slopes |= {name: slopes.get(name, 0.0) + per_volt * s for name, s in v_in.slopes.items()}
        total = maximum(c.v_out * i * (1.0 / Dual(eta, slopes) - 1.0), v_in * p["quiescent"])
        others = sum((loss.power for loss in outside), constant(np.zeros_like(i.value)))
        return Loss(self.chip.part, "P", total - others, "P_out · (1/η − 1) − ΣP of the parts outside", "{} − {}",
                    (total, others), "power balance of the converter")

    def read(self, u: Unknowns, p: Numbers) -> Reading:
        c = self._cycle(u, p)
        off = self._is_off(u)
        on, rest = c.s * c.delta, c.s * (1.0 - c.delta)
        i, s, ripple = (np.where(off, 0.0, value_of(n)) for n in (c.i, c.s, c.ripple))
        blocked = np.where(off, 0.0, c.blocked.value)
        on, rest = (np.where(off, 0.0, value_of(share)) for share in (on, rest))
        parts = dict(c.main.readings(on, 0.0, i, ripple, blocked))
        parts |= dict(c.free.readings(np.maximum(rest - c.dead, 0.0), c.dead, i, ripple, blocked))
        square = i**2 + ripple**2 / 12.0
        if self.inductor is not None:
            drop = p["winding"] * i
            parts[self.inductor] = PartReading(s * i, np.sqrt(s * square), i + ripple / 2.0, drop, drop)
        pulsed, held = (on, "a") if self.is_buck else (rest, "b")
        hacked = np.sqrt(np.maximum(pulsed * square - (pulsed * i) ** 2, 0.0))
        smooth = np.sqrt(np.maximum(s * square - (s * i) ** 2, 0.0))
        near = {"a": smooth, "b": smooth} | {held: np.where(off, 0.0, hacked)}
        return Reading(parts, tuple(Ripple(self.nodes[side], self.ground, rms, self.key) for side, rms in near.items()))


class _Cycle(NamedTuple):
    """One switching period; the symbols are those of the module's table.

    travel: what the duty has left to its end, a buck's main switch always on, a boost's always off.
    paused_a: the current while it flows that makes it reach zero in every period.
    """

    v_in: Dual
    v_out: Dual
    i: Dual
    i_l: Dual
    s: Dual
    delta: Dual
    travel: Dual
    ripple: Dual
    paused_a: Dual
    blocked: Dual
    dead: np.ndarray
    main: Carrying
    free: Carrying


def _silenced(loss: Loss, off: np.ndarray) -> Loss:
    """No loss where the converter is off."""
    return replace(loss, power=where(off, 0.0, loss.power))
