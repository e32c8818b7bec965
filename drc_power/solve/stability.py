"""Heat that feeds itself: the loop gain of temperature and dissipation, and what has no equilibrium.

A hotter channel has more resistance, loses more and gets hotter. The loop gain is the spectral radius of dT'/dT,
where T' is the temperature that the losses at temperature T would settle at. Below 1 the loop settles.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from .newton import Solver, take
from .system import Prepared, System

CERTAIN_BELOW = 0.5
"""Where a bound on the loop gain lies below this, the gain itself is not computed."""

HOPELESS_C = 2000.0
"""Past this a loop that still feeds itself is diverging; one that no longer does is followed, to END_C."""

END_C = 1e5

SETTLED_K = 1e-9
HASTE = 4.0
MOST_AT_ONCE = 1e3
MAX_ROUNDS = 120
CHUNK = 256


def gain_bound(system: System, x: np.ndarray, prepared: Prepared) -> np.ndarray:
    """An upper estimate of the loop gain at fixed currents, shape (sample,): the largest row sum of |R · dP/dT|."""
    slopes_w_per_k = np.zeros((len(system.thermal.parts), prepared.n_samples))
    rows = {part: k for k, part in enumerate(system.thermal.parts)}
    temperatures = set(system.temperature_at.tolist())
    for family, p in zip(system.families, prepared.families, strict=True):
        for parts, _, slopes in family.heats(x, p):
            for columns, value in slopes:
                for part, column, per_k in zip(parts, columns.tolist(), value, strict=True):
                    if column in temperatures and part in rows:
                        slopes_w_per_k[rows[part]] += np.abs(per_k)
    return system.thermal.gain_bound(x, prepared.heat, slopes_w_per_k)


def loop_gain(solver: Solver, x: np.ndarray, prepared: Prepared) -> np.ndarray:
    """The loop gain at x with all the network's answers to a change of temperature, shape (sample,)."""
    t = solver.system.temperature_at
    gains = np.zeros(prepared.n_samples)
    if not len(t):
        return gains
    for first in range(0, prepared.n_samples, CHUNK):
        samples = np.arange(first, min(first + CHUNK, prepared.n_samples))
        free = replace(take(prepared, samples), held_c=None)
        jacobian = solver.jacobian(x[:, samples], free)
        rest = np.setdiff1d(np.arange(solver.system.n), t)
        inner = jacobian[:, rest[:, None], rest]
        outer = jacobian[:, rest[:, None], t]
        try:
            answer = np.linalg.solve(inner, outer)
        except np.linalg.LinAlgError:
            # A singular network has no loop gain; its samples are unconverged in any case.
            answer = np.array([_answer_or_nan(m, b) for m, b in zip(inner, outer, strict=True)])
        closed = jacobian[:, t[:, None], t] - jacobian[:, t[:, None], rest] @ answer
        known = np.isfinite(closed).all(axis=(1, 2))
        gains[samples[known]] = np.abs(np.linalg.eigvals(np.eye(len(t)) - closed[known])).max(axis=1, initial=0.0)
    return gains


def _answer_or_nan(inner: np.ndarray, outer: np.ndarray) -> np.ndarray:
    try:
        return np.linalg.solve(inner, outer)
    except np.linalg.LinAlgError:
        return np.full_like(outer, np.nan)


def climb(solver: Solver, x: np.ndarray, prepared: Prepared) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """From the ambient upward, each round at the temperatures that the last round's losses give.

    Losses that rise with temperature make this climb to the lowest equilibrium, or without end where there is none.
    Returns the last unknowns, where an equilibrium was reached, and which followed parts ran away (part, sample).
    """
    at, x = solver.system.temperature_at, x.copy()
    settled = np.zeros(prepared.n_samples, dtype=bool)
    lost = np.zeros(prepared.n_samples, dtype=bool)
    active, last = np.arange(prepared.n_samples), np.full(prepared.n_samples, 1e300)
    stride = np.ones(prepared.n_samples)
    ran = np.zeros((len(at), prepared.n_samples), dtype=bool)
    for _ in range(MAX_ROUNDS):
        part, held_c = take(prepared, active), x[at][:, active]
        found, solved = solver.solve(x[:, active], replace(part, held_c=held_c))
        target = solver.system.thermal.settling_c(found, part.heat)
        moved = np.abs(target - held_c).max(axis=0)
        x[:, active] = found
        settled[active] = solved & (moved < SETTLED_K * (1.0 + np.abs(held_c).max(axis=0)))
        lost[active] = ~solved
        gain = 1.0 + (moved / last[active] - 1.0) / stride[active]
        feeds_itself = (gain >= 1.0 - 1e-9) | (held_c.max(axis=0) > END_C)
        ran[:, active] = (held_c > HOPELESS_C) & (target > held_c) & feeds_itself
        going = ~settled[active] & ~lost[active] & ~ran[:, active].any(axis=0)
        if not going.any():
            break
        stride[active] = _stride(gain, stride[active])
        last[active] = moved
        active = active[going]
        x[np.ix_(at, active)] = held_c[:, going] + stride[active] * (target - held_c)[:, going]
    return x, settled, ran & ~settled & ~lost


def _stride(gain: np.ndarray, stride: np.ndarray) -> np.ndarray:
    """How many rounds' worth to climb at once, shape (sample,).

    gain: of the loop, read off the last stride, since a loop of gain g changes the distance to the settling temperature
    by 1 + (g − 1) · stride. With g below 1 there are 1/(1 − g) rounds' worth left if it stays, of which most is taken;
    from 1 on the climb has no end in sight and is hastened.
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        rest = np.clip(0.9 / (1.0 - gain), 1.0, MOST_AT_ONCE)
    return np.where(~np.isfinite(gain), 1.0, np.where(gain >= 1.0, np.minimum(HASTE * stride, MOST_AT_ONCE), rest))
