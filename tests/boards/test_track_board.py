"""Annotated tracks in a whole run: drops fed back into the network, rises by two methods, vias, and where they may lie.

The reference solution is written out here: IPC-2221 in mils, copper by IEC 60028, Ohm and Kirchhoff, solved by scipy.
"""

from __future__ import annotations

import numpy as np
import pytest
from battery_board import ANNOTATIONS, DEVICES, PARTS
from draw import write_board
from scipy.optimize import root

from drc_power.faults import InputError
from drc_power.physics import copper
from drc_power.run import Run, check, read_board
from drc_power.solve.balance import current_imbalance, power_imbalance
from drc_power.solve.build import build_circuit
from drc_power.solve.solution import Engine

EXACT = (ANNOTATIONS.replace("-20 °C .. 50 °C", "40 °C").replace("20 V .. 24 V .. 28 V", "26 V").replace("20 mA .. 60 mA", "60 mA")
         .replace("12 ohm ± 5 %", "6 ohm").replace("gate: 20 V .. 28 V", "gate: 26 V").replace(", limit: 10 A", ""))

TRACKS = """copper:
  tracks:
    VBAT: {width: 2 mm, thickness: 35 um, layer: outer, length: 80 mm}
    "+24V":
      - {width: 1.5 mm, thickness: 35 um, layer: outer, length: 50 mm}
      - {width: 1 mm, thickness: 35 um, layer: outer, length: 60 mm, to: J2, vias: {count: 2, drill: 0.4 mm, plating: 25 um}}
      - {width: 0.3 mm, thickness: 35 um, layer: inner, length: 40 mm, to: U1}
    GND: {width: 1 mm, thickness: 35 um, layer: outer, length: 30 mm, to: R3}
"""
RULES = "limits:\n  rise: {applies_to: {kind: track}, stress: rise, at_most: 20 K, source: test}\n"

MIL = 25.4e-6


def rise_k(i, width_m, k=0.048):
    """IPC-2221 in mils, 35 µm."""
    return (i / (k * (width_m * 35e-6 / MIL**2) ** 0.725)) ** (1 / 0.44)


def track_v(i, width_m, length_m, k=0.048, vias_m2=None):
    """Drop at the temperature that the current gives the copper, in air of 40 °C."""
    hot = 1 + 3.93e-3 * (40 + rise_k(i, width_m, k) - 20)
    return i * hot / 58e6 * (length_m / (width_m * 35e-6) + (1.6e-3 / vias_m2 if vias_m2 else 0.0))


VIAS_M2 = 2 * np.pi * 0.375e-3 * 25e-6


def scale_q1(t):
    return 1 + 0.4 * (t - 25) / 75 if t < 100 else 1.4 + 0.4 * (t - 100) / 50


def scale_q2(t):
    return 1 + 0.45 * (t - 25) / 75 if t < 100 else 1.45 + 0.4 * (t - 100) / 50


def reference():
    def equations(u):
        v24, i, t1, t2 = u
        i_u1 = 0.065
        total = i + i_u1
        before_heater, v_u1 = track_v(i, 1e-3, 0.06, vias_m2=VIAS_M2), v24 - track_v(i_u1, 0.3e-3, 0.04, 0.024)
        p1, p2 = total**2 * 0.012 * scale_q1(t1), i**2 * 0.008 * scale_q2(t2)
        pu = (v_u1 - 5) * 0.06 + v_u1 * 0.005
        drop = track_v(total, 2e-3, 0.08) + total * (0.009 + 0.012 * scale_q1(t1)) + track_v(total, 1.5e-3, 0.05)
        back = track_v(i, 1e-3, 0.03)
        return [v24 - 26 + drop, i - (v24 - before_heater - back) / (6 + 0.008 * scale_q2(t2) + 0.01),
                t1 - 40 - 50 * p1, t2 - 40 - 8 * (p2 + pu) - 1.96 * p2]

    v24, i, t1, t2 = root(equations, [25.0, 4.0, 50.0, 50.0], tol=1e-13).x
    return {"v24": v24, "i": i, "total": i + 0.065, "t1": t1, "t2": t2, "v_heater": v24 - track_v(i, 1e-3, 0.06, vias_m2=VIAS_M2)}


def solution_of(tmp_path, extra=TRACKS, annotations=EXACT):
    devices = DEVICES.replace("{typ: 6.4 mohm, max: 8 mohm}", "8 mohm")
    board, _, _ = read_board(write_board(tmp_path, PARTS, annotations + extra, devices, RULES), Run())
    circuit = build_circuit(board.modes[0])
    return Engine(circuit).solve(circuit.box.typical()[None], polish=True)


def test_drops_of_warm_tracks_are_those_of_the_independent_solution(tmp_path):
    solution, expected = solution_of(tmp_path), reference()
    assert solution.converged.all()
    assert solution.node_v("+24V")[0] == pytest.approx(expected["v24"], rel=1e-9)
    assert solution.current_a("load heater")[0] == pytest.approx(expected["i"], rel=1e-9)
    assert solution.node_v("+24V at J2")[0] == pytest.approx(expected["v_heater"], rel=1e-9)
    assert solution.parts["Q1"].tj_c[0] == pytest.approx(expected["t1"], rel=1e-9)
    assert solution.parts["Q2"].tj_c[0] == pytest.approx(expected["t2"], rel=1e-9)


def test_currents_and_power_balance_with_tracks(tmp_path):
    solution = solution_of(tmp_path)
    assert current_imbalance(solution).max() < 1e-9
    assert power_imbalance(solution).max() < 1e-9


@pytest.fixture(scope="module")
def result(tmp_path_factory):
    devices = DEVICES.replace("{typ: 6.4 mohm, max: 8 mohm}", "8 mohm")
    return check(write_board(tmp_path_factory.mktemp("tracks"), PARTS, EXACT + TRACKS, devices, RULES))


def test_every_stretch_is_judged_by_its_rise(result):
    expected, found = reference(), {f.quantity: f for f in result.findings if f.rule == "copper.track"}
    wanted = {"VBAT": rise_k(expected["total"], 2e-3), "+24V": rise_k(expected["total"], 1.5e-3), "+24V to J2": rise_k(expected["i"], 1e-3),
              "+24V to U1": rise_k(0.065, 0.3e-3, 0.024), "GND to R3": rise_k(expected["i"], 1e-3)}
    assert {q.removeprefix("rise of the track of "): f.value for q, f in found.items()} == {
        name: pytest.approx(value, rel=1e-6) for name, value in wanted.items()}
    for quantity, f in found.items():
        value = wanted[quantity.removeprefix("rise of the track of ")]
        assert f.verdict == ("exceeded" if value > 20 else "close" if value > 18 else "met")
        assert (f.allowed, f.unit) == (20.0, "K") and f.workings and "IPC-2221" in f.workings[-1].source


def test_vias_share_the_current(result):
    via, = [f for f in result.findings if f.rule == "copper.via"]
    each = reference()["i"] / 2
    area_mil2 = VIAS_M2 / 2 / MIL**2
    assert via.value == pytest.approx((each / (0.024 * area_mil2**0.725)) ** (1 / 0.44), rel=1e-6)


def test_nets_keep_their_names(result):
    assert {point.net for point in result.nets} <= PARTS_NETS
    assert len({f.id for f in result.findings if f.rule == "copper.track"}) == 5


PARTS_NETS = {net for _, _, *nets in PARTS.values() for net in nets}


def test_the_newer_chart_where_the_house_says_so(tmp_path):
    solution = solution_of(tmp_path)
    rules = RULES + "methods: {track: ipc-2152}\n"
    devices = DEVICES.replace("{typ: 6.4 mohm, max: 8 mohm}", "8 mohm")
    board, _, _ = read_board(write_board(tmp_path, PARTS, EXACT + TRACKS, devices, rules), Run())
    circuit = build_circuit(board.modes[0])
    newer = Engine(circuit).solve(circuit.box.typical()[None])
    track = next(p.track for p in circuit.tracks if p.name == "VBAT")
    i = newer.current_a(track.key)
    assert newer.converged.all()
    assert track.rise_k(i)[0] == pytest.approx(float(copper.chart_rise_k(i, 2e-3 * 35e-6)[0]), rel=1e-12)
    assert track.rise_k(i)[0] != pytest.approx(rise_k(solution.current_a(track.key)[0], 2e-3), rel=1e-2)
    hot = 40 + float(copper.chart_rise_k(i, 2e-3 * 35e-6)[0])
    assert (newer.node_v("VBAT before its track") - newer.node_v("VBAT"))[0] == pytest.approx(
        i[0] * 0.08 / (2e-3 * 35e-6 * 58e6) * (1 + 3.93e-3 * (hot - 20)), rel=1e-9)


def findings_of(tmp_path, tracks, annotations=EXACT, rules=RULES):
    result = check(write_board(tmp_path, PARTS, annotations + tracks, DEVICES, rules))
    return result, [f for f in result.findings if f.rule == "copper.track"]


def test_wider_or_hotter_than_the_chart_is_unproven(tmp_path):
    wide = "copper: {tracks: {VBAT: {width: 11 mm, thickness: 35 um, layer: outer, length: 80 mm}}}\n"
    _, (found,) = findings_of(tmp_path, wide)
    assert found.verdict == "unproven" and "outside what ipc-2221 covers" in found.text
    _, (found,) = findings_of(tmp_path, wide.replace("11 mm", "0.2 mm"))
    assert found.verdict == "unproven"


def test_a_missing_length_leaves_the_voltage_of_the_load_unproven(tmp_path):
    tracks = 'copper: {tracks: {"+5V": {width: 1 mm, layer: outer}}}\n'
    annotations = EXACT.replace("needs: 4.5 V .. 5.5 V", "needs: 5.0 V .. 5.5 V")
    result, (found,) = findings_of(tmp_path, tracks, annotations)
    voltage = next(f for f in result.findings if f.rule == "network.voltage")
    assert found.verdict == "met" and voltage.verdict == "unproven"
    result, _ = findings_of(tmp_path, tracks.replace("outer", "outer, length: 50 mm"), annotations)
    assert next(f for f in result.findings if f.rule == "network.voltage").verdict == "exceeded"


def test_without_a_limit_of_the_house_a_track_is_unproven(tmp_path):
    _, (found,) = findings_of(tmp_path, "copper: {tracks: {VBAT: {width: 2 mm, length: 80 mm}}}\n", rules="")
    assert found.verdict == "unproven" and "stress: rise" in found.remedy


def test_a_limit_on_the_drop(tmp_path):
    rules = RULES + "  drop: {applies_to: {kind: track, nets: [VBAT]}, stress: drop, at_most: 50 mV, source: test}\n"
    _, found = findings_of(tmp_path, "copper: {tracks: {VBAT: {width: 2 mm, thickness: 35 um, layer: outer, length: 80 mm}}}\n", rules=rules)
    drop = next(f for f in found if f.stress == "drop")
    assert drop.verdict == "exceeded" and drop.unit == "V" and 0.08 < drop.value < 0.12


@pytest.mark.parametrize(("tracks", "says"), [
    ("GND: {width: 1 mm}", "GND is a ground, which no part feeds"),
    ('"/HEAT-": {width: 1 mm, to: R2}', "nothing that the network holds of R2 lies on /HEAT-"),
    ('VBAT: {width: 1 mm, to: J1, vias: {count: 2}}', "vias without drill"),
    ('VBAT: {width: 1 mm, vias: {count: 2, drill: 0.03 mm, plating: 25 um}}', "plating"),
    ('VBAT: {length: 1 mm}', "width")])
def test_what_cannot_be_placed_is_refused_with_its_line(tmp_path, tracks, says):
    with pytest.raises(InputError) as error:
        check(write_board(tmp_path, PARTS, EXACT + f"copper: {{tracks: {{{tracks}}}}}\n", DEVICES, RULES))
    assert any(says in str(fault) for fault in error.value.faults)


def test_what_returns_to_a_net_feeds_it(tmp_path):
    """The return of the heater: the load feeds the net, the FET takes from it."""
    solution = solution_of(tmp_path, 'copper: {tracks: {"/HEAT-": {width: 1 mm, thickness: 35 um, layer: outer, length: 60 mm}}}\n')
    before, after = solution.node_v("/HEAT- before its track")[0], solution.node_v("/HEAT-")[0]
    assert before - after == pytest.approx(track_v(solution.current_a("load heater")[0], 1e-3, 0.06), rel=1e-9)
    heater = next(load for load in solution.circuit.loads if load.name == "heater")
    assert heater.b == "/HEAT- before its track"


def test_stretches_of_one_place_follow_each_other(tmp_path):
    two = """copper:
  tracks:
    VBAT:
      - {width: 2 mm, thickness: 35 um, layer: outer, length: 30 mm}
      - {width: 1.5 mm, thickness: 35 um, layer: outer, length: 50 mm}
"""
    solution = solution_of(tmp_path, two)
    i = solution.current_a("track VBAT 1")[0]
    assert i == pytest.approx(solution.current_a("track VBAT 2")[0], rel=1e-12)
    drop = solution.node_v("VBAT before its track")[0] - solution.node_v("VBAT")[0]
    assert drop == pytest.approx(track_v(i, 2e-3, 0.03) + track_v(i, 1.5e-3, 0.05), rel=1e-9)


def test_the_melting_current_of_the_thinnest_copper(tmp_path):
    """Onderdonk for the events: 1 mm of 35 µm, or the two vias where they are thinner."""
    probe = next(p for p in solution_of(tmp_path).circuit.tracks if p.name == "+24V to J2")
    least_m2 = min(1e-3 * 35e-6, VIAS_M2)
    circular_mils = least_m2 / (np.pi / 4 * MIL**2)
    by_hand = circular_mils * np.sqrt(np.log10(1 + (1083 - 60) / (234 + 60)) / 33 / 0.5)
    assert probe.melts_at_a(np.array([0.5]), np.array([60.0]))[0] == pytest.approx(by_hand, rel=1e-9)


@pytest.mark.parametrize("event", ["kind: overload, to: busy", "kind: stall, load: heater, limit: 6 A"])
def test_an_event_still_reaches_the_fuse_behind_a_track(tmp_path, event):
    events = f"events:\n  more: {{{event}, lasts: 2 s, from: run}}\nmodes:\n  run: {{}}\n  busy: {{loads: {{heater: 4 ohm}}}}\n"
    plain = check(write_board(tmp_path, PARTS, EXACT + events, DEVICES, RULES))
    folder = tmp_path / "tracked"
    folder.mkdir()
    tracked = check(write_board(folder, PARTS, EXACT + TRACKS + events, DEVICES, RULES))
    about = [{(f.ref, f.rule, f.stress) for f in result.findings if f.event and f.ref} for result in (plain, tracked)]
    assert about[0] == about[1]
    assert {ref for ref, _, _ in about[0]} >= ({"F1", "Q1"} if "stall" in event else {"Q1"})
