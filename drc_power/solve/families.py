"""The laws of the branches, one class per law, vectorised over branches and samples.

Each family gives, for unknowns x of shape (unknown + 1, sample) whose last row is zero:
- `parameters(points)`: its numbers at every sample, each of shape (branch, sample);
- `flows(p)`: (node places, current places, weight): what each current takes out of a node, in the mean;
- `equations(x, p)`: residuals and the entries of their derivatives, by places of rows and columns;
- `heats(x, p)`: for each set of parts, the dissipation and its derivatives;
- `regime(x, p)`: which straight line each branch stands on, as booleans: equal regimes share one elimination.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence

import numpy as np

from .branches import (
    CurrentLoad,
    Curve,
    Drop,
    Linear,
    OneWay,
    PowerLoad,
    Resistive,
    Source,
    Switching,
)
from .layout import Layout
from .variables import values_of

COLLAPSE_V = 0.5
"""Below this voltage a constant-current load or a quiescent current fades in proportion, so that an unpowered net rests at zero."""

NO_CURRENT_A = 1e-13
"""Below this a branch carries rounding, not current."""

NO_VOLTAGE_V = 1e-9
"""A net that only a diode feeds and nothing loads hangs at the drop to within rounding: that diode conducts."""

LINK_OHM = 1e-9
"""The resistance of an ideal link, so that parallel links share and a loop of links has a solution."""

Values = Mapping[str, np.ndarray]
Residuals = list[tuple[np.ndarray, np.ndarray]]
Entries = list[tuple[np.ndarray, np.ndarray, np.ndarray]]
Heats = list[tuple[tuple[str | None, ...], np.ndarray, list[tuple[np.ndarray, np.ndarray]]]]


def scale_at(scales: Sequence[Curve | None], temperature_c: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """The factor on each branch's resistance and its slope [1/K], shape (branch, sample); 1 and 0 without a scale."""
    factor, slope = np.ones_like(temperature_c), np.zeros_like(temperature_c)
    for row, scale in enumerate(scales):
        if scale is not None:
            factor[row], slope[row] = scale.extended.read(temperature_c[row])
    return factor, slope


def drop_at(drops: Sequence[Drop], p: Values, i_a: np.ndarray, t_c: np.ndarray) -> tuple[np.ndarray, ...]:
    """Forward drop [V], its slope over current [ohm] and over temperature [V/K], each of shape (branch, sample)."""
    tempco = np.array([d.knee_v_per_k for d in drops])[:, None]
    factor, growth = scale_at([d.scale for d in drops], t_c)
    per_amp, per_k = p["slope"] * factor, tempco + p["slope"] * growth * i_a
    volts = p["knee"] + tempco * (t_c - 25.0) + per_amp * i_a
    for row, drop in enumerate(drops):
        if drop.lines:
            volts[row], per_amp[row], per_k[row] = between_lines(drop.extended, i_a[row], t_c[row])
    return volts, per_amp, per_k


def between_lines(lines, x: np.ndarray, y: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """A family of curves over x, straight between the y of neighbours; outside them the nearest curve holds.

    Returns the value and its slopes over x and over y, each of shape (sample,).
    """
    if len(lines) == 1:
        return *lines[0][1].read(x), np.zeros_like(x)
    at = [curve.read(x) for _, curve in lines]
    ys = np.array([y for y, _ in lines])
    values, slopes = np.array([v for v, _ in at]), np.array([s for _, s in at])
    upper = np.clip(np.searchsorted(ys, y), 1, len(lines) - 1)
    lower, sample = upper - 1, np.arange(len(x))
    width = ys[upper] - ys[lower]
    share = np.clip((y - ys[lower]) / width, 0.0, 1.0)
    inside = (y > ys[0]) & (y < ys[-1])
    rise = values[upper, sample] - values[lower, sample]
    per_x = slopes[lower, sample] + share * (slopes[upper, sample] - slopes[lower, sample])
    return values[lower, sample] + share * rise, per_x, np.where(inside, rise / width, 0.0)


def fade(v: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """1 above COLLAPSE_V, in proportion below, 0 at or below zero; and its slope."""
    inside = (v > 0.0) & (v < COLLAPSE_V)
    return np.clip(v / COLLAPSE_V, 0.0, 1.0), np.where(inside, 1.0 / COLLAPSE_V, 0.0)


class Family:
    """What all families share: the branches, their nodes and the places of their currents."""

    def __init__(self, branches: Sequence, layout: Layout) -> None:
        self.branches = tuple(branches)
        self.a = layout.places("node", [b.a for b in branches])
        self.b = layout.places("node", [b.b for b in branches])
        self.i = layout.places("current", [b.key for b in branches])
        self.parts = tuple(b.part for b in branches)

    def follow_temperature(self, layout: Layout) -> None:
        """Look up the places of the temperatures once the layout is sealed."""
        self.t = layout.places("temperature", [part or "" for part in self.parts])

    def through(self, weight: np.ndarray | float) -> list[tuple[np.ndarray, np.ndarray, np.ndarray | float]]:
        """A current that leaves node a and enters node b."""
        return [(self.a, self.i, weight), (self.b, self.i, -weight)]

    def regime(self, x: np.ndarray, p: Values) -> Iterator[np.ndarray]:
        return iter(())

    def heats(self, x: np.ndarray, p: Values) -> Heats:
        return []


class Resistives(Family):
    """v_a − v_b − R·s(T)·i = 0."""

    def __init__(self, branches: Sequence[Resistive], layout: Layout) -> None:
        super().__init__(branches, layout)
        self.scales = [b.scale for b in branches]

    def parameters(self, points: np.ndarray) -> Values:
        r = np.maximum(values_of([b.r_ohm for b in self.branches], points), LINK_OHM)
        return {"r": r, "duty": values_of([b.duty for b in self.branches], points)}

    def flows(self, p: Values):
        return self.through(p["duty"])

    def equations(self, x: np.ndarray, p: Values) -> tuple[Residuals, Entries]:
        i = x[self.i]
        factor, slope = scale_at(self.scales, x[self.t])
        one = np.ones_like(i)
        entries = [(self.i, self.a, one), (self.i, self.b, -one), (self.i, self.i, -p["r"] * factor),
                   (self.i, self.t, -p["r"] * slope * i)]
        return [(self.i, x[self.a] - x[self.b] - p["r"] * factor * i)], entries

    def heats(self, x: np.ndarray, p: Values) -> Heats:
        i = x[self.i]
        factor, slope = scale_at(self.scales, x[self.t])
        weighted = p["duty"] * p["r"]
        return [(self.parts, weighted * factor * i * i,
                 [(self.i, 2.0 * weighted * factor * i), (self.t, weighted * slope * i * i)])]


class OneWays(Family):
    """Either v_a − v_b = drop(i, T) with i > 0, or i = 0 with no more than the drop across it."""

    def __init__(self, branches: Sequence[OneWay], layout: Layout) -> None:
        super().__init__(branches, layout)
        self.drops = [b.drop for b in branches]

    def parameters(self, points: np.ndarray) -> Values:
        return {"knee": values_of([d.knee_v for d in self.drops], points),
                "slope": values_of([d.slope_ohm for d in self.drops], points),
                "duty": values_of([b.duty for b in self.branches], points)}

    def flows(self, p: Values):
        return self.through(p["duty"])

    def _law(self, x: np.ndarray, p: Values):
        forward = np.maximum(x[self.i], 0.0)
        volts, per_amp, per_k = drop_at(self.drops, p, forward, x[self.t])
        excess = x[self.a] - x[self.b] - volts
        # A diode that carries current conducts; one that carries none conducts from where its voltage is the drop.
        on = (x[self.i] > NO_CURRENT_A) | ((x[self.i] > -NO_CURRENT_A) & (excess > -NO_VOLTAGE_V))
        return on, excess, volts, per_amp, per_k

    def regime(self, x: np.ndarray, p: Values) -> Iterator[np.ndarray]:
        yield self._law(x, p)[0]

    def equations(self, x: np.ndarray, p: Values) -> tuple[Residuals, Entries]:
        on, excess, _, per_amp, per_k = self._law(x, p)
        step = on.astype(float)
        entries = [(self.i, self.a, step), (self.i, self.b, -step),
                   (self.i, self.i, np.where(on, -per_amp, 1.0)), (self.i, self.t, np.where(on, -per_k, 0.0))]
        return [(self.i, np.where(on, excess, x[self.i]))], entries

    def heats(self, x: np.ndarray, p: Values) -> Heats:
        _, _, volts, per_amp, per_k = self._law(x, p)
        i, duty = np.maximum(x[self.i], 0.0), p["duty"]
        return [(self.parts, duty * volts * i,
                 [(self.i, duty * (volts + per_amp * i)), (self.t, duty * per_k * i)])]


class Sources(Family):
    """v_a − v_b − V + R·i = 0, i delivered out of a."""

    def __init__(self, branches: Sequence[Source], layout: Layout) -> None:
        self.branches = tuple(branches)
        self.a = layout.places("node", [b.a for b in branches])
        self.b = layout.places("node", [b.b for b in branches])
        self.i = layout.places("current", [b.key for b in branches])
        self.parts = (None,) * len(branches)

    def parameters(self, points: np.ndarray) -> Values:
        return {"v": values_of([b.voltage_v for b in self.branches], points),
                "r": values_of([b.resistance_ohm for b in self.branches], points)}

    def flows(self, p: Values):
        return self.through(-1.0)

    def equations(self, x: np.ndarray, p: Values) -> tuple[Residuals, Entries]:
        one = np.ones_like(p["v"])
        entries = [(self.i, self.a, one), (self.i, self.b, -one), (self.i, self.i, p["r"])]
        return [(self.i, x[self.a] - x[self.b] - p["v"] + p["r"] * x[self.i])], entries


class Regulators(Family):
    """What linear and switching regulators share: ports a (in), b (out), ground, and two currents."""

    def __init__(self, branches: Sequence, layout: Layout) -> None:
        super().__init__(branches, layout)
        self.g = layout.places("node", [b.ground for b in branches])
        self.i_in = layout.places("current", [f"{b.key} input" for b in branches])

    def flows(self, p: Values):
        return [(self.a, self.i_in, 1.0), (self.b, self.i, -1.0), (self.g, self.i_in, -1.0), (self.g, self.i, 1.0)]

    def heats(self, x: np.ndarray, p: Values) -> Heats:
        v_in, v_out = x[self.a] - x[self.g], x[self.b] - x[self.g]
        i_in, i = x[self.i_in], x[self.i]
        return [(self.parts, v_in * i_in - v_out * i,
                 [(self.a, i_in), (self.b, -i), (self.g, i - i_in), (self.i_in, v_in), (self.i, -v_out)])]


class Linears(Regulators):
    """v_out = the lower of the set voltage and v_in − dropout, not below 0; i_in = i + quiescent."""

    def parameters(self, points: np.ndarray) -> Values:
        return {"set": values_of([b.setpoint_v for b in self.branches], points),
                "dropout": values_of([b.dropout_v for b in self.branches], points),
                "quiescent": values_of([b.quiescent_a for b in self.branches], points)}

    def _starved(self, x: np.ndarray, p: Values) -> tuple[np.ndarray, np.ndarray]:
        left = x[self.a] - x[self.g] - p["dropout"]
        return (left < p["set"]) & (left > 0.0), left <= 0.0

    def regime(self, x: np.ndarray, p: Values) -> Iterator[np.ndarray]:
        yield from self._starved(x, p)

    def equations(self, x: np.ndarray, p: Values) -> tuple[Residuals, Entries]:
        starved, dead = self._starved(x, p)
        v_in, v_out = x[self.a] - x[self.g], x[self.b] - x[self.g]
        target = np.where(dead, 0.0, np.where(starved, v_in - p["dropout"], p["set"]))
        follows = starved.astype(float)
        share, slope = fade(v_in)
        one, draw = np.ones_like(v_in), p["quiescent"] * slope
        entries = [(self.i, self.b, one), (self.i, self.a, -follows), (self.i, self.g, follows - 1.0),
                   (self.i_in, self.i_in, one), (self.i_in, self.i, -one),
                   (self.i_in, self.a, -draw), (self.i_in, self.g, draw)]
        return [(self.i, v_out - target), (self.i_in, x[self.i_in] - x[self.i] - p["quiescent"] * share)], entries


class Switchings(Regulators):
    """v_out = the set voltage; v_in · i_in = v_out · i / η(i, v_in), or no load's v_in · quiescent where that is more."""

    START_V = 1.0
    """Below this input the converter is off: its output follows the input in proportion, its input is a resistor."""

    def parameters(self, points: np.ndarray) -> Values:
        return {"set": values_of([b.setpoint_v for b in self.branches], points),
                "quiescent": values_of([b.quiescent_a for b in self.branches], points),
                "factor": values_of([b.efficiency.factor for b in self.branches], points)}

    def efficiency(self, x: np.ndarray, p: Values) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """η, its slope over output current and over input voltage, each of shape (branch, sample)."""
        i, v_in = np.maximum(x[self.i], 0.0), x[self.a] - x[self.g]
        eta, per_amp, per_volt = np.empty_like(i), np.empty_like(i), np.zeros_like(i)
        for row, branch in enumerate(self.branches):
            eta[row], per_amp[row], per_volt[row] = between_lines(branch.efficiency.lines, i[row], v_in[row])
        return eta * p["factor"], per_amp * p["factor"], per_volt * p["factor"]

    def _loss(self, x: np.ndarray, p: Values):
        """Loss [W] with slopes over i, v_out and v_in."""
        v_in, v_out = x[self.a] - x[self.g], x[self.b] - x[self.g]
        i = np.maximum(x[self.i], 0.0)
        eta, per_amp, per_volt = self.efficiency(x, p)
        excess = 1.0 / eta - 1.0
        loaded = v_out * i * excess
        idle = v_in * p["quiescent"]
        is_idle = idle > loaded
        slopes = (v_out * (excess - i * per_amp / eta**2), i * excess, -v_out * i * per_volt / eta**2)
        return (np.where(is_idle, idle, loaded), np.where(is_idle, 0.0, slopes[0]),
                np.where(is_idle, 0.0, slopes[1]), np.where(is_idle, p["quiescent"], slopes[2]), is_idle)

    def regime(self, x: np.ndarray, p: Values) -> Iterator[np.ndarray]:
        yield x[self.a] - x[self.g] < self.START_V
        yield self._loss(x, p)[4]

    def equations(self, x: np.ndarray, p: Values) -> tuple[Residuals, Entries]:
        v_in, v_out = x[self.a] - x[self.g], x[self.b] - x[self.g]
        off = v_in < self.START_V
        safe = np.maximum(v_in, self.START_V)
        share = np.clip(v_in / self.START_V, 0.0, 1.0)
        share_slope = np.where(off & (v_in > 0.0), 1.0 / self.START_V, 0.0)
        loss, per_i, per_out, per_in, _ = self._loss(x, p)
        power = v_out * x[self.i] + loss
        d_out, d_i = -(x[self.i] + per_out) / safe, -(v_out + per_i) / safe
        d_in = np.where(off, 0.0, -per_in / safe + power / safe**2)
        one = np.ones_like(v_in)
        follow = p["set"] * share_slope
        entries = [(self.i, self.b, one), (self.i, self.a, -follow), (self.i, self.g, follow - 1.0),
                   (self.i_in, self.i_in, one), (self.i_in, self.i, d_i), (self.i_in, self.b, d_out),
                   (self.i_in, self.a, d_in), (self.i_in, self.g, -d_in - d_out)]
        return [(self.i, v_out - p["set"] * share), (self.i_in, x[self.i_in] - power / safe)], entries


class CurrentLoads(Family):
    """i = I, fading to nothing below COLLAPSE_V."""

    def __init__(self, branches: Sequence[CurrentLoad], layout: Layout) -> None:
        super().__init__(branches, layout)

    def parameters(self, points: np.ndarray) -> Values:
        return {"draw": values_of([b.current_a for b in self.branches], points), **self._duties(points)}

    def _duties(self, points: np.ndarray) -> Values:
        return {"duty": values_of([b.duty for b in self.branches], points)}

    def flows(self, p: Values):
        return self.through(p["duty"])

    def equations(self, x: np.ndarray, p: Values) -> tuple[Residuals, Entries]:
        share, slope = fade(x[self.a] - x[self.b])
        one = np.ones_like(share)
        entries = [(self.i, self.i, one), (self.i, self.a, -p["draw"] * slope), (self.i, self.b, p["draw"] * slope)]
        return [(self.i, x[self.i] - p["draw"] * share)], entries

    def regime(self, x: np.ndarray, p: Values) -> Iterator[np.ndarray]:
        yield fade(x[self.a] - x[self.b])[1] > 0.0

    def heats(self, x: np.ndarray, p: Values) -> Heats:
        v, i = x[self.a] - x[self.b], p["duty"] * x[self.i]
        return [(self.parts, v * i, [(self.a, i), (self.b, -i), (self.i, p["duty"] * v)])]


class PowerLoads(CurrentLoads):
    """i = P / v; below the floor i = P · v / floor², the resistor that takes P at the floor.

    `as_resistor_v`, NaN otherwise, makes the load the resistor that takes P at that voltage: a way to a starting point.
    """

    def parameters(self, points: np.ndarray) -> Values:
        floor = np.array([b.floor_v for b in self.branches])[:, None]
        return {"power": values_of([b.power_w for b in self.branches], points), **self._duties(points),
                "floor": np.broadcast_to(floor, (len(self.branches), points.shape[0])),
                "as_resistor_v": np.full((len(self.branches), points.shape[0]), np.nan)}

    def collapsed(self, x: np.ndarray, p: Values) -> np.ndarray:
        """Where the load gets a voltage, but less than it can run at; shape (branch, sample)."""
        v = x[self.a] - x[self.b]
        return (v < p["floor"]) & (v > 1e-6) & (p["power"] > 0.0)

    def equations(self, x: np.ndarray, p: Values) -> tuple[Residuals, Entries]:
        v = x[self.a] - x[self.b]
        as_resistor = p["as_resistor_v"]
        low = (v < p["floor"]) | ~np.isnan(as_resistor)
        safe = np.maximum(v, p["floor"])
        conductance = p["power"] / np.where(np.isnan(as_resistor), p["floor"], as_resistor) ** 2
        draw = np.where(low, conductance * np.maximum(v, 0.0), p["power"] / safe)
        slope = np.where(low, np.where(v > 0.0, conductance, 0.0), -p["power"] / safe**2)
        one = np.ones_like(v)
        entries = [(self.i, self.i, one), (self.i, self.a, -slope), (self.i, self.b, slope)]
        return [(self.i, x[self.i] - draw)], entries

    def regime(self, x: np.ndarray, p: Values) -> Iterator[np.ndarray]:
        yield x[self.a] - x[self.b] < p["floor"]


FAMILIES = {Resistive: Resistives, OneWay: OneWays, Source: Sources, Linear: Linears, Switching: Switchings,
            CurrentLoad: CurrentLoads, PowerLoad: PowerLoads}
"""The law of each kind of branch."""
