"""Ring patches: against Bessel functions, finite differences, halved rings; heat in and out; monotone."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from drc_power.physics import OutsideRange
from drc_power.physics.patch import FR4, Laminate, rectangular_patch, round_patch_rth_k_per_w
from drc_power.physics.rings import RingPatch, ring_patch_rth_k_per_w

THIN = Laminate(1.6e-3, 0.8, 1e4)
"""A board at one temperature through its thickness, as the Bessel functions take it."""


@pytest.mark.parametrize(("pad_mm", "copper_mm", "board_mm"), [(3, 10, 30), (5, 25, 26), (2, 20, 21), (2, 8, 40)])
def test_agrees_with_bessel_where_both_apply(pad_mm, copper_mm, board_mm):
    """Within 1 %, what the rings miss; the lower face of the pad, which Bessel leaves out, is added."""
    radii_m = [1e-3 * r for r in (pad_mm, copper_mm, board_mm)]
    by_bessel = 1 / (1 / round_patch_rth_k_per_w(*radii_m, 35e-6, 20.0, THIN) + 10.0 * np.pi * radii_m[0] ** 2)
    assert ring_patch_rth_k_per_w(RingPatch(*radii_m, 35e-6), 10.0, 10.0, THIN) == pytest.approx(by_bessel, rel=1e-2)


@pytest.mark.parametrize("below_um", [0, 35])
@pytest.mark.parametrize("vias", [0.0, 0.02, 0.2])
@pytest.mark.parametrize("side_mm", [12, 25, 40])
def test_agrees_with_finite_differences_of_equal_area(side_mm, vias, below_um):
    """Squares of equal area, both layers, within 4 %: what the shape makes. The upper face of the pad is added to ours."""
    sizes_m = [1e-3 * s for s in (5, side_mm, side_mm + 20)]
    below_m = (sizes_m[1],) * 2 if below_um else (0.0, 0.0)
    squares = rectangular_patch(*((s, s) for s in sizes_m), 35e-6, (10.0, 8.0), below_m, vias).rth_k_per_w
    radii_m = [s / np.sqrt(np.pi) for s in sizes_m]
    ours = 1 / (1 / ring_patch_rth_k_per_w(RingPatch(*radii_m, 35e-6, below_um * 1e-6, vias), 10.0, 8.0) + 10.0 * sizes_m[0] ** 2)
    assert ours == pytest.approx(squares, rel=0.04)


@pytest.mark.parametrize("patch", [RingPatch(1e-3, 5e-3, 15e-3, 35e-6), RingPatch(3e-3, 20e-3, 30e-3, 70e-6, 70e-6, 0.05)])
def test_halving_the_rings_changes_less_than_a_percent(patch):
    coarse, fine = (ring_patch_rth_k_per_w(patch, 10.0, 8.0, n_rings=n) for n in (24, 48))
    assert fine == pytest.approx(coarse, rel=0.01)


def test_perfect_copper_gives_off_all_that_its_faces_can():
    r_m = 20e-3
    whole = ring_patch_rth_k_per_w(RingPatch(2e-3, r_m, r_m, 1.0, 1.0, 1e4), 10.0, 8.0, THIN)
    assert 1 / whole == pytest.approx(10.0 * np.pi * (r_m**2 - 2e-3**2) + 8.0 * np.pi * r_m**2, rel=1e-3)


def test_numbers_broadcast():
    h = np.array([5.0, 10.0, 20.0])
    patch = RingPatch(np.array([[2e-3], [3e-3]]), 10e-3, 20e-3, 35e-6)
    found = ring_patch_rth_k_per_w(patch, h, h)
    assert found.shape == (2, 3)
    assert found[1, 2] == pytest.approx(ring_patch_rth_k_per_w(RingPatch(3e-3, 10e-3, 20e-3, 35e-6), 20.0, 20.0), rel=1e-12)


@settings(max_examples=40, deadline=None)
@given(st.floats(4e-3, 30e-3), st.floats(1.02, 2.0), st.floats(18e-6, 105e-6), st.floats(4, 30), st.floats(0.0, 0.1))
def test_more_area_copper_vias_or_air_is_never_hotter(r_m, growth, foil_m, h, vias):
    """The bare board keeps its width beyond the copper."""
    ask = lambda r, foil, h, vias: ring_patch_rth_k_per_w(RingPatch(2e-3, r, r + 0.01, foil, foil, vias), h, h)  # noqa: E731
    base = ask(r_m, foil_m, h, vias)
    for more in (ask(r_m * growth, foil_m, h, vias), ask(r_m, foil_m * growth, h, vias), ask(r_m, foil_m, h * growth, vias),
                 ask(r_m, foil_m, h, vias + 0.01)):
        assert more <= base * (1 + 1e-9)


@pytest.mark.parametrize("radii", [(0.0, 5e-3, 9e-3), (6e-3, 5e-3, 9e-3), (1e-3, 5e-3, 4e-3)])
def test_rings_that_do_not_nest_are_refused(radii):
    with pytest.raises(OutsideRange):
        ring_patch_rth_k_per_w(RingPatch(*radii, 35e-6), 10.0, 10.0, FR4)
