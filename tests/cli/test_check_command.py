"""`drc-power check` as a user meets it: exit status, messages of one line, files written whole or not at all."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest
from battery_board import ANNOTATIONS, DEVICES, PARTS
from draw import write_board

from drc_power.cli import main

DEMO = Path(__file__).parents[2] / "fixtures" / "frost-fan"


@pytest.fixture
def board(tmp_path):
    return write_board(tmp_path, PARTS, ANNOTATIONS, DEVICES)


def edited(board: Path, old: str, new: str) -> str:
    text = board.read_text()
    assert old in text
    board.write_text(text.replace(old, new))
    return str(board)


def test_a_board_within_its_limits_exits_0(board, capsys):
    assert main(["check", str(board)]) == 0
    out, err = capsys.readouterr()
    assert "0 exceeded" in out
    assert err == ""


def test_a_board_past_its_limits_exits_1_and_says_what(board, capsys):
    path = edited(board, "resistance: 12 ohm ± 5 %", "resistance: 2.6 ohm")
    assert main(["check", path]) == 1
    assert "exceeded" in capsys.readouterr().out


def test_fails_from_on_the_command_line_beats_the_rules(board):
    path = edited(board, "  Q1: {device: pfet-40v, gate: 20 V .. 28 V}", "  Q1: {device: pfet-40v}")
    (board.parent / "devices.yaml").write_text((board.parent / "devices.yaml").read_text().replace(", rth_ja: 50 K/W", ""))
    assert main(["check", path]) == 1
    assert main(["check", path, "--fails-from", "exceeded"]) == 0


def test_files_are_written_and_the_json_keys_stand_in_the_order_of_the_contract(board, tmp_path, capsys):
    out, comment = tmp_path / "out.json", tmp_path / "out.md"
    assert main(["check", str(board), "--json", str(out), "--markdown", str(comment), "--today", "2026-11-30"]) == 0
    document = json.loads(out.read_text())
    keys = "format tool today board inputs verdict tally coverage parts rails loads rules operating_points nets findings"
    assert list(document)[:15] == keys.split()
    assert document["today"] == "2026-11-30"
    assert list(document["findings"][0])[:12] == ["id", "rule", "stress", "verdict", "was", "ref", "uuid", "sheet", "net",
                                                  "mode", "event", "corner"]
    assert comment.read_text().strip()


def test_dash_is_standard_output_and_nothing_else_goes_there(board, capsys):
    assert main(["check", str(board), "--json", "-"]) == 0
    assert json.loads(capsys.readouterr().out)["format"] == 1


BAD = [
    ("netlist: board.net", "netlist: bord.net", ("bord.net",)),
    ('  "+5V": {voltage: 5 V}', '  "+5V": {voltage: 5}', ("a voltage", ":10:")),
    ('  "+5V": {voltage: 5 V}', '  "+5V": {voltage: 5 A}', ("voltage",)),
    ('  "+5V": {voltage: 5 V}', '  "+5V": {volts: 5 V}', ("'volts'", "'voltage'")),
    ('  "+5V": {voltage: 5 V}', '  "+5W": {voltage: 5 V}', ("'+5W'", "'+5V'")),
    ("R3: {device: shunt-2512}", "R3: {device: shunt-2521}", ("'shunt-2521'", "'shunt-2512'")),
    ("R3: {device: shunt-2512}", "R33: {device: shunt-2512}", ("'R33'",)),
    ("sink: plate, interface: 0.6 K/W", "sink: plat, interface: 0.6 K/W", ("'plat'", "'plate'")),
    ("source: J1", "source: J7", ("'J7'",)),
    ("heats: U2", "heats: U9", ("'U9'",)),
    ('net: "+24V", return: "/HEAT-"', 'net: "+24V", return: "/HEAT"', ("'/HEAT'", "'/HEAT-'")),
]


@pytest.mark.parametrize(("old", "new", "words"), BAD, ids=[new[:30] for _, new, _ in BAD])
def test_bad_input_exits_2_with_lines_that_name_the_place_and_the_right_name(board, tmp_path, capsys, old, new, words):
    out = tmp_path / "out.json"
    out.write_text("a good file")
    assert main(["check", edited(board, old, new), "--json", str(out)]) == 2
    printed, err = capsys.readouterr()
    assert printed == ""
    assert out.read_text() == "a good file"
    for line in err.splitlines():
        assert line.startswith(str(tmp_path)) or ".net" in line
    for word in words:
        assert word in err
    assert "Traceback" not in err


def test_a_missing_file_exits_2(tmp_path, capsys):
    assert main(["check", str(tmp_path / "none.power.yaml")]) == 2
    assert len(capsys.readouterr().err.splitlines()) == 1


def test_a_truncated_netlist_exits_2_with_its_line(board, capsys):
    netlist = board.parent / "board.net"
    netlist.write_text(netlist.read_text()[:700])
    assert main(["check", str(board)]) == 2
    err = capsys.readouterr().err
    assert "board.net:" in err
    assert len(err.splitlines()) == 1


def test_what_is_no_netlist_is_said_to_be_none(board, capsys):
    (board.parent / "board.net").write_text("(kicad_sch (version 20250114))")
    assert main(["check", str(board)]) == 2
    assert "kicad-cli sch export netlist" in capsys.readouterr().err


def test_a_key_that_is_not_built_yet_is_refused(board, capsys):
    assert main(["check", edited(board, "rails:", "copper: {board: b.kicad_pcb}\nrails:")]) == 2
    assert "not supported yet" in capsys.readouterr().err


def test_usage_errors_are_one_line(capsys):
    with pytest.raises(SystemExit) as stop:
        main(["check"])
    assert stop.value.code == 2
    assert len(capsys.readouterr().err.splitlines()) == 1


def test_a_fault_of_the_tool_exits_70_and_asks_for_a_report(board, monkeypatch, capsys):
    def broken(*_):
        raise ZeroDivisionError("inside")

    monkeypatch.setattr("drc_power.run.read_board", broken)
    assert main(["check", str(board)]) == 70
    assert "report" in capsys.readouterr().err


def test_the_netlist_is_confirmed_by_a_second_reader(board):
    assert main(["check", str(board), "--confirm-netlist"]) == 0


@pytest.mark.parametrize("seed", ["0", "1", "12345"])
def test_the_same_inputs_give_the_same_bytes_whatever_the_hash_seed(seed):
    environment = {**os.environ, "PYTHONHASHSEED": seed}
    command = [sys.executable, "-m", "drc_power", "check", str(DEMO / "rev-b.power.yaml"), "--json", "-"]
    run = subprocess.run(command, capture_output=True, env=environment, check=False)
    assert run.returncode == 1
    # The first seed of a test session is the reference for the others.
    reference = _FIRST.setdefault("bytes", run.stdout)
    assert run.stdout == reference


_FIRST: dict[str, bytes] = {}


def test_the_same_board_in_another_folder_gives_the_same_bytes(board, tmp_path_factory, capsys):
    import shutil

    elsewhere = tmp_path_factory.mktemp("elsewhere") / "deeper"
    shutil.copytree(board.parent, elsewhere)
    main(["check", str(board), "--json", "-"])
    first = capsys.readouterr().out
    main(["check", str(elsewhere / board.name), "--json", "-"])
    assert capsys.readouterr().out == first


def test_a_board_without_a_ground_exits_2_and_says_what_to_write(tmp_path, capsys):
    parts = {"J1": ("Conn_01x02", "BAT", "P", "M"), "R1": ("R", "10", "P", "M")}
    annotations = "surroundings: {ambient: 25 °C}\nrails:\n  P: {voltage: 10 V, source: J1}\nparts:\n  R1: {device: fuse-10a}\n"
    path = write_board(tmp_path, parts, annotations, DEVICES)
    assert main(["check", str(path)]) == 2
    assert "write grounds: [NET]" in capsys.readouterr().err
    path.write_text(path.read_text().replace("source: J1}", "source: J1, return: M}"))
    assert main(["check", str(path)]) in (0, 1)
