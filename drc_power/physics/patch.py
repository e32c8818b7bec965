"""Copper on the board as a fin: round patches by Bessel functions, rectangular ones by finite differences.

| symbol | name here | unit | meaning |
|---|---|---|---|
| k · t | sheet_w_per_k | W/K | conductivity times thickness of everything that conducts along the board |
| h | h_w_per_m2_k | W/(m²·K) | coefficient of both faces together, convection and radiation |
| r_1, r_2 | inner_radius_m, outer_radius_m | m | edge of the device's pad; edge of the copper |

The pad is at one temperature, held by the device's tab. Resistances are from the pad to the air.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from drc_power.physics.copper import CONDUCTIVITY_W_PER_M_K
from drc_power.physics.range import refuse_unless

LAMINATE_ALONG_W_PER_M_K, LAMINATE_THROUGH_W_PER_M_K = 0.8, 0.3
"""FR-4 along and through the board: Azar and Graebner, SEMI-THERM 12, 1996 (from memory), rounded."""

PAD_SHEET_W_PER_K = 20.0
"""Stands for a pad of one temperature: far above any copper, not so far that digits are lost."""


class Laminate(NamedTuple):
    """The board between its copper layers."""

    thickness_m: float = 1.6e-3
    along_w_per_m_k: float = LAMINATE_ALONG_W_PER_M_K
    through_w_per_m_k: float = LAMINATE_THROUGH_W_PER_M_K


FR4 = Laminate()
"""The common board of 1.6 mm."""


class PatchField(NamedTuple):
    """A quarter of a board around its patch: rises per watt of the whole pad, by layer and cell."""

    rth_k_per_w: float
    rise_k: np.ndarray
    """Shape (layer, y, x), top layer first."""
    cell_m2: np.ndarray
    """Shape (y, x)."""


def ring_conductance_w_per_k(inner_radius_m, outer_radius_m, sheet_w_per_k, h_w_per_m2_k, load_w_per_k=0.0):
    """Heat that enters a ring of board at its inner edge per kelvin there, exact by Bessel functions.

    With m = √(h/(k · t)), a = m · r_1, b = m · r_2, c = 2π · k · t · b, G the load at the outer edge:
    G_in = 2π · k · t · a · [(c·I_1(b) + G·I_0(b)) · K_1(a) − (c·K_1(b) − G·K_0(b)) · I_1(a)]
    / [(c·K_1(b) − G·K_0(b)) · I_0(a) + (c·I_1(b) + G·I_0(b)) · K_0(a)].

    inner_radius_m: inner edge, above 0 [m].
    outer_radius_m: outer edge [m].
    sheet_w_per_k: conductivity times thickness, along the board [W/K].
    h_w_per_m2_k: coefficient of both faces together, above 0 [W/(m2.K)].
    load_w_per_k: conductance of what adjoins outside, 0 for an edge that gives off nothing [W/K].
    Returns the conductance to the air [W/K]; rings are chained by the load.
    Raises OutsideRange for a ring turned inside out.
    Source: radial fin equation; Kern and Kraus, Extended Surface Heat Transfer, 1972.

    >>> round(1 / float(ring_conductance_w_per_k(5e-3, 25e-3, 390 * 35e-6, 20.0)), 1)
    37.6
    """
    from scipy.special import i0e, i1e, k0e, k1e

    refuse_unless(np.greater(outer_radius_m, inner_radius_m), "a ring's outer edge must lie outside its inner edge")
    m_per_m = np.sqrt(np.divide(h_w_per_m2_k, sheet_w_per_k))
    a, b = m_per_m * inner_radius_m, m_per_m * outer_radius_m
    edge_w_per_k = 2.0 * np.pi * sheet_w_per_k * b
    # Scaled functions, so that wide rings do not overflow; what the scales leave is e^(−2 · (b − a)).
    outward = edge_w_per_k * i1e(b) + load_w_per_k * i0e(b)
    inward = (edge_w_per_k * k1e(b) - load_w_per_k * k0e(b)) * np.exp(-2.0 * (b - a))
    return 2.0 * np.pi * sheet_w_per_k * a * (outward * k1e(a) - inward * i1e(a)) / (inward * i0e(a) + outward * k0e(a))


def round_patch_rth_k_per_w(
    pad_radius_m, copper_radius_m, board_radius_m, copper_thickness_m, h_w_per_m2_k, laminate=FR4
):
    """Resistance of a round pad in round copper on a round board: the copper's ring with the bare board as its load.

    pad_radius_m: radius of the pad, whose own faces give off nothing [m].
    copper_radius_m: radius of the copper [m].
    board_radius_m: radius of the board, not inside the copper [m].
    copper_thickness_m: thickness of the copper, of all layers together [m].
    h_w_per_m2_k: coefficient of both faces together [W/(m2.K)].
    laminate: a `Laminate` [record].
    Returns the resistance from pad to air [K/W]. Valid where the board is at one temperature through its
    thickness: small against √(k/h · t).
    Source: `ring_conductance_w_per_k`.

    >>> round(float(round_patch_rth_k_per_w(3e-3, 10e-3, 30e-3, 35e-6, 20.0)), 1)
    62.8
    """
    bare_w_per_k = laminate.along_w_per_m_k * laminate.thickness_m
    covered_w_per_k = bare_w_per_k + CONDUCTIVITY_W_PER_M_K * copper_thickness_m
    load_w_per_k = 0.0
    if board_radius_m > copper_radius_m:
        load_w_per_k = ring_conductance_w_per_k(copper_radius_m, board_radius_m, bare_w_per_k, h_w_per_m2_k)
    return 1.0 / ring_conductance_w_per_k(pad_radius_m, copper_radius_m, covered_w_per_k, h_w_per_m2_k, load_w_per_k)


def rectangular_patch(
    pad_m,
    copper_m,
    board_m,
    copper_thickness_m,
    h_faces_w_per_m2_k,
    copper_below_m=(0.0, 0.0),
    vias_w_per_k=0.0,
    laminate=FR4,
    n_cells=14,
):
    """Pad, copper and board as rectangles about one centre, two layers of cells, solved by finite differences.

    pad_m: width and height of the pad [m].
    copper_m: width and height of the copper on the device's side, not inside the pad [m].
    board_m: width and height of the board, not inside the copper [m].
    copper_thickness_m: thickness of the copper on each side [m].
    h_faces_w_per_m2_k: coefficients of the device's side and of the other side [W/(m2.K)].
    copper_below_m: width and height of the copper on the other side, 0 for none [m].
    vias_w_per_k: conductance through the board of all vias under the pad [W/K].
    laminate: a `Laminate` [record].
    n_cells: cells from each edge to the next [-].
    Returns a `PatchField`: resistance from pad to air [K/W], rises [K] and cell areas [m2] of one quarter.
    Raises OutsideRange for rectangles that do not lie in each other.
    Source: energy balance of each cell; conductances from centre to centre in series.

    >>> field = rectangular_patch((5e-3, 5e-3), (18e-3, 18e-3), (60e-3, 60e-3), 35e-6, (10.0, 10.0))
    >>> round(field.rth_k_per_w, 1)
    62.9
    """
    nested = all(
        0.0 < p <= c <= b >= low for p, c, b, low in zip(pad_m, copper_m, board_m, copper_below_m, strict=True)
    )
    refuse_unless(nested, "the pad must lie within its copper and the copper within its board")
    corners_m = np.array([pad_m, copper_m, copper_below_m, board_m]) / 2
    edges = [_edges(corners_m[:, axis], n_cells) for axis in (0, 1)]
    on_copper, on_copper_below, on_pad = (_covered(edges, size_m) for size_m in (copper_m, copper_below_m, pad_m))
    bare_w_per_k = laminate.along_w_per_m_k * laminate.thickness_m / 2
    covered_w_per_k = CONDUCTIVITY_W_PER_M_K * copper_thickness_m
    sheets_w_per_k = bare_w_per_k + covered_w_per_k * np.array([on_copper, on_copper_below])
    sheets_w_per_k[0] += PAD_SHEET_W_PER_K * on_pad
    widths_m, heights_m = (np.diff(axis) for axis in edges)
    cell_m2 = np.outer(heights_m, widths_m)
    on_pad_share = on_pad * cell_m2 / (pad_m[0] * pad_m[1])
    through_w_per_k = laminate.through_w_per_m_k / laminate.thickness_m * cell_m2 + vias_w_per_k * on_pad_share
    faces_w_per_k = np.reshape(h_faces_w_per_m2_k, (2, 1, 1)) * cell_m2
    heat_w = np.array([on_pad_share, np.zeros_like(on_pad_share)])
    rise_k = _solve(sheets_w_per_k, widths_m, heights_m, through_w_per_k, faces_w_per_k, heat_w)
    pad_rise_k = np.sum(rise_k[0] * on_pad_share) / np.sum(on_pad_share)
    return PatchField(float(pad_rise_k), rise_k, cell_m2)


def _edges(half_sizes_m, n_cells):
    """Edges of cells from the centre outward: `n_cells` between neighbours, finer towards the pad's edge."""
    corners_m = np.unique(np.append(0.0, half_sizes_m))
    corners_m = corners_m[np.append(True, np.diff(corners_m) > 1e-9)]
    # Within the pad nothing varies; outside, cells grow from the inner edge outward.
    graded = np.linspace(0.0, 1.0, n_cells + 1) ** 2
    pieces = [start + (end - start) * graded[:-1] for start, end in zip(corners_m[1:-1], corners_m[2:], strict=True)]
    inside = np.linspace(0.0, corners_m[1], max(2, n_cells // 3) + 1)[:-1]
    return np.concatenate([inside, *pieces, corners_m[-1:]])


def _covered(edges, size_m):
    """1 where a centred rectangle covers a cell, else 0, shape (y, x)."""
    along, across = ((axis[:-1] + axis[1:]) / 2 < size / 2 for axis, size in zip(edges, size_m, strict=True))
    return np.outer(across, along).astype(float)


def _solve(sheets, widths_m, heights_m, through_w_per_k, faces_w_per_k, heat_w):
    """Rises of all cells, shape (layer, y, x)."""
    from scipy.sparse import coo_matrix, diags
    from scipy.sparse.linalg import splu

    index = np.arange(sheets.size).reshape(sheets.shape)
    halves_x, halves_y = widths_m / 2 / sheets, heights_m[:, np.newaxis] / 2 / sheets
    links = [
        (index[:, :, :-1], index[:, :, 1:], heights_m[:, np.newaxis] / (halves_x[:, :, :-1] + halves_x[:, :, 1:])),
        (index[:, :-1], index[:, 1:], widths_m / (halves_y[:, :-1] + halves_y[:, 1:])),
        (index[0], index[1], through_w_per_k),
    ]
    one, other, link = (np.concatenate([np.ravel(part[k]) for part in links]) for k in range(3))
    ends, leaves = np.concatenate([one, other]), np.concatenate([other, one])
    off = coo_matrix((np.tile(-link, 2), (ends, leaves)), shape=(sheets.size, sheets.size))
    own = np.bincount(ends, np.tile(link, 2), sheets.size) + np.ravel(faces_w_per_k)
    # Symmetric and dominated by its diagonal: no pivots needed, which halves the work.
    factors = splu((off + diags(own)).tocsc(), permc_spec="MMD_AT_PLUS_A", options={"SymmetricMode": True})
    return factors.solve(heat_w.ravel()).reshape(sheets.shape)
