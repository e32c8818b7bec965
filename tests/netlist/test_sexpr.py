"""The reader of s-expressions, held against a writer that is kept as plain as possible."""

import gc

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from drc_power.faults import InputError
from drc_power.netlist import sexpr
from drc_power.netlist.sexpr import Clause, collector_paused, parse_clauses, unescape
from drc_power.netlist.source import Source


def parse(text):
    return parse_clauses(Source("a.net", text, ""))


def fault_of(text):
    with pytest.raises(InputError) as raised:
        parse(text)
    (fault,) = raised.value.faults
    return fault


def as_tuple(clause: Clause):
    inside = [as_tuple(child) for child in clause.clauses]
    return clause.name, clause.words, clause.values, inside


def test_values_words_and_clauses():
    clause = parse('(field (name "Voltage rating") 25V (dnp) (a (b c)))')
    assert as_tuple(clause) == (
        "field",
        ["25V"],
        [("name", "Voltage rating"), ("dnp", "")],
        [("a", [], [("b", "c")], [])],
    )


@pytest.mark.parametrize(
    "written, text",
    [
        (r'"a \"quoted\" word"', 'a "quoted" word'),
        (r'"back\\slash"', "back\\slash"),
        (r'"one\ntwo\ttabbed\r"', "one\ntwo\ttabbed\r"),
        (r'"\x41\102"', "AB"),
        (r'"\q"', "q"),
        ('"10kΩ ± 5 µ"', "10kΩ ± 5 µ"),
        ('"(not a clause)"', "(not a clause)"),
        ('""', ""),
        ("10kΩ", "10kΩ"),
        ('5"', '5"'),
        ("#PWR01", "#PWR01"),
        ('"a" "b"', "a b"),
        ("a b", "a b"),
    ],
)
def test_words(written, text):
    assert parse(f"(x (value {written}))").value("value") == text


def test_blanks_may_stand_anywhere():
    assert as_tuple(parse('\n ( x\r\n(  a\t"1"  ) ( b  2\n) )\n\n')) == ("x", [], [("a", "1"), ("b", "2")], [])


def test_lines_that_begin_with_a_hash_are_comments():
    clause = parse('# made by hand\n(x (a 1)\n  # (a 2)\n  (b "# 3"))\n#end')
    assert clause.values == [("a", "1"), ("b", "# 3")]


def test_a_clause_knows_where_it_opens():
    source = Source("a.net", '(x\n  (µ 1)\n  (p (q 1)))', "")
    (clause,) = parse_clauses(source).clauses
    assert str(source.mark(clause.at)) == "a.net:3:3"


names = st.from_regex(r"[a-z_]{1,8}", fullmatch=True)
words = st.text(st.characters(exclude_categories=["Cs"], exclude_characters="\0"), max_size=12)
values = st.tuples(names, words)
trees = st.recursive(values, lambda inside: st.tuples(names, words, st.lists(inside, min_size=1, max_size=4)))


def write(tree):
    name, text, *inside = tree
    quoted = text.replace("\\", r"\\").replace('"', r"\"").replace("\n", r"\n")
    return f'({name} "{quoted}" {" ".join(write(child) for child in (inside or [[]])[0])})'


def expected(tree):
    name, text, children = tree
    inside = [expected(child) for child in children if len(child) == 3]
    return name, [text], [child for child in children if len(child) == 2], inside


@settings(max_examples=100)
@given(st.tuples(names, words, st.lists(trees, min_size=1, max_size=5)))
def test_what_is_written_is_read_back(tree):
    assert as_tuple(parse(write(tree))) == expected(tree)


@pytest.mark.parametrize(
    "text, where, found",
    [
        ("(x (a 1)", "a.net:1:9", "the file ends inside the clause (x ...) of line 1"),
        ("(x\n (y (a 1)", "a.net:2:10", "the file ends inside the clause (y ...) of line 2"),
        ("(x (a 1)))", "a.net:1:10", "a closing parenthesis too many"),
        ("(x (a 1))\n(y (b 2))", "a.net:2:1", "a second clause after the end of the first"),
        ("(x (a 1)) y", "a.net:1:1", "text around the one clause"),
        ("(x (a 1)) (y)", "a.net:1:1", "text around the one clause"),
        ("", "a.net:1:1", "text around the one clause"),
        ('(x\n (a "one\n) (b "two"))', "a.net:2:5", 'a quoted text that does not end on its line: ""one"'),
        ('(x (a "one', "a.net:1:7", "a quoted text that does not end on its line"),
        ('(x (a "one\\"))', "a.net:1:7", "a quoted text that does not end on its line"),
    ],
)
def test_faults_say_where(text, where, found):
    fault = fault_of(text)
    assert str(fault.mark) == where
    assert fault.found.startswith(found)


def test_depth_is_bounded():
    deep = sexpr.MAX_DEPTH
    assert parse("(a " * deep + "(a 1)" + ")" * deep).name == "a"
    fault = fault_of("(a " * (deep + 1) + "(a 1)" + ")" * (deep + 1))
    assert (str(fault.mark), fault.found) == ("a.net:1:601", "parentheses nest deeper than 200")


@pytest.mark.parametrize(
    "shape", ['(x (a "{}"))', "(x (a {}))", '(x "{}" (a 1))', "(x {} (a 1))", '(x "\\n{}" (a 1))', "({} (a 1))"]
)
def test_length_of_a_word_is_bounded(shape):
    parse(shape.format("v" * (sexpr.MAX_TOKEN_CHARS - 8)))
    assert "longer than 1048576 characters" in fault_of(shape.format("v" * (sexpr.MAX_TOKEN_CHARS + 1))).found


def test_number_of_words_is_bounded(monkeypatch):
    monkeypatch.setattr(sexpr, "MAX_TOKENS", 10)
    parse("(x" + " (a 1)" * 8 + ")")
    assert "more than 10 words" in fault_of("(x" + " (a 1)" * 9 + ")").found


def test_unescape_leaves_text_without_escapes_alone():
    assert unescape("10 % of 5 V") == "10 % of 5 V"


def test_the_collector_runs_again_afterwards():
    with pytest.raises(InputError), collector_paused():
        assert not gc.isenabled()
        parse("(x")
    assert gc.isenabled()
