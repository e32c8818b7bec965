"""Putting entries into a user's file: in the right place, in its own manner, with every byte of it kept."""

from __future__ import annotations

import pytest

from drc_power.draft.page import Page
from drc_power.draft.whole import inserted
from drc_power.draft.writing import Entry, commented, entry
from drc_power.faults import InputError
from drc_power.intake.tree import tree_of

NEW = [entry("+5V", {"voltage": ""}, "guess: 5 V", names={"+5V"}), commented("VIN", {"voltage": ""}, "solved", names={"VIN"})]
LINES = ['"+5V": {voltage: }   # guess: 5 V', "# VIN: {voltage: }   # solved"]


def put(text: str, entries=NEW, section: str = "rails", blocks=()) -> str:
    return inserted(Page(text, "b.yaml"), {section: entries}, blocks)


@pytest.mark.parametrize(("before", "after"), [
    ("rails:\n  A: {x: 1}\n", "rails:\n  A: {x: 1}\n  %s\n  %s\n"),
    ("rails:\n  A: {x: 1}   # mine\nloads: {}\n", "rails:\n  A: {x: 1}   # mine\n  %s\n  %s\nloads: {}\n"),
    ("rails:\n      A: 1\n\n# next\nloads:\n", "rails:\n      A: 1\n      %s\n      %s\n\n# next\nloads:\n"),
    ("rails:\n  A: 1\n  # later: B\n# loads\nloads:\n", "rails:\n  A: 1\n  # later: B\n  %s\n  %s\n# loads\nloads:\n"),
    ("rails:\n  A:\n    x: 1\n    y:\n     - 2\n     - 3   # three\nloads:\n", "rails:\n  A:\n    x: 1\n    y:\n     - 2\n     - 3   # three\n  %s\n  %s\nloads:\n"),
    ("rails:\n  A:\n  - 1\n  - 2\n", "rails:\n  A:\n  - 1\n  - 2\n  %s\n  %s\n"),
    ("rails:\n  A:   # blank\nloads:\n", "rails:\n  A:   # blank\n  %s\n  %s\nloads:\n"),
    ("rails:\nloads:\n", "rails:\n  %s\n  %s\nloads:\n"),
    ("rails:   # none yet\n  # a thought\n\nloads:\n", "rails:   # none yet\n  # a thought\n  %s\n  %s\n\nloads:\n"),
    ("rails:", "rails:\n  %s\n  %s\n"),
    ("rails:\n  A: 1", "rails:\n  A: 1\n  %s\n  %s\n"),
    ("rails:\n  A: |\n    text\n    more\nloads:\n", "rails:\n  A: |\n    text\n    more\n  %s\n  %s\nloads:\n"),
    ("rails:\n  A: two\n    lines\nloads:\n", "rails:\n  A: two\n    lines\n  %s\n  %s\nloads:\n"),
    ("\ufeffrails:\n  A: 1\n", "\ufeffrails:\n  A: 1\n  %s\n  %s\n"),
    ("rails:\r\n  A: 1\r\nloads:\r\n", "rails:\r\n  A: 1\r\n  %s\r\n  %s\r\nloads:\r\n"),
    ("---\nrails:\n  A: 1\n...\n# after\n", "---\nrails:\n  A: 1\n  %s\n  %s\n...\n# after\n"),
    ("x: &a {y: 1}\nrails:\n  A: *a\nloads:\n", "x: &a {y: 1}\nrails:\n  A: *a\n  %s\n  %s\nloads:\n"),
    ("  rails:\n    A: 1\n  loads:\n", "  rails:\n    A: 1\n    %s\n    %s\n  loads:\n"),
    ('"rails":\n  "µ ü": 1   # ± 日本\n', '"rails":\n  "µ ü": 1   # ± 日本\n  %s\n  %s\n'),
])
def test_below_the_last_entry_in_its_indentation(before, after):
    assert put(before) == after % tuple(LINES)


@pytest.mark.parametrize(("before", "after"), [
    ("rails: {}\n", 'rails: {\n    "+5V": {voltage: },   # guess: 5 V\n    # VIN: {voltage: }   # solved\n  }\n'),
    ("rails: {A: {x: 1}}   # mine\n", 'rails: {A: {x: 1},\n    "+5V": {voltage: },   # guess: 5 V\n    # VIN: {voltage: }   # solved\n  }   # mine\n'),
    ("rails: {A: 1, }\n", 'rails: {A: 1, \n    "+5V": {voltage: },   # guess: 5 V\n    # VIN: {voltage: }   # solved\n  }\n'),
    ("rails: {\n  A: 1   # a, b\n}\nx: 1\n", 'rails: {\n  A: 1,   # a, b\n    "+5V": {voltage: },   # guess: 5 V\n    # VIN: {voltage: }   # solved\n}\nx: 1\n'),
    ("rails: {\n  A: 1,   # a\n  # end\n  }\n", 'rails: {\n  A: 1,   # a\n  # end\n    "+5V": {voltage: },   # guess: 5 V\n    # VIN: {voltage: }   # solved\n  }\n'),
])
def test_inside_the_braces_of_a_section_in_braces(before, after):
    assert put(before) == after


def test_blocks_go_to_the_end_and_entries_before_them():
    assert put("rails:\n  A: 1", blocks=["loads:\n  x: 1"]) == f"rails:\n  A: 1\n  {LINES[0]}\n  {LINES[1]}\n\nloads:\n  x: 1\n"
    assert put("rails:\n  A: 1\n...\n", [], blocks=["loads:\n  x: 1"]) == "rails:\n  A: 1\n\nloads:\n  x: 1\n...\n"


def test_a_name_with_a_hash_inside_keeps_its_comma_inside_braces():
    odd = [entry("A   # B", {"net": '"x   # y"'}, "a remark", names={"A   # B"})]
    text = put("rails: {}\n", odd)
    assert tree_of(text.encode(), "x")[0]["rails"] == {"A   # B": {"net": "x   # y"}}


@pytest.mark.parametrize(("text", "said"), [
    ("{rails: {}}", "b.yaml:1:1: the file is not a mapping with a line for each key"),
    ("- rails", "b.yaml:1:1: the file is not a mapping"),
    ("rails: ~\n", "b.yaml:1:8: rails: does not hold names with values of their own; leave nothing after the colon"),
    ("rails: [a]\n", "b.yaml:1:8: rails: does not hold names"),
    ("x: &a {y: 1}\nrails: *a\n", "b.yaml:2:8: rails: does not hold names"),
    ("rails: text\n", "b.yaml:1:8: rails: does not hold names"),
    ("rails: {a: 1\n", "this is not YAML"),
    ("rails: {}\nrails: {}\n", "the key 'rails' stands twice"),
    # A line separator ends a line for YAML and not for an editor: what goes below the editor's line changes the meaning.
    ("rails: {A: 1}\u2028loads:\n  x: 1\n", None),
    ("rails:\n  A: 1\u2028loads: {}\n", "there is no place in this file"),
])
def test_what_has_no_place_is_refused_and_not_guessed(text, said):
    if said is None:
        assert set(tree_of(put(text).encode(), "x")[0]["rails"]) == {"A", "+5V"}
        return
    with pytest.raises(InputError) as caught:
        put(text)
    assert said in str(caught.value)


def test_entries_of_several_lines_have_no_room_in_braces():
    with pytest.raises(InputError, match="write its entries one below the other"):
        put("rails: {}\n", [Entry("a:\n  b: 1", "a")])


def test_statements_are_entries_and_comment_lines():
    page = Page('loads:   # intro\n  # a U1 on +5V\n  x: {net: "+3V3"}   # U4\n  y:\n    # inside y\n    net: GND\n  # last\n# next section\nparts:\n', "b")
    found = page.statements("loads")
    assert [(s.key, sorted(s.scalars)) for s in found if not s.is_comment] == [("x", ["+3V3", "net"]), ("y", ["GND", "net"])]
    assert [s.text.strip() for s in found if s.is_comment] == ["# a U1 on +5V", "# last", "# next section"]
    assert found[0].speaks_of("+3V3") and found[0].speaks_of("U4") and not found[0].speaks_of("3V3") and not found[0].speaks_of("U")
