"""The survey as JSON and as text: keys of the contract, order, harmless names, the power tree."""

from __future__ import annotations

import json
import time
from dataclasses import replace

import pytest

from drc_power.netlist.model import Part, Pin
from drc_power.survey import survey_json, survey_netlist, survey_text


def _board(drawn_boards, name):
    return next(board for board in drawn_boards if board.name == name)


def test_json_has_the_keys_of_the_contract_in_order(drawn_boards):
    data = survey_json(survey_netlist(_board(drawn_boards, "dc-motor-driver").netlist))
    assert list(data) == ["format", "netlist", "grounds", "rails", "elements", "stages", "paths", "signal"]
    assert list(data["rails"][0]) == ["net", "voltage", "because", "fed_by"]
    assert list(data["elements"][0]) == ["ref", "group", "role", "from", "to", "control", "device", "confidence", "because"]
    assert list(data["stages"][0]) == ["kind", "parts", "node"]
    assert list(data["signal"][0]) == ["ref", "because"]
    assert {e["group"] for e in data["elements"]} <= {"pass", "switch", "clamp", "source", "load"}
    assert json.loads(json.dumps(data, allow_nan=False)) == data


def test_json_is_the_same_every_time(drawn_boards):
    for board in drawn_boards:
        assert json.dumps(survey_json(survey_netlist(board.netlist))) == json.dumps(survey_json(survey_netlist(board.netlist)))


def test_path_goes_from_the_contact_through_the_elements_to_a_rail(drawn_boards):
    survey = survey_netlist(_board(drawn_boards, "dc-motor-driver").netlist)
    assert ("J1", "VBAT_RAW", "F1", "/VB_F", "Q1", "+VM", "U2", "/SW12", "L1", "+12V", "U3", "+3V3") in survey.paths


def test_text_shows_the_tree_once_and_counts_the_rest(drawn_boards):
    board = _board(drawn_boards, "dc-motor-driver")
    text = survey_text(survey_netlist(board.netlist), board.netlist)
    lines = text.splitlines()
    assert "J1 -> VBAT_RAW" in lines
    assert "  F1 [15A] fuse -> /VB_F" in lines
    assert any(line.strip().startswith("U3 [1117-3.3] linear-regulator -> +3V3 (3.3 V, guessed: net name)") for line in lines)
    assert sum("F1 [15A]" in line for line in lines) == 1
    assert any("feedback divider" in line for line in lines)
    assert any(line.startswith("in returns") for line in lines)


def test_parallel_parts_share_a_line(drawn_boards):
    board = _board(drawn_boards, "battery-monitor")
    text = survey_text(survey_netlist(board.netlist))
    assert "Q1" in text
    board = _board(drawn_boards, "buck-outside-switches")
    assert "Q3, Q4 mosfet switch -> GND" in survey_text(survey_netlist(board.netlist))


def test_hostile_names_are_made_harmless(netlist_of):
    evil = "\x1b[2J\u202eGND\n" * 3
    parts = [
        Part("J1\x07", evil, pins=(Pin("1", "Pin_1", "passive", "+5V\x1b[31m"), Pin("2", "Pin_2", "passive", "GND"))),
        Part("F1", "1A", symbol="Fuse", library="Device", pins=(Pin("1", "", "passive", "+5V\x1b[31m"), Pin("2", "", "passive", evil))),
        Part("U1", "7805", symbol="7805", pins=(Pin("1", "VI", "input", evil), Pin("2", "GND", "input", "GND"), Pin("3", "VO", "power_out", "x" * 5000))),
    ]
    netlist = netlist_of(parts)
    text = survey_text(survey_netlist(netlist), netlist)
    assert "\x1b" not in text and "\u202e" not in text and "\x07" not in text
    assert max(map(len, text.splitlines())) < 400
    json.dumps(survey_json(survey_netlist(netlist)))


@pytest.mark.parametrize(
    "parts",
    [
        [],
        [Part("R1")],
        [Part("R1", pins=(Pin("1", "", "", "A"),))],
        [Part("Q1", symbol="NMOS", pins=(Pin("1", "D", "", "A"), Pin("2", "G", "", "A"), Pin("3", "S", "", "A")))],
        [Part("Q1", symbol="NMOS", pins=(Pin("1", "D", "", ""), Pin("2", "G", "", ""), Pin("3", "S", "", "")))],
        [Part("", symbol="", pins=(Pin("", "", "", "GND"), Pin("", "", "", "+5V")))],
        [Part("D1", symbol="D_Bridge", pins=(Pin("1", "+", "", "A"),))],
        [Part("L1", symbol="L", pins=tuple(Pin(str(n), "", "", f"n{n}") for n in range(4)))],
    ],
    ids=range(8),
)
def test_odd_netlists_do_not_crash(netlist_of, parts):
    netlist = netlist_of(parts)
    survey = survey_netlist(netlist)
    survey_text(survey, netlist)
    survey_json(survey)


def test_fifteen_hundred_parts_in_well_under_a_second(drawn_boards, netlist_of):
    """Every drawn board many times over on one sheet: parts renamed, nets kept apart except the ground."""
    parts = []
    copy = 0
    while len(parts) < 1500:
        for board in drawn_boards:
            copy += 1
            for part in board.netlist.parts.values():
                pins = tuple(replace(p, net=p.net if p.net in ("", "GND") else f"{p.net}_{copy}") for p in part.pins)
                parts.append(replace(part, ref=f"{part.ref}{copy:03d}", pins=pins))
    netlist = netlist_of(parts)
    started = time.perf_counter()
    survey = survey_netlist(netlist)
    elapsed_s = time.perf_counter() - started
    assert len(survey.parts) >= 1500
    assert elapsed_s < 3.0, f"{elapsed_s:.2f} s; about 0.6 s on an idle machine"
