"""The power tree for programs that draw: read back by the rules of Mermaid and DOT, and drawn by Graphviz where it is."""

from __future__ import annotations

import re
import shutil
import subprocess
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from drc_power.netlist import read_netlist
from drc_power.survey import survey_netlist
from drc_power.survey.diagram import power_diagram
from drc_power.survey.model import Element, Identity, Rail, Survey
from drc_power.survey.trees import MOST_ARROWS, dot_text, mermaid_text

DEMO = Path(__file__).parents[2] / "fixtures" / "frost-fan" / "rev-c.net"


def element(ref, group, role, from_net, to_net):
    return Element(ref, group, role, from_net, to_net, None, 0.8, ("drawn",))


def survey(*elements, rails=(), grounds=("GND",)):
    parts = {e.ref: Identity(e.ref, e.role, 0.8, ()) for e in elements}
    return Survey("b/drawn.net", grounds, tuple(rails), parts, elements, (), (), (), ())


BOARD = survey(
    element("J1", "source", "connector", "GND", "VIN"),
    element("F1", "pass", "fuse", "VIN", "Net-(F1-2)"),
    element("Q1", "pass", "mosfet", "Net-(F1-2)", "+24V"),
    element("Q2", "pass", "mosfet", "Net-(F1-2)", "+24V"),
    element("Q3", "switch", "mosfet", "/HEAT-", "GND"),
    element("D1", "switch", "diode", "GND", "/SW"),
    element("D2", "clamp", "tvs", "+24V", "GND"),
    element("U4", "load", "ic", "+24V", "GND"),
    element("J3", "load", "connector", "/HEAT-", "+24V"),
    element("J3", "load", "connector", "+24V", "/HEAT-"),
    rails=[Rail("+24V", 24.0, "net name", ("Q1", "Q2"))],
)


def mermaid(text):
    """Boxes (kind of bracket, lines) by id and arrows of a flowchart, by Mermaid's documented grammar of flowcharts."""
    chart = re.search(r"```mermaid\n(.*?)\n```\n$", text, re.DOTALL)[1].split("\n")
    assert chart[0] == "flowchart LR"
    boxes, arrows = {}, []
    for line in chart[1:]:
        box = re.fullmatch(r'  (n\d+)([\[({>/]+)"([^"]*)"[\])}/]+', line)
        arrow = re.fullmatch(r'  (n\d+) (-->|-\.->)(?:\|"([^"]*)"\|)? (n\d+)', line)
        assert box or arrow, line
        if box:
            boxes[box[1]] = box[2], tuple(unnumbered(part) for part in box[3].split("<br/>"))
        else:
            arrows.append((arrow[1], arrow[4], unnumbered(arrow[3] or ""), arrow[2] == "-.->"))
    return boxes, arrows


def unnumbered(text):
    assert not set(re.sub(r"#\d+;", "", text)) & set("\"#;<>&`[]{}|\\")
    return re.sub(r"#(\d+);", lambda m: chr(int(m[1])), text)


def dot(text):
    """Boxes and arrows of a digraph, its strings undone by the rules of DOT's escString and its entities."""
    boxes, arrows = {}, []
    for line in text.split("\n"):
        box = re.fullmatch(r'  (n\d+) \[label="((?:[^"\\]|\\.)*)", [^"]*\];', line)
        arrow = re.fullmatch(r'  (n\d+) -> (n\d+)(?: \[(?:label="((?:[^"\\]|\\.)*)")?(?:, )?(style=dotted)?\])?;', line)
        if box:
            boxes[box[1]] = tuple(undone(box[2]).split("\n"))
        elif arrow:
            arrows.append((arrow[1], arrow[2], undone(arrow[3] or ""), bool(arrow[4])))
    return boxes, arrows


def undone(text):
    """A DOT string without its escapes; `\\n` ends a line."""
    plain = re.sub(r"\\(.)", lambda m: "\n" if m[1] == "n" else m[1], text)
    return plain.replace("&amp;", "&")


def test_power_runs_from_the_source_through_elements_and_rails_to_the_loads():
    boxes, arrows = mermaid(mermaid_text(BOARD))
    named = {key: lines[0] for key, (_, lines) in boxes.items()}
    runs = {(named[tail], named[head], label) for tail, head, label, _ in arrows}
    assert runs == {
        ("J1", "F1", "VIN"), ("F1", "Q1, Q2", ""), ("Q1, Q2", "+24V", ""), ("+24V", "U4", ""), ("+24V", "J3", ""),
        ("J3", "Q3", "/HEAT-"), ("+24V", "D2", ""), ("D1", "/SW", "")}
    assert {named[tail] for tail, _, _, dotted in arrows if dotted} == {"+24V", "D1"}


def test_boxes_say_what_they_are():
    boxes, _ = mermaid(mermaid_text(BOARD))
    assert ("[", ("Q1, Q2", "2 in parallel, mosfet")) in boxes.values()
    assert ("[", ("+24V", "24 V (a guess)")) in boxes.values()
    assert ("{{", ("Q3", "mosfet to GND")) in boxes.values()
    assert ("([", ("J1",)) in boxes.values()


def test_both_formats_draw_the_same():
    boxes, arrows = mermaid(mermaid_text(BOARD))
    assert dot(dot_text(BOARD)) == ({key: lines for key, (_, lines) in boxes.items()}, arrows)


def test_values_come_from_the_netlist():
    netlist = read_netlist(DEMO)
    text = mermaid_text(survey_netlist(netlist), netlist)
    assert "F1 20A" in text and "J1 BATTERY 24V" in text


def test_every_element_of_every_board_is_in_its_diagram(drawn_boards):
    for board in drawn_boards:
        found = survey_netlist(board.netlist)
        diagram = power_diagram(found, {})
        words = {word for box in diagram.boxes.values() for line in box.lines for word in line.replace(",", " ").split()}
        cut = any("more" in line for box in diagram.boxes.values() for line in box.lines)
        assert cut or {e.ref for e in found.elements} <= words, board.name
        assert {key for arrow in diagram.arrows for key in (arrow.tail, arrow.head)} <= diagram.boxes.keys()


def test_same_survey_same_bytes(drawn_boards):
    for board in drawn_boards:
        again = survey_netlist(replace(board.netlist))
        assert dot_text(survey_netlist(board.netlist)) == dot_text(again)
        assert mermaid_text(survey_netlist(board.netlist)) == mermaid_text(again)


def test_a_chart_too_large_for_mermaid_is_cut_and_says_so():
    many = [element(f"F{n}", "pass", "fuse", f"A{n}", "B") for n in range(2 * MOST_ARROWS)]
    text = mermaid_text(survey(*many, rails=[Rail(f"A{n}", None, "x", ()) for n in range(2 * MOST_ARROWS)]))
    boxes, arrows = mermaid(text)
    assert len(arrows) == MOST_ARROWS
    assert f"{3 * MOST_ARROWS} of its {4 * MOST_ARROWS} arrows do not fit" in text
    assert {end for arrow in arrows for end in arrow[:2]} == set(boxes)


def test_a_list_sign_in_front_is_no_list():
    text = mermaid_text(survey(element("1. x", "source", "connector", "GND", "- a"), element("R", "pass", "resistor", "- a", "b")))
    assert not re.search(r'"(- |1\. )', text)


HOSTILE = ["\\", "\\\\", '"]; n1 -> n2; a["', "end", "a\\", "\\N", "<b>x</b>", "&lt;", "#quot;", "```\n# x", "|x|", "a;b", "subgraph x", "‮rtl", "\x1b[2J", "%%{init}%%",
           "x" * 5000, "日本", "click n1 href", "`tick`", "a\nb", "_x_ *y*", "%s {0} {}"]


@pytest.mark.parametrize("name", HOSTILE)
def test_hostile_names_stay_inside_their_box(name):
    hostile = survey(element(name, "source", "connector", "GND", f"{name}1"), element(f"{name}Q", "pass", "mosfet", f"{name}1", f"{name}2"),
                     element(f"{name}U", "load", "ic", f"{name}2", "GND"), rails=[Rail(f"{name}2", None, "x", ())])
    check_reads_back(replace(hostile, netlist=f"{name}.net"))


@settings(max_examples=60, deadline=None)
@given(st.lists(st.text(min_size=1, max_size=30), min_size=4, max_size=4, unique=True))
def test_any_names_stay_inside_their_box(names):
    j, net, q, rail = names
    check_reads_back(survey(element(j, "source", "connector", "GND?", net), element(q, "pass", "mosfet", net, rail),
                            rails=[Rail(rail, 1.0, "x", ())], grounds=("GND?",)))


def check_reads_back(hostile):
    boxes, arrows = mermaid(mermaid_text(hostile))
    diagram = power_diagram(hostile, {})
    assert sorted(lines for _, lines in boxes.values()) == sorted(tuple(box.lines) for box in diagram.boxes.values())
    assert len(arrows) == len(diagram.arrows)
    assert sorted(dot(dot_text(hostile))[0].values()) == sorted(lines for _, lines in boxes.values())


@pytest.mark.skipif(not shutil.which("dot"), reason="Graphviz is not installed")
def test_graphviz_reads_it(tmp_path):
    names = [name for name in HOSTILE if "\x1b" not in name]
    hostile = survey(*(element(name, "pass", "mosfet", f"{name}<", f"{name}>") for name in names))
    for text in (dot_text(hostile), dot_text(survey_netlist(read_netlist(DEMO)))):
        done = subprocess.run(["dot", "-Tplain"], input=text.encode(), capture_output=True, check=True, timeout=60)
        assert not done.stderr
        assert done.stdout.count(b"\nnode ") == len(dot(text)[0])
