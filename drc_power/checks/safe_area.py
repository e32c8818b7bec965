"""The safe area of one part as its data and the house's methods give it, and how much of it a path uses."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from ..board import BoardPart
from ..physics.area_use import window_use
from ..physics.envelope import case_factor, curve_current_a, power_line_a, safe_current_a
from ..solve.events.captured import CapturedPath
from ..solve.events.impedance import impedance_of
from ..solve.events.paths import Path

T_DRAWN_C = 25.0
LINES_FOR_HEAT_S = np.geomspace(1e-6, 100.0, 65)
"""Pulse lengths at which an area is made up from a transient impedance, where the house accepts that."""

N_CASES = 49
COLDEST_C = -100.0
"""Case temperatures at which an area is worked out whose lines change shape with temperature."""

Curve = tuple[tuple[float, ...], tuple[float, ...]]


@dataclass(frozen=True)
class SafeArea:
    """Lines of allowed current over voltage, each for one pulse length, and one for any length."""

    tj_max_c: float
    scaling: str
    pulses: tuple[tuple[float, Curve], ...] = ()
    dc: Curve | None = None
    heat_k_per_w: np.ndarray | None = None
    final_k_per_w: float | None = None
    most_a: float = np.inf
    memo: dict = field(default_factory=dict, compare=False, repr=False)

    @property
    def is_derived(self) -> bool:
        return self.heat_k_per_w is not None

    @property
    def lengths_s(self) -> np.ndarray:
        return LINES_FOR_HEAT_S[: len(self.heat_k_per_w)] if self.is_derived else np.array([length for length, _ in self.pulses])

    @property
    def has_any_length(self) -> bool:
        return self.dc is not None or self.final_k_per_w is not None

    @property
    def holds_for_s(self) -> float:
        """The longest event that the area says something about."""
        if self.has_any_length:
            return np.inf
        return float(self.lengths_s[-1]) if len(self.lengths_s) else 0.0

    def lines_a(self, v_v: np.ndarray, t_case_c: np.ndarray | float = T_DRAWN_C) -> list[np.ndarray]:
        """What each line allows at a voltage [A], the one for any length last where there is one."""
        if self.is_derived:
            all_k_per_w = [*self.heat_k_per_w, *([] if self.final_k_per_w is None else [self.final_k_per_w])]
            return [np.minimum(power_line_a(v_v, z, t_case_c, self.tj_max_c), self.most_a) for z in all_k_per_w]
        curves = [curve for _, curve in self.pulses] + ([self.dc] if self.dc is not None else [])
        if np.isscalar(t_case_c) and t_case_c == T_DRAWN_C:
            return [curve_current_a(v_v, *curve) for curve in curves]
        return [safe_current_a(v_v, np.inf, t_case_c, self.tj_max_c, [], curve, scaling=self.scaling) for curve in curves]

    def share(self, path: Path, t_case_c: np.ndarray | float = T_DRAWN_C) -> np.ndarray:
        """How much of the area is used up at the end of each slice of each path, shape (path, slice)."""
        middle_v, middle_a = ((x[:, 1:] + x[:, :-1]) / 2.0 for x in (path.v_v, path.i_a))
        use = _uses(middle_a, self.lines_a(middle_v, t_case_c))
        peak = np.max([_uses(path.i_a[:, ends], [self.lines_a(path.v_v[:, ends], t_case_c)[0]])[..., 0]
                       for ends in (slice(0, -1), slice(1, None))], axis=0)
        n = len(self.lengths_s)
        beyond = use[..., -1] if self.has_any_length else None
        unknown = ~np.isfinite(path.t_s).all(axis=1) | ~np.isfinite(path.p_w).all(axis=1)
        t_s = np.where(unknown[:, None], 0.0, path.t_s)
        return np.where(unknown[:, None], np.nan, window_use(t_s, use[..., :n], peak, self.lengths_s, beyond))

    def _captured_share(self, path: CapturedPath, t_case_c: float) -> np.ndarray:
        """As `share` of a capture: the use of every line by every sample, then by slices."""
        n = len(self.lengths_s)
        use = _uses(path.raw_i_a, self.lines_a(path.raw_v_v, t_case_c))
        held, peak = path.mean_use(use, self.lengths_s[0] if n else np.inf)
        return window_use(path.t_s, held[..., :n], peak, self.lengths_s, held[..., -1] if self.has_any_length else None)

    def shares(self, path: Path, row: np.ndarray, case_c: np.ndarray) -> np.ndarray:
        """The same at each sample's own case temperature, shape (sample, slice).

        row: which path each sample follows, shape (sample,). case_c: at the end of each slice, shape (sample, slice).
        """
        if path.t_s.shape[1] == 2 and not isinstance(path, CapturedPath):
            one = Path(path.t_s[row], path.v_v[row], path.i_a[row])
            return np.where(case_c >= self.tj_max_c, np.inf, self.share(one, np.minimum(case_c, self.tj_max_c - 1e-6)))
        if self.scaling == "current" and not self.is_derived:
            factor = case_factor(case_c, self.tj_max_c)
            with np.errstate(divide="ignore", invalid="ignore"):
                return np.where(factor <= 0.0, np.inf, self._tables(path, (T_DRAWN_C,))[row, 0] / factor)
        return self._between_cases(path, row, case_c)

    def _between_cases(self, path: Path, row: np.ndarray, case_c: np.ndarray) -> np.ndarray:
        """An area whose lines change shape with temperature: worked out at some, straight between."""
        cases_c = np.linspace(COLDEST_C, self.tj_max_c - 1e-6, N_CASES)
        tables = self._tables(path, tuple(cases_c))
        within_c = np.clip(np.nan_to_num(case_c, nan=COLDEST_C), COLDEST_C, cases_c[-1])
        at = np.clip(np.searchsorted(cases_c, within_c, side="right") - 1, 0, N_CASES - 2)
        slices = np.arange(case_c.shape[1])
        # A case that is not known gives no answer; headroom goes straight with temperature where use goes to infinity.
        low, high = (1.0 / np.maximum(tables[row[:, None], k, slices], 1e-300) for k in (at, at + 1))
        weight = (within_c + 0.0 * case_c - cases_c[at]) / (cases_c[at + 1] - cases_c[at])
        with np.errstate(divide="ignore"):
            return np.where(case_c >= self.tj_max_c, np.inf, 1.0 / (low + weight * (high - low)))

    def _tables(self, path: Path, cases_c: tuple[float, ...]) -> np.ndarray:
        """Shares at some case temperatures, shape (path, case, slice), each path worked out once."""
        found = []
        if isinstance(path, CapturedPath):
            if "captured" not in self.memo:
                self.memo["captured"] = np.array([[self._captured_share(path, case_c)[0] for case_c in cases_c]])
            return self.memo["captured"]
        for k in range(len(path.t_s)):
            one = Path(path.t_s[k : k + 1], path.v_v[k : k + 1], path.i_a[k : k + 1])
            key = one.t_s.tobytes() + one.v_v.tobytes() + one.i_a.tobytes()
            if key not in self.memo:
                self.memo[key] = np.array([self.share(one, case_c)[0] for case_c in cases_c])
            found.append(self.memo[key])
        return np.array(found)


def _uses(i_a: np.ndarray, lines_a: list[np.ndarray]) -> np.ndarray:
    """Current over what each line allows, shape (..., line): 0 without current, inf where a line allows none."""
    allowed = np.stack(lines_a, axis=-1)
    with np.errstate(divide="ignore", invalid="ignore"):
        use = i_a[..., None] / allowed
    return np.where(i_a[..., None] > 0.0, np.where(allowed > 0.0, use, np.where(np.isnan(allowed), np.nan, np.inf)), 0.0)


def safe_area_of(part: BoardPart, methods) -> SafeArea | None:
    """The area that the device's curves give; one made up from its impedance only where the house accepts that."""
    device, tj = part.device, part.limit("tj")
    if device is None or tj is None:
        return None
    scaling = str(methods.get("envelope_scaling", "current"))
    if device.envelope.dc is not None or device.envelope.pulses:
        pulses = tuple((length_s, (table.column(0), table.column(1))) for length_s, table in device.envelope.pulses)
        dc = device.envelope.dc
        return SafeArea(tj.min, scaling, pulses, (dc.column(0), dc.column(1)) if dc is not None else None)
    return _from_heat(part, tj.min, scaling) if str(methods.get("derived_envelope")) == "accepted" else None


def _from_heat(part: BoardPart, tj_max_c: float, scaling: str) -> SafeArea | None:
    impedance = impedance_of(part)
    most = next((part.limit(key).min for key in ("id_pulsed", "ic_pulsed", "id", "ic") if part.limit(key) is not None), np.inf)
    if impedance is None:
        rth = part.device.thermal.rth_jc
        return SafeArea(tj_max_c, scaling, heat_k_per_w=np.zeros(0), final_k_per_w=rth.max, most_a=most) if rth else None
    lines_k_per_w = impedance.zth_k_per_w(LINES_FOR_HEAT_S)
    final = impedance.final_k_per_w if np.isinf(impedance.reach_s) else None
    return SafeArea(tj_max_c, scaling, heat_k_per_w=lines_k_per_w[np.isfinite(lines_k_per_w)], final_k_per_w=final, most_a=most)
