"""Which note holds for which part, and what the schematic's own fields say."""

import pytest

from drc_power.faults import InputError, Mark
from drc_power.intake import lay_file_over_fields, part_note_from_fields, read_annotations

REFS = ["Q1", "Q2", "Q3", "R1", "R10", "R11", "U1"]


def parts(project, text):
    return read_annotations(project.write("b.power.yaml", "format: 1\nnetlist: b.net\nparts:\n" + text))


def resolved(project, text):
    return parts(project, text).resolve_parts(REFS)


def test_a_name_a_list_and_a_glob(project):
    found = resolved(project, '  Q1: {gate: 10 V}\n  "Q2 Q3": {gate: 5 V}\n  "R1?": {device: chip}\n')
    assert {ref: note.gate.typ for ref, note in found.items() if note.gate} == {"Q1": 10.0, "Q2": 5.0, "Q3": 5.0}
    assert [ref for ref, note in found.items() if note.device == "chip"] == ["R10", "R11"]
    assert list(found) == ["Q1", "Q2", "Q3", "R10", "R11"]


def test_exact_beats_glob_key_by_key(project):
    found = resolved(project, '  "Q*": {device: a, gate: 10 V}\n  Q2: {device: b}\n')
    assert [(note.device, note.gate.typ) for note in found.values()] == [("a", 10.0), ("b", 10.0), ("a", 10.0)]
    assert found["Q2"].source_of("device").line == 5 and found["Q2"].source_of("gate").line == 4


def test_the_order_in_the_file_does_not_matter(project):
    found = resolved(project, '  Q2: {device: b}\n  "Q*": {device: a, gate: 10 V}\n')
    assert (found["Q2"].device, found["Q2"].gate.typ) == ("b", 10.0)


def test_globs_may_agree_or_set_different_keys(project):
    found = resolved(project, '  "Q*": {device: a}\n  "Q[12]": {device: a, gate: 1 V}\n  "?2": {gate: 1000 mV}\n')
    assert (found["Q2"].device, found["Q2"].gate.typ, found["Q3"].gate) == ("a", 1.0, None)


WRONG = [
    ('  "Q*": {device: a}\n  "Q?": {device: b}\n', "b.power.yaml:5:18: 'Q*' and 'Q?' both set device of Q1, differently; give Q1 an entry of its own"),
    ('  "Q1 Q2": {device: a}\n  "Q2 Q3": {device: b}\n', "b.power.yaml:5:21: 'Q2' and 'Q2' both set device of Q2, differently; give Q2 an entry of its own"),
    ("  Q9: {device: a}\n", "b.power.yaml:4:3: 'Q9' names no part of the netlist; write 'Q3'"),
    ('  "X*": {device: a}\n', "b.power.yaml:4:3: 'X*' names no part of the netlist; choose from Q1, Q2, Q3, R1, R10, R11, U1"),
    ('  "Q1 Q33": {device: a}\n', "b.power.yaml:4:3: 'Q33' names no part of the netlist; write 'Q3'"),
    ("  q1: {device: a}\n", "b.power.yaml:4:3: 'q1' names no part of the netlist; write 'Q1'"),
]


@pytest.mark.parametrize(("text", "fault"), WRONG)
def test_wrong(project, text, fault):
    assert fault in project.faults(lambda: resolved(project, text))


def test_an_exact_entry_settles_what_globs_dispute(project):
    found = parts(project, '  "Q*": {device: a}\n  "?2": {device: b}\n  Q2: {device: c}\n').resolve_parts(["Q1", "Q2"])
    assert (found["Q1"].device, found["Q2"].device) == ("a", "c")


AT = Mark("b.net", 12)


def test_fields_of_the_schematic():
    note = part_note_from_fields(
        {"Pwr.device": "fet", "Pwr.draws": "10 mA", "Pwr.heat": "{sink: rail, interface: 0.6 K/W}", "Pwr.pins": "{drain: [5, 6]}", "MPN": "x", "Pwr.gate": " "}, AT
    )
    assert (note.device, note.draws.typ, note.heat.sink, note.heat.interface.typ) == ("fet", 0.01, "rail", 0.6)
    assert note.pins == {"drain": ("5", "6")} and note.source_of("heat") == AT and note.gate is None
    assert part_note_from_fields({"MPN": "x"}, AT).written == ()


@pytest.mark.parametrize(
    ("fields", "fault"),
    [
        ({"Pwr.drows": "1 A"}, "b.net:12: 'drows' is not a key of a part; write 'draws'"),
        ({"Pwr.draws": "1"}, "b.net:12: '1' has no unit, a current is due; write for example 350 mA"),
        ({"Pwr.heat": "rail"}, "b.net:12: heat is due here as a mapping, found 'rail'; write {key: value, ...}"),
        ({"Pwr.heat": "{sink: [}"}, "b.net:12: this is not YAML: while parsing a flow node did not find expected node content; check the brackets"),
        ({"Pwr.heat": "{a: !!python/none x}"}, "b.net:12: a tag, 'tag:yaml.org,2002:python/none'; remove it; values are plain text here"),
        ({"Pwr.state": "\ud800\x00"}, None),
    ],
)
def test_wrong_fields(fields, fault):
    with pytest.raises(InputError) as caught:
        part_note_from_fields(fields, AT)
    assert fault is None or str(caught.value.faults[0]) == fault


def test_the_file_wins_over_the_schematic_and_says_so(project):
    file = resolved(project, "  Q1: {device: a, gate: 10 V, duty: 50 %}\n")["Q1"]
    fields = part_note_from_fields({"Pwr.device": "b", "Pwr.gate": "10000 mV", "Pwr.state": "linear"}, AT)
    note, conflicts = lay_file_over_fields("Q1", file, fields)
    assert (note.device, note.gate.typ, note.state, note.duty.typ) == ("a", 10.0, "linear", 0.5)
    (sentence,) = conflicts
    assert sentence.startswith("Q1: device in ") and sentence.endswith("b.power.yaml:4:16 wins over the schematic's field Pwr.device")
    assert lay_file_over_fields("Q1", None, fields) == (fields, ())
