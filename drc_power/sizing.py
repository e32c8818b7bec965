"""What would make a part pass: the levers of one part, moved on the real solver until its worst finding is just met."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from .board import Board, Mode
from .checks import House, Judgement, judge
from .quantity import format_quantity
from .solve.build import build_circuit
from .solve.circuit import Circuit
from .solve.search import worst_corners
from .solve.sizing import NOT_MET, Boundary, Lever, boundary
from .solve.solution import Engine

REACH = 5.0
"""A resistance, a current or a power is tried from a fifth to five times its present value."""

MATTERS = 1e-3
NUDGE = 0.9
"""A judgement that changes by less than MATTERS when a lever goes to this share of its value is none of its business."""

AMBIENT_C = (-60.0, 250.0)


@dataclass(frozen=True, slots=True)
class Sizing:
    """One part in one mode: how far each lever goes, what no lever moves although it fails, and what is unproven."""

    mode: str
    ref: str
    boundaries: tuple[Boundary, ...]
    stuck: tuple[str, ...]
    unproven: tuple[str, ...]


def size_part(board: Board, ref: str) -> list[Sizing]:
    """Every mode's answer for one part."""
    house = House(board.rules)
    return [_Part(mode, ref, house).sizing() for mode in board.modes]


class _Part:
    """The judgements of one part in one mode, with every lever a side of the box."""

    def __init__(self, mode: Mode, ref: str, house: House) -> None:
        self.mode, self.ref, self.house = mode, ref, house
        self.circuit = build_circuit(mode, frozenset(_lever_names(mode, ref)))
        self.engine = Engine(self.circuit)

    def sizing(self) -> Sizing:
        now = self.judged(self.circuit.box.typical()[None])
        unproven = tuple(dict.fromkeys(datum for j in now for datum in j.lacking))
        proven = [k for k, j in enumerate(now) if not j.lacking]
        worst = worst_corners(self.circuit.box, lambda points: (self.margins_of(proven, points), np.empty((0, len(points)))))
        fails = {k for k, least in zip(proven, self.margins_of(proven, worst.points).min(axis=1), strict=True) if least < -1e-9}
        found = []
        for lever in _levers(self.circuit, self.ref):
            rows = self.moved_by(lever)
            if rows:
                fails -= set(rows)
                found.append(boundary(self.circuit.box, lambda points, r=rows: self.margins_of(r, points).min(axis=0), lever, worst.points))
        stuck = tuple(dict.fromkeys(now[k].rule for k in sorted(fails)))
        return Sizing(self.mode.name, self.ref, tuple(found), stuck, unproven)

    def margins_of(self, rows: Sequence[int], points: np.ndarray) -> np.ndarray:
        """The margins of some judgements at points, shape (judgement, point); an unproven one counts as not met."""
        judged = self.judged(points)
        found = np.array([judged[k].margins() for k in rows]).reshape(len(rows), len(points))
        return np.where(np.isnan(found), NOT_MET, found)

    def judged(self, points: np.ndarray) -> list[Judgement]:
        return [j for j in judge(self.engine.solve(points), self.house, self.ref) if j.ref == self.ref]

    def moved_by(self, lever: Lever) -> list[int]:
        """The judgements that change when the lever is nudged."""
        points = np.repeat(self.circuit.box.typical()[None], 2, axis=0)
        points[:, lever.index] = lever.now, lever.now * NUDGE if lever.dimension != "temperature" else lever.now - 10.0
        return [k for k, j in enumerate(self.judged(points)) if not j.lacking and abs(np.diff(j.margins())[0]) > MATTERS]


def _lever_names(mode: Mode, ref: str) -> Iterator[str]:
    heat = mode.parts[ref].note.heat
    if heat is not None and heat.sink:
        yield f"sink {heat.sink}"
        yield f"{ref} interface"
    elif heat is not None and heat.to_ambient is not None:
        yield f"{ref} to ambient"
    else:
        yield f"{ref} rth_ja"
    yield "ambient"
    yield from (f"{name} at" for name in mode.loads)


def _levers(circuit: Circuit, ref: str) -> Iterator[Lever]:
    for name in dict.fromkeys(_lever_names(circuit.mode, ref)):
        index = circuit.box.index_of(name)
        if index is None:
            continue
        variable = circuit.box.variables[index]
        less_is_worse = variable.dimension == "resistance"
        now = variable.span.min if less_is_worse else variable.span.max
        if variable.dimension == "temperature":
            yield Lever(name, index, now, *AMBIENT_C, variable.dimension)
        elif now > 0.0:
            yield Lever(name, index, now, now / REACH, now * REACH, variable.dimension, -1 if less_is_worse else 1)


def sizing_text(found: list[Sizing]) -> str:
    """The answers as text: what can be moved and how far; what was tried in vain in one line."""
    lines = []
    for sizing in found:
        lines.append(f"{sizing.ref} in mode {sizing.mode}")
        turns = [each for each in sizing.boundaries if each.value is not None]
        lines += [f"  {_line(each)}" for each in turns]
        for passes, text in ((True, "never past its limits, whatever of this is moved alone"), (False, "not brought within its limits by moving one of")):
            names = [each.lever.name.removesuffix(" at") for each in sizing.boundaries if each.value is None and each.passes_now == passes]
            lines += [f"  {text}: {', '.join(names)}"] if names else []
        if sizing.stuck:
            lines.append(f"  no load, sink or ambient moves what is past its limit in: {', '.join(sizing.stuck)}")
        if sizing.unproven:
            lines.append(f"  not judged, for want of: {', '.join(sizing.unproven)}")
    return "\n".join(lines) + "\n"


def _line(found: Boundary) -> str:
    lever = found.lever
    bound = "at least" if lever.worse < 0 else "at most"
    verb = "holds with" if found.passes_now else "would hold with"
    value, now = (format_quantity(number, lever.dimension) for number in (found.value, lever.now))
    return f"{verb} {lever.name.removesuffix(' at')} {bound} {value} (now {now})"
