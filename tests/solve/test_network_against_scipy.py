"""The network solver against scipy's root finder on equations written here, independently of the solver's own.

Tolerance: both solve the same equations in double precision, so 1e-8 relative is generous to scipy's stopping test.
"""

from __future__ import annotations

import numpy as np
import pytest
from circuits import DIODE, RDS_SCALE, P, flat, link, own_heat, solve
from scipy.optimize import brentq, root

from drc_power.solve.branches import (
    CurrentLoad, Curve, Drop, Efficiency, Linear, OneWay, PowerLoad, Resistive, Source, Switching,
)


def test_battery_fuse_and_regulator_chain():
    """24 V, 20 mohm, then 5 V linear (0.35 A + 4 mA), from it 3.3 V linear (0.12 A + 2 mA)."""
    named, converged, _, _ = solve([
        Source("V", "A", "0", P(24.0)), link("F", "A", "B", 0.02),
        Linear("U1", "B", "C", "0", P(5.0), P(0.5), P(0.004)), CurrentLoad("L1", "C", "0", P(0.35)),
        Linear("U2", "C", "D", "0", P(3.3), P(0.2), P(0.002)), CurrentLoad("L2", "D", "0", P(0.12))])
    assert converged.all()
    i1 = 0.35 + 0.12 + 0.002
    assert named["current", "F"][0] == pytest.approx(i1 + 0.004, rel=1e-12)
    assert named["node", "B"][0] == pytest.approx(24.0 - 0.02 * (i1 + 0.004), rel=1e-12)
    assert named["node", "D"][0] == pytest.approx(3.3, rel=1e-12)


def test_constant_power_load_takes_the_higher_voltage():
    """v = (V + √(V² − 4·R·P))/2, the stable root of R·P/v + v = V."""
    named, converged, _, _ = solve([Source("V", "A", "0", P(12.0)), link("R", "A", "B", 1.0),
                                    PowerLoad("L", "B", "0", P(35.0), 0.6)])
    assert converged.all()
    assert named["node", "B"][0] == pytest.approx((12.0 + np.sqrt(144.0 - 140.0)) / 2.0, rel=1e-10)


def test_constant_power_load_beyond_what_the_source_can_give_has_no_operating_point():
    """36 W is V²/(4R): 37 W has no solution, and must not come back as one."""
    named, converged, system, x = solve([Source("V", "A", "0", P(12.0)), link("R", "A", "B", 1.0),
                                         PowerLoad("L", "B", "0", P(37.0), 0.6)])
    family = system.families[-1]
    collapsed = family.collapsed(x, family.parameters(np.zeros((1, 0))))
    assert not converged.all() or collapsed.all()


def test_oring_diodes_share_by_their_own_lines():
    """Two supplies of 12.0 V and 11.9 V through equal diodes into 6 ohm, against scipy."""
    named, converged, _, _ = solve([
        Source("V1", "A", "0", P(12.0)), Source("V2", "B", "0", P(11.9)),
        OneWay("D1", "A", "C", DIODE), OneWay("D2", "B", "C", DIODE), link("R", "C", "0", 6.0)])

    def equations(v):
        i1, i2 = ((e - v[0] - 0.4) / 0.05 if e - v[0] > 0.4 else 0.0 for e in (12.0, 11.9))
        return [i1 + i2 - v[0] / 6.0]

    expected = root(equations, [11.4], tol=1e-13).x[0]
    assert converged.all()
    assert named["node", "C"][0] == pytest.approx(expected, rel=1e-9)


def test_oring_diode_of_a_low_supply_carries_nothing():
    named, converged, _, _ = solve([
        Source("V1", "A", "0", P(12.0)), Source("V2", "B", "0", P(5.0)),
        OneWay("D1", "A", "C", DIODE), OneWay("D2", "B", "C", DIODE), link("R", "C", "0", 6.0)])
    assert converged.all()
    assert named["current", "D2"][0] == 0.0


def test_resistor_mesh_against_nodal_matrix():
    """A random mesh of 14 resistors among 6 nets, against numpy's solution of the nodal matrix."""
    rng = np.random.default_rng(7)
    pairs = [(a, b) for a in range(6) for b in range(a)][:14]
    ohms = rng.uniform(0.5, 50.0, len(pairs))
    branches = [Source("V", "n5", "n0", P(10.0))]
    branches += [link(f"R{k}", f"n{a}", f"n{b}", r) for k, ((a, b), r) in enumerate(zip(pairs, ohms, strict=True))]
    named, converged, _, _ = solve(branches, reference=("n0",))
    matrix = np.zeros((6, 6))
    for (a, b), r in zip(pairs, ohms, strict=True):
        matrix[a, a] += 1 / r
        matrix[b, b] += 1 / r
        matrix[a, b] -= 1 / r
        matrix[b, a] -= 1 / r
    inner = [1, 2, 3, 4]
    expected = np.linalg.solve(matrix[np.ix_(inner, inner)], -matrix[inner, 5] * 10.0)
    assert converged.all()
    assert [named["node", f"n{k}"][0] for k in inner] == pytest.approx(expected, rel=1e-9)


def test_parallel_channels_share_by_temperature():
    """Two FETs of 8 and 10 mohm on one sink share 30 A; equations by hand, root by scipy."""
    branches = [Source("V", "A", "0", P(24.0)),
                Resistive("Q1", "A", "B", P(0.008), "Q1", RDS_SCALE), Resistive("Q2", "A", "B", P(0.010), "Q2", RDS_SCALE),
                CurrentLoad("L", "B", "0", P(30.0))]
    named, converged, system, _ = solve(branches, heat=own_heat(("Q1", 40.0, 1.5), ("Q2", 40.0, 1.5), sink=(40.0, 4.0)))

    def scale(t):
        return 1.0 + 0.45 * (t - 25.0) / 75.0 if t < 100.0 else 1.45 + 0.4 * (t - 100.0) / 50.0

    def equations(u):
        i1, t1, t2 = u
        p1, p2 = i1**2 * 0.008 * scale(t1), (30.0 - i1) ** 2 * 0.010 * scale(t2)
        return [i1 * 0.008 * scale(t1) - (30.0 - i1) * 0.010 * scale(t2),
                t1 - 40.0 - 4.0 * (p1 + p2) - 1.5 * p1, t2 - 40.0 - 4.0 * (p1 + p2) - 1.5 * p2]

    i1, t1, t2 = root(equations, [15.0, 60.0, 60.0], tol=1e-13).x
    assert converged.all()
    assert named["current", "Q1"][0] == pytest.approx(i1, rel=1e-8)
    assert named["temperature", "Q1"][0] == pytest.approx(t1, rel=1e-8)
    assert named["temperature", "Q2"][0] == pytest.approx(t2, rel=1e-8)


def test_switching_regulator_draws_power_over_efficiency():
    """48 V through 0.5 ohm into a converter of 12 V, efficiency by table over load and input voltage."""
    eta = Efficiency((24.0, 60.0), (Curve(np.array([0.1, 1.0, 3.0]), np.array([0.80, 0.92, 0.90])),
                                    Curve(np.array([0.1, 1.0, 3.0]), np.array([0.70, 0.88, 0.86]))))
    named, converged, _, _ = solve([Source("V", "A", "0", P(48.0)), link("R", "A", "B", 0.5),
                                    Switching("U", "B", "C", "0", P(12.0), eta), CurrentLoad("L", "C", "0", P(2.2))])

    def excess(v):
        low = 0.92 + (0.90 - 0.92) * 1.2 / 2.0
        high = 0.88 + (0.86 - 0.88) * 1.2 / 2.0
        return (48.0 - v) / 0.5 * v - 12.0 * 2.2 / (low + (high - low) * (v - 24.0) / 36.0)

    v = brentq(excess, 40.0, 48.0, xtol=1e-12)
    assert converged.all()
    assert named["node", "B"][0] == pytest.approx(v, rel=1e-9)
    assert named["current", "U input"][0] == pytest.approx((48.0 - v) / 0.5, rel=1e-7)


def test_regulator_in_dropout_follows_its_input():
    named, converged, _, _ = solve([Source("V", "A", "0", P(5.2)), link("R", "A", "B", 1.0),
                                    Linear("U", "B", "C", "0", P(5.0), P(0.4), P(0.001)), CurrentLoad("L", "C", "0", P(0.1))])
    assert converged.all()
    assert named["node", "C"][0] == pytest.approx(5.2 - 0.101 - 0.4, rel=1e-12)


def test_a_net_nothing_feeds_rests_at_zero():
    named, converged, _, _ = solve([Source("V", "A", "0", P(24.0)), OneWay("body", "B", "A", DIODE),
                                    CurrentLoad("L", "B", "0", P(2.0)), link("R", "A", "0", 100.0)])
    assert converged.all()
    assert named["node", "B"][0] == pytest.approx(0.0, abs=1e-6)
    assert named["current", "L"][0] == pytest.approx(0.0, abs=1e-6)


def test_shunt_and_low_side_switch_in_the_return():
    """24 V, heater 12 ohm, FET 50 mohm, shunt 100 mohm: one loop, by Ohm's law."""
    named, converged, _, _ = solve([Source("V", "A", "0", P(24.0)), link("heater", "A", "B", 12.0),
                                    link("Q", "B", "C", 0.05), link("shunt", "C", "0", 0.1)])
    assert converged.all()
    assert named["node", "C"][0] == pytest.approx(24.0 / 12.15 * 0.1, rel=1e-12)


def test_parallel_links_of_no_resistance_share():
    named, converged, _, _ = solve([Source("V", "A", "0", P(10.0)), link("W1", "A", "B", 0.0), link("W2", "A", "B", 0.0),
                                    link("R", "B", "0", 5.0)])
    assert converged.all()
    total = named["current", "W1"][0] + named["current", "W2"][0]
    assert total == pytest.approx(2.0, rel=1e-8)


@pytest.mark.parametrize("efficiency", [0.5, 0.9, 1.0])
def test_converter_power_balance(efficiency):
    named, converged, system, x = solve([Source("V", "A", "0", P(24.0)), Switching("U", "A", "B", "0", P(5.0), flat(efficiency), part="U"),
                                         CurrentLoad("L", "B", "0", P(1.0))])
    loss = system.powers(x, system.prepare(np.zeros((1, 0))))["U"][0]
    assert converged.all()
    assert loss == pytest.approx(5.0 * (1.0 / efficiency - 1.0), abs=1e-12)


def test_a_measured_forward_line_is_read_between_its_points():
    """1 A and 3 A at 0.42 V and 0.50 V: 2 A lies at 0.46 V."""
    drop = Drop(lines=((25.0, Curve(np.array([1.0, 3.0]), np.array([0.42, 0.50]))),))
    named, converged, _, _ = solve([Source("V", "A", "0", P(5.0)), OneWay("D", "A", "B", drop), CurrentLoad("L", "B", "0", P(2.0))])
    assert converged.all()
    assert named["node", "B"][0] == pytest.approx(5.0 - 0.46, rel=1e-12)
