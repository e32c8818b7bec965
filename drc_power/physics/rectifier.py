"""Rectifiers that charge a reservoir capacitor: the periodic solution, exact within each interval.

| symbol | name here | unit | meaning |
|---|---|---|---|
| V_p | v_peak_v | V | amplitude of the alternating voltage |
| V_d, R | v_drop_v, r_ohm | V, ohm | knees of the diodes in the path together; source, path and diode slopes |
| C, I | c_f, i_load_a | F, A | reservoir; the direct current that the load draws, constant over the period |
| ω, θ | f_hz, theta_rad | Hz, rad | ω = 2π · f; angle of the alternating voltage |

While the diodes conduct, C · dv/dt = (V_p · sin θ − V_d − v)/R − I, whose solution is a sine and an exponential; while
they do not, v falls by I/C. The angles where conduction starts and ends follow from i = 0 at its end and from v
being the same a period later. Arrays broadcast; the first axis is the corner or sample.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

LEAST_OHM = 1e-6
"""A path without resistance is taken with this much: its voltage follows the source within nanoseconds."""

N_HALVINGS, N_FALSE_POSITIONS, N_INNER = 5, 8, 9
NODES, WEIGHTS = np.polynomial.legendre.leggauss(24)


class Rectified(NamedTuple):
    """The periodic state: output mean, lowest and highest [V]; of the charging current mean square [A²] and peak [A];
    angles where conduction starts and ends [rad]. NaN where the reservoir would run empty within the period."""

    mean_v: np.ndarray
    valley_v: np.ndarray
    peak_v: np.ndarray
    square_a2: np.ndarray
    peak_a: np.ndarray
    start_rad: np.ndarray
    end_rad: np.ndarray


class _Path(NamedTuple):
    v_peak_v: np.ndarray
    v_drop_v: np.ndarray
    r_ohm: np.ndarray
    tau_rad: np.ndarray
    i_load_a: np.ndarray
    fall_v_per_rad: np.ndarray
    period_rad: np.ndarray

    def source_v(self, theta_rad):
        return self.v_peak_v * np.sin(theta_rad) - self.v_drop_v

    def settled_v(self, theta_rad):
        """What the reservoir's voltage tends to while the diodes conduct."""
        sine_v = self.v_peak_v * (np.sin(theta_rad) - self.tau_rad * np.cos(theta_rad)) / (1.0 + self.tau_rad**2)
        return sine_v - self.v_drop_v - self.r_ohm * self.i_load_a

    def charging_v(self, theta_rad, start_rad):
        """The reservoir's voltage from the start of conduction on."""
        begun_v = self.source_v(start_rad) - self.settled_v(start_rad)
        return self.settled_v(theta_rad) + begun_v * np.exp(-np.maximum(theta_rad - start_rad, 0.0) / self.tau_rad)

    def current_a(self, theta_rad, start_rad):
        return (self.source_v(theta_rad) - self.charging_v(theta_rad, start_rad)) / self.r_ohm


def rectified(v_peak_v, v_drop_v, r_ohm, c_f, i_load_a, f_hz, n_pulses=2):
    """The periodic state of a rectifier with a reservoir capacitor at a constant load current.

    v_peak_v: amplitude of the alternating voltage, above `v_drop_v` [V], shape (corner,).
    v_drop_v: knees of all diodes in the path [V], shape (corner,).
    r_ohm: resistance of the path: source, wiring, diode slopes [ohm], shape (corner,).
    c_f: reservoir capacitance, above 0 [F], shape (corner,).
    i_load_a: load current, 0 or more [A], shape (corner,).
    f_hz: frequency of the alternating voltage [Hz], shape (corner,).
    n_pulses: charging pulses per period of it, 2 for full-wave and 1 for half-wave rectifiers [-].
    Returns a `Rectified`, voltages [V], mean square [A2] and peak [A] of the current, angles [rad], each of shape
    (corner,); NaN where the reservoir would run empty.
    Source: Kirchhoff's laws, solved exactly in each interval; the start of conduction by false position.

    >>> state = rectified(20.0, 1.4, 0.5, 4700e-6, 1.0, 50.0)
    >>> round(float(state.mean_v), 2), round(float(state.peak_v - state.valley_v), 2), round(float(state.peak_a), 1)
    (16.12, 1.49, 4.8)
    """
    given = np.broadcast_arrays(*(np.asarray(n, dtype=float) for n in (v_peak_v, v_drop_v, r_ohm, c_f, i_load_a, f_hz)))
    v_peak_v, v_drop_v, r_ohm, c_f, i_load_a, f_hz = given
    r_ohm, i_load_a, omega = np.maximum(r_ohm, LEAST_OHM), np.maximum(i_load_a, 1e-12), 2.0 * np.pi * f_hz
    period_rad = np.full_like(omega, 2.0 * np.pi / n_pulses)
    path = _Path(v_peak_v, v_drop_v, r_ohm, omega * r_ohm * c_f, i_load_a, i_load_a / (omega * c_f), period_rad)
    start_rad, empty = _start_rad(path)
    end_rad = _end_rad(path, start_rad)
    state = _read(path, start_rad, end_rad)
    return Rectified(*(np.where(empty, np.nan, quantity) for quantity in (*state, start_rad, end_rad)))


def _start_rad(path):
    """The angle where conduction starts, and whether none does: the later it starts, the less is gained by a period on.

    Halved first, then by false position with the weight of an end that stays halved (the Illinois method).
    """
    low = np.arcsin(np.clip(path.v_drop_v / path.v_peak_v, 0.0, 1.0))
    high = np.full_like(low, np.pi / 2.0)
    at_low, at_high = _surplus_v(path, low), _surplus_v(path, high)
    empty, kept = at_low < 0.0, np.zeros_like(low)
    for k in range(N_HALVINGS + N_FALSE_POSITIONS):
        with np.errstate(divide="ignore", invalid="ignore"):
            chord = high - at_high * (high - low) / (at_high - at_low)
        halve = (k < N_HALVINGS) | ~np.isfinite(chord)
        middle = np.where(halve, (low + high) / 2.0, np.clip(chord, low, high))
        surplus = _surplus_v(path, middle)
        gains = surplus > 0.0
        low, high = np.where(gains, middle, low), np.where(gains, high, middle)
        at_high = np.where(gains, np.where(kept > 0.0, at_high / 2.0, at_high), surplus)
        at_low = np.where(gains, surplus, np.where(kept < 0.0, at_low / 2.0, at_low))
        kept = np.where(gains, 1.0, -1.0) * (k >= N_HALVINGS)
    return middle, empty


def _surplus_v(path, start_rad):
    """By how much the reservoir stands above where it began, one period on [V]."""
    end_rad = _end_rad(path, start_rad)
    begun_v = path.source_v(start_rad)
    end_v = path.charging_v(end_rad, start_rad)
    return end_v - path.fall_v_per_rad * (start_rad + path.period_rad - end_rad) - begun_v


def _end_rad(path, start_rad):
    """The angle where the charging current falls to nothing: past the crest, before the source is at zero again."""
    low, high = np.maximum(start_rad, np.pi / 2.0), np.full_like(start_rad, np.pi)
    at = low + 0.1 * (high - low)
    for _ in range(N_INNER):
        excess_v = path.source_v(at) - path.charging_v(at, start_rad)
        rise_v = (excess_v / path.r_ohm - path.i_load_a) * path.fall_v_per_rad / path.i_load_a
        slope_v = path.v_peak_v * np.cos(at) - rise_v
        low, high = np.where(excess_v > 0.0, at, low), np.where(excess_v > 0.0, high, at)
        with np.errstate(divide="ignore", invalid="ignore"):
            newton = at - excess_v / slope_v
        at = np.where((newton >= low) & (newton <= high), newton, (low + high) / 2.0)
    return at


def _read(path, start_rad, end_rad):
    """Mean, valley, peak of the voltage; mean square and peak of the current."""
    width = end_rad - start_rad
    begun_v, end_v = path.source_v(start_rad), path.charging_v(end_rad, start_rad)
    source_vrad = path.v_peak_v * (np.cos(start_rad) - np.cos(end_rad)) - path.v_drop_v * width
    # All charge of the load passes the resistance within the conduction: ∫ i dθ = I · period.
    conducting_vrad = source_vrad - path.r_ohm * path.i_load_a * path.period_rad
    idle_vrad = (end_v + begun_v) / 2.0 * (path.period_rad - width)
    mean_v = (conducting_vrad + idle_vrad) / path.period_rad
    layer = np.minimum(6.0 * path.tau_rad, width)
    theta, weight = (np.concatenate(rows) for rows in zip(
        _nodes(start_rad, start_rad + layer), _nodes(start_rad + layer, end_rad), strict=True))
    i_a = path.current_a(theta, start_rad)
    v_v = path.charging_v(theta, start_rad)
    square = (i_a**2 * weight).sum(axis=0) / path.period_rad
    valley_v = np.minimum(begun_v, -_crest(-v_v, theta))
    return mean_v, valley_v, np.maximum(_crest(v_v, theta), end_v), square, np.maximum(_crest(i_a, theta), 0.0)


def _nodes(low, high):
    """Nodes and weights of Gauss's rule between two angles, shape (node, corner)."""
    half = (high - low) / 2.0
    shape = (-1, *(1,) * half.ndim)
    return (low + high) / 2.0 + NODES.reshape(shape) * half, WEIGHTS.reshape(shape) * half


def _crest(values, theta):
    """The highest value, by the parabola through the three highest neighbours, shape (corner,)."""
    best = np.clip(values.argmax(axis=0), 1, len(values) - 2)[None]
    x0, x1, x2 = (np.take_along_axis(theta, best + k, axis=0)[0] for k in (-1, 0, 1))
    y0, y1, y2 = (np.take_along_axis(values, best + k, axis=0)[0] for k in (-1, 0, 1))
    with np.errstate(divide="ignore", invalid="ignore"):
        first, second = (y1 - y0) / (x1 - x0), (y2 - y1) / (x2 - x1)
        bend = (second - first) / (x2 - x0)
        top = (x0 + x1) / 2.0 - first / (2.0 * bend)
        crest = y1 + (top - x1) * (first + bend * (top - x0))
    return np.where((bend < 0.0) & (top > x0) & (top < x2), np.maximum(crest, y1), y1)
