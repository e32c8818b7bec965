"""Snubber voltage against an ODE solution."""

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from drc_power.physics import snubber


@pytest.mark.parametrize("r_ohm", [0.1, 2.0, 6.6, 12.0, 16.0])
@pytest.mark.parametrize("i_trapped_a", [0.0, 5.0, 20.0])
def test_peak_is_that_of_the_circuit_solved_in_time(r_ohm, i_trapped_a):
    v_supply, l_h, c_f = 220.0, 50e-6, 0.7346e-6
    rates = lambda _, y: [(v_supply - r_ohm * y[0] - y[1]) / l_h, y[0] / c_f]  # noqa: E731
    times = np.linspace(0, 60e-6, 60_001)
    i_a, v_c = solve_ivp(rates, [0, 60e-6], [i_trapped_a, 0], t_eval=times, rtol=1e-9, atol=1e-9).y
    expected_v = (r_ohm * i_a + v_c).max()
    assert snubber.recovery_peak_v(v_supply, i_trapped_a, l_h, c_f, r_ohm) == pytest.approx(expected_v, rel=1e-6)


def test_at_critical_damping_the_formula_ends():
    r_ohm = snubber.critical_resistance_ohm(50e-6, 1e-6)
    peaks_v = snubber.recovery_peak_v(220.0, 20.0, 50e-6, 1e-6, np.array([0.999, 1.001]) * r_ohm)
    np.testing.assert_array_equal(np.isnan(peaks_v), [False, True])
