"""The findings JSON: keys and order of the format, the same bytes everywhere, and back."""

import dataclasses
import json
import os
import random
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import drc_power
from drc_power.faults import InputError
from drc_power.report.json_reader import load_result, read_result
from drc_power.report.json_writer import to_json

GOLDEN = Path(__file__).parent / "golden" / "example.json"

# The findings format, keys in this order. `outside_because` is the project's addition for the reasons.
KEYS = "format tool today board inputs verdict tally coverage parts rails loads rules operating_points nets findings"
KEYS_OF = {
    "tool": "name version",
    "board": "name revision netlist parts nets",
    "tally": "exceeded unproven close waived met",
    "coverage": "elements judged unproven outside outside_because not_fitted",
}
KEYS_OF_ROWS = {
    "inputs": "role path sha256",
    "parts": "ref uuid sheet value device role",
    "operating_points": "mode corner ref role voltage current rms power tj case",
    "nets": "mode corner net voltage current",
    "findings": "id rule stress verdict was ref uuid sheet net mode event corner quantity value allowed rated unit "
    "margin text remedy inputs_used sensitivity samples workings where",
}


def test_the_example_reads_as_the_golden_file(example):
    text = to_json(example).replace(f'"version": "{drc_power.__version__}"', '"version": "0.1.0"')
    assert text == GOLDEN.read_text(encoding="utf-8")


def test_keys_stand_in_the_order_of_the_format(example):
    document = json.loads(to_json(dataclasses.replace(example, notes=())))
    assert list(document) == KEYS.split()
    for name, keys in KEYS_OF.items():
        assert list(document[name]) == keys.split()
    for name, keys in KEYS_OF_ROWS.items():
        assert {tuple(row) for row in document[name]} == {tuple(keys.split())}
    row = next(row for row in document["findings"] if row["ref"] == "Q3")
    assert list(row["workings"][0]) == ["symbol", "formula", "numbers", "value", "unit", "source"]
    assert list(row["where"]) == ["file", "line"]


def test_the_order_in_which_things_were_found_does_not_matter(example):
    mixed = dataclasses.replace(example, **{
        name: tuple(random.Random(5).sample(getattr(example, name), len(getattr(example, name))))
        for name in ("findings", "parts", "rails", "operating_points", "nets", "inputs")
    })
    assert to_json(mixed) == to_json(example)


def test_numbers_are_finite_rounded_and_shortest(example, make_finding):
    finding = make_finding(value=0.1 + 0.2, allowed=float("inf"), rated=float("nan"), margin=-0.0,
                           samples={"p": np.array([[1, 2]]), "q": np.float32(0.5), "n": np.int64(3), "s": {"b", "a"}})
    text = to_json(dataclasses.replace(example, findings=(finding,)))
    row = json.loads(text, parse_constant=pytest.fail)["findings"][0]
    assert (row["value"], row["allowed"], row["rated"]) == (0.3, None, None)
    assert row["samples"] == {"p": [[1, 2]], "q": 0.5, "n": 3, "s": ["a", "b"]}
    assert '"margin": 0.0' in text


@given(st.floats(1e-30, 1e30), st.integers(-3, 3))
def test_last_bits_that_differ_between_machines_do_not_show_unless_they_straddle_a_rounding(value, steps):
    from drc_power.report.json_writer import _rounded

    near = value
    for _ in range(abs(steps)):
        near = float(np.nextafter(near, np.inf if steps > 0 else 0.0))
    assert abs(_rounded(near) - _rounded(value)) <= 1.1e-11 * value
    assert _rounded(_rounded(value)) == _rounded(value)
    assert _rounded(value) == pytest.approx(value, rel=5e-12)


def test_an_extra_key_cannot_hide_one_of_the_format(example):
    with pytest.raises(ValueError, match="verdict"):
        to_json(dataclasses.replace(example, extra={"verdict": "met"}))
    assert json.loads(to_json(dataclasses.replace(example, extra={"more": [1]})))["more"] == [1]


def test_hostile_text_comes_back_as_it_was_and_nothing_invisible_stands_in_the_file(hostile, hostile_result):
    text = to_json(hostile_result)
    assert text.isascii() or all(c.isprintable() or c == "\n" for c in text)
    text.encode("utf-8")
    row = load_result(text)["findings"][0]
    assert row["ref"] == row["text"] == row["corner"] == hostile
    assert json.loads(text)["coverage"]["outside_because"] == {hostile: hostile}


def test_letters_beyond_ascii_stay_readable(example, make_finding):
    assert "100 µΩ at 55 °C" in to_json(dataclasses.replace(example, findings=(make_finding(text="100 µΩ at 55 °C"),)))


PROGRAM = """
from drc_power.findings.model import *
from drc_power.report.json_writer import to_json
from drc_power.report.markdown import to_markdown
from drc_power.report.terminal import to_table
import sys
names = {f"Q{i}" for i in range(40)}
findings = tuple(Finding(f"id{n}", "junction.steady", "tj", "close", None, n, n, "/", None, "run", None, "hot",
                         "temperature", 100.0, 110.0, 120.0, "°C", 0.05, "text", "") for n in names)
result = Result("b", "r", "n", 40, 1, (), findings, Coverage(40, 40, tuple(names), (), tuple(names)),
                parts=tuple(PartRow(n, n, "/", "", None, "") for n in names), extra={"names": names})
sys.stdout.buffer.write((to_json(result) + to_markdown(result) + to_table(result)).encode())
"""


def test_the_same_bytes_whatever_the_hash_seed_and_locale():
    outputs = {
        subprocess.run([sys.executable, "-c", PROGRAM], capture_output=True, check=True,
                       env=os.environ | {"PYTHONHASHSEED": seed, "LC_ALL": locale, "TZ": zone}).stdout
        for seed, locale, zone in (("0", "C", "UTC"), ("1", "C.UTF-8", "Asia/Tokyo"), ("77", "de_DE", "UTC"))
    }
    assert len(outputs) == 1


def test_what_was_written_is_read_back(example):
    assert load_result(to_json(example)) == json.loads(to_json(example))


@pytest.mark.parametrize(
    ("change", "said"),
    [
        ({"format": 2}, "is of format 2, and this version reads format 1"),
        ({"format": True}, "is of format true"),
        ({"findings": {}}, "findings is not a list"),
        ({"findings": [7]}, "findings[0] is not an object"),
        ({"findings": [{"id": "x"}]}, "findings[0] has no rule"),
        ({"parts": None}, "parts is not a list"),
        ({"coverage": []}, "coverage is not an object"),
        ({"coverage": {"elements": 1, "judged": 1, "unproven": ["Q1", 2], "outside": [], "not_fitted": []}},
         'coverage.unproven cannot be ["Q1", 2]'),
        ({"board": None}, "board is not an object"),
    ],
)
def test_a_document_of_another_shape_is_refused_with_what_is_wrong(example, change, said):
    document = json.loads(to_json(example)) | change
    with pytest.raises(InputError) as refusal:
        load_result(json.dumps(document), "base.json")
    assert str(refusal.value).startswith("base.json: ")
    assert said in str(refusal.value)


@pytest.mark.parametrize(
    ("key", "value"), [("verdict", "fine"), ("verdict", []), ("margin", "0.1"), ("ref", 3), ("was", "ok")]
)
def test_a_finding_with_a_wrong_value_is_refused(example, key, value):
    document = json.loads(to_json(example))
    document["findings"][2][key] = value
    with pytest.raises(InputError, match=rf"findings\[2\]\.{key} cannot be"):
        load_result(json.dumps(document))


def test_no_more_than_five_faults_are_listed(example):
    document = json.loads(to_json(example))
    document["findings"] = [{}] * 100
    with pytest.raises(InputError) as refusal:
        load_result(json.dumps(document))
    assert len(refusal.value.faults) == 5


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", "base.json:1:1: is not JSON"),
        ('{"format": 1,\n "findings": [}', "base.json:2:15: is not JSON"),
        ("[1, 2]", "is not a findings file"),
        ('{"format": 1}', "is not a findings file"),
        ('{"format": 1, "findings": [NaN]}', "NaN is not a JSON number"),
        ("[" * 100_000, "is nested too deeply"),
        ('{"format": 1, "findings": ' + "9" * 5_000 + "}", "is not JSON"),
    ],
    ids=["empty", "syntax", "list", "no findings", "NaN", "deep", "long number"],
)
def test_text_that_is_no_findings_json_is_one_sentence(text, said):
    with pytest.raises(InputError) as refusal:
        load_result(text, "base.json")
    assert said in str(refusal.value)
    assert "\n" not in str(refusal.value)


def test_files_that_cannot_be_read(tmp_path, example):
    (tmp_path / "latin.json").write_bytes(b'"\xe9"')
    (tmp_path / "good.json").write_text(to_json(example), encoding="utf-8")
    assert read_result(str(tmp_path / "good.json"))["verdict"] == "exceeded"
    unreadable = {"latin.json": "is not UTF-8", "none.json": "no such file", "": "is a directory", "a\0b": "null"}
    for name, said in unreadable.items():
        with pytest.raises(InputError, match=said):
            read_result(f"{tmp_path}/{name}")
