"""Tracks as branches: copper whose own current warms it, and with it its resistance."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from ..physics import copper
from .families import LINK_OHM, Entries, Family, Heats, Residuals, Values
from .heat import AIR, TRACKS
from .layout import Layout
from .variables import Param, values_of

MOST_RISE_K = 300.0
"""Hotter than this no track is taken to be, so that what the charts do not cover still has a number."""

FITS: Mapping[str, str] = {"ipc-2152": "ipc-2152-vacuum", "qft-in-0113": "cnes"}
"""The fit of measured charts behind each method but the first, `ipc-2221`."""

SOURCES: Mapping[str, str] = {"ipc-2221": "IPC-2221: I = k · ΔT^0.44 · A^0.725, A in mil²",
                              **{method: copper.CHART_FITS[fit].source for method, fit in FITS.items()}}

WIDEST_M = {"ipc-2221": 400 * 25.4e-6}
"""Where a method's chart ends."""


@dataclass(frozen=True, slots=True)
class Track:
    """One stretch of copper from `a`, towards the source, to `b`: R = ρ(T) · (length/A + vias), T = air + rise(|i|).

    vias_per_m: length over section of the vias in series with it [1/m]. `part` is the key of all tracks' heat.
    """

    key: str
    a: str
    b: str
    length_m: Param
    width_m: float
    thickness_m: float
    method: str
    inner: bool
    start_c: Param
    vias_per_m: float = 0.0
    part: str = TRACKS

    @property
    def area_m2(self) -> float:
        return self.width_m * self.thickness_m

    def rise_k(self, i_a: np.ndarray) -> np.ndarray:
        """Rise at a current [K]; NaN beyond what the method covers."""
        wide = self.width_m > WIDEST_M.get(self.method, np.inf) * (1.0 + 1e-9)
        return rise_by(self.method, i_a, self.area_m2, self.inner) * (np.nan if wide else 1.0)


def rise_by(method: str, i_a: np.ndarray, area_m2: float, inner: bool) -> np.ndarray:
    """Rise of copper of a section by a method of the house [K]; NaN beyond what the method covers."""
    if method in FITS:
        return copper.chart_rise_k(i_a, area_m2, FITS[method])
    return copper.ipc_2221_rise_k(i_a, area_m2, copper.IPC_2221_INNER if inner else copper.IPC_2221_OUTER)


class Tracks(Family):
    """v_a − v_b − R(T(i)) · i = 0."""

    def __init__(self, branches: Sequence[Track], layout: Layout) -> None:
        super().__init__(branches, layout)
        self.methods = {method: [k for k, b in enumerate(branches) if b.method == method] for method in SOURCES}
        self.areas = np.array([b.area_m2 for b in branches])[:, None]
        self.constants = np.array([copper.IPC_2221_INNER if b.inner else copper.IPC_2221_OUTER for b in branches])[:, None]

    def follow_temperature(self, layout: Layout) -> None:
        self.air = np.full(len(self.branches), layout.unknown("sink", AIR), dtype=np.intp)

    def parameters(self, points: np.ndarray) -> Values:
        per_m = values_of([b.length_m for b in self.branches], points) / self.areas
        per_m = per_m + np.array([b.vias_per_m for b in self.branches])[:, None]
        starts = values_of([b.start_c for b in self.branches], points)
        return {"per_m": per_m, "start": starts if (self.air < 0).all() else np.zeros_like(starts)}

    def flows(self, p: Values):
        return self.through(1.0)

    def _rise(self, size_a: np.ndarray) -> np.ndarray:
        """Rise of every track, carried on past the charts and held at `MOST_RISE_K`."""
        rise = np.empty_like(size_a)
        for method, rows in self.methods.items():
            if method in FITS:
                fit = copper.CHART_FITS[FITS[method]]
                most = copper.chart_rise_k(np.minimum(size_a[rows], fit.max_i_a), self.areas[rows], FITS[method])
                rise[rows] = np.where(np.isnan(most), fit.max_rise_k, most)
            else:
                at_one_kelvin = self.constants[rows] * (self.areas[rows] / copper.MIL2_M2) ** 0.725
                rise[rows] = (size_a[rows] / at_one_kelvin) ** (1.0 / 0.44)
        return np.minimum(rise, MOST_RISE_K)

    def _resistance(self, x: np.ndarray, p: Values) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """R [ohm], the slope of R · i over i [ohm], and that of R over the air's temperature [ohm/K]."""
        size = np.abs(x[self.i])
        step = 1e-6 * size + 1e-9
        rise = self._rise(size)
        per_amp = (self._rise(size + step) - rise) / step
        r = copper.resistivity_ohm_m(p["start"] + x[self.air] + rise) * p["per_m"]
        per_k = copper.RESISTIVITY_20_OHM_M * copper.TEMPCO_20_PER_K * p["per_m"]
        r = np.maximum(r, LINK_OHM)
        return r, r + per_k * per_amp * size, per_k

    def equations(self, x: np.ndarray, p: Values) -> tuple[Residuals, Entries]:
        i, (r, per_i, per_k) = x[self.i], self._resistance(x, p)
        one = np.ones_like(i)
        entries = [(self.i, self.a, one), (self.i, self.b, -one), (self.i, self.i, -per_i), (self.i, self.air, -per_k * i)]
        return [(self.i, x[self.a] - x[self.b] - r * i)], entries

    def heats(self, x: np.ndarray, p: Values) -> Heats:
        i, (r, per_i, per_k) = x[self.i], self._resistance(x, p)
        return [(self.parts, r * i * i, [(self.i, (r + per_i) * i), (self.air, per_k * i * i)])]
