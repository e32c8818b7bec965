"""Stages that group parts: or-ing, linear pass, hot-plug, load switch; and a boost whose switch is inside its chip."""

from __future__ import annotations

import numpy as np
import pytest
from converter_boards import BUCK_DEVICES
from draw import write_board

from drc_power.run import check

PARTS = {
    "J1": ("Conn_01x02", "MAIN", "VA", "GND"), "J2": ("Conn_01x02", "SPARE", "VB", "GND"),
    "Q1": ("Q_NMOS_GDS", "NF6008", "/GA", "+BUS", "VA"), "Q2": ("Q_NMOS_GDS", "NF6008", "/GB", "+BUS", "VB"),
    "Q3": ("Q_NMOS_GDS", "NF6004", "/GC", "+BUS", "+OUT"),
    "J3": ("Conn_01x02", "LOAD", "+OUT", "GND"),
}
ANNOTATIONS = """
surroundings: {ambient: 20 °C .. 25 °C}
grounds: [GND]
rails:
  VA: {voltage: 12 V, source: J1}
  VB: {voltage: 11 V, source: J2}
loads:
  load: {net: "+OUT", draws: 10 A}
stages:
  either: {kind: or-ing, parts: [Q1, Q2]}
  plug: {kind: hot-plug, parts: Q3}
parts:
  "Q1 Q2": {device: nfet-60v-8m, gate: 10 V, heat: {case: 25 °C}}
  Q3: {device: nfet-60v-4m, gate: 10 V, heat: {case: 25 °C}}
"""


def value(result, ref, rule):
    found = [f for f in result.findings if (f.ref, f.rule) == (ref, rule)]
    assert len(found) == 1, [f"{f.ref} {f.rule}" for f in result.findings]
    return found[0].value


def hot(loss_25_w, rth):
    """Loss of a channel on a case at 25 °C: P = P_25 · (1 + 0.8/125 · R_th · P)."""
    return loss_25_w / (1.0 - 0.8 / 125.0 * rth * loss_25_w)


def test_or_ing_fets_carry_current_one_way_only(tmp_path):
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS, BUCK_DEVICES))
    loss = hot(10.0**2 * 8e-3, 1.36)
    assert value(result, "Q1", "dissipation.part") == pytest.approx(loss, rel=1e-6)
    assert value(result, "Q2", "dissipation.part") == pytest.approx(0.0, abs=1e-12)
    assert value(result, "Q2", "derating.vds") == pytest.approx(12.0 - loss / 10.0 - 11.0, rel=1e-6)
    assert value(result, "Q3", "dissipation.part") == pytest.approx(hot(10.0**2 * 4e-3, 1.0), rel=1e-6)


def test_equal_sources_share_through_the_or_ing_fets(tmp_path):
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS.replace("voltage: 11 V", "voltage: 12 V"), BUCK_DEVICES))
    assert value(result, "Q1", "derating.id") == pytest.approx(5.0, rel=1e-6)
    assert value(result, "Q2", "derating.id") == pytest.approx(5.0, rel=1e-6)


@pytest.mark.parametrize("kind", ["hot-plug", "load-switch"])
def test_a_grouping_kind_leaves_its_parts_as_they_conduct(tmp_path, kind):
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS.replace("kind: hot-plug", f"kind: {kind}"), BUCK_DEVICES))
    assert value(result, "Q3", "derating.id") == pytest.approx(10.0, rel=1e-9)


def test_a_linear_pass_stage_puts_its_transistor_in_state_linear(tmp_path):
    annotations = ANNOTATIONS.replace("{kind: hot-plug, parts: Q3}", "{kind: linear-pass, parts: Q3}").replace(
        "loads:", '  "+OUT": {voltage: 9 V}\nloads:', 1).replace("draws: 10 A", "draws: 2 A")
    result = check(write_board(tmp_path, PARTS, annotations, BUCK_DEVICES))
    bus = 12.0 - hot(2.0**2 * 8e-3, 1.36) / 2.0
    assert value(result, "Q3", "dissipation.part") == pytest.approx((bus - 9.0) * 2.0, rel=1e-6)


BOOST = {
    "J1": ("Conn_01x02", "SUPPLY", "VIN", "GND"), "C1": ("C", "100u", "VIN", "GND"),
    "U1": ("BOOST", "BO-24", "VIN", "GND", "/SW", "/FB"),
    "L1": ("L", "22u", "VIN", "/SW"), "D1": ("D_Schottky", "SD6020", "+24V", "/SW"), "C2": ("C", "100u", "+24V", "GND"),
    "R1": ("R", "100k", "+24V", "/FB"), "R2": ("R", "10k", "/FB", "GND"), "J2": ("Conn_01x02", "LOAD", "+24V", "GND"),
}
BOOST_DEVICES = BUCK_DEVICES + """  boost-chip: {kind: switching-regulator, source: "invented", limits: {vin: 30 V, current: 2 A, power: 5 W, tj: 125 °C},
    conduction: {efficiency: 90 %, quiescent: 2 mA}, thermal: {rth_ja: 30 K/W}}
"""
BOOST_ANNOTATIONS = """
surroundings: {ambient: 20 °C .. 25 °C}
grounds: [GND]
rails:
  VIN: {voltage: 12 V, source: J1}
  "+24V": {voltage: 24 V, held_by: U1}
loads:
  load: {net: "+24V", draws: 1 A}
stages:
  up: {kind: boost, chip: U1, high: D1, inductor: L1, frequency: 300 kHz}
parts:
  U1: {device: boost-chip}
  D1: {device: diode-60v, overshoot: 4 V, heat: {case: 25 °C}}
  L1: {device: coil-10u}
  "C1 C2": {device: alu}
"""


def test_a_boost_chip_shares_its_loss_with_diode_and_inductor(tmp_path):
    """By hand: P = 24 V · I · (1/0.9 − 1) in all; the diode's and the winding's share by duty and ripple."""
    result = check(write_board(tmp_path, BOOST, BOOST_ANNOTATIONS, BOOST_DEVICES))
    i_out = 1.0 + 24.0 / 110e3
    i_in = 24.0 * i_out / 0.9 / 12.0
    knee = 0.4
    for _ in range(50):
        forward_v = knee + 8e-3 * i_in
        duty = 1.0 - (12.0 - 6e-3 * i_in) / (24.0 + forward_v)
        ripple = (12.0 - 6e-3 * i_in) * duty / (22e-6 * 300e3)
        square = i_in**2 + ripple**2 / 12.0
        diode = (1.0 - duty) * (knee * i_in + 8e-3 * square)
        knee = 0.4 - 1e-3 * 2.0 * diode
    coil = 6e-3 * square
    assert value(result, "D1", "dissipation.part") == pytest.approx(diode, rel=1e-3)
    assert value(result, "L1", "derating.current") == pytest.approx(np.sqrt(square), rel=1e-3)
    assert value(result, "L1", "derating.saturation") == pytest.approx(i_in + ripple / 2.0, rel=1e-3)
    assert value(result, "U1", "dissipation.part") == pytest.approx(24.0 * i_out * (1.0 / 0.9 - 1.0) - diode - coil, rel=1e-3)
    assert value(result, "C2", "derating.ripple") == pytest.approx(np.sqrt((1 - duty) * square - ((1 - duty) * i_in) ** 2), rel=1e-3)


def test_an_efficiency_too_high_for_its_outside_parts_is_not_met(tmp_path):
    """At 98.5 % the diode alone would lose more than the whole converter."""
    result = check(write_board(tmp_path, BOOST, BOOST_ANNOTATIONS, BOOST_DEVICES.replace("efficiency: 90 %", "efficiency: 98.5 %")))
    found = [f for f in result.findings if f.ref == "U1" and f.rule in ("dissipation.part", "junction.steady")]
    assert {f.verdict for f in found} == {"unproven"}
