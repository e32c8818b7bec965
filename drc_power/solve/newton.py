"""Newton's method for many samples at once, each linear step by sparse elimination over the sample axis."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np

from .elimination import Plan, SingularPattern, plan_elimination, solve_planned
from .families import PowerLoads
from .system import Prepared, System

MAX_ITERATIONS = 60
STEP_TOLERANCE = 1e-12
"""Converged when no unknown moves by more than this share of itself (of 1 below 1) and no branch changes its line."""

RESIDUAL = 1e-7
"""And no equation misses by more than this share of the largest unknown: a singular network stands still without a solution."""

MILD_ITERATIONS = 8
MILD_ROUNDS = 8
"""How often the milder network is solved on the way to the real one."""

SMALL_STEP = 1e-9
"""Polishing moves nothing by more than this: a larger step would be no rounding."""

DAMPING = ((10, 1.0), (25, 0.5), (MAX_ITERATIONS, 0.2))
"""Up to which iteration the step is taken at which length: a cycle between lines is broken by shorter steps."""

VOLTAGE_ROOM = 3.0
"""No node strays further than this many times the highest voltage of the starting point on the way."""

MAX_TEMPERATURE_C = 1e6
"""A temperature past this is no equilibrium; it only keeps the numbers finite while runaway is being shown."""


@dataclass(slots=True)
class Solver:
    """Newton's method on one system; plans are kept by regime, since equal regimes have equal good pivots."""

    system: System
    plans: dict[bytes, Plan] = field(default_factory=dict)
    _pattern: tuple[np.ndarray, np.ndarray] | None = None
    _slots: list[np.ndarray] = field(default_factory=list)

    def solve(self, x: np.ndarray, prepared: Prepared) -> tuple[np.ndarray, np.ndarray]:
        """Iterate from x of shape (unknown + 1, sample). Returns the solution and where it converged, (sample,).

        Where that does not converge it is tried once more from a milder network's solution.
        """
        start = x
        x, converged = self._iterate(start, prepared)
        lost = np.flatnonzero(~converged & ~self._is_hopeless(x))
        if len(lost) and any(isinstance(f, PowerLoads) for f in self.system.families):
            part = take(prepared, lost)
            x[:, lost], converged[lost] = self._iterate(self._milder(start[:, lost], part), part)
        return x, converged

    def _milder(self, x: np.ndarray, prepared: Prepared) -> np.ndarray:
        """A starting point with every constant-power load as a resistor, its voltage set to what it got in the last round."""
        volts = [None] * len(self.system.families)
        for _ in range(MILD_ROUNDS):
            families = []
            for k, (family, p) in enumerate(zip(self.system.families, prepared.families, strict=True)):
                if isinstance(family, PowerLoads):
                    reached = x[family.a] - x[family.b]
                    volts[k] = np.maximum(reached, p["floor"]) if volts[k] is None else np.maximum(0.5 * (volts[k] + reached), p["floor"])
                    p = {**p, "as_resistor_v": volts[k]}
                families.append(p)
            x, _ = self._iterate(x, replace(prepared, families=tuple(families)), MILD_ITERATIONS)
        return x

    def _iterate(self, x: np.ndarray, prepared: Prepared, most: int = MAX_ITERATIONS) -> tuple[np.ndarray, np.ndarray]:
        converged = np.zeros(prepared.n_samples, dtype=bool)
        x = x.copy()
        bound_v = VOLTAGE_ROOM * np.abs(x[self.system.nodes]).max(initial=1.0)
        active, part = np.arange(prepared.n_samples), prepared
        before = self.system.regime(x, part)
        for iteration in range(most):
            residual, entries = self.system.evaluate(x[:, active], part)
            step = self._step(before, residual, entries)
            damping = next(share for limit, share in DAMPING if iteration < limit)
            x[:-1, active] -= damping * step
            self._keep_in_bounds(x, bound_v)
            after = self.system.regime(x[:, active], part)
            size = np.abs(step) / np.maximum(np.abs(x[:-1, active]), 1.0)
            met = np.abs(residual).max(axis=0, initial=0.0) <= RESIDUAL * (1.0 + np.abs(x[:-1, active]).max(axis=0, initial=0.0))
            done = (size.max(axis=0, initial=0.0) <= STEP_TOLERANCE) & (before == after).all(axis=0) & met
            converged[active[done]] = True
            done |= self._is_hopeless(x[:, active])
            before = after
            if done.all():
                break
            if done.any():
                active, before = active[~done], after[:, ~done]
                part = take(prepared, active)
        return x, converged

    def _is_hopeless(self, x: np.ndarray) -> np.ndarray:
        """Where a temperature has left for where no equilibrium is, shape (sample,): that sample stops unconverged."""
        at = self.system.thermal.kelvin_at
        return (np.abs(x[at]) >= MAX_TEMPERATURE_C).any(axis=0) if len(at) else np.zeros(x.shape[1], dtype=bool)

    def polish(self, x: np.ndarray, prepared: Prepared) -> np.ndarray:
        """One step more from a solution: it takes the rounding of large currents out of small ones."""
        residual, entries = self.system.evaluate(x, prepared)
        step = self._step(self.system.regime(x, prepared), residual, entries)
        x = x.copy()
        x[:-1] -= np.where(np.abs(step) <= SMALL_STEP * np.maximum(np.abs(x[:-1]), 1.0), step, 0.0)
        return x

    def _keep_in_bounds(self, x: np.ndarray, bound_v: float) -> None:
        nodes, at = self.system.nodes, self.system.thermal.kelvin_at
        x[nodes] = np.clip(x[nodes], -bound_v, bound_v)
        if len(at):
            x[at] = np.clip(np.nan_to_num(x[at], nan=MAX_TEMPERATURE_C), -273.15, MAX_TEMPERATURE_C)

    def _step(self, regime: np.ndarray, residual: np.ndarray, entries) -> np.ndarray:
        values = self._gather(entries, residual.shape[1])
        step = np.empty_like(residual)
        for key, samples in _groups(regime):
            step[:, samples] = self._solve_group(key, values[:, samples], residual[:, samples])
        bad = ~np.isfinite(step).all(axis=0)
        if bad.any():
            step[:, bad] = self.dense_solve(values[:, bad], residual[:, bad])
        return step

    def _solve_group(self, key: bytes, values: np.ndarray, right: np.ndarray) -> np.ndarray:
        rows, columns = self._pattern
        if key not in self.plans:
            try:
                self.plans[key] = plan_elimination(rows, columns, values[:, 0], self.system.n)
            except SingularPattern:
                return np.full_like(right, np.nan)
        return solve_planned(self.plans[key], values, right)

    def _gather(self, entries, n_samples: int) -> np.ndarray:
        """Entries summed by place: values of shape (entry, sample) in the order of the pattern."""
        if self._pattern is None:
            self._lay_pattern(entries)
        values = np.zeros((len(self._pattern[0]) + 1, n_samples))
        for slots, (_, _, value) in zip(self._slots, entries, strict=True):
            values[slots] += value
        return values[:-1]

    def _lay_pattern(self, entries) -> None:
        """Number the places once; entries on the zero row or column all share the last slot, which is dropped."""
        numbers: dict[tuple[int, int], int] = {}
        for rows, columns, _ in entries:
            for r, c in zip(rows.tolist(), columns.tolist(), strict=True):
                if r >= 0 and c >= 0:
                    numbers.setdefault((r, c), len(numbers))
        for rows, columns, _ in entries:
            slots = [numbers.get((r, c), len(numbers)) for r, c in zip(rows.tolist(), columns.tolist(), strict=True)]
            self._slots.append(np.array(slots, dtype=np.intp))
        places = np.array(list(numbers), dtype=np.intp).reshape(-1, 2)
        self._pattern = places[:, 0], places[:, 1]

    def dense(self, values: np.ndarray) -> np.ndarray:
        """The matrices of the given entries, shape (sample, unknown, unknown)."""
        rows, columns = self._pattern
        matrix = np.zeros((values.shape[1], self.system.n, self.system.n))
        matrix[:, rows, columns] = values.T
        return matrix

    def dense_solve(self, values: np.ndarray, right: np.ndarray) -> np.ndarray:
        """The same step by a dense solver: for the few samples whose pivots vanish in the planned order."""
        out = np.zeros_like(right)
        matrices = self.dense(values)
        finite = np.isfinite(matrices).all(axis=(1, 2)) & np.isfinite(right).all(axis=0)
        if finite.any():
            try:
                out[:, finite] = np.linalg.solve(matrices[finite], right[:, finite].T[..., None])[..., 0].T
            except np.linalg.LinAlgError:
                for sample in np.flatnonzero(finite):
                    out[:, sample] = np.linalg.lstsq(matrices[sample], right[:, sample], rcond=None)[0]
        return out

    def jacobian(self, x: np.ndarray, prepared: Prepared) -> np.ndarray:
        """dF/dx at x, shape (sample, unknown, unknown)."""
        _, entries = self.system.evaluate(x, prepared)
        return self.dense(self._gather(entries, prepared.n_samples))


def _groups(regime: np.ndarray):
    """Samples of equal regime, each with a key."""
    packed = np.packbits(regime, axis=0)
    if packed.shape[0] == 0 or (packed == packed[:, :1]).all():
        yield packed[:, 0].tobytes() if packed.shape[1] else b"", np.arange(regime.shape[1])
        return
    keys, inverse = np.unique(packed, axis=1, return_inverse=True)
    for k in range(keys.shape[1]):
        yield keys[:, k].tobytes(), np.flatnonzero(inverse == k)


def take(prepared: Prepared, samples: np.ndarray) -> Prepared:
    if len(samples) == prepared.n_samples:
        return prepared
    families = tuple({name: value[:, samples] for name, value in p.items()} for p in prepared.families)
    heat = {name: value[:, samples] for name, value in prepared.heat.items()}
    held_c = None if prepared.held_c is None else prepared.held_c[:, samples]
    return Prepared(families, heat, len(samples), held_c)
