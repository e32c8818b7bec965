"""Heat that feeds itself: equilibria, loop gain, and the cases that have none.

The closed form for a constant current through a resistance that rises linearly with temperature is algebra:
P = b·(1 + α·(Ta − 25))/(1 − b·α·Rth), b = I²·R25; the loop gain is b·α·Rth and an equilibrium exists below 1.
"""

from __future__ import annotations

import numpy as np
import pytest
from circuits import P, own_heat

from drc_power.solve.branches import CurrentLoad, Curve, Resistive, Source
from drc_power.solve.newton import Solver
from drc_power.solve.stability import climb, gain_bound, loop_gain
from drc_power.solve.start import starting_point
from drc_power.solve.system import System

ALPHA_PER_K = 0.005
LINEAR = Curve(np.array([25.0, 525.0]), np.array([1.0, 1.0 + 500.0 * ALPHA_PER_K]))


def one_channel(i_load_a: float, rth_k_per_w: float):
    """24 V, 4 mohm at 25 °C, a constant current, ambient 50 °C."""
    branches = [Source("V", "A", "0", P(24.0)), Resistive("Q", "A", "B", P(0.004), "Q", LINEAR),
                CurrentLoad("L", "B", "0", P(i_load_a))]
    system = System(branches, own_heat(("Q", 50.0, rth_k_per_w)), ["0"])
    points = np.zeros((1, 0))
    return Solver(system), starting_point(system, points), system.prepare(points)


def test_worked_example_of_the_closed_form():
    """20 A, 4 mohm, 0.5 %/K, 40 K/W, 50 °C: gain 0.32, 2.647 W, 155.9 °C (derived from the closed form)."""
    solver, x, prepared = one_channel(20.0, 40.0)
    x, converged = solver.solve(x, prepared)
    at = solver.system.temperature_at[0]
    assert converged.all()
    assert loop_gain(solver, x, prepared)[0] == pytest.approx(0.32, abs=1e-9)
    assert solver.system.powers(x, prepared)["Q"][0] == pytest.approx(2.647, abs=0.0005)
    assert x[at][0] == pytest.approx(155.9, abs=0.05)


@pytest.mark.parametrize("gain", [0.1, 0.5, 0.9, 0.99])
def test_below_a_gain_of_one_the_climb_finds_the_equilibrium(gain):
    b = 20.0**2 * 0.004
    solver, x, prepared = one_channel(20.0, gain / (b * ALPHA_PER_K))
    found, converged = solver.solve(x, prepared)
    expected = b * (1.0 + ALPHA_PER_K * 25.0) / (1.0 - gain)
    assert converged.all()
    assert solver.system.powers(found, prepared)["Q"][0] == pytest.approx(expected, rel=1e-9)
    assert loop_gain(solver, found, prepared)[0] == pytest.approx(gain, rel=1e-9)
    assert gain_bound(solver.system, found, prepared)[0] >= gain * (1.0 - 1e-12)


@pytest.mark.parametrize("gain", [1.0, 1.05, 1.5, 10.0])
def test_from_a_gain_of_one_on_there_is_no_equilibrium(gain):
    b = 20.0**2 * 0.004
    solver, x, prepared = one_channel(20.0, gain / (b * ALPHA_PER_K))
    found, settled, ran = climb(solver, x, prepared)
    assert not settled.any()
    assert ran.all()
    assert loop_gain(solver, found, prepared)[0] == pytest.approx(gain, rel=1e-9)


def test_a_voltage_driven_channel_always_settles():
    """Across a fixed voltage a hotter channel loses less: the gain is negative in sign and never runs away."""
    branches = [Source("V", "A", "0", P(1.0)), Resistive("Q", "A", "0", P(0.01), "Q", LINEAR)]
    system = System(branches, own_heat(("Q", 50.0, 40.0)), ["0"])
    points = np.zeros((1, 0))
    solver, prepared = Solver(system), system.prepare(points)
    x, converged = solver.solve(starting_point(system, points), prepared)
    t = x[system.temperature_at[0]][0]
    assert converged.all()
    assert t == pytest.approx(50.0 + 40.0 * 1.0 / (0.01 * (1.0 + ALPHA_PER_K * (t - 25.0))), rel=1e-9)
