"""Temperature over time: within 0.01 % of an ODE, periodic to 1e-9, energy kept, a million samples a second."""

import time

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp, trapezoid

from drc_power.physics import OutsideRange, transient
from drc_power.physics.impedance import foster_zth_k_per_w, table_zth_integral_k_s_per_w, table_zth_k_per_w
from drc_power.physics.peak import foster_peak_k

R, TAU = np.array([0.05, 0.2, 0.6, 1.0]), np.array([1e-4, 2e-3, 5e-2, 1.0])


def by_ode(t_s, p_w, r, tau, start):
    """scipy's solver, stopped at every corner of the power so that none is stepped over."""
    state, rises = np.array(start, dtype=float), [float(np.sum(start))]
    for t_0, t_1, p_0, p_1 in zip(t_s[:-1], t_s[1:], p_w[:-1], p_w[1:], strict=True):
        if t_1 > t_0:
            slope = (p_1 - p_0) / (t_1 - t_0)
            rates = lambda t, y, p=p_0, s=slope, at=t_0: (r * (p + s * (t - at)) - y) / tau  # noqa: E731
            state = solve_ivp(rates, [t_0, t_1], state, method="LSODA", rtol=1e-9, atol=1e-10).y[:, -1]
        rises.append(state.sum())
    return np.array(rises)


@pytest.mark.parametrize("seed", range(6))
def test_against_an_ode_solver(seed):
    rng = np.random.default_rng(seed)
    n_terms = int(rng.integers(1, 6))
    r, tau, start = rng.uniform(0.01, 2, n_terms), 10 ** rng.uniform(-4, 1, n_terms), rng.uniform(0, 20, n_terms)
    t_s = np.cumsum(10 ** rng.uniform(-4, 0, 40)) * (rng.random(40) > 0).astype(float)
    p_w = rng.uniform(0, 100, 40)
    t_s[20] = t_s[19]  # a step
    ours = transient.foster_response_k(t_s, p_w, r, tau, start)
    theirs = by_ode(t_s, p_w, r, tau, start)
    np.testing.assert_allclose(ours, theirs, rtol=1e-4)
    np.testing.assert_allclose(transient.foster_end_k(t_s, p_w, r, tau, start).sum(), ours[-1], rtol=1e-12)


@pytest.mark.parametrize("t_s", [1e-6, 1e-4, 3e-3, 0.7, 20.0])
def test_a_step_of_power_is_the_impedance(t_s):
    """However the step is cut into samples, short or long against the time constants."""
    for n in (2, 3, 1000):
        times = np.concatenate([[0.0], np.geomspace(t_s / 1e3, t_s, n - 1)]) if n > 2 else np.array([0.0, t_s])
        rise_k = transient.foster_response_k(times, np.full(n, 7.0), R, TAU)
        np.testing.assert_allclose(rise_k, 7.0 * foster_zth_k_per_w(times, R, TAU), rtol=1e-9, atol=1e-15)


def test_cutting_straight_power_into_pieces_changes_nothing():
    coarse_s, coarse_w = np.array([0.0, 1e-3, 0.1, 2.0]), np.array([0.0, 50.0, 10.0, 30.0])
    fine_s = np.union1d(np.linspace(0, 2, 10_001), coarse_s)
    fine_k = transient.foster_response_k(fine_s, np.interp(fine_s, coarse_s, coarse_w), R, TAU)
    coarse_k = transient.foster_response_k(coarse_s, coarse_w, R, TAU)
    np.testing.assert_allclose(fine_k[np.searchsorted(fine_s, coarse_s)], coarse_k, rtol=1e-10, atol=1e-12)


@given(st.integers(1, 50), st.integers(0, 10_000))
def test_blocks_of_every_size_give_the_plain_recurrence(n, seed):
    rng = np.random.default_rng(seed)
    t_s, p_w = np.cumsum(rng.uniform(0, 1e-2, n)), rng.uniform(-5, 100, (2, n))
    expected = np.zeros((2, n))
    for k in range(1, n):
        x = (t_s[k] - t_s[k - 1]) / 1e-2
        a, phi = np.exp(-x), (1 - np.exp(-x)) / x
        expected[:, k] = a * expected[:, k - 1] + 3.0 * ((1 - phi) * p_w[:, k] + (phi - a) * p_w[:, k - 1])
    np.testing.assert_allclose(transient.foster_response_k(t_s, p_w, [3.0], [1e-2]), expected, rtol=1e-7, atol=1e-7)


def test_an_event_may_be_cut_and_carried_on():
    t_s, p_w = np.linspace(0, 0.3, 301), np.abs(np.sin(np.arange(301.0))) * 40
    whole = transient.foster_response_k(t_s, p_w, R, TAU)
    half = transient.foster_end_k(t_s[:151], p_w[:151], R, TAU)
    np.testing.assert_allclose(transient.foster_response_k(t_s[150:], p_w[150:], R, TAU, half), whole[150:], rtol=1e-12)


def test_corners_run_side_by_side():
    t_s, p_w = np.linspace(0, 0.1, 50), np.random.default_rng(0).uniform(0, 50, (3, 50))
    start = np.random.default_rng(1).uniform(0, 5, (4, 3))
    together = transient.foster_response_k(t_s, p_w, R, TAU, start)
    apart = [transient.foster_response_k(t_s, row, R, TAU, start[:, k]) for k, row in enumerate(p_w)]
    np.testing.assert_allclose(together, apart, rtol=1e-12)
    ends = transient.foster_end_k(t_s, p_w, R, TAU, start)
    assert ends.shape == (4, 3)
    np.testing.assert_allclose(ends.sum(axis=0), together[:, -1], rtol=1e-12)
    assert transient.foster_periodic_k(t_s, p_w, R, TAU).shape == (3, 50)


def test_heat_stored_and_given_off_is_heat_put_in():
    """One term: C · θ at the end plus the integral of θ/R, by quadrature on a fine grid."""
    t_s = np.linspace(0, 1, 20_001)
    p_w = 30 * np.sin(3 * t_s) ** 2
    rise_k = transient.foster_response_k(t_s, p_w, [2.0], [0.1])
    stored_j, given_j = 0.1 / 2.0 * rise_k[-1], trapezoid(rise_k, t_s) / 2.0
    assert stored_j + given_j == pytest.approx(trapezoid(p_w, t_s), rel=1e-7)


@pytest.mark.parametrize("seed", range(3))
def test_periodic_steady_state_is_many_periods_carried_on(seed):
    """25 of the longest time constants later nothing of the start is left: within 1e-9."""
    rng = np.random.default_rng(seed)
    r, tau = rng.uniform(0.1, 2, 3), np.array([1e-3, 1e-2, 0.05])
    period_s = 0.01
    t_s, p_w = np.sort(np.append(rng.uniform(0, period_s, 8), [0.0, period_s])), rng.uniform(0, 50, 10)
    state = np.zeros(3)
    for _ in range(int(np.ceil(25 * 0.05 / period_s))):
        state = transient.foster_end_k(t_s, p_w, r, tau, state)
    explicit = transient.foster_response_k(t_s, p_w, r, tau, state)
    np.testing.assert_allclose(transient.foster_periodic_k(t_s, p_w, r, tau), explicit, rtol=1e-9)


@given(st.floats(1e-6, 1), st.floats(0, 1))
def test_pulse_train_peak_and_valley_are_those_of_the_periodic_answer(period_s, duty):
    t_on_s = duty * period_s
    times = np.array([0.0, t_on_s, t_on_s, period_s])
    periodic = transient.foster_periodic_k(times, np.array([9.0, 9.0, 0.0, 0.0]), R, TAU)
    peak_k, valley_k = (
        f(9.0, t_on_s, period_s, R, TAU) for f in (transient.pulse_train_peak_k, transient.pulse_train_valley_k)
    )
    assert peak_k == pytest.approx(periodic[1], rel=1e-9, abs=1e-12)
    assert valley_k == pytest.approx(periodic[3], rel=1e-9, abs=1e-12)
    zth = lambda t: foster_zth_k_per_w(t, R, TAU)  # noqa: E731
    assert transient.pulse_train_bound_k(9.0, duty, R.sum(), zth(t_on_s)) >= peak_k * (1 - 1e-12)


def test_pulse_train_ends():
    np.testing.assert_allclose(transient.pulse_train_peak_k(2.0, [0.0, 0.5], 0.5, R, TAU), [0.0, 2.0 * R.sum()])
    assert np.isnan(transient.pulse_train_peak_k(2.0, np.nextafter(0.5, 1), 0.5, R, TAU))
    assert np.isnan(transient.pulse_train_peak_k(2.0, 0.0, 0.0, R, TAU))


def test_superposition_of_a_foster_curve_is_the_recurrence():
    rng = np.random.default_rng(3)
    t_s, p_w = np.cumsum(rng.uniform(1e-4, 1e-2, 12)), rng.uniform(0, 50, (2, 12))
    t_s[5] = t_s[4]
    zth = lambda t: foster_zth_k_per_w(t, R, TAU)  # noqa: E731
    integral = lambda t: sum(r * (t + tau * np.expm1(-t / tau)) for r, tau in zip(R, TAU, strict=True))  # noqa: E731
    ours = transient.superposed_rise_k(t_s, t_s, p_w, zth, integral)
    expected = transient.foster_response_k(t_s, p_w, R, TAU)
    # At a step superposition shows the rise either side, which is the same: power moves heat, not temperature.
    np.testing.assert_allclose(ours, expected, rtol=1e-9, atol=1e-9)


def test_superposition_of_a_table_is_the_table_for_a_step_and_its_mean_for_a_ramp():
    table = [1e-4, 1e-3, 1e-2], [0.04, 0.13, 0.5]
    zth, integral = (lambda t: table_zth_k_per_w(t, *table)), (lambda t: table_zth_integral_k_s_per_w(t, *table))
    at_s = np.array([0.0, 5e-5, 1e-3, 8e-3])
    np.testing.assert_allclose(transient.superposed_rise_k(at_s, [0.0, 1e-2], [3.0, 3.0], zth, integral), 3 * zth(at_s))
    ramp_k = transient.superposed_rise_k(at_s, [0.0, 1e-2], [0.0, 10.0], zth, integral)
    np.testing.assert_allclose(ramp_k, 1000 * integral(at_s))


@pytest.mark.parametrize("seed", range(4))
def test_the_peak_between_samples(seed):
    rng = np.random.default_rng(seed)
    t_s, p_w = np.cumsum(10 ** rng.uniform(-4, 0, 15)), rng.uniform(0, 100, (2, 15))
    fine_s = np.union1d(np.linspace(t_s[0], t_s[-1], 200_001), t_s)
    fine_k = [transient.foster_response_k(fine_s, np.interp(fine_s, t_s, row), R, TAU) for row in p_w]
    peak_k, when_s = foster_peak_k(t_s, p_w, R, TAU)
    for row in range(2):
        assert peak_k[row] >= fine_k[row].max() * (1 - 1e-12)
        assert peak_k[row] == pytest.approx(fine_k[row].max(), rel=1e-5)
        assert when_s[row] == pytest.approx(fine_s[np.argmax(fine_k[row])], abs=5e-4 * (t_s[-1] - t_s[0]))


def test_the_peak_of_a_power_that_only_rises_is_its_end():
    peak_k, when_s = foster_peak_k([0.0, 1.0, 2.0], [0.0, 5.0, 6.0], R, TAU, start_k=[0.0, 0.0, 0.0, 2.0])
    assert when_s == 2.0
    assert peak_k == pytest.approx(
        transient.foster_response_k([0.0, 1.0, 2.0], [0.0, 5.0, 6.0], R, TAU, [0, 0, 0, 2.0])[-1]
    )


@settings(max_examples=30)
@given(st.integers(0, 1000), st.floats(0, 2))
def test_more_power_is_never_cooler(seed, more):
    rng = np.random.default_rng(seed)
    t_s, p_w = np.cumsum(rng.uniform(0, 1e-2, 30)), rng.uniform(0, 50, 30)
    low, high = (transient.foster_response_k(t_s, p_w * (1 + extra), R, TAU) for extra in (0.0, more))
    assert np.all(high >= low - 1e-9)


@pytest.mark.parametrize(
    ("times", "powers"),
    [
        ([0.0, -1.0], [1.0, 1.0]),
        ([0.0, np.nan], [1.0, 1.0]),
        ([0.0, 1.0], [1.0, np.inf]),
        ([0.0, 1.0], [1.0]),
        ([], []),
    ],
)
def test_a_record_that_is_none_is_refused(times, powers):
    with pytest.raises(OutsideRange):
        transient.foster_response_k(times, powers, R, TAU)


def test_terms_that_are_none_are_refused():
    for terms in (([1.0], [0.0]), ([-1.0], [1.0]), ([1.0, 1.0], [1.0])):
        with pytest.raises(OutsideRange):
            transient.foster_response_k([0.0, 1.0], [1.0, 1.0], *terms)


def test_a_period_of_no_length_is_refused():
    with pytest.raises(OutsideRange):
        transient.foster_periodic_k([0.0, 0.0], [1.0, 2.0], R, TAU)


def test_a_million_samples_take_about_a_second():
    """Generous by a factor of several, so that a busy machine does not fail it; the benchmark has the figure."""
    rng = np.random.default_rng(0)
    t_s, p_w = np.cumsum(rng.uniform(5e-7, 2e-6, 1_000_000)), rng.uniform(0, 100, 1_000_000)
    began = time.perf_counter()
    transient.foster_response_k(t_s, p_w, R, TAU)
    assert time.perf_counter() - began < 3.0
