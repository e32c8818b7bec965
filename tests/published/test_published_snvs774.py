"""Texas Instruments SNVS774Q (LM317-N), table 1: R_thJA of a TO-252 regulator over its copper, 1 oz. FOUND.

The sheet does not say what the test board is. Assumed here, and the same for all sixteen rows: tab 33 mm² (package
drawing, MEMORY), FR-4 of 1.6 mm, board 60 mm square, 9 and 7 W/(m²·K) on the two faces (still air, horizontal, with
radiation), four vias of 0.3 mm where there is copper below. What leaves through body and leads is one conductance,
set by the first row alone. The contract of this project asks for 15 %.
"""

import numpy as np
import pytest

from drc_power.physics import copper, patch, rings
from drc_power.solve import cooling

IN2_M2 = 0.0254**2
TAB_M, BOARD_M, FACES = (33e-6**0.5,) * 2, (60e-3, 60e-3), (9.0, 7.0)
TOP = [(0.0123, 103), (0.066, 87), (0.3, 60), (0.53, 54), (0.76, 52), (1.0, 47)]
BELOW = [(0.2, 84), (0.4, 70), (0.6, 63), (0.8, 57), (1.0, 57)]
BOTH = [(0.066, 89), (0.175, 72), (0.284, 61), (0.392, 55), (0.5, 53)]


def board_rth(top_in2, below_in2=0.0):
    top_m, below_m = (area_in2 * IN2_M2 for area_in2 in (top_in2, below_in2))
    top_m, below_m = max(top_m**0.5, TAB_M[0]), below_m**0.5
    vias = 1 / copper.via_rth_k_per_w(0.3e-3, 25e-6, 1.6e-3, 4) if below_in2 else 0.0
    return patch.rectangular_patch(TAB_M, (top_m,) * 2, BOARD_M, 35e-6, FACES, (below_m,) * 2, vias).rth_k_per_w


BODY_W_PER_K = 1 / TOP[0][1] - 1 / board_rth(TOP[0][0])


def test_what_leaves_through_body_and_leads_is_plausible():
    """100 to 500 K/W by themselves (common practice for small packages without a pad)."""
    assert 100 < 1 / BODY_W_PER_K < 500


@pytest.mark.parametrize(
    ("top_in2", "below_in2", "rth"),
    [(a, 0.0, r) for a, r in TOP[1:]] + [(0.066, a, r) for a, r in BELOW] + [(a, a, r) for a, r in BOTH],
)
def test_within_15_percent(top_in2, below_in2, rth):
    assert 1 / (1 / board_rth(top_in2, below_in2) + BODY_W_PER_K) == pytest.approx(rth, rel=0.15)


def convention_rth(top_in2, below_in2=0.0):
    """As `solve/cooling.py` takes a patch: a disc of equal area, bare board to 10 mm beyond, faces of 100 mm at half of
    the pad's rise, here 50 K in air of 25 °C (the sheet has no rise); the tab's area is known."""
    top_m2, below_m2 = (max(a * IN2_M2, TAB_M[0] ** 2) if a else 0.0 for a in (top_in2, below_in2))
    widest_m2 = max(top_m2, below_m2)
    radius_m = np.sqrt(widest_m2 / np.pi)
    vias = 1 / copper.via_rth_k_per_w(0.3e-3, 25e-6, 1.6e-3, 4) if below_in2 else 0.0
    disc = rings.RingPatch(np.sqrt(TAB_M[0] ** 2 / np.pi), radius_m, radius_m + cooling.BARE_M, 35e-6, 35e-6 if below_in2 else 0.0, vias)
    h = cooling.board_face_w_per_m2_k(25.0, 25.0, cooling.AirAround())
    return float(rings.ring_patch_rth_k_per_w(disc, h, h))


@pytest.mark.parametrize(("top_in2", "below_in2", "rth"), [(a, 0.0, r) for a, r in TOP[1:]] + [(a, a, r) for a, r in BOTH])
def test_the_convention_of_the_tool_within_15_percent(top_in2, below_in2, rth):
    """Body and leads again one conductance, set by the first row; the tool itself leaves them out, to the hot side."""
    body = 1 / TOP[0][1] - 1 / convention_rth(TOP[0][0])
    assert 1 / (1 / convention_rth(top_in2, below_in2) + body) == pytest.approx(rth, rel=0.15)
    assert convention_rth(top_in2, below_in2) > rth


@pytest.mark.parametrize(("copper_um", "rth"), [(35, 37.6), (70, 32.1)])
def test_radial_fin(copper_um, rth):
    """Pad radius 5 mm, copper to 25 mm, k 390, h 20 for both faces: 37.6 and 32.1 K/W, 26.5 for perfect copper
    (DERIVED); recomputed here by cutting the copper into 4,000 rings."""
    edges = np.linspace(5e-3, 25e-3, 4001)
    middles = (edges[:-1] + edges[1:]) / 2
    seen = 0.0
    for inner, outer, middle in zip(edges[-2::-1], edges[:0:-1], middles[::-1], strict=True):
        seen += 20 * np.pi * (outer**2 - inner**2)
        seen = 1 / (1 / seen + (outer - inner) / (390 * copper_um * 1e-6 * 2 * np.pi * middle))
    assert 1 / seen == pytest.approx(rth, abs=0.06)
    ours = 1 / patch.ring_conductance_w_per_k(5e-3, 25e-3, 390 * copper_um * 1e-6, 20.0)
    assert ours == pytest.approx(1 / seen, rel=1e-3)
    perfect = 1 / patch.ring_conductance_w_per_k(5e-3, 25e-3, 390.0, 20.0)
    assert perfect == pytest.approx(1 / (20 * np.pi * (25e-3**2 - 5e-3**2)), rel=1e-3)
    assert perfect == pytest.approx(26.5, abs=0.05)
