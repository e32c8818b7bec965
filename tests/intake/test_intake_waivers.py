"""Waivers: all five keys, a real day, one value with its unit."""

import pytest

from drc_power.intake import read_waivers

GOOD = "- {finding: a, because: b, by: c, until: 2027-03-31, value: 151 °C}\n"

WRONG = [
    ("- {finding: a, because: b, until: 2027-03-31, value: 1 V}", "1:3: a waiver without 'by'; add by: ..."),
    ("- {finding: a, because: b, by: c, until: 2027-02-30, value: 1 V}", "1:42: a date is due here, found '2027-02-30'; write it as 2027-03-31"),
    ("- {finding: a, because: b, by: c, until: 31.3.2027, value: 1 V}", "1:42: a date is due here, found '31.3.2027'; write it as 2027-03-31"),
    ("- {finding: a, because: b, by: c, until: 2027-03-31, value: 1 V .. 2 V}", "1:61: '1 V .. 2 V' is a span where one value is due; write one value"),
    ("- {finding: a, because: b, by: c, until: 2027-03-31, value: hot}", "1:61: 'hot' is not a number with a unit; write for example 24 V or 350 mA or 8 mohm"),
    ('- {finding: a, because: " ", by: c, until: 2027-03-31, value: 1 V}', "1:25: the text ' ' is empty or has control characters; write plain text on one line"),
    ("- {finding: a, because: b, by: c, until: 2027-03-31, value: 1 V, reason: d}", "1:66: 'reason' is not a key of a waiver; "
     "choose from finding, because, by, until, value"),
    ("- a", "1:3: a waiver is due here as a mapping, found 'a'; write {key: value, ...}"),
    ("finding: a", "1:1: a list is due here, found a mapping; write [..., ...]"),
    (GOOD + GOOD + "- {}", "3:3: a waiver without 'finding'; add finding: ..."),
]  # fmt: skip


@pytest.mark.parametrize(("text", "fault"), WRONG)
def test_wrong(project, text, fault):
    project.write("w.yaml", text + "\n")
    faults = project.faults(lambda: read_waivers("w.yaml", str(project.folder)))
    assert f"w.yaml:{fault}" in faults


def test_all_five_keys_are_required(project):
    project.write("w.yaml", "- {}\n- {}\n")
    assert len(project.faults(lambda: read_waivers("w.yaml", str(project.folder)))) == 10


@pytest.mark.parametrize("text", ["", "[]\n", "# none yet\n"])
def test_a_file_without_waivers(project, text):
    project.write("w.yaml", text)
    assert read_waivers("w.yaml", str(project.folder)).waivers == ()


@pytest.mark.parametrize(("text", "value", "dimension"), [("0.93", 0.93, "number"), ("12 A", 12.0, "current"), ("120 mJ", 0.12, "energy"), ("25 K", 25.0, "temperature_difference")])
def test_the_value_keeps_its_unit(project, text, value, dimension):
    project.write("w.yaml", GOOD.replace("151 °C", text))
    found = read_waivers("w.yaml", str(project.folder))
    assert (found.waivers[0].value.typ, found.waivers[0].value.dimension) == (value, dimension)
    assert (found.files[0].role, found.files[0].path) == ("waivers", "w.yaml")
