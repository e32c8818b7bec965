"""Three-phase bridges against the sum over one output period, switching cycle by switching cycle.

The reference takes 3,600 switching cycles of a sine: in each the high switch of a leg conducts for its duty less the
dead time, the diode of whichever side the current would freewheel through for both dead times. No closed form is used.
"""

from __future__ import annotations

import numpy as np
import pytest
from converter_boards import BUCK_DEVICES
from draw import write_board

from drc_power.faults import InputError
from drc_power.physics.waveforms import (
    three_phase_input_mean_a,
    three_phase_input_rms_a,
)
from drc_power.run import Run, check, read_board
from drc_power.solve.balance import current_imbalance, power_imbalance
from drc_power.solve.build import build_circuit
from drc_power.solve.solution import Engine

PHASES = "UVW"
PARTS = {
    "J1": ("Conn_01x02", "SUPPLY", "VBUS", "GND"), "C1": ("C", "470u", "VBUS", "GND"),
    **{f"Q{2 * k + 1}": ("Q_NMOS_GDS", "NF6008", f"/GH{p}", "VBUS", f"/{p}") for k, p in enumerate(PHASES)},
    **{f"Q{2 * k + 2}": ("Q_NMOS_GDS", "NF6008", f"/GL{p}", f"/{p}", f"/S{p}") for k, p in enumerate(PHASES)},
    **{f"R{k + 1}": ("R", "2mR", f"/S{p}", "GND") for k, p in enumerate(PHASES)},
    "J2": ("Conn_01x02", "MOTOR", "/U", "/V"), "J3": ("Conn_01x02", "MOTOR", "/W", ""),
}
DEVICES = BUCK_DEVICES + """  shunt: {kind: resistor, source: "invented", limits: {power: 3 W}}
  igbt-60v: {kind: igbt, source: "invented", limits: {vce: 60 V, ic: 60 A, tj: 175 °C, power: 80 W}, conduction: {saturation: 0.9 V, slope: 15 mohm},
    switching: {rise: 40 ns, fall: 120 ns}, thermal: {rth_jc: 1 K/W, rth_ja: 10 K/W}}
"""
ANNOTATIONS = """
surroundings: {ambient: 20 °C .. 40 °C}
grounds: [GND]
rails:
  VBUS: {voltage: 36 V, source: J1}
loads:
  motor: {between: ["/U", "/V", "/W"], draws: 14 A rms}
stages:
  drive: {kind: three-phase, high: [Q1, Q3, Q5], low: [Q2, Q4, Q6], shunts: [R1, R2, R3], load: motor, frequency: 20 kHz,
          modulation: 80 %, power_factor: 90 %, dead_time: 300 ns}
parts:
  "Q?": {device: nfet-60v-8m, gate: 10 V, overshoot: 6 V, heat: {to_ambient: 20 K/W}}
  "R?": {device: shunt}
  C1: {device: alu}
"""
V, F_HZ, M, COS, I_A, HOT_C = 36.0, 20e3, 0.8, 0.9, 14.0 * np.sqrt(2.0), 40.0
DELTA = 300e-9 * F_HZ
THETA = (np.arange(3600) + 0.5) * 2.0 * np.pi / 3600


def leg(shift=0.0):
    """Duty of the high switch before dead times, and the current out of the leg, over one output period."""
    return 0.5 * (1.0 + M * np.sin(THETA - shift)), I_A * np.sin(THETA - shift - np.arccos(COS))


def fet_loss(growth):
    """One high switch: channel, body diode while the current flows back into the leg, edges while it flows out."""
    duty, i = leg()
    channel = np.mean((duty - DELTA) * i**2) * 8e-3 * growth
    back, out = np.maximum(-i, 0.0), np.maximum(i, 0.0)
    body = np.mean(2.0 * DELTA * (0.7 * back + 4e-3 * back**2))
    edges = np.mean(V * out * 33e-9 / 2.0 * F_HZ) + np.mean((out > 0.0) * (40e-9 + 55e-9) * V * F_HZ)
    return channel + body + edges


def settled():
    hot_c = HOT_C
    for _ in range(60):
        loss = fet_loss(1.0 + 0.8 * (hot_c - 25.0) / 125.0)
        hot_c = HOT_C + 20.0 * loss
    return loss, hot_c


def foot_current():
    """Mean and rms of the current in the common supply, by symmetric modulation: the legs' duties nested in each other."""
    duties, currents = (np.array(rows) for rows in zip(*(leg(k * 2.0 * np.pi / 3.0) for k in range(3)), strict=True))
    order = np.argsort(-duties, axis=0)
    d, i = np.take_along_axis(duties, order, axis=0), np.take_along_axis(currents, order, axis=0)
    square = (d[0] - d[1]) * i[0] ** 2 + (d[1] - d[2]) * (i[0] + i[1]) ** 2
    return np.mean((duties * currents).sum(axis=0)), np.sqrt(np.mean(square))


def test_the_supply_s_current_is_that_of_nested_duties():
    mean_a, rms_a = foot_current()
    assert three_phase_input_mean_a(I_A, M, np.arccos(COS)) == pytest.approx(mean_a, rel=1e-6)
    assert three_phase_input_rms_a(I_A, M, np.arccos(COS)) == pytest.approx(rms_a, rel=1e-6)


@pytest.fixture(scope="module")
def result(tmp_path_factory):
    return check(write_board(tmp_path_factory.mktemp("drive"), PARTS, ANNOTATIONS, DEVICES))


def value(result, ref, rule):
    found = [f for f in result.findings if (f.ref, f.rule) == (ref, rule)]
    assert len(found) == 1, [f"{f.ref} {f.rule}" for f in result.findings]
    return found[0].value


def test_losses_and_junctions(result):
    loss, hot_c = settled()
    for ref in ("Q1", "Q2", "Q6"):
        assert value(result, ref, "dissipation.part") == pytest.approx(loss, rel=1e-3)
        assert value(result, ref, "junction.steady") == pytest.approx(hot_c, abs=1e-3 * (hot_c - HOT_C))


def test_currents_of_switches_shunts_and_capacitor(result):
    duty, i = leg()
    assert value(result, "Q1", "derating.id") == pytest.approx(np.sqrt(np.mean(duty * i**2)), rel=1e-3)
    assert value(result, "R2", "dissipation.part") == pytest.approx(2e-3 * np.mean((1.0 - duty) * i**2), rel=1e-3)
    mean_a, rms_a = foot_current()
    assert value(result, "C1", "derating.ripple") == pytest.approx(np.sqrt(rms_a**2 - mean_a**2), rel=1e-3)
    vbus = max((n for n in result.nets if n.net == "VBUS"), key=lambda n: n.current_a)
    lost = 6 * settled()[0] + 3 * 2e-3 * I_A**2 / 4.0
    assert vbus.current_a == pytest.approx(mean_a + lost / V, rel=1e-3)


def test_nothing_is_unproven(result):
    assert [(f.ref, f.rule, f.text) for f in result.findings if f.verdict == "unproven"] == []


def test_the_same_current_from_power_and_from_resistance(tmp_path):
    watts = 1.5 * (M * V / 2.0) * I_A * COS
    ohm = (M * V / 2.0) * COS / I_A
    for k, demand in enumerate((f"power: {watts:.9f} W", f"resistance: {ohm:.9f} ohm")):
        folder = tmp_path / str(k)
        folder.mkdir()
        result = check(write_board(folder, PARTS, ANNOTATIONS.replace("draws: 14 A rms", demand), DEVICES))
        assert value(result, "Q1", "dissipation.part") == pytest.approx(settled()[0], rel=1e-3)


def test_igbts_with_their_diodes(tmp_path):
    """Only the transistor carries the forward share, only the diode the backward one."""
    parts = PARTS | {f"D{2 * k + 1}": ("D", "D60", "VBUS", f"/{p}") for k, p in enumerate(PHASES)}
    parts |= {f"D{2 * k + 2}": ("D", "D60", f"/{p}", f"/S{p}") for k, p in enumerate(PHASES)}
    annotations = ANNOTATIONS.replace("[Q1, Q3, Q5]", "[Q1, Q3, Q5, D1, D3, D5]").replace("[Q2, Q4, Q6]", "[Q2, Q4, Q6, D2, D4, D6]")
    annotations = annotations.replace('"Q?": {device: nfet-60v-8m, gate: 10 V,', '"D?": {device: diode-60v, overshoot: 6 V, heat: {case: 25 °C}}\n  "Q?": {device: igbt-60v, pins: {collector: 2, emitter: 3},')
    devices = DEVICES.replace("knee: 0.4 V, slope: 8 mohm, knee_tempco: -1 mV/K", "knee: 0.4 V, slope: 8 mohm")
    result = check(write_board(tmp_path, parts, annotations, devices))
    duty, i = leg()
    out, back = np.maximum(i, 0.0), np.maximum(-i, 0.0)
    igbt = np.mean(duty * (0.9 * out + 15e-3 * out**2)) + np.mean(V * out * 160e-9 / 2.0 * F_HZ) + 0.5 * 20e-9 * V * F_HZ
    assert value(result, "Q1", "dissipation.part") == pytest.approx(igbt, rel=1e-3)
    assert value(result, "D1", "dissipation.part") == pytest.approx(np.mean(duty * (0.4 * back + 8e-3 * back**2)), rel=1e-3)
    assert value(result, "D1", "derating.if") == pytest.approx(np.mean(duty * back), rel=1e-3)


def test_one_shunt_in_the_common_foot(tmp_path):
    parts = {ref: (*row[:-1], "/FOOT") if ref in ("Q2", "Q4", "Q6") else row for ref, row in PARTS.items() if ref not in ("R1", "R2", "R3")}
    parts |= {"R1": ("R", "2mR", "/FOOT", "GND")}
    annotations = ANNOTATIONS.replace("[R1, R2, R3]", "R1")
    result = check(write_board(tmp_path, parts, annotations, DEVICES))
    assert value(result, "R1", "dissipation.part") == pytest.approx(2e-3 * foot_current()[1] ** 2, rel=1e-3)


def test_a_half_bridge_with_a_modulation_is_one_leg(tmp_path):
    parts = {ref: row for ref, row in PARTS.items() if ref in ("J1", "C1", "Q1", "Q2", "R1", "J2")}
    annotations = ANNOTATIONS.replace("kind: three-phase, high: [Q1, Q3, Q5], low: [Q2, Q4, Q6], shunts: [R1, R2, R3], load: motor",
                                      "kind: half-bridge, high: Q1, low: Q2, shunts: R1, current: 14 A rms")
    annotations = annotations.replace('loads:\n  motor: {between: ["/U", "/V", "/W"], draws: 14 A rms}\n', "")
    result = check(write_board(tmp_path, parts, annotations, DEVICES))
    assert value(result, "Q2", "dissipation.part") == pytest.approx(settled()[0], rel=1e-3)


@pytest.mark.parametrize(("datum", "instead", "rule"), [
    (", dead_time: 300 ns", "", "dissipation.part"), ("frequency: 20 kHz,", "", "junction.steady"), ("recovery: 55 nC, ", "", "dissipation.part")])
def test_a_datum_deleted_is_unproven(tmp_path, datum, instead, rule):
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS.replace(datum, instead), DEVICES.replace(datum, instead)))
    assert {f.verdict for f in result.findings if f.rule == rule and f.ref.startswith("Q")} == {"unproven"}


@pytest.mark.parametrize("datum", ["power_factor: 90 %, ", "modulation: 80 %, "])
def test_without_a_factor_the_first_switch_asks_for_it(tmp_path, datum):
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS.replace(datum, ""), DEVICES))
    found = next(f for f in result.findings if (f.ref, f.rule) == ("Q1", "dissipation.part"))
    assert found.verdict == "unproven"
    assert datum.split(":")[0] in found.remedy


@pytest.mark.parametrize(("text", "instead", "says"), [
    ("[Q1, Q3, Q5]", "[Q1, Q3]", "legs"), ("modulation: 80 %", "modulation: 115 %", "modulation"),
    ("load: motor, ", "", "no load"), ("low: [Q2, Q4, Q6], shunts: [R1, R2, R3]", "low: [Q2, Q4, Q6]", "one return")])
def test_what_makes_no_bridge_is_said(tmp_path, text, instead, says):
    with pytest.raises(InputError, match=says):
        check(write_board(tmp_path, PARTS, ANNOTATIONS.replace(text, instead), DEVICES))


def test_random_points_balance(tmp_path):
    spread = ANNOTATIONS.replace("14 A rms", "0 A rms .. 20 A rms").replace("voltage: 36 V", "voltage: 12 V .. 48 V").replace(
        "modulation: 80 %", "modulation: 10 % .. 100 %")
    board, _, _ = read_board(write_board(tmp_path, PARTS, spread, DEVICES), Run())
    circuit = build_circuit(board.modes[0])
    low, high = circuit.box.bounds()
    points = low + np.random.default_rng(10).random((300, len(low))) * (high - low)
    solution = Engine(circuit).solve(points, polish=True)
    assert not solution.unsolved().any()
    assert current_imbalance(solution).max() < 1e-9
    assert power_imbalance(solution).max() < 1e-9
