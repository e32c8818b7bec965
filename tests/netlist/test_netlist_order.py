"""The order in which a netlist lists its clauses changes nothing."""

import re
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from drc_power.netlist import parse_netlist

FORMATS = sorted((Path(__file__).parent / "formats").glob("*.net"))
TOKEN = re.compile(r'"(?:[^"\\]|\\.)*"|[()]|[^\s()]+')


def tree_of(text):
    """The clauses as nested lists of raw tokens, by the plainest means."""
    stack = [[]]
    for token in TOKEN.findall(text):
        if token == "(":
            stack.append([])
        elif token == ")":
            stack[-2].append(stack.pop())
        else:
            stack[-1].append(token)
    return stack[0][0]


def shuffled(tree, rng):
    """The same clauses in another order. Only properties keep theirs: those of the sheet come last."""
    words = [item for item in tree if isinstance(item, str)]
    clauses = [shuffled(item, rng) for item in tree if isinstance(item, list)]
    properties = iter([clause for clause in clauses if clause[0] == "property"])
    rng.shuffle(clauses)
    return words[:1] + [next(properties) if clause[0] == "property" else clause for clause in clauses] + words[1:]


def text_of(tree):
    return tree if isinstance(tree, str) else f"({' '.join(text_of(item) for item in tree)})"


def content(netlist):
    """All that a netlist says but where it stands in the file, with the order of everything."""
    parts = [(ref, replace(part, line=0), list(part.fields)) for ref, part in netlist.parts.items()]
    nets = [(name, replace(net, line=0)) for name, net in netlist.nets.items()]
    return netlist.version, netlist.tool, netlist.title, netlist.revision, parts, nets


JUMPERS = """(export (version "E")
  (components
    (comp (ref "J1") (jumper_pin_groups (group (pin "1") (pin "3")) (group (pin "2") (pin "4"))))
    (comp (ref "J2") (duplicate_pin_numbers_are_jumpers "1") (libsource (lib "A") (part "B"))))
  (libparts
    (libpart (lib "A") (part "B") (pins (pin (num "1") (name "X") (type "input"))))
    (libpart (lib "A") (part "B") (pins (pin (num "1") (name "Y") (type "output")) (pin (num "2")))))
  (nets
    (net (code "1") (name "/B") (node (ref "J1") (pin "1")) (node (ref "J2") (pin "1") (pinfunction "X_1")))
    (net (code "2") (name "/A") (node (ref "J1") (pin "3")))
    (net (code "3") (name "Net-(J2-X)") (node (ref "J2") (pin "1")) (node (ref "J1") (pin "2")))
    (net (code "4") (name "GND") (node (ref "J1") (pin "4")))))"""
TEXTS = {path.stem: path.read_text(encoding="utf-8") for path in FORMATS} | {"jumpers": JUMPERS}


@pytest.mark.parametrize("name", TEXTS)
@settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(rng=st.randoms(use_true_random=False))
def test_shuffled_clauses_give_the_same_netlist(name, rng):
    tree = tree_of(TEXTS[name])
    assert content(parse_netlist(text_of(shuffled(tree, rng)), "x.net")) == content(parse_netlist(TEXTS[name], "x.net"))
