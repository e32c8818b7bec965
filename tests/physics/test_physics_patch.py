"""Copper patches: Bessel rings against ODE, cells against Bessel, halved cells, heat in and out, monotone."""

import time

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_bvp
from scipy.special import gamma

from drc_power.physics import OutsideRange
from drc_power.physics.patch import Laminate, rectangular_patch, ring_conductance_w_per_k, round_patch_rth_k_per_w

PAD, COPPER, BOARD, FACES = (5e-3, 5e-3), (18e-3, 18e-3), (60e-3, 60e-3), (10.0, 8.0)


@pytest.mark.parametrize("load", [0.0, 1e-3, 0.1])
@pytest.mark.parametrize("sheet", [1e-3, 390 * 35e-6, 0.1])
def test_a_ring_is_its_equation(sheet, load):
    r_1, r_2, h = 5e-3, 25e-3, 20.0
    grid = np.linspace(r_1, r_2, 300)
    solved = solve_bvp(
        lambda r, y: [y[1], h / sheet * y[0] - y[1] / r],
        lambda a, b: [a[0] - 1, 2 * np.pi * r_2 * sheet * b[1] + load * b[0]],
        grid,
        np.array([np.ones(300), np.zeros(300)]),
        tol=1e-8,
        max_nodes=50_000,
    )
    expected = -2 * np.pi * r_1 * sheet * solved.sol(r_1)[1]
    assert ring_conductance_w_per_k(r_1, r_2, sheet, h, load) == pytest.approx(expected, rel=1e-5)


def test_rings_chain():
    whole = ring_conductance_w_per_k(5e-3, 25e-3, 0.02, 20.0, 0.003)
    outer = ring_conductance_w_per_k(15e-3, 25e-3, 0.02, 20.0, 0.003)
    assert ring_conductance_w_per_k(5e-3, 15e-3, 0.02, 20.0, outer) == pytest.approx(whole, rel=1e-12)


def test_a_wide_ring_does_not_overflow_and_a_turned_one_is_refused():
    assert np.isfinite(ring_conductance_w_per_k(5e-3, 50.0, 1e-4, 20.0))
    with pytest.raises(OutsideRange):
        ring_conductance_w_per_k(5e-3, 5e-3, 0.02, 20.0)


@pytest.mark.parametrize("n_cells", [6, 12, 24])
def test_heat_in_is_heat_out(n_cells):
    field = rectangular_patch(PAD, COPPER, BOARD, 35e-6, FACES, (10e-3, 30e-3), 0.02, n_cells=n_cells)
    out_w = 4 * np.sum(np.reshape(FACES, (2, 1, 1)) * field.cell_m2 * field.rise_k)
    assert out_w == pytest.approx(1.0, abs=1e-9)


@pytest.mark.parametrize("copper", [(6e-3, 6e-3), (18e-3, 18e-3), (40e-3, 10e-3)])
@pytest.mark.parametrize("below", [(0.0, 0.0), (25e-3, 25e-3)])
def test_halving_the_cells_changes_less_than_a_percent(copper, below):
    coarse, fine = (
        rectangular_patch(PAD, copper, BOARD, 35e-6, FACES, below, 0.02, n_cells=n).rth_k_per_w for n in (14, 28)
    )
    assert fine == pytest.approx(coarse, rel=0.01)


@pytest.mark.parametrize(("pad_mm", "copper_mm", "board_mm"), [(3, 10, 30), (5, 25, 26), (2, 20, 21), (2, 8, 40)])
def test_cells_and_bessel_agree_where_both_apply(pad_mm, copper_mm, board_mm):
    """Laminate that conducts freely through; within 2 %.

    Copper and board of equal area; the pad a square that spreads like its circle: side · Γ(1/4)²/(4π^1.5) = r,
    the capacity of a square (Pólya and Szegő). The pad's own faces, which Bessel leaves out, are added.
    """
    laminate = Laminate(1.6e-3, 0.8, 1e3)
    radii_m = [1e-3 * r for r in (pad_mm, copper_mm, board_mm)]
    pad_m = radii_m[0] * 4 * np.pi**1.5 / gamma(0.25) ** 2
    by_bessel = 1 / (1 / round_patch_rth_k_per_w(*radii_m, 35e-6, 20.0, laminate) + 20.0 * pad_m**2)
    squares = [(side, side) for side in (pad_m, *(r * np.sqrt(np.pi) for r in radii_m[1:]))]
    by_cells = rectangular_patch(*squares, 35e-6, (10.0, 10.0), laminate=laminate, n_cells=24).rth_k_per_w
    assert by_cells == pytest.approx(by_bessel, rel=0.02)


@settings(max_examples=15, deadline=None)
@given(st.floats(6e-3, 30e-3), st.floats(1.05, 1.9), st.floats(18e-6, 105e-6), st.floats(4, 20))
def test_more_area_copper_or_air_is_never_hotter(side_m, growth, copper_m, h):
    ask = lambda side, thick, coefficient: (
        rectangular_patch(  # noqa: E731
            PAD, (side, side), BOARD, thick, (coefficient, coefficient)
        ).rth_k_per_w
    )
    base = ask(side_m, copper_m, h)
    assert ask(side_m * growth, copper_m, h) <= base * 1.002, "to the error of the cells"
    assert ask(side_m, copper_m * growth, h) <= base
    assert ask(side_m, copper_m, h * growth) <= base
    radial = [round_patch_rth_k_per_w(3e-3, side_m * g, 0.06, copper_m, 2 * h) for g in (1.0, growth)]
    assert radial[1] <= radial[0] * (1 + 1e-9)


def test_copper_below_and_vias_help():
    none, below, tied = (
        rectangular_patch(PAD, COPPER, BOARD, 35e-6, FACES, size, vias).rth_k_per_w
        for size, vias in (((0, 0), 0.0), ((30e-3, 30e-3), 0.0), ((30e-3, 30e-3), 0.05))
    )
    assert none > below > tied


@pytest.mark.parametrize(
    ("pad", "copper", "board"),
    [(PAD, (4e-3, 18e-3), BOARD), (PAD, (70e-3, 18e-3), BOARD), ((0.0, 5e-3), COPPER, BOARD)],
)
def test_rectangles_that_do_not_nest_are_refused(pad, copper, board):
    with pytest.raises(OutsideRange):
        rectangular_patch(pad, copper, board, 35e-6, FACES)


def test_edges_may_coincide():
    flush = rectangular_patch(PAD, PAD, PAD, 35e-6, FACES).rth_k_per_w
    through = 1.6e-3 / 0.3 / 25e-6
    expected = 1 / (FACES[0] * 25e-6 + 1 / (1 / (FACES[1] * 25e-6) + through))
    assert flush == pytest.approx(expected, rel=1e-3)


def test_many_patches_are_quick():
    """200 in under 5 s by contract; generous here, the benchmark has the figure."""
    rectangular_patch(PAD, COPPER, BOARD, 35e-6, FACES)
    began = time.perf_counter()
    for _ in range(10):
        rectangular_patch(PAD, COPPER, BOARD, 35e-6, FACES)
    assert time.perf_counter() - began < 1.0
