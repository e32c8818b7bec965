"""Half bridges with switches in parallel, a shunt in their foot and dead times, against losses worked out by hand.

The load keeps its current I = 12 A. High pair: D · (I/2)² · R(Tj) each; low pair in the rest less both dead times, in
which the body diode carries the current; each switch's edges ½ · V · I/2 · (t_r + t_f) · f, its own output charge, and
half of what the two body diodes recover.
"""

from __future__ import annotations

import numpy as np
import pytest
from converter_boards import BUCK_DEVICES
from draw import write_board

from drc_power.faults import InputError
from drc_power.run import Run, check, read_board
from drc_power.solve.balance import current_imbalance, power_imbalance
from drc_power.solve.build import build_circuit
from drc_power.solve.solution import Engine

PARTS = {
    "J1": ("Conn_01x02", "SUPPLY", "VIN", "GND"),
    "C1": ("C", "100u", "VIN", "GND"),
    "Q1": ("Q_NMOS_GDS", "NF6008", "/GH", "VIN", "/OUT"), "Q2": ("Q_NMOS_GDS", "NF6008", "/GH", "VIN", "/OUT"),
    "Q3": ("Q_NMOS_GDS", "NF6004", "/GL", "/OUT", "/FOOT"), "Q4": ("Q_NMOS_GDS", "NF6004", "/GL", "/OUT", "/FOOT"),
    "R1": ("R", "5mR", "/FOOT", "GND"),
    "J2": ("Conn_01x02", "LOAD", "/OUT", "GND"),
}
DEVICES = BUCK_DEVICES + "  shunt: {kind: resistor, source: \"invented\", limits: {power: 2 W}}\n"
ANNOTATIONS = """
surroundings: {ambient: 20 °C .. 40 °C}
grounds: [GND]
rails:
  VIN: {voltage: 24 V, source: J1}
stages:
  drive: {kind: half-bridge, high: [Q1, Q2], low: [Q3, Q4], shunts: R1, current: 12 A, frequency: 50 kHz, duty: 30 %, dead_time: 200 ns}
parts:
  "Q1 Q2": {device: nfet-60v-8m, gate: 10 V, overshoot: 6 V}
  "Q3 Q4": {device: nfet-60v-4m, gate: 10 V, overshoot: 6 V}
  R1: {device: shunt}
  C1: {device: alu}
"""
I_A, V, F_HZ, DUTY, HOT_C = 12.0, 24.0, 50e3, 0.3, 40.0
DEAD = 2 * 200e-9 * F_HZ


def settle(loss_w):
    """Loss and junction of a channel on 50 K/W whose loss depends on its resistance's growth."""
    hot_c = HOT_C
    for _ in range(60):
        loss = loss_w(1.0 + 0.8 * (hot_c - 25.0) / 125.0)
        hot_c = HOT_C + 50.0 * loss
    return loss, hot_c


HIGH_W = settle(lambda s: DUTY * 6.0**2 * 8e-3 * s + (0.5 * V * 6.0 * 33e-9 + 40e-9 * V + 70e-9 * V) * F_HZ)
LOW_W = settle(lambda s: (1.0 - DUTY - DEAD) * 6.0**2 * 4e-3 * s + DEAD * (0.65 + 3e-3 * I_A) * I_A / 2.0)


@pytest.fixture(scope="module")
def result(tmp_path_factory):
    return check(write_board(tmp_path_factory.mktemp("bridge"), PARTS, ANNOTATIONS, DEVICES))


def value(result, ref, rule):
    found = [f for f in result.findings if (f.ref, f.rule) == (ref, rule)]
    assert len(found) == 1, [f"{f.ref} {f.rule}" for f in result.findings]
    return found[0].value


@pytest.mark.parametrize(("refs", "hand"), [(("Q1", "Q2"), HIGH_W), (("Q3", "Q4"), LOW_W)])
def test_losses_and_junctions_of_a_synchronous_pair(result, refs, hand):
    for ref in refs:
        assert value(result, ref, "dissipation.part") == pytest.approx(hand[0], rel=1e-3)
        assert value(result, ref, "junction.steady") == pytest.approx(hand[1], abs=1e-3 * (hand[1] - HOT_C))


def test_rms_currents_of_switches_shunt_and_capacitor(result):
    assert value(result, "Q1", "derating.id") == pytest.approx(6.0 * np.sqrt(DUTY), rel=1e-6)
    assert value(result, "Q3", "derating.id") == pytest.approx(6.0 * np.sqrt(1.0 - DUTY), rel=1e-6)
    assert value(result, "R1", "dissipation.part") == pytest.approx(5e-3 * I_A**2 * (1.0 - DUTY), rel=1e-6)
    assert value(result, "C1", "derating.ripple") == pytest.approx(I_A * np.sqrt(DUTY * (1.0 - DUTY)), rel=1e-6)


def test_the_source_gives_load_and_losses(result):
    vin = max((n for n in result.nets if n.net == "VIN"), key=lambda n: n.current_a)
    out = next(n for n in result.nets if n.net == "/OUT")
    lost = 2 * HIGH_W[0] + 2 * LOW_W[0] + 5e-3 * I_A**2 * (1.0 - DUTY)
    assert V * vin.current_a == pytest.approx(out.voltage_v * I_A + lost, rel=1e-3)


def test_nothing_is_unproven(result):
    assert [(f.ref, f.rule, f.text) for f in result.findings if f.verdict == "unproven"] == []


def test_workings_name_dead_time_and_share(result):
    finding = next(f for f in result.findings if (f.ref, f.rule) == ("Q3", "dissipation.part"))
    steps = {step.symbol: step for step in finding.workings}
    assert steps["P_dead"].value == pytest.approx(DEAD * (0.65 + 3e-3 * I_A) * I_A / 2.0, rel=1e-3)
    assert "share" in steps["P_cond"].formula


def test_unequal_switches_share_by_conductance(tmp_path):
    """8 and 4 mohm side by side, cold: the second carries two thirds."""
    annotations = ANNOTATIONS.replace('"Q1 Q2": {device: nfet-60v-8m, gate: 10 V', 'Q1: {device: nfet-60v-8m, gate: 10 V, resistance: 8 mohm, overshoot: 6 V}\n  Q2: {device: nfet-60v-8m, resistance: 4 mohm, gate: 10 V')
    result = check(write_board(tmp_path, PARTS, annotations, DEVICES))
    assert value(result, "Q1", "derating.id") == pytest.approx(4.0 * np.sqrt(DUTY), rel=1e-6)
    assert value(result, "Q2", "derating.id") == pytest.approx(8.0 * np.sqrt(DUTY), rel=1e-6)


@pytest.mark.parametrize(("datum", "instead", "ref"), [
    (", dead_time: 200 ns", "", "Q3"), ("knee: 0.65 V, ", "", "Q3"), ("frequency: 50 kHz, ", "", "Q1"), ("duty: 30 %, ", "", "Q1"),
    ("recovery: 70 nC, ", "", "Q1")])
def test_a_datum_deleted_is_unproven(tmp_path, datum, instead, ref):
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS.replace(datum, instead), DEVICES.replace(datum, instead)))
    assert next(f for f in result.findings if (f.ref, f.rule) == (ref, "dissipation.part")).verdict == "unproven"


def test_with_neither_dead_time_nor_body_diode_the_low_side_is_unproven(tmp_path):
    devices = DEVICES.replace("body: {knee: 0.65 V, slope: 3 mohm}, ", "")
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS.replace(", dead_time: 200 ns", ""), devices))
    assert next(f for f in result.findings if (f.ref, f.rule) == ("Q3", "junction.steady")).verdict == "unproven"


def test_a_diode_beside_the_low_switch_takes_the_dead_times(tmp_path):
    parts = PARTS | {"D1": ("D_Schottky", "SD6020", "/OUT", "/FOOT")}
    annotations = ANNOTATIONS.replace("low: [Q3, Q4]", "low: [Q3, Q4, D1]") + "  D1: {device: diode-60v, overshoot: 6 V}\n"
    result = check(write_board(tmp_path, parts, annotations, DEVICES))
    point = max((p for p in result.operating_points if p.ref == "D1"), key=lambda p: p.power_w)
    assert point.current_a == pytest.approx(DEAD * I_A, rel=1e-6)
    steps = {s.symbol: s.value for f in result.findings if (f.ref, f.rule) == ("Q1", "dissipation.part") for s in f.workings}
    assert steps["P_rr"] == pytest.approx(20e-9 * V * F_HZ / 2.0)


def test_diodes_in_parallel_are_refused_not_shared_by_guess(tmp_path):
    parts = PARTS | {"D1": ("D_Schottky", "SD6020", "/OUT", "/FOOT"), "D2": ("D_Schottky", "SD6020", "/OUT", "/FOOT")}
    annotations = ANNOTATIONS.replace("low: [Q3, Q4]", "low: [D1, D2]") + '  "D1 D2": {device: diode-60v, overshoot: 6 V}\n'
    with pytest.raises(InputError, match="diodes in parallel"):
        check(write_board(tmp_path, parts, annotations, DEVICES))


def test_random_points_balance(tmp_path):
    spread = ANNOTATIONS.replace("current: 12 A", "current: 0 A .. 15 A").replace("duty: 30 %", "duty: 5 % .. 95 %").replace("voltage: 24 V", "voltage: 0 V .. 40 V")
    board, _, _ = read_board(write_board(tmp_path, PARTS, spread, DEVICES), Run())
    circuit = build_circuit(board.modes[0])
    low, high = circuit.box.bounds()
    points = low + np.random.default_rng(8).random((300, len(low))) * (high - low)
    points[:, circuit.box.typical() < 0] = 0.0
    solution = Engine(circuit).solve(points, polish=True)
    fed = solution.node_v("VIN") > 1.0
    assert not solution.unsolved()[fed].any()
    assert current_imbalance(solution)[fed].max() < 1e-9
    assert power_imbalance(solution)[fed].max() < 1e-9
