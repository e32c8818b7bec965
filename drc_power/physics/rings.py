"""Copper on the board as rings: two layers with laminate and vias between them, cooled from both faces.

| symbol | name here | unit | meaning |
|---|---|---|---|
| r_1, r_2, r_3 | pad_radius_m, copper_radius_m, board_radius_m | m | edges of the pad, of the copper, of the board |
| S | sheets | W/K | conductivity times thickness of one layer, copper and half of the laminate |
| g | through | W/(m²·K) | conductance through the laminate between the layers, per area |
| h | h_w_per_m2_k | W/(m²·K) | coefficient of one face, convection and radiation |
| Y | admittance | W/K | what both layers of a ring take in from the rings inside it, a symmetric 2 × 2 matrix |

Round patches of equal area stand for patches of any compact shape. Everything broadcasts: patches, faces and
samples may be arrays, which the finite differences of `patch.py` cannot; those and its Bessel functions check this.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from drc_power.physics.copper import CONDUCTIVITY_W_PER_M_K
from drc_power.physics.patch import FR4
from drc_power.physics.range import refuse_unless

N_RINGS = 24
"""Rings of the copper, and as many of the bare board around it."""


class RingPatch(NamedTuple):
    """A round pad in round copper on a round board; thicknesses of the copper on the device's side and on the other."""

    pad_radius_m: float
    copper_radius_m: float
    board_radius_m: float
    copper_above_m: float
    copper_below_m: float = 0.0
    vias_w_per_k: float = 0.0


class _Admittance(NamedTuple):
    """A symmetric matrix of 2 × 2 for the two layers."""

    above: np.ndarray
    across: np.ndarray
    below: np.ndarray


def ring_patch_rth_k_per_w(patch, h_above_w_per_m2_k, h_below_w_per_m2_k, laminate=FR4, n_rings=N_RINGS):
    """Resistance from a pad to the air, ring by ring from the edge of the board inward.

    Y_i = faces and laminate of ring i + (D⁻¹ + Y_{i+1}⁻¹)⁻¹, D the conductances to the next ring, 2π · S/ln(r_{i+1}/r_i).

    patch: a `RingPatch` [record], whose numbers broadcast.
    h_above_w_per_m2_k: coefficient of the face on the device's side, which the device covers over the pad [W/(m2.K)].
    h_below_w_per_m2_k: coefficient of the other face [W/(m2.K)].
    laminate: a `Laminate` [record].
    n_rings: rings of copper, and of bare board [-].
    Returns the resistance [K/W], of the common shape.
    Raises OutsideRange for a pad outside its copper or copper outside the board.
    Source: energy balance of each ring; conductance of a ring by integration of Fourier's law.

    >>> one_side = RingPatch(3e-3, 10e-3, 30e-3, 35e-6)
    >>> round(float(ring_patch_rth_k_per_w(one_side, 10.0, 10.0)), 1)
    66.0
    """
    inside = np.greater(patch.pad_radius_m, 0.0) & np.less_equal(patch.pad_radius_m, patch.copper_radius_m)
    inside &= np.less_equal(patch.copper_radius_m, patch.board_radius_m)
    refuse_unless(inside, "the pad must lie within its copper and the copper within its board")
    through = laminate.through_w_per_m_k / laminate.thickness_m
    bare = laminate.along_w_per_m_k * laminate.thickness_m / 2.0
    covered = tuple(bare + CONDUCTIVITY_W_PER_M_K * np.asarray(t) for t in (patch.copper_above_m, patch.copper_below_m))
    faces = (np.asarray(h_above_w_per_m2_k), np.asarray(h_below_w_per_m2_k), through)
    board = _rings(patch.copper_radius_m, patch.board_radius_m, (bare, bare), faces, None, n_rings)
    seen = _rings(patch.pad_radius_m, patch.copper_radius_m, covered, faces, board, n_rings)
    return 1.0 / _into_pad(patch, seen, faces)


def _into_pad(patch, seen, faces):
    """Heat that the pad takes in per kelvin: its own lower face through vias and laminate, and the rings around."""
    pad_m2 = np.pi * np.square(patch.pad_radius_m)
    tied = patch.vias_w_per_k + faces[2] * pad_m2
    below = seen.below + tied + faces[1] * pad_m2
    return seen.above + tied - (tied - seen.across) ** 2 / below


def _rings(inner_m, outer_m, sheets, faces, beyond, n_rings):
    """Admittance at the inner edge of a band of rings that others follow, or an edge that gives off nothing."""
    # Radii in equal ratio: fine where the heat crowds.
    growth = (np.asarray(outer_m) / inner_m) ** (1.0 / n_rings)
    half = 4.0 * np.pi / np.maximum(np.log(growth), 1e-9)
    for ring in reversed(range(n_rings)):
        start_m = inner_m * growth**ring
        area_m2 = np.pi * start_m**2 * (growth**2 - 1.0)
        tied = faces[2] * area_m2
        own = _Admittance(faces[0] * area_m2 + tied, -tied, faces[1] * area_m2 + tied)
        reached = own if beyond is None else _plus(own, _behind(beyond, *(half * sheet for sheet in sheets)))
        beyond = _behind(reached, *(half * sheet for sheet in sheets))
    return beyond


def _plus(one, other):
    return _Admittance(*(a + b for a, b in zip(one, other, strict=True)))


def _behind(y, d_above, d_below):
    """(D⁻¹ + Y⁻¹)⁻¹ = D − D · (D + Y)⁻¹ · D for a diagonal D."""
    above, below = d_above + y.above, d_below + y.below
    determinant = above * below - y.across**2
    return _Admittance(d_above - d_above**2 * below / determinant, d_above * d_below * y.across / determinant,
                       d_below - d_below**2 * above / determinant)
