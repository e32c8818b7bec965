"""Diodes with a measured forward line, which is flat below its first point: the current there is the network's to say.

The values are arithmetic: with a flat line the diode of the higher supply holds the net at that supply less 0.42 V, the
other blocks. Marked are those that the solver does not give yet; a mark that is no longer due fails.
"""

from __future__ import annotations

import numpy as np
import pytest
from circuits import P, own_heat
from engines import engine_solution

from drc_power.solve.balance import current_imbalance, power_imbalance
from drc_power.solve.branches import CurrentLoad, Curve, Drop, OneWay, Source

COLD = (25.0, Curve(np.array([0.1, 1.0, 5.0]), np.array([0.42, 0.55, 0.80])))
HOT = (125.0, Curve(np.array([0.1, 1.0, 5.0]), np.array([0.25, 0.42, 0.72])))


def oring(v_second: float, i_load_a: float, lines=(COLD,), source_ohm: float = 0.0):
    """24 V and a second supply OR-ed into one load by equal diodes at 40 °C and 2 K/W."""
    branches = [Source("V1", "a", "0", P(24.0), P(source_ohm)), Source("V2", "b", "0", P(v_second), P(source_ohm)),
                OneWay("D1", "a", "out", Drop(lines=lines), "D1"), OneWay("D2", "b", "out", Drop(lines=lines), "D2"),
                CurrentLoad("L", "out", "0", P(i_load_a))]
    return engine_solution(branches, own_heat(("D1", 40.0, 2.0), ("D2", 40.0, 2.0)))


@pytest.mark.parametrize("v_second", [
    pytest.param(v, marks=pytest.mark.xfail(strict=True, reason="does not converge: both lines are level below their first points"))
    for v in (23.9, 23.5, 20.0)])
def test_below_the_first_point_the_higher_of_two_stiff_supplies_feeds_alone(v_second):
    solution = oring(v_second, 0.05)
    assert solution.node_v("out")[0] == pytest.approx(24.0 - 0.42, rel=1e-9)
    assert solution.current_a("D1")[0] == pytest.approx(0.05, rel=1e-9)
    assert solution.current_a("D2")[0] == pytest.approx(0.0, abs=1e-9)


@pytest.mark.xfail(strict=True, reason="does not converge: the two diodes' lines are level below their first points")
def test_two_forward_lines_below_the_first_point():
    """0.42 V at 25 °C and 0.25 V at 125 °C: at 40 °C and 2 K/W · 0.05 A · v the drop v is 0.3945 V − 1.7 mV/K · 0.1 K/V · v."""
    assert oring(23.9, 0.05, (COLD, HOT)).node_v("out")[0] == pytest.approx(24.0 - 0.3945 / (1.0 + 0.0017 * 0.1), rel=1e-9)


@pytest.mark.parametrize("v_second", [23.9, 23.5, 20.0])
def test_with_resistance_in_the_supplies_the_higher_feeds_alone(v_second):
    solution = oring(v_second, 0.05, source_ohm=0.01)
    assert solution.node_v("out")[0] == pytest.approx(24.0 - 0.42 - 0.01 * 0.05, rel=1e-9)
    assert solution.current_a("D2")[0] == pytest.approx(0.0, abs=1e-9)


@pytest.mark.parametrize("volts", [3.3, 5.0, 10.0, 12.0, 24.0, 48.0])
def test_an_unloaded_net_behind_a_diode_rests_a_knee_below(volts):
    solution = engine_solution([Source("V", "a", "0", P(volts), P(0.1)), OneWay("D", "a", "b", Drop(P(0.4), P(0.05)))])
    assert solution.converged.all()
    assert solution.node_v("b")[0] == pytest.approx(volts - 0.4, rel=1e-9)


@pytest.mark.parametrize("i_load_a", [
    pytest.param(0.0, marks=pytest.mark.xfail(strict=True, reason="the leak of 1e-18 S is all that flows, and counts as imbalance")),
    pytest.param(0.001, marks=pytest.mark.xfail(strict=True, reason="an unloaded net's leak against a millionth of 1 mA")), 0.2])
def test_an_unloaded_net_is_no_imbalance(i_load_a):
    """A mode in which nothing, or little, is drawn passes the self-check."""
    solution = engine_solution([Source("V", "a", "0", P(48.0)), OneWay("D", "a", "b", Drop(P(0.4), P(0.05))),
                                CurrentLoad("L", "a", "0", P(i_load_a))])
    assert current_imbalance(solution).max() < 1e-9
    assert power_imbalance(solution).max() < 1e-9


@pytest.mark.parametrize("v_second", [23.9, 23.5, 20.0])
def test_what_does_not_converge_is_no_operating_point(v_second):
    """Until these converge they must at least not pass for solutions."""
    assert oring(v_second, 0.05).unsolved().all()
    assert oring(23.9, 0.05, (COLD, HOT)).unsolved().all()
