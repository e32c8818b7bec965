"""One position of a switched group: the parts, in parallel, that carry its current while it is on.

Switches share by conductance at their own temperatures; the diode beside them, or their body diode, carries the
current in the dead times only. A shunt in series carries the same pulses.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from .branches import Drop, Leg
from .duals import Dual, constant, read, value_of
from .families import LINK_OHM, between_lines
from .groups import Loss, Numbers, PartReading, Unknowns, temperature_of
from .variables import ZERO, Param


@dataclass(frozen=True)
class Position:
    """Legs in parallel, all switches or one diode; `free` carries the dead times; `shunts` lie in series."""

    legs: tuple[Leg, ...]
    free: Leg | None = None
    shunts: tuple[Leg, ...] = ()

    @cached_property
    def all_legs(self) -> tuple[Leg, ...]:
        return (*self.legs, *((self.free,) if self.free else ()), *self.shunts)

    @cached_property
    def refs(self) -> tuple[str, ...]:
        """The parts, each once: a switch's own body diode is no part of its own."""
        return tuple(dict.fromkeys(leg.part for leg in self.all_legs))

    def params(self, side: str) -> Iterator[tuple[str, Param]]:
        """The numbers of the legs, by names that begin with the side of the group."""
        for name, leg in self._named(side):
            yield f"{name} ohm", leg.r_ohm or ZERO
            yield f"{name} knee", leg.drop.knee_v if leg.drop else ZERO
            yield f"{name} slope", leg.drop.slope_ohm if leg.drop else ZERO

    def _named(self, side: str) -> Iterator[tuple[str, Leg]]:
        yield from ((f"{side} {k}", leg) for k, leg in enumerate(self.legs))
        yield from ((f"{side} shunt {k}", leg) for k, leg in enumerate(self.shunts))
        if self.free is not None:
            yield f"{side} free", self.free

    def at(self, side: str, i: Dual, u: Unknowns, p: Numbers) -> Carrying:
        """The position while it carries the current i."""
        drops = [_drop_of(leg, f"{side} {k}", i, u, p) for k, leg in enumerate(self.legs)]
        shunts = [_drop_of(leg, f"{side} shunt {k}", i, u, p) for k, leg in enumerate(self.shunts)]
        free = _drop_of(self.free, f"{side} free", i, u, p) if self.free is not None else None
        if len(drops) > 1:
            conductances = [1.0 / ohm for _, ohm in drops]
            ohm = 1.0 / sum(conductances[1:], conductances[0])
            shares, drop = [g * ohm for g in conductances], (ohm * i, ohm)
        else:
            shares, drop = [constant(1.0)] * len(drops), drops[0] if drops else (constant(0.0), constant(0.0))
        return Carrying(self, i, *drop, tuple(shares), tuple(shunts), free)


@dataclass(frozen=True, slots=True)
class Carrying:
    """A position with a current i: drop `volts` of its legs and its slope `ohm`, and how the legs share."""

    position: Position
    i: Dual
    volts: Dual
    ohm: Dual
    shares: tuple[Dual, ...]
    shunts: tuple[tuple[Dual, Dual], ...]
    free: tuple[Dual, Dual] | None

    @property
    def total_v(self) -> Dual:
        """The drop while the legs carry the current, shunts included."""
        return sum((volts for volts, _ in self.shunts), self.volts)

    @property
    def total_ohm(self) -> Dual:
        return sum((ohm for _, ohm in self.shunts), self.ohm)

    @property
    def dead_v(self) -> Dual:
        """The drop in the dead times: that of the diode, else of the legs themselves."""
        return sum((volts for volts, _ in self.shunts), self.free[0] if self.free else self.volts)

    def conduction(self, on, ripple) -> Iterator[Loss]:
        """Conduction losses for a share `on` of the period, with a triangular ripple [A peak to peak]."""
        square = self.i * self.i + ripple * ripple / 12.0
        for leg, share in zip(self.position.legs, self.shares, strict=True):
            if leg.drop is None and len(self.shares) == 1:
                yield Loss(leg.part, "P_cond", on * self.ohm * square, "D · (I² + ΔI²/12) · R_DS(on)(Tj)", "{} · ({}² + {}²/12) · {}",
                           (on, self.i, ripple, self.ohm), JOULE)
            elif leg.drop is None:
                yield Loss(leg.part, "P_cond", on * share * self.ohm * square, "D · (I² + ΔI²/12) · R_DS(on)(Tj) · share²",
                           "{} · ({}² + {}²/12) · {} · {}²", (on, self.i, ripple, self.ohm / share, share), JOULE)
            else:
                power = on * (self.volts * self.i + self.ohm * ripple * ripple / 12.0)
                yield Loss(leg.part, "P_cond", power, "D · (V_on · I + r · ΔI²/12)", "{} · ({} · {} + {} · {}²/12)",
                           (on, self.volts, self.i, self.ohm, ripple), "forward drop at the mean current, slope for the ripple")

    def shunted(self, on, ripple) -> Iterator[Loss]:
        """The shunts' losses for the share of the period that the current passes them, dead times included."""
        square = self.i * self.i + ripple * ripple / 12.0
        for leg, (_, ohm) in zip(self.position.shunts, self.shunts, strict=True):
            yield Loss(leg.part, "P_cond", on * ohm * square, "D · (I² + ΔI²/12) · R", "{} · ({}² + {}²/12) · {}",
                       (on, self.i, ripple, ohm), "Joule's law")

    def dead(self, share) -> Iterator[Loss]:
        """The dead times' loss for their share of the period: in the diode, else shared as the switches share."""
        if self.free is None:
            return
        volts = self.free[0]
        owners = [(leg.part, part) for leg, part in zip(self.position.legs, self.shares, strict=True)]
        for ref, part in [(self.position.free.part, constant(1.0))] if self.has_diode else owners:
            yield Loss(ref, "P_dead", share * part * volts * self.i, "V_F · I · 2 · t_d · f · share", "{} · {} · {} · {}",
                       (volts, self.i, share, part), "diode conduction in both dead times")

    def readings(self, on, dead, i, ripple, block_v) -> Iterator[tuple[str, PartReading]]:
        """What each part carries: `on` and `dead` are shares of the period, i and ripple arrays; `block_v` held off."""
        rms_a, peak_a = np.sqrt(i**2 + ripple**2 / 12.0), i + ripple / 2.0
        carried = on if self.has_diode else on + dead
        for leg, share in zip(self.position.legs, self.shares, strict=True):
            k = value_of(share)
            yield leg.part, PartReading(carried * k * i, np.sqrt(carried) * k * rms_a, k * peak_a, value_of(self.volts), block_v)
        if self.has_diode:
            yield self.position.free.part, PartReading(dead * i, np.sqrt(dead) * rms_a, peak_a, value_of(self.free[0]), block_v)
        for leg, (volts, _) in zip(self.position.shunts, self.shunts, strict=True):
            drop_v = value_of(volts)
            yield leg.part, PartReading((on + dead) * i, np.sqrt(on + dead) * rms_a, peak_a, drop_v, drop_v)

    def dead_for(self, share, mean_a, square_a2, line) -> Iterator[Loss]:
        """The dead times' loss for a current of any shape: its mean and mean square while it is that diode's."""
        knee, slope = line
        owners = [(self.position.free.part, constant(1.0))] if self.has_diode else [
            (leg.part, part) for leg, part in zip(self.position.legs, self.shares, strict=True)]
        for ref, part in owners:
            yield Loss(ref, "P_dead", share * part * (knee * mean_a + slope * square_a2), "2 · δ · (V_F0 · Î/π + r · Î²/4) · share",
                       "{} · ({} · {} + {} · {}) · {}", (share, knee, mean_a, slope, square_a2, part), "diode conduction in both dead times")

    @property
    def has_diode(self) -> bool:
        """Whether a part of its own carries the dead times, not the switches' body diodes."""
        return self.position.free is not None and self.position.free.part not in {leg.part for leg in self.position.legs}


JOULE = "Joule's law, resistance at Tj"


def _drop_of(leg: Leg, name: str, i: Dual, u: Unknowns, p: Numbers) -> tuple[Dual, Dual]:
    """Drop [V] of one leg with the whole current i, and its slope [ohm]."""
    t_c = u[temperature_of(leg)]
    if leg.drop is None:
        ohm = constant(np.maximum(p[f"{name} ohm"], LINK_OHM))
        ohm = ohm * read(leg.scale.extended.read, t_c) if leg.scale is not None else ohm
        return ohm * i, ohm
    return forward(leg.drop, p[f"{name} knee"], p[f"{name} slope"], i, t_c)


def forward(drop: Drop, knee_v: np.ndarray, slope_ohm: np.ndarray, i: Dual, t_c: Dual) -> tuple[Dual, Dual]:
    """Forward drop [V] of a diode or a saturated transistor, and its slope [ohm]."""
    if drop.lines:
        volts, ohm, per_k = between_lines(drop.extended, *np.broadcast_arrays(np.maximum(i.value, 0.0), t_c.value))
        slopes = {name: ohm * s for name, s in i.slopes.items()}
        slopes |= {name: slopes.get(name, 0.0) + per_k * s for name, s in t_c.slopes.items()}
        return Dual(volts, slopes), constant(ohm)
    volts = slope_ohm * i + knee_v
    if drop.knee_v_per_k:
        volts = volts + drop.knee_v_per_k * (t_c - 25.0)
    return volts, constant(slope_ohm)


def params_of(positions: Mapping[str, Position]) -> dict[str, Param]:
    """The numbers of several positions, by side."""
    return dict(pair for side, position in positions.items() for pair in position.params(side))


def legs_of(positions: Sequence[Position]) -> tuple[Leg, ...]:
    return tuple(leg for position in positions for leg in position.all_legs)
