"""A draft goes straight into a check: no error, everything unproven by name, and no blank ever passes."""

from __future__ import annotations

import importlib.util
import re
import sys
from pathlib import Path

import pytest

from drc_power.cli import main
from drc_power.draft import make_draft
from drc_power.findings.verdict import exit_status
from drc_power.intake.annotations import read_annotations
from drc_power.intake.tree import Blank, tree_of
from drc_power.netlist import read_netlist
from drc_power.report.write import write_files
from drc_power.run import check
from drc_power.survey import survey_netlist

sys.path.insert(0, str(Path(__file__).parents[1] / "boards"))
from battery_board import ANNOTATIONS, DEVICES, PARTS  # noqa: E402
from draw import write_board  # noqa: E402

ROOT = Path(__file__).parents[2]
DEMO = ROOT / "fixtures" / "frost-fan"
SHARED = ROOT.parent / "shared" / "netlists"
NETLISTS = [DEMO / "rev-b.net", DEMO / "rev-c.net", *sorted(SHARED.glob("*.net"))]


@pytest.fixture
def drafted(tmp_path, request):
    """A netlist with a draft beside it, in an empty folder; the annotation file's path."""
    (tmp_path / "board.net").write_bytes(request.param.read_bytes())
    netlist = read_netlist(tmp_path / "board.net")
    path = tmp_path / "board.power.yaml"
    files = make_draft(survey_netlist(netlist), netlist, str(path)).files
    (tmp_path / "devices").mkdir()
    write_files(files)
    return path


@pytest.mark.parametrize("drafted", NETLISTS, ids=lambda path: path.stem, indirect=True)
def test_a_draft_checks_with_everything_unproven_by_name(drafted):
    result = check(str(drafted))
    assert exit_status(result) == 1
    assert {f.verdict for f in result.findings} == {"unproven"}
    tree = tree_of(drafted.read_bytes(), "x")[0]
    nets = {f.net for f in result.findings if f.rule == "coverage.rail"}
    assert all(isinstance(rail.get("voltage", rail.get("ac")), Blank) for rail in tree["rails"].values()) and set(tree["rails"]) <= nets
    told = " ".join(f.text for f in result.findings if f.rule == "coverage.data" and f.ref is None)
    assert all(f"the load {name} takes" in told for name in tree.get("loads") or ())
    refs = {f.ref for f in result.findings if f.ref}
    assert {ref for key in tree["parts"] for ref in key.split()} <= refs
    assert set(result.coverage.unproven) >= {ref for key in tree["parts"] for ref in key.split()}


@pytest.mark.parametrize("drafted", NETLISTS[:2], ids=lambda path: path.stem, indirect=True)
def test_the_command_says_so_and_exits_1(drafted, capsys):
    assert main(["check", str(drafted)]) == 1
    out, err = capsys.readouterr()
    assert "0 exceeded" in out and "0 met" in out and err == ""


@pytest.fixture
def battery(tmp_path):
    return lambda annotations=ANNOTATIONS, devices=DEVICES: check(str(write_board(tmp_path, PARTS, annotations, devices)))


BLANKS = [
    ("VBAT: {voltage: 20 V .. 24 V .. 28 V,", "VBAT: {voltage: ,"), ('"+5V": {voltage: 5 V}', '"+5V": {voltage: }'),
    ("draws: 20 mA .. 60 mA", "draws: "), ("resistance: 12 ohm ± 5 %", "resistance: "), ("ambient: -20 °C .. 50 °C", "ambient: "),
    ("{device: nfet-60v, gate: 10 V,", "{device: , gate: 10 V,"), ("{device: shunt-2512}", "{device: }"), ("gate: 10 V", "gate: "),
]
"""Every key of the annotations that may be blank and that the board has."""


@pytest.mark.parametrize(("given", "blank"), BLANKS, ids=[row[1] for row in BLANKS])
def test_no_blank_of_the_annotations_passes(battery, given, blank):
    assert given in ANNOTATIONS
    before, after = battery(), battery(ANNOTATIONS.replace(given, blank))
    assert not [f for f in before.findings if f.verdict == "unproven"]
    assert [f for f in after.findings if f.verdict == "unproven"] and exit_status(after) == 1


DATA = [re.search(rf"{key}: ([^,{{}}\[\]]+|\{{[^}}]*\}}|\[\[.*?\]\])", DEVICES) for key in
        ("vds", "vgs", "id", "tj", "power", "rds", "dc", "vin", "current", "dropout", "quiescent", "differential", "voltage", "resistance", "rth_ja")]


@pytest.mark.parametrize("found", DATA, ids=[m[0] for m in DATA])
def test_no_blank_of_the_device_data_passes(battery, found):
    key, _, value = found[0].partition(": ")
    blanked = DEVICES[: found.start()] + f"{key}: " + DEVICES[found.end() :]
    assert blanked != DEVICES and value
    assert [f for f in battery(devices=blanked).findings if f.verdict == "unproven"]


REFUSED = [("rds_scale: [[25 °C, 1.0], [100 °C, 1.4], [150 °C, 1.8]]", "rds_scale: "), ("at_gate: 10 V", "at_gate: "), ("slope: 10 mohm", "slope: ")]


@pytest.mark.parametrize(("given", "blank"), REFUSED, ids=[row[1] for row in REFUSED])
def test_a_blank_that_would_pass_for_none_is_refused(tmp_path, capsys, given, blank):
    path = write_board(tmp_path, PARTS, ANNOTATIONS, DEVICES.replace(given, blank, 1))
    assert main(["check", str(path)]) == 2
    assert "is due here, found nothing" in capsys.readouterr().err


@pytest.mark.parametrize("annotations", [
    ANNOTATIONS.replace("draws: 20 mA .. 60 mA", "draws: "),
    ANNOTATIONS.replace("draws: 20 mA .. 60 mA", "draws: ").replace("4.5 V .. 5.5 V", "4.6 V .. 5.1 V"),
], ids=["in the middle", "where some load would help"])
def test_a_load_left_blank_leaves_all_that_carries_it_unproven(battery, annotations):
    verdicts = {(f.ref, f.rule): f.verdict for f in battery(annotations).findings}
    for ref, rule in (("F1", "derating.current"), ("Q1", "junction.steady"), ("U1", "junction.steady"), ("U1", "derating.current")):
        assert verdicts[ref, rule] == "unproven", (ref, rule)
    assert [f for f in battery(annotations).findings if f.rule == "coverage.data" and "controller" in f.text]


def test_a_blank_in_a_mode_takes_the_base_value_away(tmp_path):
    modes = "modes:\n  run: {}\n  idle: {loads: {heater: {draws: }, controller: {draws: 1 mA}}}\n"
    result = check(str(write_board(tmp_path, PARTS, ANNOTATIONS + modes, DEVICES)))
    open_loads = [f for f in result.findings if f.rule == "coverage.data" and "heater" in f.text]
    assert [f.mode for f in open_loads] == ["idle"]
    assert {f.mode for f in result.findings if f.verdict == "unproven"} == {"idle"}


@pytest.mark.parametrize(("load", "lacks", "demands"), [
    ("{net: A, draws: }", True, ()), ("{net: A, draws: , power: 3 W}", False, ("power",)), ("{net: A, draws: 1 A, power: }", False, ("draws",)),
    ("{net: A, kind: motor, draws: , resistance: 0.3 ohm}", True, ("resistance",)), ("{net: A, kind: motor, draws: 1 A, resistance: }", False, ("draws",)),
])
def test_what_counts_as_a_demand_beside_blanks(tmp_path, load, lacks, demands):
    path = tmp_path / "b.power.yaml"
    path.write_text(f"format: 1\nnetlist: b.net\nloads: {{x: {load}}}\n")
    note = read_annotations(path).in_mode("run").loads["x"]
    assert (note.lacks_demand, note.demands) == (lacks, demands)


@pytest.mark.parametrize("stage", ["{kind: low-side, switch: Q2, load: heater, frequency: , duty: }", "{kind: low-side, switch: Q2, frequency: }"])
def test_a_switch_that_may_be_chopped_is_unproven_until_somebody_says(battery, stage):
    result = battery(ANNOTATIONS + f"stages:\n  heat: {stage}\n")
    verdicts = {f.rule: f.verdict for f in result.findings if f.ref == "Q2"}
    assert {verdicts[rule] for rule in ("junction.steady", "dissipation.part", "derating.vds")} == {"unproven"}
    static = battery(ANNOTATIONS + "stages:\n  heat: {kind: low-side, switch: Q2, load: heater}\n")
    assert not [f for f in static.findings if f.verdict == "unproven"]


def test_a_chips_idle_current_left_blank_is_unproven(battery):
    chip = "  mc-01: {kind: ic, limits: {power: 1 W, tj: 125 °C}, thermal: {rth_ja: 100 K/W}, conduction: {quiescent: }}\n"
    annotations = ANNOTATIONS.replace("outside:\n  - {parts: [U2], because: signal level}\n", "").replace(", heats: U2", "")
    result = battery(annotations.replace("  R3:", "  U2: {device: mc-01}\n  R3:"), DEVICES + chip)
    assert {f.verdict for f in result.findings if f.ref == "U2"} == {"unproven"}


def test_a_draft_filled_in_checks_like_annotations_written_by_hand(tmp_path):
    """The same numbers typed into the blanks of a draft give the same operating points."""
    by_hand = check(str(write_board(tmp_path, PARTS, ANNOTATIONS, DEVICES)))
    folder = tmp_path / "drafted"
    (folder / "devices").mkdir(parents=True)
    (folder / "board.net").write_bytes((tmp_path / "board.net").read_bytes())
    netlist = read_netlist(folder / "board.net")
    path = folder / "board.power.yaml"
    text = make_draft(survey_netlist(netlist), netlist, str(path)).files[str(path)]
    for blank, given in FILLED_IN:
        assert text.count(blank) == 1, (blank, text)
        text = text.replace(blank, given)
    path.write_text(text)
    (folder / "devices" / "board.yaml").write_text("format: 1\ndevices:\n" + renamed(DEVICES))
    result = check(str(path))
    assert not [f for f in result.findings if f.verdict == "unproven"]
    assert worst_powers(result) == pytest.approx(worst_powers(by_hand))


FILLED_IN = [
    ("{ambient: }", "{ambient: -20 °C .. 50 °C}"), ("VBAT: {voltage: ,", "VBAT: {voltage: 20 V .. 24 V .. 28 V,"),
    ('"+5V": {voltage: ,', '"+5V": {voltage: 5 V,'), ('{net: "+5V", draws: }', '{net: "+5V", draws: 20 mA .. 60 mA}'),
    ('{net: "+24V", return: "/HEAT-", draws: }', '{net: "+24V", return: "/HEAT-", resistance: 12 ohm ± 5 %}'),
    (", frequency: , duty: }", "}"), ("{device: pf4012, gate: }", "{device: pf4012, gate: 20 V .. 28 V}"),
    ("{device: nf6008, gate: , overshoot: }", "{device: nf6008, gate: 10 V, heat: {sink: plate, interface: 0.6 K/W}}"),
    ("{device: reg-5v0}", "{device: reg-5v0, heat: {sink: plate, interface: 1.0 K/W}}"),
    ("rules: [shipped/common-practice]", "sinks: {plate: {resistance: 8 K/W}}"),
]


def renamed(devices: str) -> str:
    """The board's device data under the names that a draft gives."""
    for name, drafted in (("fuse-10a", "fuse-10a"), ("pfet-40v", "pf4012"), ("nfet-60v", "nf6008"), ("ldo-5v", "reg-5v0"), ("shunt-2512", "resistor")):
        devices = devices.replace(f"  {name}: {{", f"  {drafted}: {{")
    return devices


def worst_powers(result) -> dict[str, float]:
    """The highest dissipation of every part [W]."""
    return {p.ref: max(q.power_w for q in result.operating_points if q.ref == p.ref) for p in result.operating_points}


DRAWN = sorted((ROOT / "tests" / "survey" / "boards").glob("*.txt"))
_conftest = importlib.util.spec_from_file_location("drawn_boards", ROOT / "tests" / "survey" / "conftest.py")
drawn_boards = importlib.util.module_from_spec(_conftest)
sys.modules["drawn_boards"] = drawn_boards
_conftest.loader.exec_module(drawn_boards)


def as_text(netlist) -> str:
    """A netlist as KiCad writes it."""
    def quote(text: str) -> str:
        return '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'

    comps = [f"(comp (ref {quote(p.ref)}) (value {quote(p.value)}) (footprint {quote(p.footprint)}) (libsource (lib {quote(p.library)}) "
             f"(part {quote(p.symbol)}) (description {quote(p.description)})))" for p in netlist.parts.values()]
    pins = {(p.ref, pin.number): pin for p in netlist.parts.values() for pin in p.pins}
    nets = []
    for code, net in enumerate(netlist.nets.values(), 1):
        nodes = [f"(node (ref {quote(n.ref)}) (pin {quote(n.pin)}) (pinfunction {quote(pins[n.ref, n.pin].name)}) (pintype {quote(pins[n.ref, n.pin].type)}))"
                 for n in net.nodes]
        nets.append(f'(net (code "{code}") (name {quote(net.name)}) {" ".join(nodes)})')
    return f'(export (version "E") (components {" ".join(comps)}) (nets {" ".join(nets)}))'


@pytest.mark.parametrize("board", DRAWN, ids=lambda path: path.stem)
def test_every_drawn_board_drafts_into_a_check_without_error(tmp_path, board):
    drawn = drawn_boards.draw(board.read_text(encoding="utf-8"), board.stem)
    (tmp_path / "board.net").write_text(as_text(drawn.netlist), encoding="utf-8")
    netlist = read_netlist(tmp_path / "board.net")
    survey = survey_netlist(netlist)
    path = tmp_path / "board.power.yaml"
    (tmp_path / "devices").mkdir()
    write_files(make_draft(survey, netlist, str(path)).files)
    result = check(str(path))
    assert exit_status(result) == 1
    assert {f.verdict for f in result.findings} == {"unproven"}
    judged = {e.ref for e in survey.elements if e.group in ("pass", "switch", "clamp")}
    assert judged <= {f.ref for f in result.findings if f.ref}
