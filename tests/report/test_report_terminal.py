"""The table on the terminal: short, within its width, and nothing from the input moves the cursor."""

import re
from pathlib import Path

import pytest

from drc_power.findings.model import Coverage
from drc_power.report.terminal import to_table
from drc_power.text import display_width

GOLDEN = Path(__file__).parent / "golden" / "example.txt"
COLOUR = re.compile(r"\x1b\[[0-9;]+m")
LINE_TO_PASTE = re.compile(r"- \{finding: ")


def test_the_example_reads_as_the_golden_file(example):
    assert to_table(example, 88) == GOLDEN.read_text(encoding="utf-8")


def test_colour_only_where_asked_for_and_only_as_colour(example):
    assert "\x1b" not in to_table(example, 88)
    coloured = to_table(example, 88, colour=True)
    assert COLOUR.search(coloured)
    assert COLOUR.sub("", coloured) == to_table(example, 88)


@pytest.mark.parametrize("width", [1, 60, 80, 200])
def test_no_line_is_wider_than_asked_for_save_the_ones_to_paste(example, width):
    for line in to_table(example, width).splitlines():
        assert display_width(line) <= max(60, width) or LINE_TO_PASTE.match(line), line


@pytest.mark.parametrize("colour", [False, True])
def test_hostile_text_moves_no_cursor_and_breaks_no_line(hostile_result, colour):
    text = to_table(hostile_result, 80, colour)
    text.encode("utf-8")
    plain = COLOUR.sub("", text) if colour else text
    assert all(c.isprintable() or c == "\n" for c in plain)
    assert all(display_width(line) <= 80 or LINE_TO_PASTE.match(line) for line in plain.splitlines())
    assert len(plain.splitlines()) < 40
    assert COLOUR.sub("", to_table(hostile_result, 80, colour=True)) == to_table(hostile_result, 80)


def test_a_colour_in_the_input_does_not_colour_the_output(make_result, make_finding):
    text = to_table(make_result(make_finding(verdict="close", ref="\x1b[32mQ1", text="\x1b[1;31m")), 100, colour=True)
    assert "\x1b[32mQ1" not in text
    assert r"\u001b[32mQ1" in text


def test_a_hundred_findings_are_cut_with_a_count(make_result, make_finding):
    findings = [make_finding(ref=f"Q{i}", uuid=f"u{i}", verdict="exceeded", margin=-0.1) for i in range(100)]
    text = to_table(make_result(*findings), 80)
    assert "and 60 more findings, see the JSON" in text
    assert "100 exceeded" in text
    assert text.count("- {finding: ") == 3


def test_modes_of_one_matter_share_a_row(make_result, make_finding):
    modes = [make_finding(mode=f"m{i}", verdict="exceeded", margin=-0.1 - 0.01 * i) for i in range(4)]
    text = to_table(make_result(*modes))
    assert text.count("exceeded  Q3") == 1
    assert "m3, ambient 55 °C, +24V 29 V; also in m2, m1, m0" in text
    assert "4 exceeded" in text


def test_what_could_not_be_judged_says_why(example):
    assert "Nothing says how Q2 gets rid of its heat" in to_table(example)


def test_close_findings_get_a_line_to_paste_only_where_they_fail_the_run(make_result, make_finding):
    close = make_finding(verdict="close", margin=0.02)
    assert "- {finding: " not in to_table(make_result(close))
    assert "- {finding: " in to_table(make_result(close, fails_from="close"))


def test_long_coverage_lists_are_cut(make_result, make_finding):
    refs = tuple(f"Q{i}" for i in range(50))
    text = to_table(make_result(make_finding(), coverage=Coverage(51, 1, refs, (), ())), 80)
    assert "Q0, Q1, Q2" in text
    assert "and 38 more." in text


def test_a_board_without_findings_is_not_called_safe(make_result):
    text = to_table(make_result(coverage=Coverage(0, 0, (), (), ())))
    assert "nothing was judged" in text
    assert "No power elements were found." in text
