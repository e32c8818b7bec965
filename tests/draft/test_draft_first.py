"""A first draft of the demo board, and drafts onto what a user made of it."""

from __future__ import annotations

import re
from dataclasses import replace

import pytest

from drc_power.draft import draft_files, draft_notes
from drc_power.faults import InputError
from drc_power.intake.device_kinds import KINDS, LIMITS
from drc_power.intake.not_built import NOT_BUILT
from drc_power.intake.tree import Blank
from drc_power.netlist import read_netlist
from drc_power.netlist.model import Net, Netlist, Node, Part, Pin
from drc_power.survey import survey_netlist
from drc_power.survey.model import Rail, Stage


def blank_places(tree, path=()):
    """Paths of keys without a value."""
    for key, value in tree.items():
        if isinstance(value, dict):
            yield from blank_places(value, (*path, str(key)))
        elif isinstance(value, Blank):
            yield (*path, str(key))


def every_value(tree):
    for key, value in tree.items():
        yield from every_value(value) if isinstance(value, dict) else ((key, value),)


def test_every_rail_load_part_and_stage_of_the_demo_is_there(desk):
    desk.draft()
    tree = desk.tree()
    assert tree["netlist"] == "board.net" and tree["grounds"] == ["GND"] and tree["devices"] == ["devices"]
    assert tree["rails"]["/VBAT"] == {"voltage": "", "source": "J1"}
    assert {net: rail["held_by"] for net, rail in tree["rails"].items() if "held_by" in rail} == {"+3V3": "U3", "+5V": "U2", "+12V": "U5"}
    assert {(load["net"], load.get("return")) for load in tree["loads"].values()} >= {
        ("/Drive/FAN+", "/Drive/FAN-"), ("+24V", "/Drive/HEAT-"), ("+24V", "/Drive/VALVE-"), ("/SENS", None), ("+3V3", None)}
    refs = {ref for key in tree["parts"] for ref in key.split()}
    assert refs == {e.ref for e in desk.survey.elements if e.group in ("pass", "switch", "clamp")}
    assert tree["stages"]["q3-half-bridge"] == {"kind": "half-bridge", "high": "Q3", "low": "D4", "load": "j2", "frequency": "", "duty": ""}
    assert tree["stages"]["u5-buck"] == {"kind": "buck", "chip": "U5", "low": "D6", "inductor": "L1", "frequency": ""}


def test_no_guess_is_a_value(desk):
    desk.draft()
    values = {str(path[-1]) for path in blank_places(desk.tree())}
    assert values == {"voltage", "draws", "gate", "overshoot", "frequency", "duty", "ambient"}
    assert not [value for key, value in every_value(desk.tree()) if key in values and value]


def test_guesses_and_readings_are_remarks(desk):
    desk.draft()
    text = desk.path.read_text()
    assert '"+5V": {voltage: , held_by: U2}   # guess: 5 V (net name)' in text
    assert '# "+24V": {voltage: }   # solved, fed through Q2' in text
    assert "unverified: 3.2A, 62mR (value)" in text and "unverified: 2W (field Power)" in text


def test_each_distinct_part_has_one_device_with_the_keys_of_its_kind(desk):
    desk.draft()
    devices, parts = read(desk.devices)["devices"], desk.tree()["parts"]
    assert {note["device"] for note in parts.values()} == devices.keys()
    assert '"R24 R25": {device: ' in desk.path.read_text()
    for device in devices.values():
        kind = KINDS[device["kind"]]
        assert set(device.get("limits", {})) <= set(kind.limits) & set(LIMITS)
        assert set(device.get("conduction", {})) <= set(kind.conduction)
        assert all(isinstance(value, Blank) for section in ("limits", "conduction", "thermal", "gate", "charge", "envelope")
                   for value in device.get(section, {}).values())
    q1 = devices[parts["Q1"]["device"]]
    assert q1["channel"] == "p" and q1["matches"] == [{"MPN": "PF6007-TB"}] and "gate" not in q1
    assert set(devices[parts["Q3"]["device"]]["gate"]) == {"rise", "fall"}


def read(path):
    from drc_power.intake.tree import tree_of

    return tree_of(path.read_bytes(), str(path))[0]


def test_drafting_again_changes_nothing(desk):
    first = desk.draft()
    assert set(first.files) == {str(desk.path), str(desk.devices)}
    again = desk.draft()
    assert again.files == {}
    assert again.notes == [f"{desk.path}: nothing new", f"{desk.devices}: 0 devices to type in"]


def test_the_same_from_the_two_small_functions(desk):
    draft = desk.draft(write=False)
    assert draft_files(desk.survey, desk.netlist, str(desk.path)) == draft.files
    assert draft_notes(desk.survey, desk.netlist, str(desk.path)) == draft.notes


def test_onto_the_demos_own_annotations_every_line_stays(desk, demo_folder):
    text = (demo_folder / "rev-c.power.yaml").read_text().replace("rev-c.net", "board.net")
    desk.write(text)
    (desk.folder / "devices").mkdir()
    for path in (demo_folder / "devices").glob("*.yaml"):
        (desk.folder / "devices" / path.name).write_bytes(path.read_bytes())
    desk.draft()
    new = iter(desk.path.read_text().splitlines())
    assert all(line in new for line in text.splitlines())
    assert {"fan-motor", "heater", "valve", "controller"} <= desk.tree()["loads"].keys()
    assert {name for name in desk.tree()["loads"] if re.fullmatch(r"[ju]\d+", name)} == {"j7"}
    assert not desk.devices.exists()
    assert desk.draft().files == {}


RENAMED = 'loads:\n  controller: {net: "+3V3", draws: 40 mA}   # U4\n  prog: {net: "+3V3", draws: 1 mA, heats: J7}\n'


def test_a_renamed_load_stands_for_the_part_that_its_line_names(desk):
    desk.write(RENAMED)
    desk.draft()
    loads = desk.tree()["loads"]
    assert {"controller", "prog"} <= loads.keys() and not {"u4", "j7"} & loads.keys()


def test_a_load_of_the_usual_name_stands_for_its_part_without_a_comment(desk):
    desk.write('loads:\n  u4: {net: "+3V3", draws: 40 mA}\n  j7: {net: "+5V", draws: 1 mA}\n')
    desk.draft()
    loads = desk.tree()["loads"]
    assert "u4-2" not in loads and loads["j7-2"]["net"] == "+3V3"


def test_one_load_without_a_name_in_it_stands_for_one_part_only(desk):
    desk.write('loads:\n  drives: {net: "+12V", draws: 20 mA}\n')
    desk.draft()
    assert {"u6", "u7"} & desk.tree()["loads"].keys() == {"u7"}
    desk.write('loads:\n  drives: {net: "+12V", draws: 20 mA}   # U6 U7\n')
    desk.draft()
    assert not {"u6", "u7"} & desk.tree()["loads"].keys()


def test_a_renamed_load_is_the_one_that_a_new_stage_names(desk):
    desk.write('loads:\n  fan: {net: "/Drive/FAN+", return: "/Drive/FAN-", draws: 9 A}   # J2\n')
    desk.draft()
    assert desk.tree()["stages"]["q3-half-bridge"]["load"] == "fan"


def test_what_is_put_behind_a_hash_stays_out_and_is_told(desk):
    desk.draft()
    text = desk.path.read_text()
    for line in ('  u4: {net: "+3V3"', "  Q4: {device", "  q4-low-side: {", '  "+5V": {'):
        assert line in text
        text = text.replace(line, f"  # {line.strip()}")
    desk.write(text)
    again = desk.draft()
    assert again.files == {}
    assert f"{desk.path}: loads that only a comment speaks of, and that count nowhere: U4 on +3V3" in again.notes


def test_a_part_left_out_needs_neither_entry_nor_device(desk):
    desk.write('outside:\n  - {parts: [D1, "L*"], because: a test}\n')
    desk.draft()
    assert not {"D1", "L1"} & desk.tree()["parts"].keys()
    assert "olp12" not in desk.devices.read_text()


def test_parts_named_by_pattern_have_their_entry(desk):
    desk.write('parts:\n  "Q*": {gate: 10 V}\n  "R24 R25": {state: conducting}\n')
    desk.draft()
    assert not {"Q1", "Q3", "R24"} & {ref for key in desk.tree()["parts"] for ref in key.split()} - {"R24"}
    notes = desk.draft().notes
    assert not [note for note in notes if "write device" in note and "Q" in note]
    assert [note for note in notes if "in the entry of" in note] == [f"{desk.path}: write device: resistor-1206 in the entry of R24, R25"]


def test_a_device_that_a_part_names_and_no_file_has_is_drafted_under_its_name(desk):
    desk.write("parts:\n  Q1: {device: house-pfet}\n")
    desk.draft()
    assert read(desk.devices)["devices"]["house-pfet"]["kind"] == "mosfet"
    assert "Q1" not in [key for key in desk.tree()["parts"] if key != "Q1"]
    assert desk.draft().files == {}


def test_a_device_of_the_library_that_fits_is_taken(desk):
    (desk.folder / "devices").mkdir()
    (desk.folder / "devices" / "house.yaml").write_text('format: 1\ndevices:\n  house-pfet: {kind: mosfet, matches: {MPN: "PF6007-*"}}\n')
    desk.draft()
    assert desk.tree()["parts"]["Q1"]["device"] == "house-pfet"
    assert "PF6007" not in desk.devices.read_text()


def test_devices_go_into_the_file_that_the_annotations_name(desk):
    desk.write("devices: lib/parts.yaml\n")
    (desk.folder / "lib").mkdir()
    (desk.folder / "lib" / "parts.yaml").write_text("format: 1\ndevices:\n  mine: {kind: fuse}   # mine\n")
    draft = desk.draft()
    assert set(draft.files) == {str(desk.path), str(desk.folder / "lib" / "parts.yaml")}
    text = (desk.folder / "lib" / "parts.yaml").read_text()
    assert text.startswith("format: 1\ndevices:\n  mine: {kind: fuse}   # mine\n\n  ")
    assert desk.draft().files == {}


def test_a_half_finished_device_file_does_not_stop_a_draft(desk):
    (desk.folder / "devices").mkdir()
    (desk.folder / "devices" / "x.yaml").write_text("format: 2\ndevices:\n  a:\n  b: {kind: }\n  c: {matches: 5}\n")
    desk.draft()
    assert desk.devices.exists()


def test_what_vanished_is_listed_with_its_place(desk):
    desk.draft()
    text = desk.path.read_text().replace("format: 1\n", "format: 1\nmodes:\n  run: {parts: {Q99: {state: blocked}}}\n")
    text = text.replace("rails:", 'rails:\n  "+9V": {voltage: 9 V, source: J99}', 1).replace("parts:   #", 'parts:\n  "Q98 Z*": {gate: 1 V}\n  #', 1)
    desk.write(text)
    notes = desk.draft().notes
    gone = [note.replace(f"{desk.path}:", "") for note in notes if "any more" in note]
    line = {name: 1 + text[: text.index(name)].count("\n") for name in ("Q99", '"+9V"', "J99", "Q98")}
    assert sorted(note.partition(": ")[2] for note in gone) == sorted([
        "the netlist has no net '+9V' any more", "the netlist has no part 'J99' any more", "the netlist has no part 'Q98' any more",
        "the netlist has no part 'Z*' any more", "the netlist has no part 'Q99' any more"])
    assert {int(note.partition(":")[0]) for note in gone} == set(line.values())


def test_another_netlist_than_the_files_own_is_said(desk):
    desk.draft()
    desk.write(desk.path.read_text().replace("netlist: board.net", "netlist: other.net"))
    assert f"{desk.path}: it is about other.net, and this draft about {desk.netlist.path}; the name stays as it is" in desk.draft().notes


def test_a_new_ground_is_said_and_not_added(desk):
    desk.write("grounds: [PACK-]\n")
    draft = desk.draft()
    assert f"{desk.path}: GND looks like a ground and is not under grounds" in draft.notes
    assert desk.tree()["grounds"] == ["PACK-"]


@pytest.mark.parametrize("text", ["", "# mine\n", "---\n", "format: 1\n"])
def test_an_almost_empty_file_is_filled(desk, text):
    desk.write(text)
    desk.draft()
    assert desk.path.read_text().startswith(text)
    assert desk.tree()["netlist"] == "board.net" and desk.tree()["rails"]
    assert desk.draft().files == {}


@pytest.mark.parametrize(("text", "said"), [
    ("rails: [1]\n", "rails: does not hold names"),
    ("rails: {\n", "this is not YAML"),
    ("devices: ../lib\n", "leaves the project folder"),
    ("\x00", "control character"),
])
def test_a_file_that_cannot_be_added_to_is_refused_whole(desk, text, said):
    desk.write(text)
    with pytest.raises(InputError) as caught:
        desk.draft()
    assert said in str(caught.value)
    assert desk.path.read_bytes() == text.encode() and not desk.devices.exists()


def test_a_folder_in_place_of_the_file_is_refused(desk):
    desk.path.mkdir()
    with pytest.raises(InputError):
        desk.draft()


# --- boards by hand ----------------------------------------------------------------------------------------------


def netlist_of(*parts: Part, aliases: dict[str, tuple[str, ...]] | None = None) -> Netlist:
    nodes: dict[str, list[Node]] = {}
    for part in parts:
        for pin in part.pins:
            nodes.setdefault(pin.net, []).append(Node(part.ref, pin.number))
    nets = {name: Net(name, nodes=tuple(found), aliases=(aliases or {}).get(name, ())) for name, found in nodes.items()}
    return Netlist("hand.net", "", "E", "", "", "", "", {part.ref: part for part in parts}, nets)


def part(ref: str, value: str, *nets: str, **more) -> Part:
    return Part(ref, value, pins=tuple(Pin(str(n), net=net) for n, net in enumerate(nets, 1)), **more)


def test_a_stage_of_a_shape_that_the_check_refuses_is_a_comment(desk_for, element, survey_of, monkeypatch):
    monkeypatch.setitem(NOT_BUILT["annotations"], "stages.*.kind=load-switch", True)
    parts = [part("Q1", "NF1000", "V", "A"), part("Q2", "NF1000", "V", "A"), part("D2", "YD9000", "B", "C"), part("D3", "YD9000", "A", "V"),
             part("D4", "YD9000", "A", "V"), part("L1", "10u", "A", "OUT")]
    netlist = netlist_of(*parts)
    shapes = [
        ("low-side", {"switch": ("Q1", "Q2")}, "several switches without a clamp are not supported yet"),
        ("low-side", {"switch": ("Q1",), "clamp": ("D2",)}, "its parts share no net"),
        ("low-side", {"switch": ("Q1",), "clamp": ("D3", "D4")}, "a side is switches in parallel with at most one diode"),
        ("half-bridge", {"high": ("Q1",), "low": ("D3",)}, "give load and take out the #"),
        ("push-pull", {"pair": ("Q1", "Q2")}, "give load and take out the #"),
        ("load-switch", {"parts": ("Q1",)}, "load-switch stages are not supported yet"),
        ("buck", {"high": ("Q1",), "low": ("D2",), "inductor": ("L1",)}, "its parts share no net"),
        ("buck", {"high": ("Q1",), "inductor": ("L1",)}, "name both sides and the inductor"),
        ("boost", {"high": ("D3",), "inductor": ("L1",)}, "name the chip or the switch that is driven"),
        ("buck", {"high": ("Q1", "Q2"), "low": ("D3",), "inductor": ("L1",)}, None),
        ("low-side", {"switch": ("Q1", "Q2"), "clamp": ("D3",)}, None),
        ("or-ing", {"parts": ("Q1", "Q2")}, None),
        ("no-such-kind", {"parts": ("Q1",)}, "no entry"),
    ]
    elements = [element(ref, "switch", role, *netlist.parts[ref].nets_of(), "g") for ref, role in
                (("Q1", "mosfet"), ("Q2", "mosfet"), ("D2", "diode"), ("D3", "diode"), ("D4", "diode"))]
    elements.append(element("L1", "pass", "inductor", "A", "OUT"))
    desk = desk_for(survey_of(netlist, *elements), netlist)
    for kind, named, problem in shapes:
        desk.survey = replace(desk.survey, stages=(Stage(kind, named, "A"),))
        desk.path.unlink(missing_ok=True)
        desk.draft()
        text, stages = desk.path.read_text(), desk.tree().get("stages") or {}
        assert (problem == "no entry") == (kind not in text)
        assert (problem is None) == bool(stages), (kind, named)
        assert not problem or problem == "no entry" or f"   # {problem}\n" in text, (kind, named, text)
    assert '"Q1 Q2": {device: nf1000, gate: }' in text


def test_rails_by_what_feeds_them(desk_for, element, survey_of):
    netlist = netlist_of(part("U1", "REG5000", "V"), part("U2", "REG5000", "V"), part("U3", "CHIP100", "V"), part("Q1", "NF1000", "V"),
                         part("U4", "LOAD", "C"), part("J1", "IN", "V", "RET"))
    rails = (Rail("A", 5.0, "net name", ("U1", "U2")), Rail("B", None, "x", ("U3",)), Rail("C", None, "x", ("U3",)), Rail("D", None, "x", ()))
    survey = survey_of(netlist, element("J1", "source", "connector", "RET", "V"), element("U1", "pass", "linear-regulator", "V", "A"),
                       element("U2", "pass", "switching-regulator", "V", "A"), element("U3", "load", "ic", "B", "GND"),
                       element("U4", "load", "ic", "C", "GND"), rails=rails)
    desk = desk_for(survey, netlist)
    desk.draft()
    text, tree = desk.path.read_text(), desk.tree()
    assert tree["rails"]["V"] == {"voltage": "", "source": "J1", "return": "RET"}
    assert tree["rails"]["A"] == {"voltage": ""} and "U1 and U2 both drive it: add held_by: PART" in text
    assert "B: {voltage: , source: U3}   # made and used inside U3 alone" in text and "B" not in tree["rails"]
    assert tree["rails"]["C"] == {"voltage": "", "source": "U3"} and "nothing was found that feeds it" in text
    assert set(tree["loads"]) == {"u4"}


def bridge_board(element, survey_of, *elements, terminals=("1", "2", "3", "4")):
    """A transformer or a source, a bridge from A and B to P and GND, and a reservoir."""
    netlist = netlist_of(part("BR1", "BR4A", "P", "GND", "A", "B"), part("C1", "1000u", "P", "GND"), part("T1", "TRAFO 12", "M", "N", "A", "B"),
                         part("J1", "MAINS", "M", "N"), part("F1", "1A", "M", "A"))
    found = survey_of(netlist, element("BR1", "switch", "bridge", "A", "P"), *elements, rails=(Rail("P", None, "output of a rectifier", ("BR1",)),),
                      stages=(Stage("rectifier", {"bridge": ("BR1",), "reservoir": ("C1",)}, "P"),))
    names = dict(zip(("plus", "minus", "ac1", "ac2"), ((pin,) for pin in terminals), strict=False))
    return replace(found, parts={**found.parts, "BR1": replace(found.parts["BR1"], terminals=names)}), netlist


@pytest.fixture
def built(monkeypatch):
    """As if alternating rails and rectifiers were supported, whatever this version does."""
    for row in ("rails.*.ac", "rails.*.frequency", "stages.*.kind=rectifier"):
        monkeypatch.delitem(NOT_BUILT["annotations"], row, raising=False)


def test_a_rectifier_behind_a_transformer_is_fed_by_its_secondary(desk_for, element, survey_of, built):
    desk = desk_for(*bridge_board(element, survey_of, element("J1", "source", "connector", "N", "M"), element("T1", "pass", "transformer", "M", "A")))
    desk.draft()
    assert desk.tree()["rails"] == {"A": {"ac": "", "frequency": "", "source": "T1", "return": "B"}}
    assert '# M: {voltage: , source: J1, return: "N"}   # feeds T1: give the voltage of its secondary instead' in desk.path.read_text()
    assert desk.tree()["stages"] == {"br1-rectifier": {"kind": "rectifier", "bridge": "BR1", "reservoir": "C1"}}
    assert desk.draft().files == {}


def test_a_rectifier_behind_a_fuse_is_fed_by_the_source(desk_for, element, survey_of, built):
    desk = desk_for(*bridge_board(element, survey_of, element("J1", "source", "connector", "B", "M"), element("F1", "pass", "fuse", "M", "A")))
    desk.draft()
    assert desk.tree()["rails"] == {"M": {"ac": "", "frequency": "", "source": "J1", "return": "B"}}


def test_a_rectifier_whose_pins_nobody_knows_is_a_comment(desk_for, element, survey_of, built):
    desk = desk_for(*bridge_board(element, survey_of, terminals=("1", "2")))
    desk.draft()
    assert not desk.tree()["stages"] and "a bridge with its pins known, or four diodes that make one, is due" in desk.path.read_text()


def test_what_hangs_on_three_phases_is_one_load_between_them(desk_for, element, survey_of, monkeypatch):
    monkeypatch.delitem(NOT_BUILT["annotations"], "stages.*.kind=three-phase", raising=False)
    high = [part(f"Q{2 * k + 1}", "NF6008", "VBUS", phase) for k, phase in enumerate("UVW")]
    low = [part(f"Q{2 * k + 2}", "NF6008", phase, "GND") for k, phase in enumerate("UVW")]
    netlist = netlist_of(*high, *low, part("J2", "MOTOR", "U", "V", "W"))
    switches = [element(p.ref, "switch", "mosfet", *p.nets_of(), f"g{p.ref}") for p in (*high, *low)]
    survey = survey_of(netlist, *switches, *(element("J2", "load", "connector", phase, "GND") for phase in "UVW"),
                       stages=(Stage("three-phase", {"high": ("Q1", "Q3", "Q5"), "low": ("Q2", "Q4", "Q6"), "load": ("J2",)}, None),))
    desk = desk_for(survey, netlist)
    desk.draft()
    tree = desk.tree()
    assert tree["loads"] == {"j2": {"between": ["U", "V", "W"], "draws": ""}}
    assert tree["stages"]["q1-three-phase"] == {
        "kind": "three-phase", "high": ["Q1", "Q3", "Q5"], "low": ["Q2", "Q4", "Q6"], "load": "j2", "frequency": "", "modulation": "",
        "power_factor": "", "dead_time": ""}
    assert desk.draft().files == {}
    desk.write(desk.path.read_text().replace("j2: {between", "motor: {between").replace("load: j2", "load: motor"))
    assert desk.draft().files == {}


HOSTILE = ["Q 1", "Q*", "Q[1]", 'Q"1', "Q#1", "Q: 1", "no", "", "\n", "\x1b[2J", "\u202eQ", "x" * 3000, "{a}", "- a", "&a", "*a", "!!python/object:os.system", "<<", "~", "'", "\\", "日本", "a # b", "Q1, Q2", "?", "|", "@", "`", "%"]


@pytest.mark.parametrize("name", HOSTILE)
def test_hostile_names_are_quoted_or_only_remarked_on(desk_for, element, survey_of, name):
    net, ref = f"{name}/net", f"{name}"
    netlist = netlist_of(part(ref, name, net, "GND", description=name, fields={"MPN": name, "Power": name}), part("U1", name, f"{name}2"), part("J1", name, net))
    survey = survey_of(netlist, element("J1", "source", "connector", f"{name}ret", net), element(ref, "pass", "mosfet", net, f"{name}2", "g"),
                       element("U1", "load", "ic", f"{name}2", "GND"), rails=(Rail(f"{name}2", 1.0, name, (ref,)),),
                       stages=(Stage("low-side", {"switch": (ref,)}, net),))
    desk = desk_for(survey, netlist)
    desk.draft()
    tree = desk.tree()
    assert set(tree.get("rails") or ()) <= {net} and set(tree.get("parts") or ()) <= {ref}
    read(desk.devices)
    assert desk.draft().files == {}
    text = desk.path.read_text() + desk.devices.read_text()
    assert all(c.isprintable() or c == "\n" for c in text)


def test_many_parts_of_one_device_fill_several_lines(desk_for, element, survey_of):
    netlist = netlist_of(*(part(f"R{n}", "0R1", f"A{n}", f"B{n}", footprint="Resistor_SMD:R_2512_6332Metric") for n in range(100)))
    desk = desk_for(survey_of(netlist, *(element(f"R{n}", "pass", "resistor", f"A{n}", f"B{n}") for n in range(100))), netlist)
    desk.draft()
    keys = list(desk.tree()["parts"])
    assert [ref for key in keys for ref in key.split()] == [f"R{n}" for n in range(100)]
    assert len(keys) == 9 and set(read(desk.devices)["devices"]) == {"resistor-2512"}


def test_names_that_are_only_values_are_held_to_the_same(desk_for, element, survey_of):
    netlist = netlist_of(part("U1", "CHIP", "V", "bad\x1bnet"), part("J1", "IN", "V", "also\nbad"))
    survey = survey_of(netlist, element("U1", "load", "ic", "V", "bad\x1bnet"), element("J1", "source", "connector", "also\nbad", "V"),
                       stages=(Stage("or-ing", {"parts": ("U1",), "controller": ("x\x00",)}, "V"),))
    desk = desk_for(survey, netlist)
    draft = desk.draft()
    assert not desk.tree().get("loads") and not desk.tree().get("rails")
    assert any("a file cannot hold every name" in note for note in draft.notes)


def test_two_kinds_of_one_value_get_no_match_that_finds_both(desk_for, element, survey_of):
    netlist = netlist_of(part("Q1", "ABC123", "V", "A"), part("U9", "ABC123", "B", "C"))
    survey = survey_of(netlist, element("Q1", "pass", "mosfet", "V", "A", "g"))
    desk = desk_for(survey, netlist)
    desk.draft()
    assert "matches" not in desk.devices.read_text() and "{device: abc123, gate: }" in desk.path.read_text()


def test_a_net_under_its_other_name_is_the_same_rail(desk_for, element, survey_of):
    netlist = netlist_of(part("J1", "IN", "V"), aliases={"V": ("VIN",)})
    survey = survey_of(netlist, element("J1", "source", "connector", "GND", "V"), rails=(Rail("V", None, "x", ("J1",)),))
    desk = desk_for(survey, netlist)
    desk.write("rails:\n  VIN: {voltage: 5 V, source: J1}\n")
    desk.draft()
    assert set(desk.tree()["rails"]) == {"VIN"}


def test_a_new_part_on_the_board_is_added_and_nothing_else(desk):
    desk.draft()
    before = desk.path.read_text()
    parts = dict(desk.netlist.parts)
    parts["F7"] = replace(parts["F1"], ref="F7", value="3A", fields={"MPN": "FBX-03"}, pins=parts["FB1"].pins)
    del parts["FB1"]
    nets = {name: replace(net, nodes=tuple(Node("F7", n.pin) if n.ref == "FB1" else n for n in net.nodes)) for name, net in desk.netlist.nets.items()}
    desk.netlist = replace(desk.netlist, parts=parts, nets=nets)
    desk.survey = survey_netlist(desk.netlist)
    notes = desk.draft().notes
    lines = [line for line in desk.path.read_text().splitlines() if line not in before.splitlines()]
    assert [line.split(":")[0].strip() for line in lines] == ["F7"]
    assert "fbx-03" in desk.devices.read_text()
    assert any("the netlist has no part 'FB1' any more" in note for note in notes)
