"""Each way in which an annotation file can be wrong, with the line that the user gets."""

import pytest

from drc_power.intake import not_built, read_annotations
from drc_power.intake.stage_notes import EVENT_KEYS, STAGE_KEYS, EventNote, StageNote

HEAD = "format: 1\nnetlist: b.net\n"

WRONG = [
    ("rails: {A: {voltage: 24}}", "3:22: '24' has no unit, a voltage is due; write for example 24 V"),
    ("rails: {A: {voltage: 24 A}}", "3:22: '24 A' is a current, a voltage is due; write for example 24 V"),
    ("rails: {A: {limit: }}", "3:20: a current is due here, found nothing; write for example 350 mA"),
    ("rails: {A: {voltage: [1 V]}}", "3:22: a voltage is due here, found a list; write for example 24 V"),
    ("rails: {A: {voltage: {min: 1 V, maxi: 2 V}}}", "3:33: 'maxi' is not an end of a span; write 'max'"),
    ("rails: {A: {voltage: {min: 3 V, max: 2 V}}}", "3:22: min, typ and max do not rise; write the least value as min, the greatest as max"),
    ("rails: {A: {voltage: {min: 1 V .. 2 V}}}", "3:28: '1 V .. 2 V' is a span where one value is due; write one value"),
    ("rails: {A: {voltage: {}}}", "3:22: a span without any end; give min, typ or max"),
    ("rails: {A: {voltige: 24 V}}", "3:13: 'voltige' is not a key of a rail; write 'voltage'"),
    ("rails: {A: {limit: 0 A}}", "3:20: '0 A' is not above zero, which it must be here; write for example 350 mA"),
    ("rails: {A: {resistance: -1 ohm}}", "3:25: '-1 ohm' is negative, which cannot be here; write for example 8 mohm"),
    ("rails: {A: {source: []}}", "3:21: an empty list; name at least one, or leave the key out"),
    ("rails: {A: {source: [J1, {}]}}", "3:26: a text is due here, found a mapping; write one word or phrase"),
    ("rails: {A: 24 V}", "3:12: a rail is due here as a mapping, found '24 V'; write {key: value, ...}"),
    ("rails: [A]", "3:8: a mapping of names is due here, found a list; write {name: ..., name: ...}"),
    ("railes: {}", "3:1: 'railes' is not a key of an annotation file; write 'rails'"),
    ("colour: red", "3:1: 'colour' is not a key of an annotation file; choose from format, netlist, board, rules, devices, waivers, "
                    "surroundings, grounds, rails, loads, modes, parts, stages, events, sinks, copper, outside"),
    ("loads: {h: {net: A, drows: 1 A}}", "3:21: 'drows' is not a key of a load; write 'draws'"),
    ("loads: {h: {net: A}}", "3:12: the load 'h' has no demand in mode run; give draws, power or resistance; 0 A if it takes nothing"),
    ("loads: {h: {draws: 1 A}}", "3:12: the load 'h' has no net; add net: ..."),
    ("loads: {h: {net: A, draws: 1 A, power: 2 W}}", "3:12: a load with draws and power; give one of draws, power, resistance"),
    ("loads: {h: {net: A, between: [A, B], draws: 1 A}}", "3:30: a load with net and between; give one of them"),
    ("loads: {h: {between: A, draws: 1 A}}", "3:22: a load between one net alone; write between: [A, B]"),
    ("loads: {h: {net: A, draws: -1 A}}", "3:28: '-1 A' is negative, which cannot be here; write for example 350 mA"),
    ("loads: {h: {net: A, resistance: 0 ohm}}", "3:33: '0 ohm' is not above zero, which it must be here; write for example 8 mohm"),
    ("loads: {h: {net: A, draws: 1 A, kind: moter}}", "3:39: 'moter' is not known here; write 'motor'"),
    ("surroundings: {ambient: 55}", "3:25: '55' has no unit, a temperature is due; write for example 55 °C"),
    ("surroundings: {ambient: 300 K}", "3:25: '300 K' is a temperature difference, a temperature is due; write for example 55 °C"),
    ("surroundings: {ambient: 55 °C ± 5 %}", "3:25: '55 °C' with a tolerance in percent is ambiguous; write minimum .. maximum"),
    ("surroundings: {altitude: 50 km}", "3:26: '50 km' is more than 9000; write for example 1.2 mm"),
    ("parts: {Q1: {state: on}}", "3:21: 'on' is not known here; choose from conducting, blocked, switching, linear"),
    ("parts: {Q1: {duty: 120 %}}", "3:20: '120 %' is more than 100 %; write for example 80 %"),
    ("parts: {Q1: {duty: 0.5}}", "3:20: '0.5' has no unit, a ratio is due; write for example 80 %"),
    ("parts: {Q1: {fitted: maybe}}", "3:22: true or false is due here, found 'maybe'; write true or false"),
    ("parts: {Q1: {heat: {sink: rail}}}", "3:27: there is no sink 'rail'; give it under sinks:"),
    ("parts: {Q1: {heat: {sink: rail}}}\nsinks: {rails: {resistance: 1 K/W}}", "3:27: there is no sink 'rail'; write 'rails'"),
    ("parts: {Q1: {heat: {interface: {thickness: 1 mm}}}}", "3:32: an interface without 'conductivity'; add conductivity: ..."),
    ("stages: {s: {kind: buk}}", "3:20: 'buk' is not known here; write 'buck'"),
    ("stages: {s: {high: Q1}}", "3:13: the stage 's' has no kind; add kind: ..."),
    ("stages: {s: {kind: buck, hihg: Q1}}", "3:26: 'hihg' is not a key of a stage; write 'high'"),
    ("stages: {s: {kind: buck, pair: Q1}}", "3:32: 'pair' is not a key of a buck stage; "
                                            "choose from kind, chip, high, low, inductor, frequency, dead_time"),
    ("stages: {s: {kind: low-side, switch: Q1, load: pump}}", "3:48: there is no load 'pump'; give it under loads:"),
    ("stages: {s: {kind: push-pull, pair: [Q1, Q2], load: 8 V}}", "3:53: '8 V' is a voltage, a resistance is due; write for example 8 mohm"),
    ("modes: {a: {like: b}}", "3:19: there is no mode 'b'; choose from a"),
    ("modes: {a: {like: b}, b: {like: a}}", "3:19: the mode 'b' is like itself, by b > a; break the circle"),
    ("loads: {heater: {net: A, draws: 1 A}}\nmodes: {a: {loads: {heter: 0 A}}}",
     "4:21: there is no load 'heter' to change, and no net to make one; write 'heater'"),
    ("loads: {heater: {net: A, draws: 1 A}}\nmodes: {a: {loads: {heater: 0 V}}}",
     "4:29: '0 V' is a voltage, a current or a power or a resistance is due; write for example 350 mA or 0.4 W or 8 mohm"),
    ("stages: {s: {kind: buck}}\nmodes: {a: {stages: {s: {pair: Q1}}}}",
     "4:32: 'pair' is not a key of a buck stage; choose from kind, chip, high, low, inductor, frequency, dead_time"),
    ("outside: [{parts: [D1]}]", "3:11: an entry of outside without 'because'; add because: ..."),
    ("outside: D1", "3:10: a list is due here, found 'D1'; write [..., ...]"),
    ("sinks: {s: {resistance: 1 K}}", "3:25: '1 K' is a temperature difference, a thermal resistance is due; write for example 0.5 K/W"),
    ("sinks: {s: {resistance: 3 K/W, fins: 9}}", "3:25: a sink with a resistance and a geometry; give one of them"),
    ("sinks: {s: {fins: 1}}", "3:19: a sink of one fin; two fins at least make a gap"),
    ("sinks: {s: {fins: 9, thickness: 1.2 mm, spacing: 5 mm, width: 40 mm}}",
     "3:63: 9 fins and their gaps take 50.8 mm of a base 40 mm wide; check fins, thickness, spacing and width"),
    ("sinks: {s: {material: silver}}", "3:23: 'silver' is not known here; choose from aluminium, aluminum, copper, brass, steel, stainless steel, zinc"),
    ("surroundings: {enclosure: {rise: 5 K, vents: 4 cm²}}",
     "3:34: an enclosure with a rise and a description; give one of them"),
    ("surroundings: {enclosure: {sealed: true, vents: 4 cm²}}", "3:36: a sealed enclosure with vents; leave one of them out"),
    ("surroundings: {enclosure: {sealed: true}}",
     "3:27: an enclosure that nothing leaves; write rise: 10 K, or faces: 600 cm², or vents: 20 cm²"),
    ("netlist: other.net", "3:1: the key 'netlist' stands twice, first in line 2; keep one of them"),
]  # fmt: skip

NOT_SUPPORTED = [
    ("copper: {board: b.kicad_pcb}", "3:10: 'board' is not supported yet; leave it out"),
]


@pytest.mark.parametrize(("text", "fault"), WRONG, ids=[text[:40] for text, _ in WRONG])
def test_wrong(project, monkeypatch, text, fault):
    monkeypatch.setattr(not_built, "NOT_BUILT", {"annotations": {}})
    faults = project.faults(lambda: read_annotations(project.write("b.power.yaml", HEAD + text + "\n")))
    assert f"b.power.yaml:{fault}" in faults


@pytest.mark.parametrize(("text", "fault"), NOT_SUPPORTED, ids=[text for text, _ in NOT_SUPPORTED])
def test_not_supported_yet(project, text, fault):
    faults = project.faults(lambda: read_annotations(project.write("b.power.yaml", HEAD + text + "\n")))
    assert f"b.power.yaml:{fault}" in faults


EVENTS = [
    ("{kind: short, net: A, limit: 1 A}", "an event of kind short that names no part; give part: or parts:"),
    ("{kind: short, part: U1, parts: [U2], limit: 1 A}", "an event with part and parts; give one of them"),
    ("{part: U1}", "an event without 'kind'; add kind: ..."),
    ("{kind: shrt, part: U1}", "'shrt' is not known here; write 'short'"),
    ("{kind: short, part: U1, slew: 1 V/ms}", "'slew' is not a key of an event of kind short; choose from kind, part, parts, from, every, sharing, net, limit, lasts"),
    ("{kind: short, part: U1, from: nowhere}", "there is no mode 'nowhere'; choose from run"),
    ("{kind: stall, load: pump}", "there is no load 'pump'; give it under loads:"),
    ("{kind: pulse, part: U1, shape: square}", "'square' is not known here; choose from rectangle, falling, rising, triangle, half-sine"),
]


@pytest.mark.parametrize(("event", "fault"), EVENTS)
def test_events_are_checked(project, event, fault):
    faults = project.faults(lambda: read_annotations(project.write("b.power.yaml", HEAD + f"events: {{e: {event}}}\n")))
    assert any(each.endswith(fault) for each in faults)


def test_all_faults_at_once_in_the_order_of_the_file(project):
    text = "format: 2\nrails: {A: {voltage: 5}, B: {volt: 5 V}}\nloads: {x: {net: A, draws: 1 V}}\nsinks: {s: {resistance: -1 K/W}}\nx: 1\nx: 2\n"
    faults = project.faults(lambda: read_annotations(project.write("b.power.yaml", text)))
    assert [fault.split(": ")[0] for fault in faults] == [
        f"b.power.yaml:{place}" for place in ("1:1", "1:9", "2:22", "2:30", "3:28", "4:25", "5:1", "6:1")
    ]


@pytest.mark.parametrize("text", ["", "# nothing\n", "~\n", "{}\n"])
def test_an_empty_file_lacks_everything(project, text):
    faults = project.faults(lambda: read_annotations(project.write("b.power.yaml", text)))
    assert [fault.split(": ", 1)[1] for fault in faults] == [
        "an annotation file without 'format'; add format: ...",
        "an annotation file without 'netlist'; add netlist: ...",
    ]


@pytest.mark.parametrize("text", ["- a\n", "just words\n"])
def test_a_file_that_is_no_mapping(project, text):
    (fault,) = project.faults(lambda: read_annotations(project.write("b.power.yaml", text)))
    assert "an annotation file is due here as a mapping" in fault


def test_a_file_that_is_not_there(project):
    path = str(project.folder / "none.power.yaml")
    assert project.faults(lambda: read_annotations(path)) == [
        "none.power.yaml: 'none.power.yaml' cannot be read: there is no such file; check the path"
    ]
    assert project.faults(lambda: read_annotations(str(project.folder)))[0].endswith("cannot be read: is a directory; check the path")


def test_words_of_older_yaml_change_no_value(project):
    text = HEAD + "rails: {on: {voltage: 010 V, limit: 1e1 A}, 0x1F: {voltage: 1e-3 kV}}\ngrounds: [off, 010, 1e-3]\nboard: {revision: 1.10}\n"
    notes = read_annotations(project.write("b.power.yaml", text))
    assert list(notes.rails) == ["on", "0x1F"] and notes.rails["on"].voltage.typ == 10 and notes.rails["0x1F"].voltage.typ == 1.0
    assert notes.grounds == ("off", "010", "1e-3") and notes.board_revision == "1.10"


def test_every_value_knows_its_place(project):
    notes = read_annotations(project.write("b.power.yaml", HEAD + "rails:\n  A: {voltage: 5 V,\n      source: J1}\n"))
    rail = notes.rails["A"]
    assert (rail.mark.line, rail.voltage.mark.column, rail.source[0].mark.line) == (4, 16, 5)
    assert rail.source_of("source").line == 5 and rail.written == ("voltage", "source") and rail.source_of("limit") == rail.mark
    assert str(rail.voltage.mark).endswith("b.power.yaml:4:16")


def test_records_are_frozen(project):
    notes = read_annotations(project.write("b.power.yaml", HEAD))
    with pytest.raises(ValueError, match="frozen"):
        notes.netlist = "other"


def test_the_kinds_of_stages_and_events_use_keys_that_exist():
    assert {key for keys in STAGE_KEYS.values() for key in keys.split()} <= set(StageNote.attributes())
    assert {key for keys in EVENT_KEYS.values() for key in keys.split()} <= set(EventNote.attributes())


def test_lists_of_files_may_be_empty(project):
    notes = read_annotations(project.write("b.power.yaml", HEAD + "rules: []\ndevices:\n"))
    assert (notes.rules, notes.devices) == ((), ())
