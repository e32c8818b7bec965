"""What each kind of event puts across and through its part: small functions from numbers to paths.

Each takes the event's values by key, arrays of shape (event,) in SI units, and gives a `Path`. Voltage and current
are totals at the part, straight between samples.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from ...physics.avalanche import turn_off_time_s
from ...physics.inrush import charge_path, power_limited_path, resistor_path, slew_current_a

N_SLICES = 96
"""Slices of a path that is not a rectangle: enough for 0.05 % of what it uses of a safe area."""

Values = Mapping[str, np.ndarray]


@dataclass(frozen=True, slots=True)
class Path:
    """Times from 0, voltages and currents, each of shape (event, sample); what is not known is NaN."""

    t_s: np.ndarray
    v_v: np.ndarray
    i_a: np.ndarray

    @property
    def p_w(self) -> np.ndarray:
        return self.v_v * self.i_a

    @property
    def peak_v(self) -> np.ndarray:
        """The highest voltage of each path, shape (event,)."""
        return np.abs(self.v_v).max(axis=1)

    @property
    def peak_a(self) -> np.ndarray:
        """The highest current of each path, shape (event,)."""
        return np.abs(self.i_a).max(axis=1)

    @property
    def square_a(self) -> np.ndarray:
        """The mean of i² in each slice [A²], exact for a straight current, shape (event, slice)."""
        first, last = self.i_a[:, :-1], self.i_a[:, 1:]
        return (first**2 + first * last + last**2) / 3.0

    @property
    def lasts_s(self) -> np.ndarray:
        return self.t_s[:, -1]


def rectangle(v_v: np.ndarray, i_a: np.ndarray, lasts_s: np.ndarray) -> Path:
    """A constant voltage and current for a time."""
    v_v, i_a, lasts_s = np.broadcast_arrays(v_v, i_a, lasts_s)
    return Path(np.stack([0.0 * lasts_s, lasts_s], -1), np.stack([v_v, v_v], -1), np.stack([i_a, i_a], -1))


SHAPES: Mapping[str, Callable[[np.ndarray], np.ndarray]] = {
    "falling": lambda x: 1.0 - x,
    "rising": lambda x: x,
    "triangle": lambda x: 1.0 - np.abs(2.0 * x - 1.0),
    "half-sine": lambda x: np.sin(np.pi * x),
}
"""Current over its peak against time over the event's length; the voltage holds."""


def shaped(v_v: np.ndarray, i_a: np.ndarray, lasts_s: np.ndarray, shape: str) -> Path:
    """A constant voltage while the current follows a shape up to its peak."""
    if shape == "rectangle":
        return rectangle(v_v, i_a, lasts_s)
    x = np.linspace(0.0, 1.0, N_SLICES + 1)
    v_v, i_a, lasts_s = (each[:, None] for each in np.broadcast_arrays(v_v, i_a, lasts_s))
    return Path(lasts_s * x, v_v + 0.0 * x, i_a * SHAPES[shape](x))


def pulse(values: Values, shape: str = "rectangle") -> Path:
    """`pulse`: voltage, peak current, length and shape as annotated."""
    return shaped(values["voltage"], values["current"], values["lasts"], shape)


def short(values: Values) -> Path:
    """`short`: all of the supply across the part, at the limit, until it is cleared."""
    return rectangle(values["voltage"], values["limit"], values["lasts"])


def avalanche(values: Values) -> Path:
    """`avalanche`, and `turn-off` into a clamp: the current falls straight to 0 at the clamping voltage."""
    lasts_s = turn_off_time_s(values["inductance"], values["current"], values["clamp"], values["supply"])
    return shaped(values["clamp"], values["current"], lasts_s, "falling")


def surge(values: Values) -> Path:
    """`surge`: the peak current at its clamping voltage for the whole length, as pulse ratings count it."""
    return rectangle(values["clamp"], values["current"], values["lasts"])


def inrush_slew(values: Values) -> Path:
    """Charging at a constant rate of rise: I = C · dv/dt."""
    return _evenly(*charge_path(values["capacitance"], _step_v(values),
                                slew_current_a(values["capacitance"], values["slew"]), values["with"]))


def inrush_limit(values: Values) -> Path:
    """Charging at a limit of the total current; the load takes its part of it."""
    return _evenly(*charge_path(values["capacitance"], _step_v(values), values["limit"] - values["with"], values["with"]))


def inrush_power(values: Values) -> Path:
    """Charging at a limit of the part's power."""
    return Path(*power_limited_path(values["capacitance"], _step_v(values), values["power_limit"], i_load_a=values["with"]))


def inrush_resistance(values: Values) -> Path:
    """Charging through a resistor, which is the part."""
    return Path(*resistor_path(values["capacitance"], _step_v(values), values["resistance"], values["with"]))


def _step_v(values: Values) -> np.ndarray:
    """Across the part at the start: the supply less what the bank already holds."""
    return np.maximum(values["voltage"] - values["charged_to"], 0.0)


def _evenly(t_s: np.ndarray, v_v: np.ndarray, i_a: np.ndarray) -> Path:
    """A straight path of two ends, cut into slices."""
    x = np.linspace(0.0, 1.0, N_SLICES + 1)
    cut = (ends[:, :1] + (ends[:, 1:] - ends[:, :1]) * x for ends in (t_s, v_v, i_a))
    # A charge that never ends has no path.
    endless = ~np.isfinite(t_s[:, 1:])
    return Path(*(np.where(endless, np.nan, each) for each in cut))
