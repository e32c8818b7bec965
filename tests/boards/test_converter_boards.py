"""Converters with their switches outside the chip, on whole boards, against their waveforms computed in time.

The reference knows no averaging: each interval's current follows L · di/dt = v − R · i − drop exactly, the interval's
length is found by scipy so that the mean current is the one asked for and the period closes, and rms values and
losses are integrals over the waveform. Temperatures are found by iterating loss and resistance. Edges and charges are
counted by hand: V · (I_valley · t_r + I_peak · t_f)/2 · f, Q_oss · V · f, Q_rr · V · f (see the glossary of losses).
"""

from __future__ import annotations

from functools import cache
from types import SimpleNamespace

import numpy as np
import pytest
from converter_boards import (
    BOOST_ANNOTATIONS,
    BOOST_PARTS,
    BUCK_ANNOTATIONS,
    BUCK_DEVICES,
    BUCK_PARTS,
)
from draw import write_board
from scipy.optimize import brentq

from drc_power.run import Run, check, read_board
from drc_power.solve.balance import current_imbalance, power_imbalance
from drc_power.solve.build import build_circuit
from drc_power.solve.solution import Engine

L_H, F_HZ, N = 10e-6, 200e3, 1001
HOT_C = 40.0


def scale(t_c):
    return 1.0 + 0.8 * (t_c - 25.0) / 125.0


def ramp(i_0, v, r, t):
    """Current of L with R in series at a constant voltage, over the times t."""
    return v / r + (i_0 - v / r) * np.exp(-r * t / L_H)


def period(i_0, intervals):
    """The waveform of consecutive intervals (length, voltage, resistance): (times, currents) of each."""
    found = []
    for length, v, r in intervals:
        t = np.linspace(0.0, length, N)
        i = ramp(i_0, v, r, t)
        found.append((t, i))
        i_0 = i[-1]
    return found


def closed(intervals):
    """The waveform that ends where it began."""
    i_0 = brentq(lambda i: period(i, intervals)[-1][1][-1] - i, -1e3, 1e3, xtol=1e-12)
    return period(i_0, intervals)


def mean(wave, power=1):
    """Mean of i^power over the switching period, of one interval."""
    return np.trapezoid(wave[1] ** power, wave[0]) * F_HZ


def buck_wave(i_out, v_in, r1, r2, dead_s=60e-9, v_out=5.0, r_coil=6e-3):
    """High on, dead time, low on, dead time, for the on-time that gives the output current."""
    def intervals(on):
        rest = 1.0 / F_HZ - on - 2.0 * dead_s
        dead = (dead_s, -v_out - 0.65, r_coil + 3e-3)
        return [(on, v_in - v_out, r1 + r_coil), dead, (rest, -v_out, r2 + r_coil), dead]

    on = brentq(lambda on: sum(mean(w) for w in closed(intervals(on))) - i_out, 0.5e-6, 2e-6, xtol=1e-16)
    return closed(intervals(on))


@cache
def buck(i_out, v_in=24.0, ambient=HOT_C):
    """Currents and losses of the buck converter, its channels at their own temperatures."""
    t1 = t2 = ambient
    for _ in range(40):
        r1, r2 = 8e-3 * scale(t1), 4e-3 * scale(t2)
        high, dead_1, low, dead_2 = wave = buck_wave(i_out, v_in, r1, r2)
        valley, peak = high[1][0], high[1][-1]
        edges = v_in * (valley * 18e-9 + peak * 15e-9) / 2.0 * F_HZ + (40e-9 + 70e-9) * v_in * F_HZ
        dead = sum(0.65 * mean(w) + 3e-3 * mean(w, 2) for w in (dead_1, dead_2))
        p1, p2 = r1 * mean(high, 2) + edges, r2 * mean(low, 2) + dead
        t1, t2 = ambient + 50.0 * p1, ambient + 50.0 * p2
    total = sum(mean(w, 2) for w in wave)
    coil = 6e-3 * total
    return SimpleNamespace(
        p1=p1, p2=p2, t1=t1, t2=t2, coil=coil, peak=peak, coil_rms=np.sqrt(total), mean1=mean(high), rms1=np.sqrt(mean(high, 2)),
        rms2=np.sqrt(total - mean(high, 2)), i_in=(5.0 * i_out + p1 + p2 + coil) / v_in,
        c_in=np.sqrt(mean(high, 2) - mean(high) ** 2), c_out=np.sqrt(total - i_out**2))


@pytest.fixture(scope="module")
def buck_result(tmp_path_factory):
    return check(write_board(tmp_path_factory.mktemp("buck"), BUCK_PARTS, BUCK_ANNOTATIONS, BUCK_DEVICES))


def finding(result, ref, rule):
    found = [f for f in result.findings if (f.ref, f.rule) == (ref, rule)]
    assert len(found) == 1, [f"{f.ref} {f.rule}" for f in result.findings]
    return found[0]


def value(result, ref, rule):
    return finding(result, ref, rule).value


FEEDBACK_A = 5.0 / 41.6e3
"""What the divider of 31.6 and 10 kohm adds to the load."""


@pytest.mark.parametrize(("ref", "rule", "name"), [
    ("Q1", "dissipation.part", "p1"), ("Q2", "dissipation.part", "p2"), ("L1", "derating.current", "coil_rms"),
    ("L1", "derating.saturation", "peak"), ("Q1", "derating.id", "rms1"), ("Q2", "derating.id", "rms2")])
def test_buck_against_its_waveform(buck_result, ref, rule, name):
    assert value(buck_result, ref, rule) == pytest.approx(getattr(buck(8.0 + FEEDBACK_A), name), rel=1e-3)


def test_buck_junctions_source_current_and_winding(buck_result):
    hand = buck(8.0 + FEEDBACK_A)
    for ref, hot_c in (("Q1", hand.t1), ("Q2", hand.t2)):
        assert value(buck_result, ref, "junction.steady") == pytest.approx(hot_c, abs=1e-3 * (hot_c - HOT_C))
    vin = max((n for n in buck_result.nets if n.net == "VIN"), key=lambda n: n.current_a)
    assert vin.current_a == pytest.approx(hand.i_in + 3e-3 + (62e-9 + 90e-9) * F_HZ, rel=1e-3)
    coil = max((p for p in buck_result.operating_points if p.ref == "L1"), key=lambda p: p.power_w)
    assert coil.power_w == pytest.approx(hand.coil, rel=1e-3)


def test_buck_capacitors_share_the_ripple_by_capacitance(buck_result):
    hand = buck(8.0 + FEEDBACK_A)
    assert value(buck_result, "C1", "derating.ripple") == pytest.approx(hand.c_in * 100 / 122, rel=2e-3)
    assert value(buck_result, "C2", "derating.ripple") == pytest.approx(hand.c_in * 22 / 122, rel=2e-3)
    # The ripple's corners are bent by the resistances and the dead times, by some thousandths.
    assert value(buck_result, "C3", "derating.ripple") == pytest.approx(hand.c_out, rel=4e-3)


def test_buck_workings_have_a_line_for_each_kind_of_loss(buck_result):
    steps = {s.symbol: s.value for s in finding(buck_result, "Q1", "dissipation.part").workings}
    assert {"P_cond", "P_overlap", "P_oss", "P_rr", "P"} <= steps.keys()
    assert sum(v for name, v in steps.items() if name.startswith("P_")) == pytest.approx(steps["P"], rel=1e-12)
    assert steps["P_oss"] == pytest.approx(40e-9 * 24.0 * F_HZ)
    assert steps["P_rr"] == pytest.approx(70e-9 * 24.0 * F_HZ)
    low = {s.symbol: s.value for s in finding(buck_result, "Q2", "dissipation.part").workings}
    assert low["P_dead"] == pytest.approx((0.65 + 3e-3 * 8.0) * 8.0 * 120e-9 * F_HZ, rel=1e-3)


def test_nothing_of_the_buck_is_unproven(buck_result):
    assert [(f.ref, f.rule, f.text) for f in buck_result.findings if f.verdict in ("unproven", "exceeded")] == []


DELETIONS = [
    ("dead_time: 60 ns", "", "Q2", "dissipation.part"), ("frequency: 200 kHz, ", "", "Q1", "dissipation.part"),
    (", rise: 18 ns, fall: 15 ns", "", "Q1", "junction.steady"), ("output: 40 nC, recovery: 55 nC, ", "recovery: 55 nC, ", "Q1", "dissipation.part"),
    ("recovery: 70 nC, ", "", "Q1", "dissipation.part"), ("knee: 0.65 V, ", "", "Q2", "dissipation.part"),
    ("winding: 6 mohm", "", "L1", "derating.current"), ("rds: 4 mohm, ", "", "Q2", "dissipation.part"),
    ('"+5V": {voltage: 5 V}', "", "Q1", "derating.id"), ('"+5V": {voltage: 5 V}', "", "L1", "derating.current"),
    ("overshoot: 6 V", "", "Q1", "derating.vds")]


@pytest.mark.parametrize(("datum", "instead", "ref", "rule"), DELETIONS, ids=[f"{d[2]}-{d[0][:20]}" for d in DELETIONS])
def test_a_datum_of_the_converter_deleted_is_unproven(tmp_path, datum, instead, ref, rule):
    devices, annotations = BUCK_DEVICES.replace(datum, instead), BUCK_ANNOTATIONS.replace(datum, instead)
    assert (devices, annotations) != (BUCK_DEVICES, BUCK_ANNOTATIONS)
    result = check(write_board(tmp_path, BUCK_PARTS, annotations.replace(", }", "}"), devices.replace(", }", "}")))
    if datum.startswith("winding"):
        # More winding resistance does not raise the coil's current; its loss is what is missing.
        assert next(p for p in result.operating_points if p.ref == "L1").power_w == pytest.approx(0.0, abs=1e-6)
        return
    assert finding(result, ref, rule).verdict == "unproven"


def test_an_inductor_without_inductance_leaves_the_peak_unproven(tmp_path):
    parts = BUCK_PARTS | {"L1": ("L", "DLW", "/SW", "+5V")}
    result = check(write_board(tmp_path, parts, BUCK_ANNOTATIONS, BUCK_DEVICES))
    assert finding(result, "L1", "derating.saturation").verdict == "unproven"
    assert finding(result, "C3", "derating.ripple").verdict == "unproven"


# --- boost ---------------------------------------------------------------------------------------------


@cache
def boost(i_out, v_in=12.0, v_out=24.0, ambient=HOT_C):
    """Low switch on, then the diode; the input current is the one whose power covers output and losses."""
    t1 = td = ambient
    i_in = i_out * v_out / v_in
    for _ in range(60):
        r1, knee = 8e-3 * scale(t1), 0.4 - 1e-3 * (td - 25.0)

        def intervals(on, r1=r1, knee=knee):
            return [(on, v_in, r1 + 6e-3), (1.0 / F_HZ - on, v_in - v_out - knee, 8e-3 + 6e-3)]

        on = brentq(lambda on: sum(mean(w) for w in closed(intervals(on))) - i_in, 1e-6, 4e-6, xtol=1e-16)  # noqa: B023
        low, diode = closed(intervals(on))
        edges = v_out * (low[1][0] * 18e-9 + low[1][-1] * 15e-9) / 2.0 * F_HZ + (40e-9 + 20e-9) * v_out * F_HZ
        p1, pd = r1 * mean(low, 2) + edges, knee * mean(diode) + 8e-3 * mean(diode, 2)
        coil = 6e-3 * (mean(low, 2) + mean(diode, 2))
        t1, td = ambient + 50.0 * p1, ambient + 45.0 * pd
        i_in = (v_out * i_out + p1 + pd + coil) / v_in
    total = mean(low, 2) + mean(diode, 2)
    return SimpleNamespace(p1=p1, pd=pd, i_in=i_in, peak=low[1][-1], coil_rms=np.sqrt(total), rms1=np.sqrt(mean(low, 2)),
                           mean_d=mean(diode), c_in=np.sqrt(total - i_in**2), c_out=np.sqrt(mean(diode, 2) - mean(diode) ** 2))


@pytest.fixture(scope="module")
def boost_result(tmp_path_factory):
    return check(write_board(tmp_path_factory.mktemp("boost"), BOOST_PARTS, BOOST_ANNOTATIONS, BUCK_DEVICES))


@pytest.mark.parametrize(("ref", "rule", "name", "ambient"), [
    ("Q1", "dissipation.part", "p1", 40.0), ("D1", "dissipation.part", "pd", 0.0), ("L1", "derating.current", "coil_rms", 40.0),
    ("L1", "derating.saturation", "peak", 40.0), ("Q1", "derating.id", "rms1", 40.0), ("D1", "derating.if", "mean_d", 40.0)])
def test_boost_against_its_waveform(boost_result, ref, rule, name, ambient):
    hand = getattr(boost(3.0 + 24.0 / 110e3, ambient=ambient), name)
    assert value(boost_result, ref, rule) == pytest.approx(hand, rel=1.5e-3)


def test_boost_capacitors_and_what_they_hold_off(boost_result):
    hand = boost(3.0 + 24.0 / 110e3)
    assert value(boost_result, "C1", "derating.ripple") == pytest.approx(hand.c_in, rel=3e-3)
    assert value(boost_result, "C2", "derating.ripple") == pytest.approx(hand.c_out * 220 / 267, rel=3e-3)
    assert value(boost_result, "Q1", "derating.vds") == pytest.approx(30.0)
    assert value(boost_result, "D1", "derating.vr") == pytest.approx(29.0)


def test_a_boost_at_light_load_lets_its_current_pause(tmp_path):
    """By hand, without drops: I = V_in² · D² · T/(2 · L · (V_out − V_in)), peak V_in · D · T/L."""
    devices = BUCK_DEVICES.replace("knee: 0.4 V, slope: 8 mohm, knee_tempco: -1 mV/K", "knee: 1 uV").replace(
        "rds: 8 mohm", "rds: 1 uohm").replace("winding: 6 mohm", "winding: 1 uohm").replace("rise: 18 ns, fall: 15 ns", "rise: 1 fs, fall: 1 fs").replace(
        "output: 40 nC, recovery: 55 nC", "output: 1 fC, recovery: 1 fC").replace("recovery: 20 nC", "recovery: 1 fC")
    annotations = BOOST_ANNOTATIONS.replace("draws: 3 A", "draws: 100 mA")
    result = check(write_board(tmp_path, BOOST_PARTS, annotations, devices))
    i_out = 0.1 + 24.0 / 110e3
    duty = np.sqrt(2.0 * L_H * F_HZ * i_out * (24.0 - 12.0)) / 12.0
    assert value(result, "L1", "derating.saturation") == pytest.approx(12.0 * duty / (L_H * F_HZ), rel=1e-3)
    assert value(result, "D1", "derating.if") == pytest.approx(i_out, rel=1e-3)


def test_a_boost_passes_a_higher_input_on(tmp_path):
    """Above the set voltage the switch stays open: 30 V less winding and diode, which carries 3 A at its own temperature."""
    annotations = BOOST_ANNOTATIONS.replace("VIN: {voltage: 12 V,", "VIN: {voltage: 30 V,")
    result = check(write_board(tmp_path, BOOST_PARTS, annotations, BUCK_DEVICES))
    volts = [n.voltage_v for n in result.nets if n.net == "+24V"]
    hot_c = HOT_C
    for _ in range(50):
        forward_v = 0.4 - 1e-3 * (hot_c - 25.0) + 0.008 * 3.0
        hot_c = HOT_C + 45.0 * 3.0 * forward_v
    # The edges that the model still counts draw some tens of milliamperes more through both.
    assert max(volts) == pytest.approx(30.0 - 0.006 * 3.0 - forward_v, abs=2e-3)


def test_a_buck_without_headroom_passes_its_input_on(tmp_path):
    annotations = BUCK_ANNOTATIONS.replace("VIN: {voltage: 24 V,", "VIN: {voltage: 4.8 V,")
    result = check(write_board(tmp_path, BUCK_PARTS, annotations, BUCK_DEVICES))
    volts = [n.voltage_v for n in result.nets if n.net == "+5V"]
    assert 4.5 < min(volts) < 4.8 - 8.0 * 0.014 + 0.01


# --- every point, at random -----------------------------------------------------------------------------


@pytest.mark.parametrize(("parts", "annotations"), [(BUCK_PARTS, BUCK_ANNOTATIONS), (BOOST_PARTS, BOOST_ANNOTATIONS)],
                         ids=["buck", "boost"])
def test_random_points_balance(tmp_path, parts, annotations):
    spread = annotations.replace("draws: 8 A", "draws: 0 A .. 10 A").replace("draws: 3 A", "draws: 0 A .. 4 A").replace(
        "voltage: 24 V,", "voltage: 8 V .. 40 V,").replace("voltage: 12 V,", "voltage: 9 V .. 28 V,")
    board, _, _ = read_board(write_board(tmp_path, parts, spread, BUCK_DEVICES), Run())
    circuit = build_circuit(board.modes[0])
    low, high = circuit.box.bounds()
    points = low + np.random.default_rng(7).random((500, len(low))) * (high - low)
    points[:20] = low
    solution = Engine(circuit).solve(points, polish=True)
    assert not solution.unsolved().any()
    assert current_imbalance(solution).max() < 1e-9
    assert power_imbalance(solution).max() < 1e-9
