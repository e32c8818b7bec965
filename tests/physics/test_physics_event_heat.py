"""Heat along many events at once, against scipy's integration of the same network and against explicit periods."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from drc_power.physics.event_heat import (
    fading_k, foster_paths_k, periodic_starts_k, superposed_paths_k, two_body_foster,
)
from drc_power.physics.impedance import foster_zth_k_per_w


def network(seed, n_terms=4):
    rng = np.random.default_rng(seed)
    return rng.uniform(0.05, 2.0, n_terms), 10.0 ** rng.uniform(-4.0, 1.0, n_terms)


@pytest.mark.parametrize("seed", range(6))
def test_random_networks_and_power_against_an_ode_solver(seed):
    rng = np.random.default_rng(seed)
    (r, tau), t_s = network(seed), np.sort(np.append(0.0, rng.uniform(0.0, 2.0, (9,))))
    p_w = rng.uniform(0.0, 50.0, t_s.size)
    rise_k, end_k = foster_paths_k([t_s], [p_w], r, tau)
    solved, state = [0.0], np.zeros(r.size)
    for k in range(t_s.size - 1):
        run = solve_ivp(lambda t, y: (r * np.interp(t, t_s, p_w) - y) / tau, t_s[k : k + 2], state, method="Radau", rtol=1e-10, atol=1e-10)
        state = run.y[:, -1]
        solved.append(state.sum())
    assert rise_k[0] == pytest.approx(np.array(solved), rel=1e-4, abs=1e-6)
    assert end_k[0] == pytest.approx(state, rel=1e-4, abs=1e-6)


@pytest.mark.parametrize("seed", range(6))
def test_superposition_on_a_curve_is_the_network_it_was_drawn_from(seed):
    rng = np.random.default_rng(seed)
    r, tau = network(seed)
    t_s, p_w = np.sort(np.append(0.0, rng.uniform(0.0, 2.0, 9))), rng.uniform(0.0, 50.0, 10)
    integral = lambda t: sum(a * (t + b * np.expm1(-t / b)) for a, b in zip(r, tau, strict=True))  # noqa: E731
    by_curve = superposed_paths_k([t_s], [p_w], lambda t: foster_zth_k_per_w(t, r, tau), integral)
    assert by_curve == pytest.approx(foster_paths_k([t_s], [p_w], r, tau)[0], rel=1e-9)


@pytest.mark.parametrize("seed", range(6))
def test_an_event_that_returns_for_ever_is_what_explicit_periods_settle_at(seed):
    rng = np.random.default_rng(seed)
    r, tau = network(seed)
    t_s, p_w, period_s = np.linspace(0.0, 0.3, 5), rng.uniform(0.0, 50.0, 5), 0.8
    _, once_k = foster_paths_k([t_s], [p_w], r, tau)
    start_k = periodic_starts_k(once_k, [0.3], [period_s], tau)
    state = np.zeros((1, r.size))
    for _ in range(int(np.ceil(25 * tau.max() / period_s))):
        _, ended_k = foster_paths_k([t_s], [p_w], r, tau, state)
        state = ended_k * np.exp(-(period_s - 0.3) / tau)
    assert start_k == pytest.approx(state, rel=1e-9)
    along = foster_paths_k([t_s], [p_w], r, tau)[0] + fading_k([t_s], start_k, tau)
    assert along == pytest.approx(foster_paths_k([t_s], [p_w], r, tau, start_k)[0], rel=1e-12)


@pytest.mark.parametrize(("r_1", "c_1", "r_2", "c_2"), [(0.6, 0.0, 8.0, 40.0), (0.6, 5.0, 8.0, 40.0), (2.0, 3.0, 0.0, 0.0), (0.0, 0.0, 40.0, 12.0), (0.5, 4.0, 3.0, 0.0)])
def test_case_and_sink_against_an_ode_solver(r_1, c_1, r_2, c_2):
    terms = two_body_foster(*(np.array([x]) for x in (r_1, c_1, r_2, c_2)))
    rise_k = foster_paths_k([[0.0, 20.0]], [[10.0, 10.0]], *terms)[0][0, -1]
    tiny = 1e-4  # a body without capacity settles long before the time that is looked at

    def heat(t, y):
        flow = (y[0] - y[1]) / max(r_1, 1e-6)
        return [(10.0 - flow) / max(c_1, tiny), (flow - y[1] / max(r_2, 1e-6)) / max(c_2, tiny)]

    solved = solve_ivp(heat, (0.0, 20.0), [0.0, 0.0], method="Radau", rtol=1e-9, atol=1e-9).y[0, -1]
    assert rise_k == pytest.approx(solved, rel=2e-4)


def test_an_event_longer_than_its_period_has_no_steady_state():
    assert np.isnan(periodic_starts_k([[1.0]], [0.3], [0.2], [0.1])).all()
