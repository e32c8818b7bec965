"""The same circuit gives the same survey, whatever the order in which the file tells it."""

from __future__ import annotations

import random

from hypothesis import given, settings
from hypothesis import strategies as st

from drc_power.netlist.reader import parse_netlist
from drc_power.survey import survey_json, survey_netlist


def _quoted(text: str) -> str:
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'


def _clauses(netlist) -> tuple[list[str], list[str], list[str]]:
    """The netlist as KiCad writes it: component, libpart and net clauses, one text each."""
    comps, libparts, nets = [], [], []
    for part in netlist.parts.values():
        comps.append(
            f"(comp (ref {_quoted(part.ref)}) (value {_quoted(part.value)}) (footprint {_quoted(part.footprint)})"
            f" (libsource (lib {_quoted(part.library)}) (part {_quoted(part.ref + part.symbol)}) (description {_quoted(part.description)}))"
            f" (tstamps {_quoted(part.ref)}))"
        )
        pins = " ".join(f"(pin (num {_quoted(p.number)}) (name {_quoted(p.name)}) (type {_quoted(p.type)}))" for p in part.pins)
        libparts.append(f"(libpart (lib {_quoted(part.library)}) (part {_quoted(part.ref + part.symbol)}) (pins {pins}))")
    for net in netlist.nets.values():
        nodes = [f"(node (ref {_quoted(n.ref)}) (pin {_quoted(n.pin)}))" for n in net.nodes]
        nets.append((net.name, nodes))
    return comps, libparts, nets


def _text(netlist, dice: random.Random | None) -> str:
    comps, libparts, nets = _clauses(netlist)
    if dice:
        for clauses in (comps, libparts, nets):
            dice.shuffle(clauses)
        nets = [(name, dice.sample(nodes, len(nodes))) for name, nodes in nets]
    written = [f"(net (code {i}) (name {_quoted(name)}) {' '.join(nodes)})" for i, (name, nodes) in enumerate(nets, 1)]
    sections = [f"(components {' '.join(comps)})", f"(libparts {' '.join(libparts)})", f"(nets {' '.join(written)})"]
    if dice:
        dice.shuffle(sections)
    return f'(export (version "E") {" ".join(sections)})'


@settings(max_examples=12, deadline=None)
@given(seed=st.integers(0, 2**32 - 1))
def test_shuffled_clauses_give_the_same_survey(drawn_boards, seed):
    dice = random.Random(seed)
    board = dice.choice(drawn_boards)
    plain = survey_json(survey_netlist(parse_netlist(_text(board.netlist, None), "same.net")))
    shuffled = survey_json(survey_netlist(parse_netlist(_text(board.netlist, dice), "same.net")))
    assert shuffled == plain
