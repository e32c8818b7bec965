"""The transient impedance of one part, from whichever of a curve, a Foster or a Cauer network its data gives."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from ...board import BoardPart
from ...physics.event_heat import fading_k, foster_paths_k, periodic_starts_k, superposed_paths_k
from ...physics.impedance import (
    Foster, cauer_to_foster, fit_foster, foster_zth_k_per_w, table_zth_integral_k_s_per_w, table_zth_k_per_w,
)

FIT_WITHIN = 0.02
"""A fitted network that misses the curve's own points by more than this share is said to."""


@dataclass(frozen=True)
class JunctionImpedance:
    """Junction to case. `reach_s` is how long an event may last before the data ends.

    A curve answers single events itself, by superposition; its fitted network answers trains and captures.
    """

    entry: str
    terms: Foster | None = None
    table: tuple[tuple[float, ...], tuple[float, ...], float | None] | None = None
    reach_s: float = np.inf

    @cached_property
    def foster(self) -> Foster:
        """The network given, or the one that fits the curve."""
        return self.terms if self.terms is not None else fit_foster(*self.table)

    @property
    def is_fitted(self) -> bool:
        return self.table is not None

    @cached_property
    def final_k_per_w(self) -> float:
        """What it ends at for ever [K/W]."""
        if self.table is None:
            return float(np.sum(self.foster.r_k_per_w))
        return self.table[2] if self.table[2] is not None else self.table[1][-1]

    def zth_k_per_w(self, t_s: np.ndarray) -> np.ndarray:
        """The impedance after a time [K/W], shape of t_s; NaN past what the data says."""
        t_s = np.asarray(t_s, dtype=float)
        if self.table is None:
            return foster_zth_k_per_w(t_s, self.foster.r_k_per_w, self.foster.tau_s)
        return np.where(t_s <= self.reach_s, table_zth_k_per_w(t_s, *self.table), np.nan)

    def rise_k(self, t_s: np.ndarray, p_w: np.ndarray, period_s: np.ndarray | None = None) -> np.ndarray:
        """Rise along events, each (event, time); with a period (event,), of an event that has returned for ever."""
        if self.table is not None:
            rise_k = superposed_paths_k(t_s, p_w, self.zth_k_per_w, self._integral)
            if period_s is None:
                return rise_k
        along_k, end_k = foster_paths_k(t_s, p_w, self.foster.r_k_per_w, self.foster.tau_s)
        if period_s is None:
            return along_k
        start_k = periodic_starts_k(end_k, t_s[:, -1] - t_s[:, 0], period_s, self.foster.tau_s)
        once_k = rise_k if self.table is not None else along_k
        return once_k + fading_k(t_s - t_s[:, :1], start_k, self.foster.tau_s)

    def _integral(self, t_s: np.ndarray) -> np.ndarray:
        return np.where(t_s <= self.reach_s, table_zth_integral_k_s_per_w(t_s, *self.table), np.nan)


def impedance_of(part: BoardPart) -> JunctionImpedance | None:
    """The impedance that the device data gives; None where it gives none."""
    thermal = part.device.thermal if part.device else None
    if thermal is None:
        return None
    if thermal.foster is not None:
        return JunctionImpedance("thermal.foster", Foster(*(np.array(thermal.foster.column(k)) for k in (0, 1)), 0.0, np.inf))
    if thermal.cauer is not None:
        return JunctionImpedance("thermal.cauer", Foster(*cauer_to_foster(thermal.cauer.column(0), thermal.cauer.column(1)), 0.0, np.inf))
    if thermal.zth_jc is None:
        return None
    rth = thermal.rth_jc.max if thermal.rth_jc is not None else None
    times_s, zth_k_per_w = thermal.zth_jc.column(0), thermal.zth_jc.column(1)
    return JunctionImpedance("thermal.zth_jc", None, (times_s, zth_k_per_w, rth), np.inf if rth is not None else times_s[-1])
