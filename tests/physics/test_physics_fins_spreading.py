"""Fins, sinks and spreading: against `ht`, series, ODE solutions and each other; ends and monotone answers."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_bvp
from scipy.optimize import minimize_scalar
from scipy.special import j0, j1, jn_zeros

from drc_power.physics import OutsideRange, fins, spreading
from drc_power.physics.fins import PlateFins

FINS = PlateFins(9, 25e-3, 60e-3, 1.2e-3, 5e-3, 200.0, 0.85)


def fin_by_ode(r_1, r_2, thickness, k, h):
    """Efficiency of an annular fin (straight for r_1 → ∞) from scipy's boundary-value solution."""
    m2 = 2 * h / (k * thickness)
    grid = np.linspace(r_1, r_2, 200)
    start = np.array([np.ones(200), np.zeros(200)])
    solved = solve_bvp(
        lambda r, y: [y[1], m2 * y[0] - y[1] / r],
        lambda a, b: [a[0] - 1, b[1]],
        grid,
        start,
        tol=1e-8,
        max_nodes=50_000,
    )
    return -k * thickness * 2 * np.pi * r_1 * solved.sol(r_1)[1] / (2 * h * np.pi * (r_2**2 - r_1**2))


@pytest.mark.parametrize("h", [5.0, 58.0, 500.0])
def test_annular_fin(h):
    geometry = 0.0127, 0.028575, 3.8e-4, 200.0
    ours = fins.annular_fin_efficiency(*geometry, h)
    assert ours == pytest.approx(fin_by_ode(*geometry, h), rel=1e-5)
    ht = pytest.importorskip("ht")
    expected = ht.fin_efficiency_Kern_Kraus(Do=0.0254, D_fin=0.05715, t_fin=3.8e-4, k_fin=200, h=h)
    assert ours == pytest.approx(expected, rel=1e-9)


def test_a_straight_fin_is_an_annular_one_of_great_radius():
    wide = fins.annular_fin_efficiency(10.0, 10.03, 1e-3, 200.0, 100.0)
    assert fins.straight_fin_efficiency(30e-3, 1e-3, 200.0, 100.0) == pytest.approx(wide, rel=2e-3)


def test_fin_ends():
    assert fins.straight_fin_efficiency(30e-3, 1e-3, 200.0, 0.0) == 1.0
    with pytest.raises(OutsideRange):
        fins.annular_fin_efficiency(0.02, 0.02, 1e-3, 200.0, 10.0)


def test_channels_between_their_limits():
    """Far apart: a plate by itself, laminar; close: full heating of the flow, Ra′/24."""
    assert fins.channel_natural_nusselt(1e-2) == pytest.approx(1e-2 / 24, rel=1e-2)
    assert fins.channel_natural_nusselt(1e6) == pytest.approx(1e6**0.25 / np.sqrt(2.873), rel=1e-3)
    assert fins.channel_forced_nusselt(1e-2, 0.71) == pytest.approx(1e-2 * 0.71 / 2, rel=1e-2)
    assert fins.channel_natural_nusselt(0.0) == pytest.approx(0.0, abs=1e-12)
    assert fins.channel_forced_nusselt(0.0, 0.71) == pytest.approx(0.0, abs=1e-9)


def test_the_optimum_spacing_is_where_a_search_finds_it():
    """Heat of an array of thin plates per width: h(S)/S."""
    ra_length, length = 1.844e7, 0.18
    heat = lambda s: fins.channel_natural_nusselt(ra_length * (s / length) ** 4) / s**2  # noqa: E731
    found = minimize_scalar(lambda s: -heat(s), bounds=(1e-3, 20e-3), method="bounded", options={"xatol": 1e-9}).x
    assert fins.optimum_spacing_m(length, ra_length) == pytest.approx(found, rel=1e-3)


def test_a_sinks_resistance_carries_its_heat():
    for faces in ("vertical", "up", "down"):
        rth = fins.sink_rth_k_per_w(FINS, [1.0, 3.0], 40.0, faces)
        heat = fins.sink_heat_w(FINS, 40.0 + rth * [1.0, 3.0], 40.0, faces)
        np.testing.assert_allclose(heat, [1.0, 3.0], rtol=1e-6)
        assert rth[1] < rth[0], "natural flow cools better when hot"


def test_a_sink_that_would_glow_is_not_answered():
    np.testing.assert_array_equal(np.isnan(fins.sink_rth_k_per_w(FINS, [0.0, 5.0, 500.0], 25.0)), [True, False, True])


@settings(max_examples=40)
@given(
    st.floats(0, 5),
    st.floats(0, 5),
    st.sampled_from(["vertical", "up", "down"]),
    st.floats(30, 120),
    st.floats(0, 4000),
)
def test_more_air_more_emissivity_less_altitude_give_off_more(one, other, faces, t_base_c, altitude_m):
    slow, fast = sorted((one, other))
    heat = lambda sink, speed, z: fins.sink_heat_w(sink, t_base_c, 25.0, faces, speed, z)  # noqa: E731
    assert heat(FINS, slow, altitude_m) <= heat(FINS, fast, altitude_m) * (1 + 1e-12)
    assert heat(FINS, slow, altitude_m) <= heat(FINS, slow, 0.0) * (1 + 1e-12)
    assert heat(FINS._replace(emissivity=0.1), slow, 0.0) <= heat(FINS, slow, 0.0)
    assert heat(FINS._replace(length_m=30e-3), slow, 0.0) <= heat(FINS, slow, 0.0)


def test_radiation_of_a_gap_lies_between_its_walls_and_a_black_opening():
    assert fins.channel_emittance(FINS._replace(emissivity=0.0)) == 0.0
    assert fins.channel_emittance(FINS._replace(emissivity=1.0)) == 1.0
    assert 0.1 < fins.channel_emittance(FINS._replace(emissivity=0.1)) < 1.0


def test_what_goes_round_the_sink_does_not_cool_it():
    assert fins.speed_in_gaps_m_per_s(FINS, 2.0, 1.0) == 0.0
    with pytest.raises(OutsideRange):
        fins.speed_in_gaps_m_per_s(FINS, 2.0, 1.1)


def disc_series(a, b, t, k, h):
    """Centre and mean rise per watt over the uniform part for a disc on a disc: exact Bessel series."""
    zeros = jn_zeros(1, 4000)
    wave = zeros / b
    depth = np.tanh(wave * t)
    response = (k * wave + h * depth) / (k * wave * (k * wave * depth + h))
    terms = 2 * a * j1(wave * a) / (b * b * wave * j0(zeros) ** 2) * response / (np.pi * a * a)
    return terms.sum(), (terms * 2 * j1(wave * a) / (wave * a)).sum()


@pytest.mark.parametrize("side_mm", [10, 25, 50])
@pytest.mark.parametrize("t_mm", [1.3, 4, 10])
@pytest.mark.parametrize("h", [20.0, 100.0])
def test_closed_form_and_placed_series_are_the_disc_series(side_mm, t_mm, h):
    """Equal-area discs for squares. Closed form: the centre, within 10 % (2 % for thin bases); series: within 4 %."""
    side, t, base, k = side_mm * 1e-3, t_mm * 1e-3, 0.1, 200.0
    centre, mean = disc_series(side / np.sqrt(np.pi), base / np.sqrt(np.pi), t, k, h)
    closed = spreading.spreading_rth_k_per_w(side**2, base**2, t, k, 1 / (h * base**2))
    assert closed == pytest.approx(centre, rel=0.10)
    middle, uniform = (base / 2, base / 2), t / (k * base**2) + 1 / (h * base**2)
    at_centre, over_source = (
        spreading.placed_rise_k_per_w((*middle, w, w), (*middle, side, side), (base, base), t, k, h) - uniform
        for w in (0.0, side)
    )
    assert at_centre == pytest.approx(centre, rel=0.04)
    assert over_source == pytest.approx(mean, rel=0.04)


def test_a_source_of_the_whole_base_does_not_spread():
    assert spreading.spreading_rth_k_per_w(0.01, 0.01, 4e-3, 200.0, 1.0) == 0.0
    whole = (0.05, 0.05, 0.1, 0.1)
    rise = spreading.placed_rise_k_per_w(whole, whole, (0.1, 0.1), 4e-3, 200.0, 50.0)
    assert rise == pytest.approx(4e-3 / (200 * 0.01) + 1 / (50 * 0.01), rel=1e-9)
    with pytest.raises(OutsideRange):
        spreading.spreading_rth_k_per_w(0.0101, 0.01, 4e-3, 200.0, 1.0)
    with pytest.raises(OutsideRange):
        spreading.placed_rise_k_per_w(whole, (0.09, 0.05, 0.03, 0.03), (0.1, 0.1), 4e-3, 200.0, 50.0)


def test_two_devices_heat_each_other_alike_and_less_than_themselves():
    one, other = (0.02, 0.03, 0.02, 0.02), (0.07, 0.06, 0.01, 0.015)
    base = (0.1, 0.08), 4e-3, 200.0, 80.0
    there, back = (spreading.placed_rise_k_per_w(*pair, *base) for pair in ((one, other), (other, one)))
    assert there == pytest.approx(back, rel=1e-12)
    assert there < spreading.placed_rise_k_per_w(one, one, *base)
    everywhere = spreading.placed_rise_k_per_w((0.05, 0.04, 0.1, 0.08), one, *base)
    assert everywhere == pytest.approx(4e-3 / (200 * 0.008) + 1 / (80 * 0.008), rel=1e-9), "mean rise is h's alone"
