"""YAML to a tree of marked text: what the words mean, where they stand, what is refused."""

import pytest
import yaml

from drc_power.faults import InputError, Mark
from drc_power.intake import tree
from drc_power.intake.tree import MOST_DEPTH, Blank, Branch, tree_of, tree_of_text
from drc_power.intake.values import Text


@pytest.fixture(params=["CSafeLoader", "SafeLoader"], autouse=True)
def loader(request, monkeypatch):
    """Both parsers of PyYAML: libyaml's, and the one in Python where libyaml is missing."""
    monkeypatch.setattr(tree, "_LOADER", getattr(yaml, request.param))


def read(text):
    root, faults = tree_of(text if isinstance(text, bytes) else text.encode(), "f.yaml")
    return root, [str(fault) for fault in faults]


def refused(text):
    with pytest.raises(InputError) as caught:
        read(text)
    return [str(fault) for fault in caught.value.faults]


def test_scalars_stay_text():
    words = ["1e-3", "off", "010", "yes", "0x1F", "1_000", "12:30:45", "2027-03-31", ".inf", "1.0", "=", "+5"]
    root, faults = read("a: [" + ", ".join(words) + "]")
    assert root == {"a": words} and not faults
    assert all(type(word) is Text for word in root["a"])


def test_nothing_is_blank_and_quoted_nothing_is_text():
    root, _ = read('a:\nb: ~\nc: null\nd: ""\ne: "~"\n')
    assert [type(value) for value in root.values()] == [Blank, Blank, Blank, Text, Text]


def test_every_value_and_key_knows_its_place():
    root, _ = read('a: 1\nb:\n  - {c: "x"}\n')
    key = next(key for key in root if key == "b")
    assert (key.mark, root.marks["b"], root["b"][0]["c"].mark) == (Mark("f.yaml", 2, 1), Mark("f.yaml", 3, 3), Mark("f.yaml", 3, 9))


def test_line_ends_and_byte_order_mark_change_nothing():
    plain, _ = read("a: 1\nb: {c: 2}\n")
    assert read("a: 1\r\nb: {c: 2}\r\n")[0] == plain
    assert read("\ufeffa: 1\nb: {c: 2}\n")[0] == plain
    assert read("\ufeffa: 1\r\nb: {c: 2}\r\n")[0]["b"]["c"].mark == Mark("f.yaml", 2, 8)


def test_an_anchor_may_be_used_again():
    root, faults = read("a: &x {b: 1}\nc: *x\n")
    assert root["c"] == {"b": "1"} and not faults


def test_an_empty_file_is_blank():
    assert isinstance(read("")[0], Blank) and isinstance(read("# only a comment\n")[0], Blank)


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        ("a: 1\nb: 2\na: 3\n", "f.yaml:3:1: the key 'a' stands twice, first in line 1; keep one of them"),
        ("a: !!python/object/apply:os.system [true]", "f.yaml:1:4: a tag, 'tag:yaml.org,2002:python/object/apply:os'; remove it; values are plain text here"),
        ("a: !!str 5", "f.yaml:1:4: a tag, 'tag:yaml.org,2002:str'; remove it; values are plain text here"),
        ("a: !mine {b: 1}", "f.yaml:1:4: a tag, '!mine'; remove it; values are plain text here"),
        ("<<: {a: 1}", "f.yaml:1:1: a merge key, '<<'; write the keys out"),
        ("? [a]\n: 1", "f.yaml:1:3: a mapping or a list where a key is due; write key: value"),
        ("~: 1", "f.yaml:1:1: nothing where a key is due; write key: value"),
    ],
)
def test_faults_that_leave_a_tree(text, fault):
    assert read(text)[1] == [fault]


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        ("a: 1\n---\nb: 2\n", "f.yaml:2:1: a second document in one file; keep one; remove the line ---"),
        ("- &a [*a]", "f.yaml:1:7: the alias *a has no anchor above it; put a text that begins with * in quotes"),
        ("parts: *Q", "f.yaml:1:8: the alias *Q has no anchor above it; put a text that begins with * in quotes"),
        (b"a: 1\nb: \0", "f.yaml:2:4: the control character U+0000; save the file as plain UTF-8 text"),
        (b"a: \xff\xfe", "f.yaml:1:4: bytes that are not UTF-8; save the file as UTF-8 text"),
        ("a: µ\nb: \x07", "f.yaml:2:4: the control character U+0007; save the file as plain UTF-8 text"),
        ("[" * 60 + "]" * 60, f"f.yaml:1:{MOST_DEPTH + 1}: nesting deeper than {MOST_DEPTH} levels; write it flatter"),
    ],
)
def test_faults_that_end_the_reading(text, fault):
    assert refused(text) == [fault]


@pytest.mark.parametrize(
    ("text", "place", "advice"),
    [
        ("a: b: c", "f.yaml:1:5", "put the text that holds ': ' in quotes, or check the indentation"),
        ("a: 'x", "f.yaml:1:6", "close the quotes"),
        ("a: @x", "f.yaml:1:4", "put the text in quotes"),
        ("a: {b: 1}}", "f.yaml:1:10", "check the brackets"),
        ("a:\n\tb: 1\n", "f.yaml:2:1", "indent with spaces, not with tabs"),
        ("a: {b: 1\nc: 2", "f.yaml:2:2", "check the commas and brackets"),
    ],
)
def test_broken_yaml_is_one_line_with_its_place(text, place, advice):
    (fault,) = refused(text)
    assert fault.startswith(f"{place}: this is not YAML: ") and fault.endswith(f"; {advice}") and "\n" not in fault


def test_several_faults_are_all_told():
    assert len(read("a: 1\na: 2\nb: !x 1\nb: 2\n")[1]) == 3


def test_a_flood_of_faults_ends_at_a_bound():
    assert len(refused("a: 1\n" * 5000)) == tree.MOST_FAULTS


def test_a_text_of_one_place_keeps_that_place():
    mark = Mark("board.net", 7)
    root = tree_of_text("{sink: rail, interface: 0.6 K/W}", mark)
    assert isinstance(root, Branch) and root["interface"].mark == mark
    with pytest.raises(InputError) as caught:
        tree_of_text("{sink: rail", mark)
    assert caught.value.faults[0].mark == mark
