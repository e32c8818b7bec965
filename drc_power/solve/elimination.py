"""Sparse Gaussian elimination of many systems of one pattern at once, written over the sample axis.

A bare batched dense solve costs tens of microseconds a sample; the networks of a board are nearly trees, so
elimination in a good order touches few entries, and each touch is one numpy operation over all samples.
"""

from __future__ import annotations

import heapq
from dataclasses import dataclass

import numpy as np

PIVOT_THRESHOLD = 1e-2
"""A pivot is at least this share of the largest entry left in its column (Markowitz with threshold)."""


@dataclass(frozen=True, slots=True)
class Step:
    """One pivot: its slot, and for every row below it the slots to combine."""

    pivot: int
    row: int
    column: int
    rest: np.ndarray
    rest_columns: np.ndarray
    targets: tuple[tuple[int, int, np.ndarray], ...]


@dataclass(frozen=True, slots=True)
class Plan:
    """An order of elimination for one pattern. `n_slots` counts the entries with fill-in."""

    n_slots: int
    steps: tuple[Step, ...]


class SingularPattern(ArithmeticError):
    """No pivot is left: the equations do not determine every unknown."""


def plan_elimination(rows: np.ndarray, columns: np.ndarray, values: np.ndarray, n: int) -> Plan:
    """Order the elimination of an n × n pattern, pivoting on the values of one sample.

    rows, columns: the entries' places, shape (entry,), each place once. values: one sample, shape (entry,).
    Returns the plan; raises SingularPattern where a column has no usable pivot.
    """
    table: list[dict[int, int]] = [{} for _ in range(n)]
    by_column: list[set[int]] = [set() for _ in range(n)]
    number = list(values)
    for slot, (r, c) in enumerate(zip(rows.tolist(), columns.tolist(), strict=True)):
        table[r][c] = slot
        by_column[c].add(r)
    queue = [(len(by_column[c]), c) for c in range(n)]
    heapq.heapify(queue)
    done: set[int] = set()
    steps = []
    while queue:
        count, column = heapq.heappop(queue)
        if column in done:
            continue
        if count != len(by_column[column]):
            heapq.heappush(queue, (len(by_column[column]), column))
            continue
        row = _pivot_row(column, by_column, table, number)
        steps.append(_eliminate(row, column, table, by_column, number))
        done.add(column)
    return Plan(len(number), tuple(steps))


def _pivot_row(column: int, by_column: list[set[int]], table: list[dict[int, int]], number: list[float]) -> int:
    sizes = {r: abs(number[table[r][column]]) for r in by_column[column]}
    largest = max(sizes.values(), default=0.0)
    if not largest > 0.0:
        raise SingularPattern(column)
    usable = (r for r, size in sizes.items() if size >= PIVOT_THRESHOLD * largest)
    return min(usable, key=lambda r: (len(table[r]), -sizes[r], r))


def _eliminate(row: int, column: int, table, by_column, number) -> Step:
    pivot_row = table[row]
    pivot_slot = pivot_row[column]
    rest = [(c, s) for c, s in pivot_row.items() if c != column]
    targets = []
    for r in sorted(by_column[column] - {row}):
        factor_slot = table[r].pop(column)
        factor = number[factor_slot] / number[pivot_slot]
        slots = []
        for c, s in rest:
            if c not in table[r]:
                table[r][c] = len(number)
                number.append(0.0)
                by_column[c].add(r)
            number[table[r][c]] -= factor * number[s]
            slots.append(table[r][c])
        targets.append((r, factor_slot, np.array(slots, dtype=np.intp)))
    for c, _ in rest:
        by_column[c].discard(row)
    by_column[column] = set()
    return Step(pivot_slot, row, column, np.array([s for _, s in rest], dtype=np.intp),
                np.array([c for c, _ in rest], dtype=np.intp), tuple(targets))


def solve_planned(plan: Plan, values: np.ndarray, right: np.ndarray) -> np.ndarray:
    """Solve all samples by one plan.

    values: entries in the order the plan was made for, shape (entry, sample). right: shape (n, sample).
    Returns the solution, shape (n, sample); a sample whose pivot vanishes comes out as nan or inf.
    """
    work = np.zeros((plan.n_slots, values.shape[1]))
    work[: values.shape[0]] = values
    right = right.copy()
    solution = np.empty_like(right)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        for step in plan.steps:
            inverse = 1.0 / work[step.pivot]
            pivot_rest = work[step.rest]
            for row, factor_slot, slots in step.targets:
                factor = work[factor_slot] * inverse
                if len(slots):
                    work[slots] -= factor * pivot_rest
                right[row] -= factor * right[step.row]
        for step in reversed(plan.steps):
            total = right[step.row]
            if len(step.rest):
                total = total - np.einsum("ks,ks->s", work[step.rest], solution[step.rest_columns])
            solution[step.column] = total / work[step.pivot]
    return solution
