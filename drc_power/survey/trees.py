"""The power tree for programs that draw: Mermaid inside Markdown, and Graphviz DOT."""

from __future__ import annotations

import os
import re
from collections.abc import Sequence

from drc_power.netlist.model import Netlist
from drc_power.survey.diagram import Arrow, Box, Diagram, power_diagram
from drc_power.survey.model import Survey
from drc_power.text import printable, shorten

MOST_ARROWS = 450
"""Mermaid draws 500 at most unless the page that shows it says otherwise."""

_GUESSED = "Voltages are guesses from names and part numbers until somebody annotates them. Dotted: only now and then."

_MERMAID_SHAPES = {
    "source": '(["{}"])', "rail": '["{}"]', "net": '("{}")', "pass": '["{}"]', "switch": '{{{{"{}"}}}}', "load": '[/"{}"/]', "clamp": '>"{}"]',
}
_DOT_SHAPES = {
    "source": "shape=oval", "rail": "shape=box, penwidth=2", "net": "shape=box, style=rounded", "pass": "shape=box",
    "switch": "shape=hexagon", "load": "shape=note", "clamp": "shape=cds, style=dotted",
}
_LIST_SIGN = re.compile(r"([0-9]+[.)]|[-+])(?= |$)")
_PLAIN = re.compile(r"[A-Za-z0-9 .,:+/()=%-]|[^\x00-\x7f]")


def mermaid_text(survey: Survey, netlist: Netlist | None = None) -> str:
    """The power tree as Markdown with a Mermaid flowchart in it; with the netlist, parts show their values.

    A flowchart of more than `MOST_ARROWS` arrows is cut, the supply's way kept before loads and clamps, and says so.
    """
    diagram = _diagram(survey, netlist)
    drawn = Diagram(diagram.boxes, diagram.arrows[:MOST_ARROWS])
    missing = len(diagram.arrows) - len(drawn.arrows)
    cut = f" {missing} of its {len(diagram.arrows)} arrows do not fit into one chart and are left out." if missing else ""
    title = shorten(printable(os.path.basename(survey.netlist)), 80)
    chart = "\n".join(["flowchart LR", *_mermaid_lines(drawn)])
    return f"# Power tree of {_escaped(title, '&#{};')}\n\n{_GUESSED}{cut}\n\n```mermaid\n{chart}\n```\n"


def dot_text(survey: Survey, netlist: Netlist | None = None) -> str:
    """The power tree as a Graphviz digraph; with the netlist, parts show their values."""
    diagram = _diagram(survey, netlist)
    ids = _ids(diagram)
    lines = [f"  {ids[key]} [label={_quoted(box.lines)}, {_DOT_SHAPES[box.kind]}];" for key, box in _drawn(diagram)]
    lines += [f"  {ids[a.tail]} -> {ids[a.head]}{_dot_manner(a)};" for a in diagram.arrows]
    head = ["digraph power_tree {", "  rankdir=LR;", '  node [fontname="sans-serif", fontsize=11];', '  edge [fontname="sans-serif", fontsize=9];']
    note = _quoted((shorten(printable(os.path.basename(survey.netlist)), 80), _GUESSED))
    return "\n".join([*head, f"  label={note};", "  fontsize=11;", *lines, "}"]) + "\n"


def _diagram(survey: Survey, netlist: Netlist | None) -> Diagram:
    values = {ref: part.value for ref, part in netlist.parts.items()} if netlist else {}
    return power_diagram(survey, values)


def _drawn(diagram: Diagram) -> list[tuple[str, Box]]:
    """The boxes that some arrow touches."""
    touched = {key for arrow in diagram.arrows for key in (arrow.tail, arrow.head)}
    return [(key, box) for key, box in diagram.boxes.items() if key in touched]


def _ids(diagram: Diagram) -> dict[str, str]:
    return {key: f"n{number}" for number, key in enumerate(diagram.boxes, 1)}


def _mermaid_lines(diagram: Diagram) -> list[str]:
    ids = _ids(diagram)
    boxes = [f"  {ids[key]}" + _MERMAID_SHAPES[box.kind].format("<br/>".join(map(_label, box.lines))) for key, box in _drawn(diagram)]
    return boxes + [f"  {ids[a.tail]} {_mermaid_manner(a)} {ids[a.head]}" for a in diagram.arrows]


def _mermaid_manner(arrow: Arrow) -> str:
    line = "-.->" if arrow.dotted else "-->"
    return line + (f'|"{_label(arrow.label)}"|' if arrow.label else "")


def _label(line: str) -> str:
    """A line inside Mermaid's quotes, which also reads some Markdown: a list's sign at the start is escaped too."""
    lead = _LIST_SIGN.match(line)
    kept = lead.end() if lead else 0
    return "".join(f"#{ord(c)};" for c in line[:kept]) + _escaped(line[kept:], "#{};")


def _escaped(text: str, reference: str) -> str:
    """Printable text in which only plain letters and signs stand for themselves, the others by their number.

    >>> _escaped('a"b', "#{};"), _escaped("x_y", "&#{};")
    ('a#34;b', 'x&#95;y')
    """
    return "".join(c if _PLAIN.match(c) else reference.format(ord(c)) for c in text)


def _dot_manner(arrow: Arrow) -> str:
    manners = [f"label={_quoted((arrow.label,))}"] * bool(arrow.label) + ["style=dotted"] * arrow.dotted
    return f" [{', '.join(manners)}]" if manners else ""


def _quoted(lines: Sequence[str]) -> str:
    """Lines as one DOT string, in which `\\` would start an escape and `\\n` ends a line; `&` would start an entity."""
    escaped = (line.replace("\\", "\\\\").replace('"', '\\"').replace("&", "&amp;") for line in lines)
    return '"' + "\\n".join(escaped) + '"'
