"""Each way in which a rule pack can be wrong, how packs lie over each other, and the packs that come with the tool."""

import os

import pytest

from drc_power.intake import read_rules
from drc_power.intake.rules import shipped_packs

HEAD = "format: 1\nname: House\n"

WRONG = [
    ("limits: {a: {stress: vds}}", "3:13: a limit that sets none; give one of at_most, at_least, below_rating_by, lowest_of"),
    ("limits: {a: {at_most: 80 %}}", "3:13: a limit without 'stress'; add stress: ..."),
    ("limits: {a: {stress: vdss, at_most: 80 %}}", "3:22: 'vdss' is not known here; write 'vds'"),
    ("limits: {a: {stress: vds, at_most: 0.8}}", "3:36: '0.8' has no unit, a quantity is due; write for example 80 % or 24 V or 350 mA"),
    ("limits: {a: {stress: vds, at_most: 80 %, at_least: 3 V}}", "3:13: a limit with at_most and at_least; give one of at_most, at_least, below_rating_by, lowest_of"),
    ("limits: {a: {stress: vds, at_most: 5 A}}", "3:36: a current as at_most of vds; write for example 80 % or 24 V"),
    ("limits: {a: {stress: tj, at_most: 25 K}}", "3:35: a temperature difference as at_most of tj; write for example 80 % or 55 °C"),
    ("limits: {a: {stress: tj, below_rating_by: 25 V}}", "3:43: a voltage as below_rating_by of tj; write for example 25 K"),
    ("limits: {a: {stress: tj, below_rating_by: -25 K}}", "3:43: '-25 K' is negative, which cannot be here; "
     "write for example 24 V or 350 mA or 0.4 W"),
    ("limits: {a: {stress: voltage, at_most: [[110 °C, 30 %], [70 °C, 50 %]]}}", "3:58: '70 °C' does not rise above '110 °C' before it; sort the points by their first value, and keep one of each"),
    ("limits: {a: {stress: voltage, at_most: [[70 °C, 50 %], [110 °C, 30 V]]}}", "3:65: '30 V' is a voltage in a column of another kind; write for example 80 %"),
    ("limits: {a: {stress: power, at_most: 50 %, full_until: 70 °C}}", "3:56: full_until without zero_at; add zero_at: ..."),
    ("limits: {a: {stress: power, at_most: 50 %, full_until: 170 °C, zero_at: 155 °C}}", "3:73: zero_at is not above full_until; write the higher temperature as zero_at"),
    ("limits: {a: {stress: power, at_least: 50 %, full_until: 70 °C, zero_at: 155 °C}}", "3:57: full_until without one value of at_most; add at_most: 100 %"),
    ("limits: {a: {stress: vds, at_most: 80 %, against: board}}", "3:51: 'board' is not known here; choose from ambient, case, junction"),
    ("limits: {a: {stress: vds, at_most: 80 %, applies_to: {kind: mosfett}}}", "3:61: there is no kind 'mosfett'; write 'mosfet'"),
    ("limits: {a: {stress: vds, at_most: 80 %, applies_to: {part: Q1}}}", "3:55: 'part' is not a key of applies_to; write 'parts'"),
    ("limits: {a: {stress: vds, at_most: 80 %, locked: always}}", "3:50: true or false is due here, found 'always'; write true or false"),
    ("limits: {a: {stress: vds, lowest_of: [{at_most: 80 %}]}}", "3:38: lowest_of with fewer than two limits; give two or more"),
    ("limits: {a: {stress: vds, lowest_of: [{at_most: 80 %}, {at_most: 3 A}]}}", "3:66: a current as at_most of vds; write for example 80 % or 24 V"),
    ("methods: {track: guess}", "3:18: 'guess' is not known here; choose from ipc-2221, ipc-2152, qft-in-0113"),
    ("methods: {tracks: ipc-2221}", "3:11: 'tracks' is not a key of methods; write 'track'"),
    ("fields: {volts: [V]}", "3:10: 'volts' is not a key of fields; write 'voltage'"),
    ("close_at: 190 %", "3:11: '190 %' is more than 100 %; write for example 80 %"),
    ("fails_from: met", "3:13: 'met' is not known here; choose from close, unproven, exceeded"),
    ("based_on: [none.rules.yaml]", "3:12: 'none.rules.yaml' cannot be read: there is no such file; check the path"),
    ("based_on: [shipped/common-practise]", "3:12: no pack 'shipped/common-practise' comes with the tool; write 'shipped/common-practice'"),
    ("based_on: [../other.rules.yaml]", "3:12: '../other.rules.yaml' leaves the project folder; keep packs and device data inside the project"),
    ("based_on: [h.rules.yaml]", "3:12: the pack 'h.rules.yaml' is based on itself; break the circle"),
]  # fmt: skip


def read(project, *names):
    return read_rules(names, str(project.folder))


@pytest.mark.parametrize(("text", "fault"), WRONG, ids=[text[:70] for text, _ in WRONG])
def test_wrong(project, text, fault):
    project.write("h.rules.yaml", HEAD + text + "\n")
    faults = project.faults(lambda: read(project, "h.rules.yaml"))
    assert f"h.rules.yaml:{fault}" in faults


def test_no_pack_at_all():
    rules = read_rules([], ".")
    assert (rules.limits, rules.packs, rules.close_at, rules.fails_from) == ({}, (), 0.9, "unproven")


def pack(project, name, text, based_on=()):
    project.write(f"{name}.rules.yaml", f"format: 1\nname: {name}\nbased_on: [{', '.join(f'{b}.rules.yaml' for b in based_on)}]\n{text}\n" if based_on else f"format: 1\nname: {name}\n{text}\n")


def test_later_packs_win_key_by_key(project):
    pack(project, "company", "limits: {v: {stress: vds, at_most: 70 %}, i: {stress: id, at_most: 60 %}}\nmethods: {track: ipc-2221}\nfields: {voltage: [V]}\nclose_at: 80 %")
    pack(project, "team", "limits: {v: {stress: vds, at_most: 80 %}}\nfields: {power: [P]}\nfails_from: close", ["company"])
    rules = read(project, "team.rules.yaml")
    assert rules.name == "team" and rules.packs == ("company", "team") and [file.path for file in rules.files] == ["company.rules.yaml", "team.rules.yaml"]
    assert (rules.limits["v"].at_most.typ, rules.limits["v"].pack, rules.limits["i"].at_most.typ) == (0.8, "team", 0.6)
    assert [(limit.name, limit.pack) for limit in rules.overridden] == [("v", "company")]
    assert rules.methods == {"track": "ipc-2221"} and (rules.fields.voltage, rules.fields.power) == (("V",), ("P",))
    assert (rules.close_at, rules.fails_from) == (0.8, "close")


def test_a_locked_limit_stays_in_force_beside_what_a_later_pack_says(project):
    pack(project, "company", "limits: {v: {stress: vds, at_most: 70 %, locked: true}}")
    pack(project, "team", "limits: {v: {stress: vds, at_most: 90 %}}", ["company"])
    rules = read(project, "team.rules.yaml")
    assert {name: limit.at_most.typ for name, limit in rules.limits.items()} == {"v": 0.7, "v of team": 0.9}
    assert rules.overridden == ()


def test_a_base_of_two_packs_is_read_once_and_below_both(project):
    pack(project, "root", "limits: {v: {stress: vds, at_most: 70 %}}")
    pack(project, "left", "limits: {v: {stress: vds, at_most: 71 %}}", ["root"])
    pack(project, "right", "limits: {w: {stress: vds, at_most: 72 %}}", ["root"])
    rules = read(project, "left.rules.yaml", "right.rules.yaml")
    assert rules.packs == ("root", "left", "right") and rules.limits["v"].at_most.typ == 0.71


def test_a_circle_of_packs(project):
    pack(project, "a", "", ["b"])
    pack(project, "b", "", ["a"])
    assert project.faults(lambda: read(project, "a.rules.yaml")) == ["b.rules.yaml:3:12: the pack 'a.rules.yaml' is based on itself; break the circle"]


def test_two_packs_of_one_name(project):
    project.write("a.rules.yaml", "format: 1\nname: x\n")
    project.write("b.rules.yaml", "format: 1\nname: x\n")
    assert project.faults(lambda: read(project, "a.rules.yaml", "b.rules.yaml")) == ["b.rules.yaml:2:7: two packs are called 'x', the other in a.rules.yaml; give each a name of its own"]


def test_a_pack_in_a_folder_names_its_base_from_there(project):
    project.write("packs/base.rules.yaml", "format: 1\nname: base\n")
    project.write("packs/top.rules.yaml", "format: 1\nname: top\nbased_on: base.rules.yaml\n")
    project.write("packs/up.rules.yaml", "format: 1\nname: up\nbased_on: ../packs/base.rules.yaml\n")
    assert read(project, "packs/top.rules.yaml").packs == ("base", "top")
    assert read(project, "packs/up.rules.yaml").packs == ("base", "up")


def test_a_link_out_of_the_project(project, tmp_path_factory):
    outside = tmp_path_factory.mktemp("elsewhere") / "x.rules.yaml"
    outside.write_text("format: 1\nname: x\n")
    os.symlink(outside, project.folder / "x.rules.yaml")
    (fault,) = project.faults(lambda: read(project, "x.rules.yaml"))
    assert "'x.rules.yaml' leaves the project folder" in fault


@pytest.mark.parametrize("name", sorted(shipped_packs()))
def test_every_limit_of_a_shipped_pack_has_a_source(name):
    rules = read_rules([f"shipped/{name}"], ".")
    assert rules.limits and not [limit.name for limit in rules.limits.values() if not limit.source]
    assert all(file.path.startswith("shipped/") for file in rules.files)
    assert all(str(limit.mark).startswith("shipped/") for limit in rules.limits.values())


def test_common_practice_comes_with_the_tool():
    assert "common-practice" in shipped_packs()
