"""A transformer's secondary, a bridge and a reservoir before a linear regulator, against the waveform integrated in time.

The reference integrates C · dv/dt = (|V_p · sin ωt| − 2 · V_F0 − v)/R − I with scipy's general solver and looks for the
reservoir's voltage that repeats; nothing is taken from the tool's own closed forms.
"""

from __future__ import annotations

from functools import cache
from types import SimpleNamespace

import numpy as np
import pytest
from draw import write_board
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from drc_power.physics.rectifier import rectified
from drc_power.run import Run, check, read_board
from drc_power.solve.balance import current_imbalance, power_imbalance
from drc_power.solve.build import build_circuit
from drc_power.solve.solution import Engine

PARTS = {
    "J1": ("Conn_01x02", "SECONDARY", "/AC1", "/AC2"),
    "F1": ("Fuse", "3A", "/AC1", "/ACF"),
    "BR1": ("D_Bridge", "BR4A", "/UNREG", "GND", "/ACF", "/AC2"),
    "C1": ("C", "2200u", "/UNREG", "GND"),
    "C2": ("C", "220u", "/UNREG", "GND"),
    "U1": ("REG", "REG-12", "/UNREG", "GND", "+12V"),
    "J2": ("Conn_01x02", "LOAD", "+12V", "GND"),
}
DEVICES = """
  bridge-4a: {kind: bridge, source: "invented, table 1", limits: {vr: 100 V, if: 4 A, tj: 150 °C, power: 10 W},
    conduction: {knee: 0.7 V, slope: 40 mohm}, thermal: {rth_ja: 25 K/W}}
  fuse-3a: {kind: fuse, source: "invented, table 2", limits: {current: 3 A}, conduction: {resistance: 30 mohm}}
  alu: {kind: capacitor, source: "invented, table 3", limits: {voltage: 35 V, ripple: 3 A}}
  ldo-12: {kind: linear-regulator, source: "invented, table 4", limits: {vin: 35 V, current: 1.5 A, power: 20 W, tj: 125 °C},
    conduction: {dropout: 1.5 V, quiescent: 5 mA}, thermal: {rth_jc: 2 K/W, rth_ja: 20 K/W}}
"""
ANNOTATIONS = """
surroundings: {ambient: 20 °C .. 40 °C}
grounds: [GND]
rails:
  "/AC1": {ac: 15 V, frequency: 50 Hz, source: J1, return: "/AC2", resistance: 0.3 ohm, limit: 3 A}
  "+12V": {voltage: 12 V}
loads:
  load: {net: "+12V", draws: 0.8 A}
stages:
  mains: {kind: rectifier, bridge: BR1, reservoir: [C1, C2]}
parts:
  F1: {device: fuse-3a}
  BR1: {device: bridge-4a}
  "C1 C2": {device: alu}
  U1: {device: ldo-12}
"""


AMPLITUDE_V = 15.0 * 2.0**0.5


@cache
def waveform(v_peak=AMPLITUDE_V, drop=1.4, r_ohm=0.3 + 0.03 + 2 * 0.04, c_f=2420e-6, i_load=0.805, f_hz=50.0, n_pulses=2):
    """The periodic state by integration in time; columns: voltage, and the integrals of v, i² and e · i."""
    w, period = 2.0 * np.pi * f_hz, 1.0 / f_hz / n_pulses

    def source(t):
        return np.abs(v_peak * np.sin(w * t)) if n_pulses == 2 else v_peak * np.sin(w * t)

    def rates(t, y):
        i = max((source(t) - drop - y[0]) / r_ohm, 0.0)
        return [(i - i_load) / c_f, y[0], i * i, source(t) * i]

    def run(v_0):
        return solve_ivp(rates, (0.0, period), [v_0, 0.0, 0.0, 0.0], rtol=1e-8, atol=1e-10, max_step=period / 200, dense_output=True)

    found = run(brentq(lambda v_0: run(v_0).y[0, -1] - v_0, 0.2 * v_peak, v_peak, xtol=1e-8))
    t = np.linspace(0.0, period, 20_001)
    v = found.sol(t)[0]
    i = np.maximum((source(t) - drop - v) / r_ohm, 0.0)
    mean_v, square, power = found.y[1:, -1] / period
    return SimpleNamespace(mean_v=mean_v, valley=v.min(), crest=v.max(), rms=np.sqrt(square), peak=i.max(), power=power, i_load=i_load)


@pytest.mark.parametrize("case", [
    {}, {"n_pulses": 1, "drop": 0.7}, {"r_ohm": 0.05, "f_hz": 60.0, "i_load": 2.0}, {"r_ohm": 5.0, "c_f": 470e-6, "i_load": 0.3}])
def test_the_periodic_state_is_that_of_integration_in_time(case):
    given = {"v_peak": 15.0 * np.sqrt(2.0), "drop": 1.4, "r_ohm": 0.41, "c_f": 2420e-6, "i_load": 0.805, "f_hz": 50.0, "n_pulses": 2} | case
    state, hand = rectified(*given.values()), waveform(**given)
    for name in ("mean_v", "valley", "crest"):
        found = {"mean_v": state.mean_v, "valley": state.valley_v, "crest": state.peak_v}[name]
        assert float(found) == pytest.approx(getattr(hand, name), rel=1e-4)
    assert float(np.sqrt(state.square_a2)) == pytest.approx(hand.rms, rel=1e-4)
    assert float(state.peak_a) == pytest.approx(hand.peak, rel=1e-3)
    # The source's power goes to the load, the resistance and the drops.
    assert hand.power == pytest.approx(float(state.mean_v) * given["i_load"] + given["r_ohm"] * float(state.square_a2)
                                       + given["drop"] * given["i_load"], rel=1e-4)


def test_a_reservoir_that_runs_empty_has_no_state():
    assert np.isnan(rectified(20.0, 1.4, 0.5, 10e-6, 1.0, 50.0).mean_v)


@pytest.fixture(scope="module")
def result(tmp_path_factory):
    return check(write_board(tmp_path_factory.mktemp("rectifier"), PARTS, ANNOTATIONS, DEVICES))


def value(result, ref, rule):
    found = [f for f in result.findings if (f.ref, f.rule) == (ref, rule)]
    assert len(found) == 1, [f"{f.ref} {f.rule}" for f in result.findings]
    return found[0].value


def test_headroom_is_the_valley_s(result):
    assert value(result, "U1", "network.headroom") == pytest.approx(waveform().valley - 12.0, rel=1e-3)


def test_heat_is_the_mean_s_and_ratings_are_the_crest_s(result):
    hand = waveform()
    assert value(result, "U1", "dissipation.part") == pytest.approx((hand.mean_v - 12.0) * 0.8 + hand.mean_v * 5e-3, rel=1e-3)
    assert value(result, "U1", "derating.vin") == pytest.approx(hand.crest, rel=1e-3)
    assert value(result, "C1", "derating.voltage") == pytest.approx(hand.crest, rel=1e-3)
    assert value(result, "BR1", "derating.vr") == pytest.approx(hand.crest + 0.7, rel=1e-3)


def test_diodes_fuse_and_source_carry_the_pulses(result):
    hand = waveform()
    assert value(result, "BR1", "dissipation.part") == pytest.approx(1.4 * hand.i_load + 2 * 0.04 * hand.rms**2, rel=1e-3)
    assert value(result, "BR1", "derating.if") == pytest.approx(hand.i_load, rel=1e-6)
    assert value(result, "F1", "derating.current") == pytest.approx(hand.rms, rel=1e-3)
    limit = next(f for f in result.findings if f.rule == "network.limit")
    assert limit.value == pytest.approx(hand.rms, rel=1e-3)


def test_the_reservoirs_share_the_ripple(result):
    hand = waveform()
    both = np.sqrt(hand.rms**2 - hand.i_load**2)
    assert value(result, "C1", "derating.ripple") == pytest.approx(both * 2200 / 2420, rel=1e-3)
    assert value(result, "C2", "derating.ripple") == pytest.approx(both * 220 / 2420, rel=1e-3)


def test_nothing_is_unproven(result):
    assert [(f.ref, f.rule, f.text) for f in result.findings if f.verdict == "unproven"] == []


def test_four_diodes_make_the_same_bridge(tmp_path):
    parts = {k: v for k, v in PARTS.items() if k != "BR1"} | {
        "D1": ("D", "D4A", "/UNREG", "/ACF"), "D2": ("D", "D4A", "/UNREG", "/AC2"),
        "D3": ("D", "D4A", "/ACF", "GND"), "D4": ("D", "D4A", "/AC2", "GND")}
    annotations = ANNOTATIONS.replace("bridge: BR1", "bridge: [D1, D2, D3, D4]").replace("BR1: {device: bridge-4a}", '"D1 D2 D3 D4": {device: diode-4a}')
    devices = DEVICES.replace("bridge-4a: {kind: bridge", "diode-4a: {kind: diode")
    result = check(write_board(tmp_path, parts, annotations, devices))
    hand = waveform()
    assert value(result, "D3", "derating.if") == pytest.approx(hand.i_load / 2.0, rel=1e-6)
    assert value(result, "D3", "dissipation.part") == pytest.approx((1.4 * hand.i_load + 0.08 * hand.rms**2) / 4.0, rel=1e-3)
    assert value(result, "D1", "derating.vr") == pytest.approx(hand.crest + 0.7, rel=1e-3)


@pytest.mark.parametrize(("datum", "instead", "ref", "rule"), [
    (", frequency: 50 Hz", "", "U1", "network.headroom"), (", reservoir: [C1, C2]", "", "U1", "network.headroom"),
    ("knee: 0.7 V, slope: 40 mohm", "knee: 0.7 V", "BR1", None),
    ("conduction: {knee: 0.7 V, slope: 40 mohm}", "conduction: {forward: {25 °C: [[0.1 A, 0.7 V], [10 A, 1.1 V]]}}", "BR1", "dissipation.part")])
def test_a_datum_deleted_is_unproven(tmp_path, datum, instead, ref, rule):
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS.replace(datum, instead), DEVICES.replace(datum, instead)))
    if rule is None:  # a diode without a slope is exact with none
        assert value(result, ref, "dissipation.part") < waveform().i_load * 1.4 * 1.001
    else:
        assert {f.verdict for f in result.findings if (f.ref, f.rule) == (ref, rule)} <= {"unproven"}


def test_without_an_alternating_voltage_the_rail_behind_is_unproven_and_nothing_on_it_passes(tmp_path):
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS.replace("ac: 15 V, ", ""), DEVICES))
    assert "unproven" in {f.verdict for f in result.findings if f.rule == "coverage.rail"}
    assert not [f.rule for f in result.findings if f.ref in ("U1", "BR1") and f.rule in ("network.headroom", "junction.steady") and f.verdict == "met"]


def test_random_points_balance(tmp_path):
    spread = ANNOTATIONS.replace("ac: 15 V", "ac: 13 V .. 18 V").replace("draws: 0.8 A", "draws: 0 A .. 1 A").replace("50 Hz", "45 Hz .. 65 Hz")
    board, _, _ = read_board(write_board(tmp_path, PARTS, spread, DEVICES), Run())
    circuit = build_circuit(board.modes[0])
    low, high = circuit.box.bounds()
    points = low + np.random.default_rng(9).random((100, len(low))) * (high - low)
    solution = Engine(circuit).solve(points, polish=True)
    assert not solution.unsolved().any()
    assert current_imbalance(solution).max() < 1e-9
    assert power_imbalance(solution).max() < 1e-9
