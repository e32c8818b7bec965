"""A whole run on a board annotated by the contract alone, against an independent solution of its equations.

Battery → fuse → p-channel FET → linear regulator with a controller, and a heater on a low-side FET with a shunt in
its return. The reference equations are written here and solved by scipy at the corner that engineering says is worst.
"""

from __future__ import annotations

import itertools
import re

import pytest
from battery_board import ANNOTATIONS, DEVICES, PARTS
from draw import write_board
from scipy.optimize import root

from drc_power.run import check

def scale_q1(t):
    return 1.0 if t < 25 else 1 + 0.4 * (t - 25) / 75 if t < 100 else 1.4 + 0.4 * (t - 100) / 50


def scale_q2(t):
    return 1.0 if t < 25 else 1 + 0.45 * (t - 25) / 75 if t < 100 else 1.45 + 0.4 * (t - 100) / 50


def reference(v_bat=28.0, i_load=0.06, r_heater=11.4, rds2=0.008, ambient=50.0, r_sink=8.0):
    """Every operating point at one corner, from Kirchhoff's and Ohm's laws written out."""
    def equations(u):
        v24, i_heat, t1, t2, tu = u
        i_fuse = i_heat + i_load + 0.005
        p1, p2 = i_fuse**2 * 0.012 * scale_q1(t1), i_heat**2 * rds2 * scale_q2(t2)
        pu = (v24 - 5.0) * i_load + v24 * 0.005
        return [v24 - (v_bat - i_fuse * (0.009 + 0.012 * scale_q1(t1))),
                i_heat - v24 / (r_heater + rds2 * scale_q2(t2) + 0.010),
                t1 - (ambient + 50.0 * p1),
                t2 - (ambient + r_sink * (p2 + pu) + (1.36 + 0.6) * p2),
                tu - (ambient + r_sink * (p2 + pu) + (3.0 + 1.0) * pu)]

    v24, i_heat, t1, t2, tu = root(equations, [24.0, 2.0, 60.0, 80.0, 90.0], tol=1e-13).x
    i_fuse = i_heat + i_load + 0.005
    return {"v24": v24, "i_heat": i_heat, "i_fuse": i_fuse, "t1": t1, "t2": t2, "tu": tu,
            "p1": i_fuse**2 * 0.012 * scale_q1(t1), "p2": i_heat**2 * rds2 * scale_q2(t2),
            "pu": (v24 - 5.0) * i_load + v24 * 0.005, "pr": i_heat**2 * 0.010}


def worst(key, pick=max):
    """The worst of a quantity over every corner of the board's spans."""
    box = itertools.product((20.0, 28.0), (0.02, 0.06), (11.4, 12.6), (0.0064, 0.008), (-20.0, 50.0))
    return pick(reference(*corner)[key] for corner in box)


@pytest.fixture(scope="module")
def result(tmp_path_factory):
    return check(write_board(tmp_path_factory.mktemp("battery"), PARTS, ANNOTATIONS, DEVICES))


def finding(result, ref, rule, mode="run"):
    found = [f for f in result.findings if (f.ref, f.rule, f.mode) == (ref, rule, mode)]
    assert len(found) == 1, [f"{f.ref} {f.rule}" for f in result.findings]
    return found[0]


@pytest.mark.parametrize(("ref", "current", "power", "temperature"), [
    ("F1", "i_fuse", None, None), ("Q1", "i_fuse", "p1", "t1"), ("Q2", "i_heat", "p2", "t2"), ("R3", "i_heat", "pr", None),
    ("U1", None, "pu", "tu")])
def test_operating_points_are_those_of_the_independent_solution(result, ref, current, power, temperature):
    row = max((p for p in result.operating_points if p.ref == ref), key=lambda p: p.power_w)
    if power:
        assert row.power_w == pytest.approx(worst(power), rel=1e-7)
    if current and power is None:
        assert row.current_a == pytest.approx(worst(current), rel=1e-7)
    if temperature:
        assert finding(result, ref, "junction.steady").value == pytest.approx(worst(temperature), rel=1e-7)


def test_verdicts_and_corners_of_the_junctions(result):
    assert [finding(result, ref, "junction.steady").verdict for ref in ("Q1", "Q2", "U1")] == ["met", "met", "met"]
    corner = finding(result, "Q1", "junction.steady").corner
    assert "VBAT at 28 V" in corner
    assert "ambient 50 °C" in corner
    assert "heater at 11.4 ohm" in corner


def test_load_voltage_and_source_limit(result):
    assert next(f for f in result.findings if f.rule == "network.voltage").verdict == "met"
    limit = next(f for f in result.findings if f.rule == "network.limit")
    assert limit.verdict == "met"
    assert limit.value == pytest.approx(worst("i_fuse"), rel=1e-7)


def test_every_element_ends_in_a_finding(result):
    assert {f.ref for f in result.findings if f.ref} >= {"F1", "Q1", "Q2", "U1", "R3"}
    assert result.coverage.judged == result.coverage.elements


def test_nothing_is_unproven_or_exceeded(result):
    assert [(f.ref, f.rule, f.text) for f in result.findings if f.verdict in ("unproven", "exceeded")] == []


DELETIONS = [
    ("thermal: {rth_jc: 2 K/W, rth_ja: 50 K/W}", "thermal: {rth_jc: 2 K/W}", "Q1", ("junction.steady", "dissipation.part")),
    ("limits: {vds: 40 V, vgs: 30 V, id: 30 A, tj: 150 °C, power: 60 W}", "limits: {vds: 40 V, vgs: 30 V, id: 30 A, power: 60 W}",
     "Q1", ("junction.steady",)),
    ("rds: 12 mohm, ", "", "Q1", ("junction.steady", "dissipation.part")),
    ("vds: 60 V, ", "", "Q2", ("derating.vds",)),
    ("id: 50 A, ", "", "Q2", ("derating.id",)),
    (", quiescent: 5 mA", "", "U1", ("junction.steady", "dissipation.part")),
    ("dropout: 1.2 V, ", "", "U1", ("network.headroom",)),
    ("vin: 40 V, ", "", "U1", ("derating.vin",)),
    ("power: 20 W, ", "", "U1", ("dissipation.part",)),
    ("limits: {power: 2 W, voltage: 100 V}", "limits: {voltage: 100 V}", "R3", ("dissipation.part",)),
    ("limits: {current: 10 A, voltage: 63 V}", "limits: {voltage: 63 V}", "F1", ("derating.current",)),
    (", interface: 0.6 K/W", "", "Q2", ("junction.steady",)),
    ("R3: {device: shunt-2512}", "R3: {}", "R3", ("dissipation.part",)),
]


@pytest.mark.parametrize(("datum", "instead", "ref", "rules"), DELETIONS, ids=[f"{d[2]}-{d[0][:24]}" for d in DELETIONS])
def test_a_deleted_datum_is_unproven_never_met(tmp_path, datum, instead, ref, rules):
    devices, annotations = DEVICES.replace(datum, instead), ANNOTATIONS.replace(datum, instead)
    assert (devices, annotations) != (DEVICES, ANNOTATIONS)
    devices = re.sub(r", *}", "}", devices)
    result = check(write_board(tmp_path, PARTS, annotations, devices))
    for rule in rules:
        found = finding(result, ref, rule)
        assert found.verdict == "unproven", found
        assert found.remedy


def test_without_its_device_a_part_is_unproven(tmp_path):
    annotations = ANNOTATIONS.replace("  Q2: {device: nfet-60v, gate: 10 V,", "  Q2: {gate: 10 V,")
    result = check(write_board(tmp_path, PARTS, annotations, DEVICES))
    assert not [f for f in result.findings if f.ref == "Q2" and f.verdict in ("met", "close")]
    assert [f for f in result.findings if f.ref == "Q2" and f.verdict == "unproven"]


def test_a_missing_fuse_resistance_leaves_what_gets_worse_by_it_unproven(tmp_path):
    """More drop lowers the load's and the regulator's input voltage: headroom is then not shown, dissipation still is."""
    devices = DEVICES.replace("conduction: {resistance: 9 mohm}", "conduction: {}")
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS, devices))
    assert finding(result, "U1", "network.headroom").verdict == "unproven"
    assert finding(result, "U1", "dissipation.part").verdict == "met"


def test_without_an_ambient_no_junction_is_proven(tmp_path):
    annotations = ANNOTATIONS.replace("surroundings: {ambient: -20 °C .. 50 °C}", "surroundings: {}")
    result = check(write_board(tmp_path, PARTS, annotations, DEVICES))
    assert {f.verdict for f in result.findings if f.rule == "junction.steady"} == {"unproven"}


def test_a_rail_without_a_voltage_is_unproven_and_so_is_what_hangs_on_it(tmp_path):
    annotations = ANNOTATIONS.replace('  "+5V": {voltage: 5 V}\n', "")
    result = check(write_board(tmp_path, PARTS, annotations, DEVICES))
    assert [f.verdict for f in result.findings if f.rule == "coverage.rail"] == ["unproven"]
    assert not [f for f in result.findings if f.ref == "U1" and f.rule in ("junction.steady", "dissipation.part") and f.verdict == "met"]
    assert finding(result, "F1", "derating.current").verdict == "unproven"


ABOUT_OPERATION = ("dissipation.part", "junction.steady", "envelope.steady", "derating.vds", "derating.id", "derating.vin",
                   "derating.current", "network.voltage", "network.headroom")


@pytest.mark.parametrize("rail", ["  VBAT: {source: J1, limit: 10 A}\n", ""], ids=["no voltage", "no rail at all"])
def test_behind_a_supply_that_nobody_gave_nothing_is_met(tmp_path, rail):
    """At zero volt every part would look safe: the worst kind of pass."""
    annotations = ANNOTATIONS.replace("  VBAT: {voltage: 20 V .. 24 V .. 28 V, source: J1, limit: 10 A}\n", rail)
    assert annotations != ANNOTATIONS
    annotations = annotations.replace('  "+5V": {voltage: 5 V}\n', "")
    if not rail:
        annotations = annotations.replace("rails:\n", "rails: {}\n")
    result = check(write_board(tmp_path, PARTS, annotations, DEVICES))
    assert [(f.ref or f.net, f.rule) for f in result.findings if f.rule in ABOUT_OPERATION and f.verdict in ("met", "close")] == []
    assert {f.ref for f in result.findings if f.verdict == "unproven"} >= {"F1", "Q1", "Q2", "R3"}


def test_a_second_supply_that_nobody_annotated_is_not_met_at_zero_volt(tmp_path):
    """A FET that switches a second battery's load, on a board whose first battery is annotated in full."""
    parts = PARTS | {"J3": ("Conn_01x02", "SECOND", "VB2", "GND"), "Q3": ("Q_NMOS_GDS", "NF6008", "/G3", "/LAMP-", "GND"),
                     "J4": ("Conn_01x02", "LAMP", "VB2", "/LAMP-")}
    annotations = ANNOTATIONS.replace("  R3: {device: shunt-2512}", "  R3: {device: shunt-2512}\n  Q3: {device: nfet-60v, gate: 10 V}")
    annotations = annotations.replace("sinks:", '  lamp: {net: VB2, return: "/LAMP-", draws: 2 A}\nsinks:')
    result = check(write_board(tmp_path, parts, annotations, DEVICES))
    of_q3 = [f for f in result.findings if f.ref == "Q3" and f.rule in ABOUT_OPERATION]
    assert of_q3
    assert {f.verdict for f in of_q3} == {"unproven"}
    assert finding(result, "Q2", "junction.steady").verdict == "met"


def test_a_part_named_without_a_word_is_judged(tmp_path):
    """Everything named under `parts` is solved and judged, whatever the survey thought: R2 is a gate resistor."""
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS + "", DEVICES))
    assert "R2" not in {f.ref for f in result.findings}
    annotations = ANNOTATIONS.replace("  R3: {device: shunt-2512}", "  R3: {device: shunt-2512}\n  R2: {}")
    named = check(write_board(tmp_path, PARTS, annotations, DEVICES))
    assert {f.verdict for f in named.findings if f.ref == "R2"} == {"unproven"}
