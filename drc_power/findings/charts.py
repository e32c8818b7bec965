"""What a chart shows, as numbers: written by a run, drawn by the report."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True, slots=True)
class AreaLine:
    """One line of a safe area at one case: the current over the voltage. `length_s` is None for any length."""

    length_s: float | None
    case_c: float
    voltage_v: np.ndarray
    current_a: np.ndarray


@dataclass(frozen=True, slots=True)
class AreaPoint:
    """The operating point of one mode at its worst corner."""

    mode: str
    voltage_v: float
    current_a: float
    case_c: float
    verdict: str


@dataclass(frozen=True, slots=True)
class AreaPath:
    """The path of one event at its worst corner, and the point of it that decides."""

    event: str
    mode: str
    voltage_v: np.ndarray
    current_a: np.ndarray
    decides_v: float
    decides_a: float
    rated_a: float | None
    case_c: float
    verdict: str


@dataclass(frozen=True, slots=True)
class SafeAreaChart:
    """The safe area of one part, with everything that the board asks of it."""

    board: str
    ref: str
    device: str
    drawn: tuple[AreaLine, ...]
    hot: tuple[AreaLine, ...]
    on_ohm: float | None
    points: tuple[AreaPoint, ...]
    paths: tuple[AreaPath, ...]
