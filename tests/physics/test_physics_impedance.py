"""Impedance tables, fits and networks: breakpoints, both directions, against direct simulation of the ladder."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.linalg import expm

from drc_power.physics import OutsideRange
from drc_power.physics.impedance import (
    cauer_to_foster,
    fit_foster,
    foster_to_cauer,
    foster_zth_k_per_w,
    table_zth_integral_k_s_per_w,
    table_zth_k_per_w,
)

TIMES_S, ZTH = [1e-5, 1e-4, 1e-3, 1e-2, 1e-1], [0.012, 0.04, 0.13, 0.5, 1.2]


@pytest.mark.parametrize(("t_s", "expected"), list(zip(TIMES_S, ZTH, strict=True)))
def test_a_point_of_the_table_is_exact_and_has_no_step(t_s, expected):
    assert table_zth_k_per_w(t_s, TIMES_S, ZTH) == expected
    for aside in (np.nextafter(t_s, 0), np.nextafter(t_s, 1)):
        assert table_zth_k_per_w(aside, TIMES_S, ZTH, 1.36) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize(
    ("t_s", "rth", "expected"),
    [
        (0.0, None, 0.0),
        (1e-7, None, 0.0012),
        (3e-3, None, float(np.exp(np.interp(np.log(3e-3), np.log(TIMES_S), np.log(ZTH))))),
        (0.1, None, 1.2),
        (np.nextafter(0.1, 1), None, np.nan),
        (np.inf, None, np.nan),
        (0.12, 1.36, 1.2 * 1.2 ** np.log10(2.4)),
        (0.2, 1.36, 1.36),
        (np.inf, 1.36, 1.36),
        (1.0, 1.0, 1.2),
        (-1e-9, None, np.nan),
        (np.nan, None, np.nan),
    ],
)
def test_between_and_beyond(t_s, rth, expected):
    assert table_zth_k_per_w(t_s, TIMES_S, ZTH, rth) == pytest.approx(expected, rel=1e-12, nan_ok=True)


def test_without_a_final_value_nothing_is_said_past_the_table():
    past_s = np.nextafter(0.1, 1)
    assert np.isnan(table_zth_integral_k_s_per_w(past_s, TIMES_S, ZTH))
    assert fit_foster(TIMES_S, ZTH).longest_s == 0.1
    assert fit_foster(TIMES_S, ZTH, 1.36).longest_s == np.inf


def test_a_table_that_ends_level_below_the_final_value_jumps_to_it():
    ends = table_zth_k_per_w([1e-2, 1.0, 1.001], [1e-3, 1e-2, 1.0], [0.1, 0.5, 0.5], 0.6)
    np.testing.assert_allclose(ends, [0.5, 0.5, 0.6])


def test_one_point_follows_the_root_law():
    np.testing.assert_allclose(table_zth_k_per_w([0.0025, 0.01, 0.04, 1.0], [0.01], [1.0], 1.5), [0.5, 1.0, 1.5, 1.5])


@pytest.mark.parametrize(
    ("t_s", "rth"),
    [*((t, 1.36) for t in (0.0, 3e-6, 1e-5, 3e-3, 0.1, 0.12, 3.0)), *((t, None) for t in (0.0, 3e-3, 0.1))],
)
def test_integral_is_scipys(t_s, rth):
    pieces = np.concatenate([[0.0], [x for x in (*TIMES_S, 0.14) if x < t_s], [t_s]])
    zth = lambda t: float(table_zth_k_per_w(t, TIMES_S, ZTH, rth))  # noqa: E731
    # The root law has an endless slope at 0, hence a substitution in the first piece.
    expected = quad(lambda u: 2 * u * zth(u * u), 0, np.sqrt(pieces[1]), epsabs=0, epsrel=1e-12)[0] if t_s else 0.0
    expected += sum(quad(zth, a, b, epsrel=1e-10)[0] for a, b in zip(pieces[1:-1], pieces[2:], strict=True))
    assert table_zth_integral_k_s_per_w(t_s, TIMES_S, ZTH, rth) == pytest.approx(expected, rel=1e-6)


@pytest.mark.parametrize(
    ("times", "values"),
    [
        ([1.0, 1.0], [1.0, 2.0]),
        ([1.0, 2.0], [2.0, 1.0]),
        ([0.0, 1.0], [0.1, 1.0]),
        ([1.0], [0.0]),
        ([], []),
        ([1.0], [1.0, 2.0]),
    ],
)
def test_a_curve_that_is_none_is_refused(times, values):
    for ask in (table_zth_k_per_w, table_zth_integral_k_s_per_w):
        with pytest.raises(OutsideRange):
            ask(1.0, times, values)
    with pytest.raises(OutsideRange):
        fit_foster(times, values)


@pytest.mark.parametrize("terms", [([1.0], [0.0]), ([-1.0], [1.0]), ([1.0, 2.0], [1.0]), ([1.0], [np.inf])])
def test_terms_that_are_none_are_refused(terms):
    with pytest.raises(OutsideRange):
        foster_zth_k_per_w(1.0, *terms)


@settings(deadline=None, max_examples=40)
@given(
    st.lists(st.floats(0.01, 5), min_size=1, max_size=8),
    st.lists(st.floats(-6, 2), min_size=8, max_size=8, unique=True),
)
def test_foster_to_cauer_and_back(r_k_per_w, decades):
    tau_s = np.sort(10.0 ** np.round(decades[: len(r_k_per_w)], 2))
    r_k_per_w, tau_s = np.array(r_k_per_w)[: np.unique(tau_s).size], np.unique(tau_s)
    ladder = foster_to_cauer(r_k_per_w, tau_s)
    assert np.all(ladder[0] > 0)
    assert np.all(ladder[1] > 0)
    assert ladder[0].sum() == pytest.approx(r_k_per_w.sum(), rel=1e-12)
    back_r, back_tau = cauer_to_foster(*ladder)
    np.testing.assert_allclose(back_tau, tau_s, rtol=1e-9)
    np.testing.assert_allclose(back_r, r_k_per_w, rtol=1e-6)


def test_equal_time_constants_are_one_term():
    r_k_per_w, c_j_per_k = foster_to_cauer([1.0, 2.0], [0.1, 0.1])
    np.testing.assert_allclose([r_k_per_w, c_j_per_k], [[3.0], [0.1 / 3]])


def test_a_ladder_answers_a_step_as_its_matrix_exponential_does():
    r, c = np.array([0.2, 0.5, 1.1]), np.array([0.01, 0.2, 5.0])
    conductance = np.diag(1 / r) + np.diag(np.append(0, 1 / r[:-1])) - np.diag(1 / r[:-1], 1) - np.diag(1 / r[:-1], -1)
    rates = -conductance / c[:, None]
    final = np.linalg.solve(conductance, [1.0, 0.0, 0.0])
    foster = cauer_to_foster(r, c)
    for t_s in (1e-4, 1e-2, 0.3, 5.0, 50.0):
        expected = (final - expm(rates * t_s) @ final)[0]
        assert foster_zth_k_per_w(t_s, *foster) == pytest.approx(expected, rel=1e-9)


def test_a_ladder_needs_positive_members():
    for members in (([1.0, 0.0], [1.0, 1.0]), ([1.0], [-1.0])):
        with pytest.raises(OutsideRange):
            cauer_to_foster(*members)
    with pytest.raises(OutsideRange):
        foster_to_cauer([0.0], [1.0])


@pytest.mark.parametrize("rth", [None, 1.36])
def test_a_fit_meets_the_points_and_says_how_closely(rth):
    fit = fit_foster(TIMES_S, ZTH, rth)
    deviation = foster_zth_k_per_w(TIMES_S, fit.r_k_per_w, fit.tau_s) / ZTH - 1
    assert fit.residual == pytest.approx(np.abs(deviation).max(), rel=1e-6)
    assert fit.residual < 0.01
    assert np.all(fit.r_k_per_w > 0)
    final = foster_zth_k_per_w(1e3, fit.r_k_per_w, fit.tau_s)
    assert final == pytest.approx(rth, rel=1e-3) if rth else final > 1.2


def test_a_fit_of_a_foster_network_is_that_network_to_a_percent():
    r, tau = [0.02, 0.1, 0.3, 0.6], [1e-4, 1e-3, 2e-2, 0.5]
    times_s = np.geomspace(1e-5, 10, 25)
    fit = fit_foster(times_s, foster_zth_k_per_w(times_s, r, tau))
    at_s = np.geomspace(1e-5, 10, 200)
    np.testing.assert_allclose(
        foster_zth_k_per_w(at_s, fit.r_k_per_w, fit.tau_s), foster_zth_k_per_w(at_s, r, tau), rtol=0.015
    )
