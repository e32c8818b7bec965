"""The safe-area chart: the same bytes each time, everything asked of the part named, and refusals in one line."""

from __future__ import annotations

import pytest
from draw import write_board
from event_board import DEVICES, PARTS, with_events

from drc_power.charting import safe_area_chart
from drc_power.cli import main
from drc_power.run import Run, read_board

pytest.importorskip("matplotlib")

EVENTS = ("plug: {kind: inrush, part: Q1, capacitance: 200 uF, slew: 7 V/ms}", "hit: {kind: pulse, part: Q1, voltage: 20 V, current: 9 A, lasts: 4 ms}")


@pytest.fixture(scope="module")
def board(tmp_path_factory):
    return write_board(tmp_path_factory.mktemp("chart"), PARTS, with_events(*EVENTS), DEVICES)


def test_the_chart_holds_lines_modes_and_events(board):
    chart = safe_area_chart(read_board(board, Run())[0], "Q1")
    assert [line.length_s for line in chart.drawn] == [1e-3, 1e-2, None]
    assert chart.hot[0].case_c > 50.0
    assert [point.mode for point in chart.points] == ["run"]
    verdicts = {path.event: path.verdict for path in chart.paths}
    assert verdicts == {"plug": "met", "hit": "exceeded"}
    hit = next(path for path in chart.paths if path.event == "hit")
    assert (hit.decides_v, hit.decides_a) == (20.0, 9.0)
    assert hit.rated_a < 9.0


@pytest.mark.parametrize(("name", "begins"), [("q1.svg", b"<?xml"), ("q1.png", b"\x89PNG")])
def test_the_command_writes_the_same_bytes_twice(board, tmp_path, name, begins):
    written = []
    for turn in ("a", "b"):
        (tmp_path / turn).mkdir()
        assert main(["envelope", str(board), "Q1", "-o", str(tmp_path / turn / name)]) == 0
        written.append((tmp_path / turn / name).read_bytes())
    assert written[0] == written[1]
    assert written[0].startswith(begins)


def test_a_part_without_an_area_is_refused_by_name(board, tmp_path, capsys):
    assert main(["envelope", str(board), "R3", "-o", str(tmp_path / "r3.svg")]) == 2
    assert "has no safe area to draw" in capsys.readouterr().err
    assert not (tmp_path / "r3.svg").exists()


def test_an_unknown_part_gets_the_nearest(board, tmp_path, capsys):
    assert main(["envelope", str(board), "Q11", "-o", str(tmp_path / "q.svg")]) == 2
    assert "Q1" in capsys.readouterr().err


def test_the_kind_of_file_is_asked_for(board, capsys):
    with pytest.raises(SystemExit) as stop:
        main(["envelope", str(board), "Q1", "-o", "q1.jpg"])
    assert stop.value.code == 2
    assert ".svg or .png" in capsys.readouterr().err
