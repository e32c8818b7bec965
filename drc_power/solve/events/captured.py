"""A capture as a path: every sample for the heat, slices for the safe area, worked out once per part."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from ...physics.inrush import path_energy_j
from ...physics.event_heat import periodic_starts_k
from ...physics.transient import foster_end_k, foster_response_k
from .impedance import JunctionImpedance
from .paths import Path

N_CAPTURE_SLICES = 640
"""Slices of a capture: they stand closer where the energy is."""

N_CELLS = 200_000
"""Cells that a slice is searched in, where a mean over the whole slice could hide a burst."""


@dataclass(frozen=True)
class CapturedPath(Path):
    """A path by its slices' edges, and the samples behind it. `raw_*` are of shape (sample,)."""

    raw_t_s: np.ndarray
    raw_v_v: np.ndarray
    raw_i_a: np.ndarray

    @cached_property
    def raw_w(self) -> np.ndarray:
        return self.raw_v_v * self.raw_i_a

    @cached_property
    def energy_j(self) -> float:
        return float(path_energy_j(self.raw_t_s, self.raw_v_v, self.raw_i_a))

    @property
    def peak_v(self) -> np.ndarray:
        return np.abs(self.raw_v_v).max(keepdims=True)

    @property
    def peak_a(self) -> np.ndarray:
        return np.abs(self.raw_i_a).max(keepdims=True)

    @cached_property
    def square_a(self) -> np.ndarray:
        whole = np.interp(self.t_s[0], self.raw_t_s, _integral(self.raw_t_s, self.raw_i_a**2))
        return (np.diff(whole) / np.maximum(np.diff(self.t_s[0]), 1e-300))[None]

    def rise_k(self, impedance: JunctionImpedance, period_s: np.ndarray | None = None) -> np.ndarray:
        """Highest rise of the junction up to each edge since the edge before [K], shape (1, edge)."""
        r_k_per_w, tau_s = impedance.foster.r_k_per_w, impedance.foster.tau_s
        start_k = None
        if period_s is not None:
            end_k = foster_end_k(self.raw_t_s, self.raw_w, r_k_per_w, tau_s)
            start_k = periodic_starts_k(end_k[None], self.raw_t_s[-1:], period_s[:1], tau_s)[0]
        rise_k = foster_response_k(self.raw_t_s, self.raw_w, r_k_per_w, tau_s, start_k)
        at = np.clip(np.searchsorted(self.raw_t_s, self.t_s[0], side="left"), 0, len(rise_k) - 1)
        highest = np.maximum.reduceat(rise_k, at[:-1])
        return np.append(highest[:1], np.maximum(highest, rise_k[at[1:]]))[None]

    def mean_use(self, use: np.ndarray, shortest_s: float) -> tuple[np.ndarray, np.ndarray]:
        """From the use of each line by each sample, (sample, line): each slice's use (1, slice, line), and its peak of the first.

        A slice much shorter than the shortest line counts by its mean; a longer one by its hardest cell, for a burst
        inside it that fills a line would else be lost.
        """
        edges = self.t_s[0]
        cells = self._cells(edges, shortest_s)
        whole = np.array([np.interp(cells, self.raw_t_s, _integral(self.raw_t_s, line)) for line in use.T])
        means = np.diff(whole, axis=1) / np.maximum(np.diff(cells), 1e-300)
        first = np.searchsorted(cells, edges[:-1])
        hardest = np.maximum.reduceat(means, first, axis=1)
        at = np.clip(np.searchsorted(self.raw_t_s, edges, side="left"), 0, len(self.raw_t_s) - 1)
        peak = np.maximum(np.maximum.reduceat(use[:, 0], at[:-1]), use[at[1:], 0])
        return hardest.T[None], peak[None]

    def _cells(self, edges: np.ndarray, shortest_s: float) -> np.ndarray:
        """The slices' edges, with more between them where a slice is long against the shortest line."""
        n_in = np.clip(np.ceil(np.diff(edges) / (shortest_s / 2.0)), 1, max(1, N_CELLS // (len(edges) - 1))).astype(int)
        starts, lengths = np.repeat(edges[:-1], n_in), np.repeat(np.diff(edges) / n_in, n_in)
        within = np.arange(n_in.sum()) - np.repeat(np.cumsum(n_in) - n_in, n_in)
        return np.append(starts + within * lengths, edges[-1])


def captured_path(t_s: np.ndarray, v_v: np.ndarray, i_a: np.ndarray, share: float) -> CapturedPath:
    """The path of a capture; where power flows back out of the part, nothing does."""
    inward = v_v * i_a > 0.0
    volt, ampere = np.abs(v_v), np.where(inward, np.abs(i_a) * share, 0.0)
    energy = _integral(t_s, volt * ampere)
    total = energy[-1] if energy[-1] > 0.0 else 1.0
    progress = 0.5 * t_s / max(t_s[-1], 1e-300) + 0.5 * energy / total
    edges = np.interp(np.linspace(0.0, progress[-1], N_CAPTURE_SLICES + 1), progress, t_s)
    mean_w = np.diff(np.interp(edges, t_s, energy)) / np.maximum(np.diff(edges), 1e-300)
    edge_w = np.append(mean_w, mean_w[-1])
    edge_v = np.interp(edges, t_s, volt)
    with np.errstate(divide="ignore", invalid="ignore"):
        edge_a = np.where(edge_v > 0.0, edge_w / edge_v, 0.0)
    return CapturedPath(edges[None], edge_v[None], edge_a[None], t_s, volt, ampere)


def _integral(t_s: np.ndarray, values: np.ndarray) -> np.ndarray:
    """Running integral of straight lines, shape of t_s."""
    return np.append(0.0, np.cumsum(np.diff(t_s) * (values[1:] + values[:-1]) / 2.0))
