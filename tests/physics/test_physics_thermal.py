"""Steady heat: heat in equals heat out, superposition, and the loop of loss and temperature against scipy."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.optimize import brentq

from drc_power.physics import OutsideRange, thermal

CURVE = [25.0, 100.0, 150.0], [1.0, 1.45, 1.85]


def random_network(rng, n_nodes):
    """A tree, so that every node has a path to ambient, and a few links more."""
    links = [(k, int(rng.integers(k)), rng.uniform(0.01, 5)) for k in range(1, n_nodes)]
    links += [(int(i), int(j), rng.uniform(0.01, 5)) for i, j in rng.integers(n_nodes, size=(n_nodes, 2)) if i != j]
    to_ambient = rng.uniform(0, 1, n_nodes) * (rng.random(n_nodes) < 0.3)
    to_ambient[0] = 0.5
    return links, to_ambient


@pytest.mark.parametrize("seed", range(5))
def test_heat_in_is_heat_out_at_every_node(seed):
    rng = np.random.default_rng(seed)
    links, to_ambient = random_network(rng, 40)
    p_w, t_ambient_c = rng.uniform(0, 20, 40), 40.0
    temps_c = thermal.network_temperatures_c(
        thermal.conductance_matrix_w_per_k(40, links, to_ambient), p_w, t_ambient_c
    )
    out_w = to_ambient * (temps_c - t_ambient_c)
    for i, j, g in links:
        flow_w = g * (temps_c[i] - temps_c[j])
        out_w[i] += flow_w
        out_w[j] -= flow_w
    np.testing.assert_allclose(out_w, p_w, rtol=0, atol=1e-9 * p_w.sum())


def test_network_by_corners_and_its_resistance_matrix_agree():
    rng = np.random.default_rng(1)
    matrix = thermal.conductance_matrix_w_per_k(12, *random_network(rng, 12))
    p_w, ambient_c = rng.uniform(0, 5, (7, 12)), rng.uniform(-40, 60, 7)
    whole = thermal.network_temperatures_c(matrix, p_w, ambient_c)
    by_resistance = thermal.steady_temperatures_c(
        thermal.resistance_matrix_k_per_w(matrix, np.arange(12)), p_w, ambient_c
    )
    np.testing.assert_allclose(by_resistance, whole, rtol=1e-10)
    stacked = thermal.network_temperatures_c(np.broadcast_to(matrix, (7, 12, 12)), p_w, ambient_c)
    np.testing.assert_allclose(stacked, whole, rtol=1e-10)


def test_a_resistance_matrix_of_some_nodes_is_symmetric_and_positive():
    rng = np.random.default_rng(2)
    matrix = thermal.conductance_matrix_w_per_k(9, *random_network(rng, 9))
    some = thermal.resistance_matrix_k_per_w(matrix, [0, 3, 7])
    np.testing.assert_allclose(some, some.T, rtol=1e-12)
    assert np.all(some > 0)


def test_a_diagonal_is_every_part_by_itself():
    temps_c = thermal.steady_temperatures_c(np.diag([40.0, 62.0]), [[1.0, 2.0], [0.0, 0.5]], [25.0, 55.0])
    np.testing.assert_allclose(temps_c, [[65.0, 149.0], [55.0, 86.0]])


@pytest.mark.parametrize(
    ("links", "to_ambient"),
    [([(0, 1, 1.0)], [0.0, 0.0, 1.0]), ([(0, 1, 0.1), (0, 2, 0.3)], [0.0, 0.0, 0.0]), ([], [1.0, 1.0, 0.0])],
)
def test_a_node_without_a_path_to_ambient_is_refused(links, to_ambient):
    matrix = thermal.conductance_matrix_w_per_k(3, links, to_ambient)
    with pytest.raises(OutsideRange, match="ambient"):
        thermal.network_temperatures_c(matrix, [1.0, 1.0, 1.0], 25.0)
    with pytest.raises(OutsideRange, match="ambient"):
        thermal.resistance_matrix_k_per_w(matrix, [0])


@pytest.mark.parametrize(
    ("links", "to_ambient"),
    [([(0, 1, 0.0)], [1, 1]), ([(0, 1, -1.0)], [1, 1]), ([], [-1, 1]), ([(0, 1, np.inf)], [1, 1])],
)
def test_a_conductance_that_is_none_is_refused(links, to_ambient):
    with pytest.raises(OutsideRange):
        thermal.conductance_matrix_w_per_k(2, links, to_ambient)


@given(
    st.floats(-40, 85), st.floats(0.1, 100), st.floats(0, 5), st.floats(0, 5),
)  # fmt: skip
def test_equilibrium_is_where_a_root_finder_puts_it(t_ambient_c, rth_k_per_w, p_fixed_w, p_25_w):
    """scipy's bracketed root of the same equation, with the curve read by numpy, up to 1e5 °C."""

    def imbalance_k(tj_c):
        scale = np.interp(tj_c, *CURVE) + max(tj_c - 150.0, 0.0) * 0.008
        return tj_c - t_ambient_c - rth_k_per_w * (p_fixed_w + p_25_w * scale)

    tj_c, gain = thermal.equilibrium_c(t_ambient_c, rth_k_per_w, p_fixed_w, p_25_w, *CURVE)
    if np.isnan(tj_c):
        assert gain >= 1.0
        assert imbalance_k(1e7) < 0
    else:
        assert gain < 1.0
        top_c = max(150.0, float(tj_c)) * 2 + 100
        assert tj_c == pytest.approx(brentq(imbalance_k, t_ambient_c - 1e-6, top_c, xtol=1e-9), abs=1e-6, rel=1e-9)


def test_equilibrium_on_each_line_and_at_each_breakpoint():
    """Chosen so that T_j is at, just below or just above a breakpoint: T_a = T_j − R · P · scale(T_j)."""
    for tj_c in (0.0, 25.0, 60.0, 100.0, 120.0, 150.0, 180.0):
        scale = np.interp(tj_c, *CURVE) + max(tj_c - 150.0, 0.0) * 0.008
        for aside_c in (-1e-9, 0.0, 1e-9):
            found_c, gain = thermal.equilibrium_c(tj_c + aside_c - 30.0 * scale, 30.0, 0.0, 1.0, *CURVE)
            assert found_c == pytest.approx(tj_c + aside_c / (1 - gain), abs=1e-8)


def test_equilibrium_of_a_level_curve_is_plain_ohms_law():
    tj_c, gain = thermal.equilibrium_c([25.0, 55.0], 40.0, 0.5, 1.0, [25.0], [1.0])
    np.testing.assert_allclose(tj_c, [85.0, 115.0])
    np.testing.assert_array_equal(gain, 0.0)


def test_runaway_begins_at_gain_one():
    b_w = 1 / (0.008 * 40)  # gain 1 on the last line
    tj_c, gain = thermal.equilibrium_c(100.0, 40.0, 0.0, np.array([0.2, 0.999, 1.0, 1.2]) * b_w, *CURVE)
    np.testing.assert_array_equal(np.isnan(tj_c), [False, False, True, True])
    np.testing.assert_allclose(gain[1:], [0.999, 1.0, 1.2], rtol=1e-12)
    power_w = thermal.linear_equilibrium_w(np.array([0.2, 1.0, 1.2]), 0.025, 40.0, 50.0)
    np.testing.assert_array_equal(np.isnan(power_w), [False, True, True])


@given(st.floats(0, 2), st.floats(0, 2), st.floats(-40, 85))
def test_more_loss_is_never_cooler(one_w, other_w, t_ambient_c):
    low_w, high_w = sorted((one_w, other_w))
    low_c, high_c = thermal.equilibrium_c(t_ambient_c, 50.0, 0.1, np.array([low_w, high_w]), *CURVE)[0]
    assert np.isnan(high_c) or low_c <= high_c + 1e-9


def test_the_closed_form_is_the_curve_with_one_slope():
    b_w, a_per_k, ambient_c = np.array([0.4, 1.6, 3.0]), 0.005, 50.0
    power_w = thermal.linear_equilibrium_w(b_w, a_per_k, 40.0, ambient_c)
    tj_c, gain = thermal.equilibrium_c(ambient_c, 40.0, 0.0, b_w, [25.0, 125.0], [1.0, 1.5])
    np.testing.assert_allclose(thermal.junction_c(ambient_c, power_w, 40.0), tj_c, rtol=1e-12)
    np.testing.assert_allclose(gain, thermal.linear_loop_gain(b_w, a_per_k, 40.0))
