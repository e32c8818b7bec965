"""What nothing feeds carries nothing, and that proves nothing: no part behind a missing rail is ever `met`."""

from __future__ import annotations

import pytest
from battery_board import ANNOTATIONS, DEVICES, PARTS
from draw import write_board

from drc_power.run import check

VBAT = "  VBAT: {voltage: 20 V .. 24 V .. 28 V, source: J1, limit: 10 A}\n"


def verdicts(tmp_path, annotations):
    result = check(str(write_board(tmp_path, PARTS, annotations, DEVICES)))
    return {(f.ref, f.rule, f.mode): f.verdict for f in result.findings}


@pytest.mark.parametrize("instead", ["", "  VBAT: {source: J1}\n", "  VBAT: {voltage: , source: J1}\n"], ids=["no rail", "no voltage", "blank"])
def test_without_the_supply_nothing_is_met(tmp_path, instead):
    found = verdicts(tmp_path, ANNOTATIONS.replace(VBAT, instead))
    assert set(found.values()) == {"unproven"}
    assert {ref for ref, *_ in found} >= {"F1", "Q1", "Q2", "R3", "U1"}


def test_the_remedy_names_a_net_and_where_to_write(tmp_path):
    result = check(str(write_board(tmp_path, PARTS, ANNOTATIONS.replace(VBAT, ""), DEVICES)))
    fuse = next(f for f in result.findings if f.ref == "F1" and f.rule == "derating.current")
    assert "what feeds VBAT (a voltage and a source under rails)" in fuse.text


def test_behind_a_regulator_without_a_set_voltage_nothing_is_met(tmp_path):
    parts = PARTS | {"F2": ("Fuse", "1A", "+5V", "+5F"), "U2": ("MCU", "MC-01", "+5F", "GND", "/HEAT_EN", "")}
    annotations = ANNOTATIONS.replace('  "+5V": {voltage: 5 V}\n', "").replace('net: "+5V"', 'net: "+5F"')
    annotations = annotations.replace("  R3:", "  F2: {device: fuse-10a}\n  R3:")
    result = check(str(write_board(tmp_path, parts, annotations, DEVICES)))
    assert {f.verdict for f in result.findings if f.ref == "F2"} == {"unproven"}
    result = check(str(write_board(tmp_path, parts, annotations.replace("loads:", '  "+5V": {voltage: 5 V}\nloads:', 1), DEVICES)))
    assert {f.verdict for f in result.findings if f.ref == "F2"} == {"met"}


def test_what_a_blocked_part_keeps_dead_is_still_judged(tmp_path):
    """A switch that is off in a mode is a statement, not a gap."""
    modes = "modes:\n  run: {}\n  off: {parts: {Q2: {state: blocked}, U1: {state: blocked}}, loads: {controller: {draws: 0 A, needs: 0 V .. 6 V}}}\n"
    found = verdicts(tmp_path, ANNOTATIONS + modes)
    assert {v for (ref, _, mode), v in found.items() if mode == "off" and ref in ("F1", "R3")} == {"met"}
