"""Whole runs with events, annotated by the contract alone, against independent solutions.

The reference integrates the differential equations of the RC network with scipy (LSODA, relative tolerance 1e-9) or
uses closed forms; the steady start comes from `test_battery_board.reference`, which scipy solves too.
"""

from __future__ import annotations

import numpy as np
import pytest
from draw import write_board
from event_board import DEVICES, PARTS, with_events
from scipy.integrate import solve_ivp
from scipy.optimize import root
from test_battery_board import scale_q1, scale_q2

from drc_power.faults import InputError
from drc_power.run import check

Q1_FOSTER = [(0.3, 1e-3), (0.9, 12e-3), (0.8, 150e-3)]
U1_CAUER = [(0.4, 2e-3), (1.1, 15e-3), (1.5, 0.4)]


def steady(v_bat=28.0, i_load=0.06, r_heater=11.4, ambient=50.0):
    """The board's hottest corner, from Kirchhoff's and Ohm's laws and the way of each part's heat."""
    def equations(u):
        v24, i_heat, t1, t2, tu = u
        i_fuse = i_heat + i_load + 0.005
        p1, p2 = i_fuse**2 * 0.012 * scale_q1(t1), i_heat**2 * 0.008 * scale_q2(t2)
        pu = (v24 - 5.0) * i_load + v24 * 0.005
        return [v24 - (v_bat - i_fuse * (0.009 + 0.012 * scale_q1(t1))),
                i_heat - v24 / (r_heater + 0.008 * scale_q2(t2) + 0.010),
                t1 - (ambient + 50.0 * p1), t2 - (ambient + 8.0 * (p2 + pu) + (1.36 + 0.6) * p2),
                tu - (ambient + 8.0 * (p2 + pu) + 4.0 * pu)]

    v24, i_heat, t1, t2, tu = root(equations, [24.0, 2.0, 60.0, 80.0, 90.0], tol=1e-13).x
    i_fuse = i_heat + i_load + 0.005
    return {"v24": v24, "t1": t1, "p1": i_fuse**2 * 0.012 * scale_q1(t1), "t2": t2, "p2": i_heat**2 * 0.008 * scale_q2(t2),
            "tu": tu, "pu": (v24 - 5.0) * i_load + v24 * 0.005, "vf": v_bat - i_fuse * 0.009}


def foster_peak(start_c, before_w, power, lasts_s, terms, bends=()):
    """Hottest moment of a junction whose Foster network starts in equilibrium with `before_w` above a case that is held."""
    r, tau = np.array(terms).T
    hottest, state = start_c, np.zeros(len(terms))
    for begin, end in zip((0.0, *bends), (*bends, lasts_s), strict=True):
        solved = solve_ivp(lambda t, y: (r * (power(t) - before_w) - y) / tau, (begin, end), state, method="LSODA", rtol=1e-9,
                           atol=1e-9, t_eval=np.linspace(begin, end, 4001))
        state, hottest = solved.y[:, -1], max(hottest, start_c + solved.y.sum(axis=0).max())
    return hottest


def run(tmp_path, *events, devices=DEVICES):
    return check(write_board(tmp_path, PARTS, with_events(*events), devices))


def found(result, ref, rule, event):
    rows = [f for f in result.findings if (f.ref, f.rule, f.event) == (ref, rule, event)]
    assert len(rows) == 1, [(f.ref, f.rule, f.event) for f in result.findings]
    return rows[0]


CHARGES = [
    ("slew: 1 V/ms", 28e-3, lambda t: (28.0 - 1000.0 * t) * (0.5 + 0.2)),
    ("limit: 2 A", 500e-6 * 28.0 / 1.8, lambda t: (28.0 - 1.8 / 500e-6 * t) * 2.0),
    ("slew: 1 V/ms, charged_to: 10 V", 18e-3, lambda t: (18.0 - 1000.0 * t) * 0.7),
]


@pytest.mark.parametrize(("way", "lasts_s", "power"), CHARGES, ids=[c[0] for c in CHARGES])
def test_inrush_heats_as_the_differential_equation_says(tmp_path, way, lasts_s, power):
    result = run(tmp_path, f"plug: {{kind: inrush, part: Q1, capacitance: 500 uF, {way}, with: 0.2 A}}")
    at = steady()
    wanted = foster_peak(at["t1"], at["p1"], power, lasts_s, Q1_FOSTER)
    assert found(result, "Q1", "junction.event", "plug").value == pytest.approx(wanted, rel=1e-3)


def test_a_power_limited_inrush(tmp_path):
    result = run(tmp_path, "plug: {kind: inrush, part: Q1, capacitance: 500 uF, power_limit: 30 W}")
    at = steady()
    # C · dv/dt = −P/v: v = √(28² − 2·P·t/C), and the power stays 30 W until nearly the end.
    wanted = foster_peak(at["t1"], at["p1"], lambda t: 30.0, 500e-6 * 28.0**2 / 2 / 30.0, Q1_FOSTER)
    assert found(result, "Q1", "junction.event", "plug").value == pytest.approx(wanted, rel=1e-3)


PULSES = [
    ("rectangle", lambda x: 1.0, ()), ("falling", lambda x: 1.0 - x, ()), ("rising", lambda x: x, ()),
    ("triangle", lambda x: 1.0 - abs(2.0 * x - 1.0), (4e-3,)), ("half-sine", lambda x: np.sin(np.pi * x), ()),
]


@pytest.mark.parametrize(("shape", "share", "bends"), PULSES, ids=[p[0] for p in PULSES])
def test_pulses_of_every_shape(tmp_path, shape, share, bends):
    result = run(tmp_path, f"hit: {{kind: pulse, part: Q1, voltage: 20 V, current: 4 A, lasts: 8 ms, shape: {shape}}}")
    at = steady()
    wanted = foster_peak(at["t1"], at["p1"], lambda t: 80.0 * share(t / 8e-3), 8e-3, Q1_FOSTER, bends)
    assert found(result, "Q1", "junction.event", "hit").value == pytest.approx(wanted, rel=1e-3)


def test_a_train_of_pulses_after_every_transient_has_gone(tmp_path):
    result = run(tmp_path, "hits: {kind: pulse, part: Q1, voltage: 20 V, current: 4 A, lasts: 8 ms, every: 100 ms}")
    at = steady()
    extra = (80.0 - at["p1"]) * sum(r * -np.expm1(-8e-3 / tau) / -np.expm1(-0.1 / tau) for r, tau in Q1_FOSTER)
    mean = (80.0 - at["p1"]) * 0.08 * 48.0
    assert found(result, "Q1", "junction.event", "hits").value == pytest.approx(at["t1"] + extra + mean, rel=1e-5)
    assert found(result, "Q1", "dissipation.part", "hits").value == pytest.approx(at["p1"] * 0.92 + 80.0 * 0.08, rel=1e-5)


def test_a_short_behind_a_regulator(tmp_path):
    """The ladder of the data, junction first, integrated node by node against a case that is held."""
    result = run(tmp_path, 'short-5: {kind: short, net: "+5V", part: U1, limit: 1.5 A, lasts: 50 ms}')
    at = steady()
    r, c = np.array(U1_CAUER).T

    def heat(t, y):
        flow = (y - np.append(y[1:], 0.0)) / r
        return (np.append(at["v24"] * 1.5 - at["pu"], flow[:-1]) - flow) / c

    rise = solve_ivp(heat, (0.0, 50e-3), np.zeros(3), method="LSODA", rtol=1e-9, atol=1e-9).y[0, -1]
    assert found(result, "U1", "junction.event", "short-5").value == pytest.approx(at["tu"] + rise, rel=1e-3)


def test_a_long_event_warms_case_and_sink(tmp_path):
    """Foster network of the junction on an interface and a sink with its capacity."""
    foster = "foster: [[0.4 K/W, 3 ms], [0.96 K/W, 90 ms]]"
    devices = DEVICES.replace("zth_jc: [[10 us, 0.012 K/W], [100 us, 0.04 K/W], [1 ms, 0.13 K/W], [10 ms, 0.5 K/W], [100 ms, 1.2 K/W]]", foster)
    result = run(tmp_path, "hold: {kind: pulse, part: Q2, voltage: 4 V, current: 5 A, lasts: 30 s}", devices=devices)
    at = steady()
    extra = 20.0 - at["p2"]
    rise = extra * (1.36 + 0.6 + 8.0 * -np.expm1(-30.0 / (8.0 * 40.0)))
    assert found(result, "Q2", "junction.event", "hold").value == pytest.approx(at["t2"] + rise, rel=1e-3)


def test_a_curve_is_read_in_log_log_between_its_points(tmp_path):
    result = run(tmp_path, "hit: {kind: pulse, part: Q2, voltage: 24 V, current: 5 A, lasts: 3 ms}")
    at = steady()
    zth = 0.13 * (0.5 / 0.13) ** np.log10(3.0)
    assert found(result, "Q2", "junction.event", "hit").value == pytest.approx(at["t2"] + (120.0 - at["p2"]) * zth, rel=1e-6)


def case_of_q1(at):
    return at["t1"] - 2.0 * at["p1"]


def test_a_rectangle_is_held_against_the_area_exactly(tmp_path):
    """Between 1 ms and 10 ms I = a · t^m at 20 V, each line straight in log-log; the case scales the current."""
    result = run(tmp_path, "hit: {kind: pulse, part: Q1, voltage: 20 V, current: 3 A, lasts: 4 ms}")
    at_20 = [120.0 * (20.0 / 5.0) ** (np.log(8.0 / 120.0) / np.log(8.0)), 30.0 * (20.0 / 5.0) ** (np.log(2.0 / 30.0) / np.log(8.0))]
    drawn = at_20[0] * (at_20[1] / at_20[0]) ** np.log10(4.0)
    safe = drawn * (150.0 - case_of_q1(steady())) / 125.0
    finding = found(result, "Q1", "envelope.event", "hit")
    assert (finding.value, finding.rated) == pytest.approx((3.0, safe), rel=1e-4)


def test_a_long_rectangle_is_held_against_the_dc_line(tmp_path):
    result = run(tmp_path, "hit: {kind: pulse, part: Q1, voltage: 20 V, current: 0.3 A, lasts: 20 ms}")
    dc = 30.0 * 10.0 ** (np.log(0.5 / 30.0) / np.log(20.0))
    assert found(result, "Q1", "envelope.event", "hit").rated == pytest.approx(dc * (150.0 - case_of_q1(steady())) / 125.0, rel=1e-4)


def test_an_inrush_uses_less_than_a_pulse_of_equal_energy_and_more_than_its_mean(tmp_path):
    """Half the length at peak power over-reads a falling triangle; half the power for all of it under-reads it."""
    result = run(tmp_path, "plug: {kind: inrush, part: Q1, capacitance: 200 uF, slew: 7 V/ms}",
                 "peak: {kind: pulse, part: Q1, voltage: 28 V, current: 1.4 A, lasts: 2 ms}",
                 "mean: {kind: pulse, part: Q1, voltage: 28 V, current: 0.56 A, lasts: 4 ms}")
    used = {name: f.value / f.rated for name in ("plug", "peak", "mean") for f in (found(result, "Q1", "envelope.event", name),)}
    assert used["mean"] < used["plug"] <= used["peak"]


def test_avalanche_with_the_supply_term(tmp_path):
    result = run(tmp_path, "cut: {kind: avalanche, part: Q2, inductance: 40 uH, current: 20 A, supply: 24 V}",
                 "many: {kind: avalanche, part: Q2, inductance: 40 uH, current: 20 A, every: 20 ms}")
    assert found(result, "Q2", "envelope.avalanche", "cut").value == pytest.approx(0.5 * 40e-6 * 400.0 * 60.0 / 36.0, rel=1e-9)
    assert found(result, "Q2", "envelope.avalanche", "many").value == pytest.approx(8e-3, rel=1e-9)
    assert found(result, "Q2", "envelope.avalanche", "many").rated == pytest.approx(9e-3)
    steps = {step.symbol: step.value for step in found(result, "Q2", "envelope.avalanche", "cut").workings}
    assert steps["½·L·I²"] == pytest.approx(8e-3)


def test_turn_off_into_a_diode_across_the_load(tmp_path):
    result = run(tmp_path, "off: {kind: turn-off, part: Q2, inductance: 5 mH, current: 2.4 A, clamp: D2}")
    clamp_v = 0.8 + 0.02 * 2.4
    assert found(result, "Q2", "derating.vds", "off").value == pytest.approx(steady()["v24"] + clamp_v, rel=2e-3)
    assert found(result, "D2", "derating.surge", "off").value == pytest.approx(2.4)
    lasts_s = 5e-3 * 2.4 / clamp_v
    rise = foster_peak(0.0, 0.0, lambda t: clamp_v * 2.4 * (1.0 - t / lasts_s), lasts_s, [(3.0, 2e-3), (9.0, 60e-3)])
    assert found(result, "D2", "junction.event", "off").value == pytest.approx(50.0 + rise, rel=1e-3)


def test_a_surge_on_a_clamp(tmp_path):
    result = run(tmp_path, "dump: {kind: surge, part: D1, current: 10 A, lasts: 1 ms}")
    finding = found(result, "D1", "derating.pulse_power", "dump")
    assert finding.value == pytest.approx(380.0)
    assert finding.rated == pytest.approx(600.0 * (150.0 - 50.0) / 125.0, rel=1e-4)


def test_parts_in_parallel_take_all_unless_they_are_said_to_share(tmp_path):
    result = run(tmp_path, "one: {kind: pulse, parts: [Q1, Q2], voltage: 10 V, current: 4 A, lasts: 1 ms}",
                 "both: {kind: pulse, parts: [Q1, Q2], voltage: 10 V, current: 4 A, lasts: 1 ms, sharing: even}")
    assert [found(result, ref, "envelope.event", name).value for name in ("one", "both") for ref in ("Q1", "Q2")] == [4.0, 4.0, 2.0, 2.0]


MISSING = [
    ("foster: [[0.3 K/W, 1 ms], [0.9 K/W, 12 ms], [0.8 K/W, 150 ms]]", "", "lasts: 4 ms", "junction.event", "thermal.zth_jc"),
    ("rth_ja: 50 K/W, ", "", "lasts: 4 ms", "junction.event", "thermal.rth_ja"),
    ("rth_ja: 50 K/W, ", "", "lasts: 4 ms", "envelope.event", "thermal.rth_ja"),
    ("tj: 150 °C, power: 60 W", "power: 60 W", "lasts: 4 ms", "envelope.event", "limits.tj"),
    ("dc: [[0.1 V, 30 A], [2 V, 30 A], [40 V, 0.5 A]], 10 ms", "10 ms", "lasts: 11 ms", "envelope.event", "envelope.dc"),
    ("", "", "lasts: 2 s", "junction.event", "thermal.capacity"),
    ("", "", "lasts: 2 s", "envelope.event", "thermal.capacity"),
    ("", "", "", "junction.event", "events.hit.lasts"),
]


@pytest.mark.parametrize(("datum", "instead", "lasts", "rule", "named"), MISSING)
def test_what_is_missing_is_unproven_by_name(tmp_path, datum, instead, lasts, rule, named):
    devices = DEVICES.replace(datum, instead).replace(", }", "}") if datum else DEVICES
    result = run(tmp_path, f"hit: {{kind: pulse, part: Q1, voltage: 20 V, current: 10 mA, {lasts}}}".replace(", }", "}"), devices=devices)
    finding = found(result, "Q1", rule, "hit")
    assert finding.verdict == "unproven"
    assert named in finding.text


def test_the_voltage_of_an_inrush_is_the_rails_maximum_unless_given(tmp_path):
    result = run(tmp_path, "plug: {kind: inrush, part: Q1, capacitance: 500 uF, slew: 1 V/ms}",
                 "known: {kind: inrush, part: Q1, capacitance: 500 uF, slew: 1 V/ms, voltage: 20 V}")
    assert [found(result, "Q1", "derating.vds", name).value for name in ("plug", "known")] == [28.0, 20.0]


ALPHA = ("body: {knee: 0.7 V, slope: 10 mohm}", "body: {knee: 0.7 V, slope: 10 mohm}, transfer: {alpha: [[1 A, 20 mA/K], [10 A, 40 mA/K], [20 A, -20 mA/K]]}")


@pytest.mark.parametrize(("current", "alpha"), [(4.0, 0.02 + 0.02 * 3 / 9), (15.0, 0.01), (20.0, -0.02)])
def test_linear_mode_feeds_itself_by_voltage_impedance_and_tempco(tmp_path, current, alpha):
    """1 − margin is V · Z_th(t) · dI/dT; past the zero-tempco point nothing of it is left."""
    result = run(tmp_path, f"hit: {{kind: pulse, part: Q1, voltage: 20 V, current: {current} A, lasts: 8 ms}}", devices=DEVICES.replace(*ALPHA))
    zth = sum(r * -np.expm1(-8e-3 / tau) for r, tau in Q1_FOSTER)
    assert 1.0 - found(result, "Q1", "envelope.linear", "hit").margin == pytest.approx(max(20.0 * zth * alpha, 1e-3), abs=1e-6)


def test_linear_mode_without_a_dc_line_or_transfer_data_is_unproven(tmp_path):
    devices = DEVICES.replace("dc: [[0.1 V, 30 A], [2 V, 30 A], [40 V, 0.5 A]], 10 ms", "10 ms")
    result = run(tmp_path, "hit: {kind: pulse, part: Q1, voltage: 20 V, current: 0.1 A, lasts: 8 ms}", devices=devices)
    assert found(result, "Q1", "envelope.linear", "hit").verdict == "unproven"
    assert "transfer.alpha, or envelope.dc" in found(result, "Q1", "envelope.linear", "hit").text


def write_capture(tmp_path, text):
    (tmp_path / "scope.csv").write_text(text, encoding="utf-8")


SCOPE = "seen: {kind: waveform, part: Q1, file: scope.csv, columns: {time: t, voltage: vds, current: id}, scale: {time: 0.001}}"


def capture_of(power_w, lasts_s, n=4001, v=20.0):
    t_s = np.linspace(0.0, lasts_s, n)
    rows = "".join(f"{1e3 * t!r},{v!r},{power_w(t) / v!r}\n" for t in t_s.tolist())
    return "bench supply 3, channel 1\nt,vds,id\n" + rows


@pytest.mark.parametrize(("shape", "share", "bends"), PULSES, ids=[p[0] for p in PULSES])
def test_a_capture_is_the_pulse_that_it_shows(tmp_path, shape, share, bends):
    write_capture(tmp_path, capture_of(lambda t: float(80.0 * share(t / 8e-3)), 8e-3))
    result = run(tmp_path, SCOPE, f"hit: {{kind: pulse, part: Q1, voltage: 20 V, current: 4 A, lasts: 8 ms, shape: {shape}}}")
    for rule, tolerance in (("junction.event", 1e-3), ("envelope.event", 1e-2)):
        seen, hit = (found(result, "Q1", rule, name) for name in ("seen", "hit"))
        assert seen.value / seen.rated == pytest.approx(hit.value / hit.rated, rel=tolerance)
    assert ("capture", "scope.csv") in {(file.role, file.path) for file in result.inputs}


def test_a_gap_in_a_capture_is_unproven(tmp_path):
    lines = capture_of(lambda t: 8.0, 8e-3, 801).splitlines()
    lines[300:310] = [line.rsplit(",", 1)[0] + ",nan" for line in lines[300:310]]
    write_capture(tmp_path, "\n".join(lines) + "\n")
    result = run(tmp_path, SCOPE)
    assert found(result, "Q1", "junction.event", "seen").verdict == "unproven"
    assert "capture lacks between" in found(result, "Q1", "envelope.event", "seen").text


def test_single_readings_that_are_missing_are_bridged(tmp_path):
    lines = capture_of(lambda t: 8.0, 8e-3, 801).splitlines()
    lines[300] = lines[300].rsplit(",", 1)[0] + ","
    lines.insert(2, "s,V,A")
    write_capture(tmp_path, "\n".join(lines) + "\n")
    assert found(run(tmp_path, SCOPE), "Q1", "junction.event", "seen").verdict == "met"


@pytest.mark.parametrize(("text", "said"), [
    ("a,b\n1,2\n", "no line with the headings"), ("t,vds,id\n0,1,1\n1,1,1\n0.5,1,1\n", "runs backwards"), ("t,vds,id\n", "fewer than two")])
def test_a_capture_that_is_none_is_refused_by_name(tmp_path, text, said):
    write_capture(tmp_path, text)
    with pytest.raises(InputError) as refused:
        run(tmp_path, SCOPE)
    assert any(said in str(fault) for fault in refused.value.faults)


Q2_FOSTER = [(0.4, 3e-3), (0.96, 90e-3)]
SLOW_Q2 = ("zth_jc: [[10 us, 0.012 K/W], [100 us, 0.04 K/W], [1 ms, 0.13 K/W], [10 ms, 0.5 K/W], [100 ms, 1.2 K/W]]",
           "foster: [[0.4 K/W, 3 ms], [0.96 K/W, 90 ms]]")


def warmed(ohm, lasts_s):
    """Q2's junction after its load has gone from 11.4 ohm to another for a while: network and heat integrated together."""
    at = steady()
    r, tau = np.array(Q2_FOSTER).T
    sink_before = 50.0 + 8.0 * (at["p2"] + at["pu"])

    def network(t2):
        def equations(u):
            v24, i, t1 = u
            fuse = i + 0.065
            return [v24 - (28.0 - fuse * (0.009 + 0.012 * scale_q1(t1))), i - v24 / (ohm + 0.008 * scale_q2(t2) + 0.010),
                    t1 - (50.0 + 50.0 * fuse**2 * 0.012 * scale_q1(t1))]
        return root(equations, [at["v24"], 4.0, at["t1"]], tol=1e-12).x

    def heat(t, y):
        junction = y[0] + 0.6 * loss(y) + y[1] + y[2]
        return junction

    def loss(y):
        t2, p2 = y[0] + y[1] + y[2], 0.0
        for _ in range(30):
            v24, i, _t1 = network(t2)
            p2 = i**2 * 0.008 * scale_q2(t2)
            t2 = y[0] + y[1] + y[2] + 0.6 * p2
        return p2

    def slopes(t, y):
        p2 = loss(y)
        v24 = network(heat(t, y))[0]
        pu = (v24 - 5.0) * 0.06 + v24 * 0.005
        return [(50.0 + 8.0 * (p2 + pu) - y[0]) / (8.0 * 40.0), *((r * p2 - y[1:]) / tau)]

    start = [sink_before, *(r * at["p2"])]
    y = solve_ivp(slopes, (0.0, lasts_s), start, method="LSODA", rtol=1e-6, atol=1e-6).y[:, -1]
    return heat(lasts_s, y)


def test_a_stall_follows_network_and_heat_together(tmp_path):
    result = run(tmp_path, "jam: {kind: stall, load: heater, resistance: 4 ohm, lasts: 40 s, part: Q2}", devices=DEVICES.replace(*SLOW_Q2))
    assert found(result, "Q2", "junction.event", "jam").value == pytest.approx(warmed(4.0, 40.0), rel=2e-3)


def test_an_overload_is_the_other_mode_for_a_while(tmp_path):
    annotations = with_events("burst: {kind: overload, to: hard, lasts: 40 s, from: run, part: Q2}")
    annotations += "modes: {run: {}, hard: {loads: {heater: 4 ohm}}}\n"
    result = check(write_board(tmp_path, PARTS, annotations, DEVICES.replace(*SLOW_Q2)))
    assert found(result, "Q2", "junction.event", "burst").value == pytest.approx(warmed(4.0, 40.0), rel=2e-3)


def test_a_stall_asks_every_part_between_the_load_and_its_supply(tmp_path):
    result = run(tmp_path, "jam: {kind: stall, load: heater, limit: 6 A, lasts: 500 ms}")
    assert {f.ref for f in result.findings if f.event == "jam"} >= {"Q1", "Q2"}
    assert found(result, "Q2", "envelope.event", "jam").value == pytest.approx(6.0)


def test_without_a_capacity_an_overload_is_met_only_where_it_would_hold_for_good(tmp_path):
    for ohm, verdict in (("10 ohm", "met"), ("1 ohm", "unproven")):
        annotations = with_events("burst: {kind: overload, to: hard, lasts: 40 s, from: run, part: Q1}")
        annotations += f"modes: {{run: {{}}, hard: {{loads: {{heater: {ohm}}}}}}}\n"
        (tmp_path / verdict).mkdir()
        result = check(write_board(tmp_path / verdict, PARTS, annotations, DEVICES))
        assert found(result, "Q1", "junction.event", "burst").verdict == verdict


FUSE = ("limits: {current: 10 A, voltage: 63 V}", "limits: {current: 10 A, voltage: 63 V, i2t: 300 A²s, melts: [[0.05 s, 80 A], [0.5 s, 40 A], [10 s, 20 A]]}")


def test_a_fuse_must_hold_the_inrush_and_clear_the_short(tmp_path):
    result = run(tmp_path, "plug: {kind: pulse, parts: [F1], voltage: 1 V, current: 30 A, lasts: 158.11388 ms}",
                 'dead: {kind: short, net: "+24V", parts: [F1, Q1], limit: 60 A, lasts: 158.11388 ms}',
                 'slow: {kind: short, net: "+24V", parts: [F1], limit: 50 A, lasts: 158.11388 ms}',
                 "brief: {kind: pulse, parts: [F1], voltage: 1 V, current: 60 A, lasts: 20 ms}", devices=DEVICES.replace(*FUSE))
    midway = np.sqrt(80.0 * 40.0)
    held = found(result, "F1", "derating.melts", "plug")
    assert (held.value, held.rated) == pytest.approx((30.0, midway), rel=1e-5)
    assert found(result, "F1", "derating.melts", "dead").margin == pytest.approx(60.0 / midway - 1.0, rel=1e-5)
    assert found(result, "F1", "derating.melts", "slow").verdict == "exceeded"
    assert found(result, "F1", "derating.i2t", "brief").value == pytest.approx(72.0)


def test_a_fuse_without_a_melting_curve_is_unproven(tmp_path):
    result = run(tmp_path, "plug: {kind: pulse, parts: [F1], voltage: 1 V, current: 30 A, lasts: 100 ms}")
    assert found(result, "F1", "derating.melts", "plug").verdict == "unproven"
