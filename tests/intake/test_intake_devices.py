"""Each way in which device data can be wrong, and how devices are found."""

import os

import pytest

from drc_power.intake import read_devices
from drc_power.intake.device_kinds import KINDS, LIMITS, STRESSES
from drc_power.intake.device_sections import Conduction, StoredCharge
from drc_power.intake.devices import Device

MOSFET = "a: {kind: mosfet, %s}"

WRONG = [
    ("a: {limits: {vds: 60 V}}", "3:6: a device without 'kind'; add kind: ..."),
    ("a: {kind: mosfett}", "3:13: 'mosfett' is not known here; write 'mosfet'"),
    (MOSFET % "channel: npn", "3:30: the channel 'npn' for a device of kind mosfet; write n or p"),
    ("a: {kind: fuse, channel: n}", "3:28: the channel 'n' for a device of kind fuse; leave it out"),
    (MOSFET % "limits: {vdss: 60 V}", "3:30: 'vdss' is not a key of limits; write 'vds'"),
    (MOSFET % "limits: {vce: 60 V}", "3:30: 'vce' is not a key of the limits of a device of kind mosfet; choose from vds, vgs, id, id_pulsed, "
                                     "power, tj, avalanche_energy, avalanche_energy_repetitive, avalanche_current, breakdown, source"),
    (MOSFET % "limits: {vds: 60}", "3:35: '60' has no unit, a voltage is due; write for example 24 V"),
    (MOSFET % "limits: {vds: -60 V}", "3:35: '-60 V' is not above zero, which it must be here; write for example 24 V"),
    (MOSFET % "limits: {tj: 175 K}", "3:34: '175 K' is a temperature difference, a temperature is due; write for example 55 °C"),
    (MOSFET % "limits: {vds: [[1 V, 1 A]]}", "3:35: a voltage is due here, found a list; write for example 24 V"),
    (MOSFET % "switching: {rise: 1 ns}", "3:21: 'switching' is not a key of a device of kind mosfet; choose from kind, channel, matches, source, "
                                         "limits, conduction, thermal, gate, charge, body, transfer, envelope"),
    (MOSFET % "conduction: {dropout: 1 V}", "3:34: 'dropout' is not a key of the conduction of a device of kind mosfet; choose from rds, rds_scale, at_gate, source"),
    (MOSFET % "conduction: {rds: 0 ohm}", "3:39: '0 ohm' is not above zero, which it must be here; write for example 8 mohm"),
    (MOSFET % "conduction: {rds: {10: 8 mohm}}", "3:40: '10' has no unit, a voltage is due; write for example 24 V"),
    (MOSFET % "conduction: {rds: {10 V: 8 mohm, 10.0 V: 9 mohm}}", "3:39: two rows for one voltage; keep one of them"),
    (MOSFET % "conduction: {rds: {}}", "3:39: a mapping without a row; add a row, or leave the key out"),
    ("a: {kind: diode, conduction: {forward: {25 °C: [[1 A, 0.4 V]], 25.0 °C: [[1 A, 0.5 V]]}}}", "3:42: two rows for one temperature; keep one of them"),
    (MOSFET % "conduction: {rds: {10 V: 8 mohm}, at_gate: 10 V}", "3:64: at_gate beside rds by gate voltage; leave at_gate out"),
    (MOSFET % "conduction: {rds_scale: [[100 °C, 1.4], [25 °C, 1]]}",
     "3:62: '25 °C' does not rise above '100 °C' before it; sort the points by their first value, and keep one of each"),
    (MOSFET % "conduction: {rds_scale: [[25 °C, 1], [25 °C, 2]]}",
     "3:59: '25 °C' does not rise above '25 °C' before it; sort the points by their first value, and keep one of each"),
    (MOSFET % "conduction: {rds_scale: [[25 °C, nan]]}", "3:54: 'nan' is not a number with a unit; write for example 1.45"),
    (MOSFET % "conduction: {rds_scale: [[25 °C, 1 ohm]]}", "3:54: '1 ohm' is a resistance, a plain number is due; write for example 1.45"),
    (MOSFET % "conduction: {rds_scale: [[25 °C]]}", "3:46: a point of 2 values is due here, found a list; write [x, y]"),
    (MOSFET % "conduction: {rds_scale: []}", "3:45: a list of points is due here, found an empty list; write [[x, y], [x, y], ...]"),
    (MOSFET % "conduction: {rds_scale: 1.4}", "3:45: a list of points is due here, found '1.4'; write [[x, y], [x, y], ...]"),
    (MOSFET % "conduction: {rds_scale: [[25 °C .. 30 °C, 1]]}", "3:47: '25 °C .. 30 °C' is a span inside a table; write one value"),
    (MOSFET % "thermal: {rth_jc: 0 K/W}", "3:39: '0 K/W' is not above zero, which it must be here; write for example 0.5 K/W"),
    (MOSFET % "thermal: {zth_jc: [[1 ms, 1 K/W]], foster: [[1 K/W, 1 s]]}", "3:64: zth_jc and foster in one device; keep one of them"),
    (MOSFET % "envelope: {dc: [[0 V, 1 A]]}", "3:38: '0 V' is not above zero, which it must be here; write for example 24 V"),
    (MOSFET % "envelope: {10: [[1 V, 1 A]]}", "3:32: '10' has no unit, a time is due; write for example 20 ms"),
    (MOSFET % "envelope: {10 ms: [[1 V, 1 A]], 0.01 s: [[1 V, 2 A]]}", "3:31: two rows for one time; keep one of them"),
    (MOSFET % "leakage: [[25 °C, 1 mA]]", "3:21: 'leakage' is not a key of a device of kind mosfet; choose from kind, channel, matches, source, "
                                          "limits, conduction, thermal, gate, charge, body, transfer, envelope"),
    (MOSFET % "matches: {}", "3:30: an empty match, which would fit every part; write {value: ...} or {FIELD: ...}"),
    ("a: {kind: diode, charge: {output: 1 nC}}", "3:29: 'output' is not a key of the charge of a device of kind diode; choose from recovery, at, source"),
    ("a: {kind: diode, conduction: {knee: 0.4 V, forward: {25 °C: [[1 A, 0.4 V]]}}}", "3:55: forward beside knee and slope; give the curves or the line"),
    ("a: {kind: switching-regulator, conduction: {efficiency: 0.9}}", "3:59: '0.9' has no unit, a ratio is due; write for example 80 %"),
    ("a: {kind: switching-regulator, conduction: {efficiency: 110 %}}", "3:59: '110 %' is more than 100 %; write for example 80 %"),
    ("a: {kind: switching-regulator, conduction: {efficiency: [{vin: 12 V, att: 90 %}]}}", "3:60: an efficiency curve without 'at'; add at: ..."),
    ("a: {kind: switching-regulator, conduction: {efficiency: [{vin: 12 V, at: 90 %}, {vin: 12 V, at: 80 %}]}}",
     "3:59: two efficiency curves for one input voltage; keep one of them"),
    ("a: 5", "3:6: a device is due here as a mapping, found '5'; write {key: value, ...}"),
]  # fmt: skip


def read(project, *names):
    return read_devices(names, str(project.folder))


@pytest.mark.parametrize(("text", "fault"), WRONG, ids=[text[:60] for text, _ in WRONG])
def test_wrong(project, text, fault):
    project.write("d.yaml", f"format: 1\ndevices:\n  {text}\n")
    assert f"d.yaml:{fault}" in project.faults(lambda: read(project, "d.yaml"))


def test_the_columns_of_a_wrong_table_are_all_told(project):
    project.write("d.yaml", "format: 1\ndevices:\n  a: {kind: mosfet, envelope: {dc: [[1, 2 A], [3 V, 4 V], [5 V, 0 A]]}}\n")
    assert len(project.faults(lambda: read(project, "d.yaml"))) == 3


def test_a_folder_is_read_in_the_order_of_names(project):
    for name in ("b", "a"):
        project.write(f"devices/{name}.yaml", f"format: 1\ndevices:\n  {name}: {{kind: ic}}\n")
    project.write("devices/.hidden.yaml", "not: read")
    project.write("devices/notes.txt", "not read")
    library = read(project, "devices")
    assert [file.path for file in library.files] == ["devices/a.yaml", "devices/b.yaml"]
    assert set(library.devices) == {"a", "b"} and all(file.role == "devices" for file in library.files)


def test_a_name_in_two_files(project):
    project.write("devices/a.yaml", "format: 1\ndevices: {x: {kind: ic}}\n")
    project.write("b.yaml", "format: 1\ndevices: {x: {kind: ic}}\n")
    faults = project.faults(lambda: read(project, "devices", "b.yaml"))
    assert faults == ["b.yaml:2:11: the device 'x' stands twice, first in devices/a.yaml:2:11; keep one of them"]


def test_the_faults_of_all_files_at_once(project):
    project.write("a.yaml", "format: 1\ndevices: {x: {kind: icc}}\n")
    project.write("b.yaml", "format: 1\n")
    faults = project.faults(lambda: read(project, "a.yaml", "b.yaml", "c.yaml", "empty"))
    assert [fault.split(":")[0] for fault in faults] == ["a.yaml", "b.yaml", "c.yaml", "empty"]


def test_a_folder_without_data(project):
    (project.folder / "empty").mkdir()
    assert project.faults(lambda: read(project, "empty")) == ["empty: the folder 'empty' has no file of device data; put a NAME.yaml into it"]


def test_nothing_outside_the_project_is_read(project, tmp_path_factory):
    outside = tmp_path_factory.mktemp("elsewhere") / "d.yaml"
    outside.write_text("format: 1\ndevices: {x: {kind: ic}}\n")
    os.symlink(outside, project.folder / "link.yaml")
    (project.folder / "devices").mkdir()
    os.symlink(outside, project.folder / "devices" / "link.yaml")
    for name in ("../d.yaml", str(outside), "link.yaml", "devices", "devices/../../d.yaml"):
        (fault,) = project.faults(lambda name=name: read(project, name))
        assert "leaves the project folder; keep packs and device data inside the project" in fault


DATA = """\
format: 1
devices:
  a:
    kind: mosfet
    source: "sheet 1"
    limits: {vds: {typ: 60 V, source: "table 2"}, id: 5 A, source: "table 1"}
    conduction: {rds: 8 mohm, source: "figure 3"}
    thermal: {rth_jc: 1 K/W}
    matches: [{value: "NF6008*", Grade: A}, {MPN: "NF60??-T"}]
"""


def test_where_a_number_stands_and_where_it_was_read(project):
    project.write("d.yaml", DATA)
    device = read(project, "d.yaml").devices["a"]
    assert [device.entry(path).line for path in ("limits.vds", "conduction.rds", "thermal", "thermal.rth_ja", "gate.charge")] == [6, 7, 8, 8, 4]
    assert device.source_text("limits.vds") == "table 2" and device.source_text("limits.id") == "table 1"
    assert device.source_text("conduction.rds") == "figure 3" and device.source_text("thermal.rth_jc") == "sheet 1"


@pytest.mark.parametrize(
    ("value", "fields", "fits"),
    [
        ("NF6008-R", {"Grade": "A"}, True),
        ("NF6008-R", {"Grade": "B"}, False),
        ("NF6008-R", {}, False),
        ("x", {"MPN": "NF6008-T"}, True),
        ("x", {"MPN": "NF608-T"}, False),
        ("nf6008", {"Grade": "A"}, False),
        ("", {}, False),
    ],
)
def test_matches(project, value, fields, fits):
    project.write("d.yaml", DATA)
    library = read(project, "d.yaml")
    assert library.devices["a"].matches_part(value, fields) is fits
    assert [device.name for device in library.matching(value, fields)] == (["a"] if fits else [])


def test_the_tables_of_kinds_name_only_what_can_be_read():
    for kind in KINDS.values():
        assert set(kind.limits) <= set(LIMITS) and set(kind.limits) <= set(STRESSES)
        assert set(kind.conduction) <= set(Conduction.attributes()) and set(kind.charge) <= set(StoredCharge.attributes())
        assert set(kind.sections) <= set(Device.attributes())
    assert set(LIMITS) <= {key for kind in KINDS.values() for key in kind.limits}
