"""`drc-power survey` as a user meets it: what goes to standard output, what into files, and what an error leaves behind."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest

from drc_power.cli import main

DEMO = Path(__file__).parents[2] / "fixtures" / "frost-fan" / "rev-c.net"


@pytest.fixture
def board(tmp_path, monkeypatch):
    """A folder with the demo's netlist, as the working directory."""
    (tmp_path / "fan.net").write_bytes(DEMO.read_bytes())
    monkeypatch.chdir(tmp_path)
    return tmp_path


def test_the_tree_goes_to_standard_output(board, capsys):
    assert main(["survey", "fan.net"]) == 0
    out, err = capsys.readouterr()
    assert "J1" in out and "20A" in out and err == ""
    assert [path.name for path in board.iterdir()] == ["fan.net"]


def test_a_draft_makes_its_files_and_folder_and_says_what_is_in_them(board, capsys):
    assert main(["survey", "fan.net", "--draft", "fan.power.yaml"]) == 0
    out, _ = capsys.readouterr()
    assert re.search(r"\nfan.power.yaml: 4 rails, 9 loads, \d stages, \d\d parts to fill in\ndevices/fan.yaml: \d\d devices to type in\n$", out)
    assert (board / "fan.power.yaml").exists() and (board / "devices" / "fan.yaml").exists()


def test_json_alone_goes_to_standard_output(board, capsys):
    assert main(["survey", "fan.net", "--json", "--draft", "fan.power.yaml", "--mermaid", "tree.md", "--dot", "tree.dot"]) == 0
    out, err = capsys.readouterr()
    assert json.loads(out)["grounds"] == ["GND"]
    assert "to fill in" in err
    assert (board / "tree.md").read_text().startswith("# Power tree of fan.net\n")
    assert (board / "tree.dot").read_text().startswith("digraph power_tree {\n")


def test_a_chart_to_standard_output_goes_there_alone(board, capsys):
    assert main(["survey", "fan.net", "--dot", "-"]) == 0
    out, err = capsys.readouterr()
    assert out.startswith("digraph") and out.endswith("}\n") and err == ""


@pytest.mark.parametrize(("arguments", "said"), [
    (["--dot", "-", "--json"], "two outputs go to standard output"),
    (["--dot", "-", "--mermaid", "-"], "two outputs go to standard output"),
    (["--dot", "a", "--draft", "a"], "a: two outputs go to this file"),
    (["--dot", "nowhere/tree.dot", "--draft", "fan.power.yaml"], "nowhere/tree.dot: cannot be written"),
    (["--draft", "nowhere/at/all/fan.power.yaml"], "cannot be written"),
    (["--draft", "devices"], "devices: "),
])
def test_what_cannot_be_written_leaves_nothing_behind(board, capsys, arguments, said):
    if "devices" in arguments:
        (board / "devices").mkdir()
    before = sorted(board.rglob("*"))
    assert main(["survey", "fan.net", *arguments]) == 2
    out, err = capsys.readouterr()
    assert said in err and err.count("\n") == 1 and out == ""
    assert sorted(board.rglob("*")) == before


@pytest.mark.parametrize("name", ["-", ""])
def test_a_draft_needs_a_file(board, capsys, name):
    with pytest.raises(SystemExit) as ended:
        main(["survey", "fan.net", "--draft", name])
    assert ended.value.code == 2 and "is no file that can be written again" in capsys.readouterr().err


def test_a_draft_onto_a_file_of_the_users_keeps_it(board, capsys):
    mine = "# mine\nrails:\n  \"+5V\": {voltage: 5 V}   # mine\n"
    (board / "fan.power.yaml").write_text(mine)
    assert main(["survey", "fan.net", "--draft", "fan.power.yaml"]) == 0
    assert (board / "fan.power.yaml").read_text().startswith(mine)


def test_without_kicad_a_schematic_is_refused_in_one_line(board, capsys, monkeypatch):
    monkeypatch.setenv("PATH", str(board))
    (board / "fan.kicad_sch").write_text("(kicad_sch)")
    assert main(["survey", "fan.kicad_sch"]) == 2
    out, err = capsys.readouterr()
    assert out == "" and err.count("\n") == 1 and "kicad-cli sch export netlist -o fan.net fan.kicad_sch" in err
