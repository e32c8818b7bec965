"""A revision compared, for a comment and for the terminal."""

import dataclasses
import re

import pytest

from drc_power.findings.compare import compare
from drc_power.findings.model import Coverage, PartRow
from drc_power.report.comparison import comparison_markdown, comparison_table
from drc_power.report.json_reader import load_result
from drc_power.report.json_writer import to_json
from drc_power.text import display_width

OUR_ELEMENTS = set("p strong table thead tbody tr th td details summary ul li code span".split())
COLOUR = re.compile(r"\x1b\[[0-9;]+m")


def _compare(base, head):
    return compare(load_result(to_json(base)), load_result(to_json(head)))


@pytest.fixture
def revised(example, make_finding):
    """Revision C of the example: Q3 is now Q5 and cooler, R12 is worse, C3 is new, D4 is gone."""
    changed = {
        "Q3": {"ref": "Q5", "verdict": "met", "value": 100.0, "margin": 0.526},
        "R12": {"verdict": "exceeded", "value": 0.13, "margin": -0.04},
    }
    findings = [dataclasses.replace(f, **changed.get(f.ref, {})) for f in example.findings if f.ref != "D4"]
    new = make_finding(ref="C3", uuid="/root/c3", rule="derating.voltage", stress="voltage", quantity="voltage",
                       unit="V", value=30.0, allowed=25.0, margin=-0.2, verdict="exceeded")
    return dataclasses.replace(
        example, board_revision="C", findings=(*findings, new), coverage=Coverage(6, 5, (), (), ("R77", "Q2")),
        rails=(), parts=(PartRow("Q5", "/root/q3", "/", "NF6010", "nfet-60v-8m", "mosfet"),
                         PartRow("R12", "/root/r12", "/", "10k", None, "resistor"),
                         PartRow("C3", "/root/c3", "/", "10u", None, "capacitor")))


def test_nothing_changed(example):
    found = _compare(example, example)
    assert comparison_markdown(found) == (
        "**Power check compared: as good as before** - Frost fan controller, revision B to B: "
        "limits exceeded → limits exceeded\n")
    assert len(comparison_table(found).splitlines()) == 1


def test_a_revision_as_markdown(example, revised):
    assert comparison_markdown(_compare(example, revised)).splitlines() == [
        "**Power check compared: something got worse** - Frost fan controller, revision B to C: "
        "limits exceeded → limits exceeded",
        "",
        "**Worse**",
        "",
        "| Part | What | Verdict | Found | Allowed | Margin | Worst corner |",
        "| --- | --- | --- | --- | --- | --- | --- |",
        "| `R12` | power | close → exceeded | 118 mW → 130 mW | ≤ 125 mW | 5.6 % → -4.0 % "
        "| run, ambient 55 °C, +24V 29 V |",
        "",
        "**New**",
        "",
        "| Part | What | Verdict | Found | Allowed | Margin | Worst corner |",
        "| --- | --- | --- | --- | --- | --- | --- |",
        "| `C3` | voltage | exceeded | 30 V | ≤ 25 V | -20.0 % | run, ambient 55 °C, +24V 29 V |",
        "",
        "<details>",
        "<summary>Better</summary>",
        "",
        "| Part | What | Verdict | Found | Allowed | Margin | Worst corner |",
        "| --- | --- | --- | --- | --- | --- | --- |",
        "| `Q5` | junction temperature | exceeded → met | 163.2 °C → 100.0 °C | ≤ 150.0 °C "
        "| -13.9 % → 52.6 % | run, ambient 55 °C, +24V 29 V |",
        "",
        "</details>",
        "",
        "<details>",
        "<summary>Gone</summary>",
        "",
        "and 1 that needs no action",
        "",
        "</details>",
        "",
        "<details>",
        "<summary>Coverage otherwise changed</summary>",
        "",
        "| Part | Before | Now |",
        "| --- | --- | --- |",
        "| `Q2` | unproven | not fitted |",
        "",
        "</details>",
        "",
        "- Parts added: `C3 (10u)`",
        "- Value or device changed: `Q5 (NF6008 → NF6010)`",
        "- Re-annotated: `Q3 → Q5`",
        "- Rails removed: `+5V`, `+24V`",
    ]


def test_a_revision_as_text_says_the_same(example, revised):
    found = _compare(example, revised)
    text = comparison_table(found, 140)
    for words in ("something got worse", "R12  power  close → exceeded  118 mW → 130 mW", "C3  voltage  exceeded",
                  "Q5  junction temperature  exceeded → met", "Re-annotated: Q3 → Q5", "Q2  unproven  not fitted"):
        assert words in text
    assert COLOUR.sub("", comparison_table(found, 140, colour=True)) == text
    assert all(display_width(line) <= 60 for line in comparison_table(found, 60).splitlines())


def test_modes_of_one_matter_share_a_row(make_result, make_finding):
    base = make_result(*[make_finding(mode=m) for m in ("run", "gale", "idle")])
    head = make_result(*[make_finding(mode=m, verdict="exceeded", margin=-x) for m, x in (("run", 0.1), ("gale", 0.3))],
                       make_finding(mode="idle", verdict="close", margin=0.01))
    rows = [line for line in comparison_markdown(_compare(base, head)).splitlines() if line.startswith("| `Q3`")]
    assert [re.search(r"met → \w+", row)[0] for row in rows] == ["met → exceeded", "met → close"]
    assert rows[0].endswith("| gale, ambient 55 °C, +24V 29 V; also in run |")


def test_the_way_back_is_better_where_nothing_new_needs_action(example, make_finding, make_result):
    bad = make_result(make_finding(verdict="exceeded", margin=-0.1))
    good = make_result(make_finding(verdict="met", margin=0.4))
    assert comparison_table(_compare(bad, good)).startswith("better: ")
    assert comparison_table(_compare(good, bad)).startswith("something got worse: ")


def test_a_part_that_nobody_judges_any_more_is_worse(make_result, make_finding):
    one, two = make_finding(), make_finding(ref="Q4", uuid="/root/q4")
    parts = tuple(PartRow(r, f"/root/{r.lower()}", "/", "", None, "") for r in ("Q3", "Q4"))
    found = _compare(make_result(one, two, parts=parts), make_result(one, parts=parts))
    text = comparison_table(found)
    assert text.startswith("something got worse")
    assert "Q4  judged  not judged" in text


def test_a_whole_new_board_stays_under_a_hundred_lines(make_result, make_finding):
    def board(letter, verdict, margin):
        refs = [f"{letter}{i}" for i in range(300)]
        findings = [make_finding(ref=r, uuid=r, verdict=verdict, margin=margin) for r in refs]
        return make_result(*findings, parts=tuple(PartRow(r, r, "/", r, None, "") for r in refs),
                           rails=tuple({"net": r} for r in refs))

    found = _compare(board("A", "exceeded", -0.1), board("B", "close", 0.01))
    for text in (comparison_markdown(found), comparison_table(found)):
        assert len(text.splitlines()) < 100
        assert len(text) < 60_000


def test_hostile_names_stay_literal_in_both(hostile, hostile_result, make_result):
    markdown_it = pytest.importorskip("markdown_it")
    empty = make_result()
    for found in (_compare(empty, hostile_result), _compare(hostile_result, empty)):
        html = markdown_it.MarkdownIt("commonmark").enable("table").render(comparison_markdown(found))
        elements = set(re.findall(r"<(\w+)", html))
        assert elements <= OUR_ELEMENTS
        assert {row.count("<td>") for row in re.findall(r"<tr>.*?</tr>", html, re.DOTALL)} <= {0, 3, 7}
        text = comparison_table(found, 80)
        assert all(c.isprintable() or c == "\n" for c in text)
        assert all(display_width(line) <= 80 for line in text.splitlines())
