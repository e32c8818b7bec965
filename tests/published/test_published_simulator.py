"""Operating points of a general-purpose circuit simulator, against the solver and against whole runs.

Source: ngspice 39 (the version stands in each kept file). `simulator/NN-name.cir` is the deck, an original circuit;
`simulator/NN-name.op.txt` is what batch mode printed for it, kept as printed. To keep new numbers, in that folder:
    ngspice -b NN-name.cir 2>/dev/null
Both sides model the same thing: a diode as a straight line past its knee, a regulator as the lower of its set voltage
and input less dropout, a temperature as the voltage of a node fed with the loss. The decks say how, in their first lines.

Tolerance: the decks ask the simulator to stop at 1e-9 of each unknown, and print 11 to 12 digits; 1e-9 is therefore
the tightest that can be asked, a millionth of the 0.1 % that agreement of methods would need. Currents of a bus bar
are differences of nearly equal voltages over 0.2 mohm: 48 V to 2e-16 of itself is 5e-11 A there, still within 1e-9.
"""

from __future__ import annotations

import importlib
import re
import shutil
import subprocess
from pathlib import Path

import numpy as np
import pytest
from circuits import RDS_SCALE, P, link, own_heat
from draw import write_board
from engines import engine_solution

from drc_power.run import check
from drc_power.solve.branches import (
    CurrentLoad, Curve, Drop, Efficiency, Linear, OneWay, PowerLoad, Resistive, Source, Switching,
)
from drc_power.solve.heat import HeatModel, HeatPath, Sink
from drc_power.solve.solution import Solution

FOLDER = Path(__file__).parent / "simulator"
DECKS = sorted(FOLDER.glob("*.cir"))
RELATIVE, ABSOLUTE = 1e-9, 1e-12
NOT_A_TEMPERATURE_C = 1e6

NUMBER = re.compile(r"^(\S+) = (-?\d\S*)$")


def read_points(text: str) -> list[dict[str, float]]:
    """The printed operating points, one mapping each from name to number; v(x) is called x."""
    points: list[dict[str, float]] = []
    for line in text.splitlines():
        if line.startswith("No. of Data Rows"):
            points.append({})
        elif found := NUMBER.match(line):
            name = re.sub(r"^v\((\w+)\)$", r"\1", found[1])
            points[-1][name] = float(found[2])
    return points


def kept(name: str) -> list[dict[str, float]]:
    return read_points((FOLDER / f"{name}.op.txt").read_text(encoding="ascii"))


def near(value: float):
    return pytest.approx(value, rel=RELATIVE, abs=ABSOLUTE)


def current(key: str, a: str, b: str, amps: float) -> CurrentLoad:
    return CurrentLoad(key, a, b, P(amps))


def diode(key: str, a: str, b: str, knee_v: float, slope_ohm: float, part: str | None = None, knee_v_per_k: float = 0.0) -> OneWay:
    return OneWay(key, a, b, Drop(P(knee_v), P(slope_ohm), knee_v_per_k), part)


def battery(key: str, a: str, volts: float, ohms: float = 0.0) -> Source:
    return Source(key, a, "0", P(volts), P(ohms))


ETA = Efficiency((36.0, 60.0), (Curve(np.array([0.1, 1.0, 3.0, 6.0]), np.array([0.78, 0.90, 0.93, 0.91])),
                                Curve(np.array([0.1, 1.0, 3.0, 6.0]), np.array([0.70, 0.86, 0.90, 0.89]))))

CIRCUITS = {
    "01-resistor-mesh": [
        battery("s1", "a", 24.0, 0.12), battery("s2", "d", 12.6, 0.045), link("r1", "a", "b", 3.3), link("r2", "a", "c", 4.7),
        link("r3", "b", "c", 10.0), link("r4", "b", "d", 2.2), link("r5", "c", "e", 6.8), link("r6", "d", "e", 1.5),
        link("r7", "e", "0", 8.2), link("r8", "b", "f", 15.0), link("r9", "f", "c", 0.47), link("r10", "f", "0", 22.0)],
    "02-battery-fuse-reverse-fet": [
        battery("bat", "bat", 12.6, 0.035), link("f1", "bat", "vf", 0.009), link("q1", "vf", "sys", 0.0065),
        diode("d1", "vf", "sys", 0.7, 0.01), link("lamp", "sys", "0", 2.4), current("load", "sys", "0", 3.0)],
    "03-oring-diodes": [
        battery("v1", "a", 24.0), battery("v2", "e2", 23.9), battery("v3", "c", 19.0), link("r2", "e2", "b", 0.02),
        diode("d1", "a", "out", 0.42, 0.055), diode("d2", "b", "out", 0.38, 0.03), diode("d3", "c", "out", 0.42, 0.055),
        link("rload", "out", "0", 9.0), current("iload", "out", "0", 1.5)],
    "04-parallel-fets": [
        battery("s", "in", 48.0),
        *(link(f"b{k}", a, f"b{k}", 0.0002) for k, a in ((1, "in"), (2, "b1"), (3, "b2"), (4, "b3"))),
        *(link(f"q{k}", f"b{k}", f"c{k}", r) for k, r in ((1, 0.0031), (2, 0.0036), (3, 0.0029), (4, 0.0040))),
        *(link(f"c{k}", f"c{k}", f"c{k + 1}", 0.00015) for k in (1, 2, 3)), current("load", "c4", "0", 60.0)],
    "05-regulator-chain": [
        battery("s", "in", 24.0), link("r1", "in", "a", 0.8), Linear("u1", "a", "b", "0", P(12.0), P(1.5), P(0.006)),
        link("r2", "b", "c", 0.15), Linear("u2", "c", "d", "0", P(5.0), P(1.1), P(0.004)),
        link("r3", "d", "e", 0.05), Linear("u3", "e", "f", "0", P(4.7), P(0.45), P(0.0012)),
        current("lb", "b", "0", 0.2), link("rd", "d", "0", 25.0), link("rf", "f", "0", 33.0), current("lf", "f", "0", 0.08)],
    "06-constant-power-near-limit": [
        battery("s", "in", 12.0), link("r1", "in", "a", 0.6), link("r2", "a", "b", 0.4), PowerLoad("load", "b", "0", P(35.9), 0.6)],
    "07-low-side-switch-split-ground": [
        battery("bat", "bat", 26.0, 0.04), link("heat", "bat", "hm", 4.0), link("q1", "hm", "sh", 0.014),
        link("shunt", "sh", "pgnd", 0.005), link("tie1", "pgnd", "0", 0.003), link("tie2", "agnd", "pgnd", 0.02),
        Linear("u1", "bat", "vcc", "agnd", P(5.0), P(1.2), P(0.005)), current("cpu", "vcc", "agnd", 0.15),
        link("sense", "vcc", "sh", 1000.0)],
    "08-converter-behind-cable": [
        battery("s", "in", 48.0), link("c1", "in", "a", 0.35), link("c2", "b", "0", 0.35),
        Switching("u1", "a", "out", "b", P(12.0), ETA), link("rload", "out", "b", 4.0), current("iload", "out", "b", 1.2)],
    "09-electro-thermal-one-part": [
        battery("s", "in", 24.0), Resistive("q1", "in", "b", P(0.008), "q1", RDS_SCALE), current("load", "b", "0", 14.0)],
    "10-electro-thermal-shared-sink": [
        battery("s", "in", 14.0), diode("d1", "in", "a", 0.52, 0.018, "d1", -0.0013), link("load", "a", "hm", 0.9),
        Resistive("q1", "hm", "0", P(0.022), "q1", RDS_SCALE)],
}

HEAT = {
    "09-electro-thermal-one-part": own_heat(("q1", 55.0, 30.0)),
    "10-electro-thermal-shared-sink": HeatModel(
        (HeatPath("d1", P(45.0), (P(2.4),), sink="sink"), HeatPath("q1", P(45.0), (P(1.9),), sink="sink")),
        {"sink": Sink("sink", P(2.6), P(45.0))}),
}

def printed_name(kind: str, name: str) -> str:
    """What the deck prints for one of our unknowns: `b`, `i_r1`, `iin_u1` for a regulator's input."""
    return name if kind == "node" else f"iin_{name.removesuffix(' input')}" if name.endswith(" input") else f"i_{name}"


@pytest.mark.parametrize("name", CIRCUITS)
def test_every_voltage_and_current_is_what_the_simulator_printed(name):
    """Of every node and branch; one that the deck does not print is an error."""
    solution = engine_solution(CIRCUITS[name], HEAT.get(name))
    printed, = kept(name)
    assert solution.converged.all()
    ours = {printed_name(kind, key): solution.x[at, 0] for (kind, key), at in solution.system.layout.names.items()
            if kind in ("node", "current")}
    assert ours == {key: near(printed[key]) for key in ours}


def losses_and_junctions(solution: Solution) -> dict[str, float]:
    """The loss and the junction temperature of every part with a heat path, by the deck's names."""
    junctions = solution.temperatures.junction_c
    return {f"p_{part}": solution.powers_w[part][0] for part in junctions} | {f"t_{part}": t[0] for part, t in junctions.items()}


@pytest.mark.parametrize("name", HEAT)
def test_every_loss_and_temperature_is_what_the_simulator_printed(name):
    printed, = kept(name)
    ours = losses_and_junctions(engine_solution(CIRCUITS[name], HEAT[name]))
    assert ours == {key: near(value) for key, value in printed.items() if key.startswith(("p_", "t_"))}


def test_every_deck_is_compared_and_has_its_numbers():
    stems = {deck.stem for deck in DECKS}
    assert stems == CIRCUITS.keys() | BOARDS.keys() | {"11-runaway", "12-board-battery"}
    assert stems == {path.name.removesuffix(".op.txt") for path in FOLDER.glob("*.op.txt")}


# Runaway: deck 11

RISING = Curve(np.array([25.0, 2025.0]), np.array([1.0, 11.0]))


def heated_channel(i_load_a: float) -> Solution:
    """The circuit of deck 11 at one current."""
    branches = [battery("s", "in", 24.0), Resistive("q1", "in", "b", P(0.004), "q1", RISING), current("load", "b", "0", i_load_a)]
    return engine_solution(branches, own_heat(("q1", 50.0, 130.0)))


@pytest.mark.parametrize("point", range(3))
def test_below_a_gain_of_one_both_find_the_equilibrium(point):
    printed = kept("11-runaway")[point]
    solution = heated_channel(printed["i_load"])
    assert solution.converged.all()
    assert not solution.runaway
    assert solution.gain[0] < 1.0
    assert losses_and_junctions(solution) == {key: near(printed[key]) for key in ("p_q1", "t_q1")}
    assert solution.node_v("b")[0] == near(printed["b"])


def test_where_the_simulator_prints_no_temperature_ours_says_runaway():
    """At 20 A the simulator's searches all fail; its last resort, a transient, prints what is no temperature."""
    printed = kept("11-runaway")[3]
    assert printed["t_q1"] > NOT_A_TEMPERATURE_C
    solution = heated_channel(printed["i_load"])
    assert solution.runaway["q1"].all()
    assert solution.gain[0] > 1.0


def test_the_simulator_breaks_off_at_the_current_where_our_loop_gain_is_one():
    """Its source stepping towards 20 A gets to the printed share and no further; six digits are printed."""
    search = (FOLDER / "11-runaway.search.txt").read_text(encoding="ascii")
    last = re.findall(r"Supplies reduced to +([\d.]+)% Note: One successful source step", search)[-1]
    solution = heated_channel(20.0 * float(last) / 100.0)
    assert solution.gain[0] == pytest.approx(1.0, abs=2.0 * 0.0001 / 98.0)


# Whole boards: decks 12 to 14 against `check`

BOARDS = {
    "13-board-two-feeds": ("two_feed_board", {
        "/IN1": "in1", "/IN2": "in2", "+24V": "p24", "/BUCKIN": "buckin", "+12V": "p12", "/LOGIC": "logic", "+5V": "p5"}),
    "14-board-heater": ("heater_board", {
        "VBAT": "bat", "+24V": "p24", "/HEAT-": "hm", "/SHUNT": "sh", "GNDPWR": "gndpwr", "/FEED": "feed", "+12V": "p12", "+5V": "p5"}),
}

BATTERY_NETS = {"VBAT": "bat", "VF": "vf", "+24V": "p24", "/HEAT-": "hm", "/SHUNT": "sh", "+5V": "p5"}


def run_board(module: str, folder: Path):
    board = importlib.import_module(module)
    return check(write_board(folder, board.PARTS, board.ANNOTATIONS, board.DEVICES))


@pytest.mark.parametrize("name", BOARDS)
def test_a_whole_board_is_what_the_simulator_printed(name, tmp_path):
    """Voltage, current, loss, junction and case of every element, voltage of every net; all spans exact."""
    module, nets = BOARDS[name]
    printed, = kept(name)
    result = run_board(module, tmp_path)
    for row in result.operating_points:
        ref = row.ref.lower()
        ours = {"v": row.voltage_v, "i": row.current_a, "p": row.power_w}
        assert ours == {key: near(printed[f"{key}_{ref}"]) for key in ours}, row.ref
        assert (row.tj_c, row.case_c) == (near_or_none(printed, f"t{ref}"), near_or_none(printed, f"c{ref}")), row.ref
    assert {row.net: row.voltage_v for row in result.nets} == {net: near(printed[at]) for net, at in nets.items()}
    assert {f"i_{row.ref.lower()}" for row in result.operating_points} == {key for key in printed if key.startswith("i_")}


def near_or_none(printed: dict[str, float], name: str):
    return near(printed[name]) if name in printed else None


def at_least(value: float):
    """Not below the worst of the corners, and no more than a millionth above it."""
    return pytest.approx(value * (1.0 + 0.5e-6), abs=value * (0.5e-6 + RELATIVE))


def test_worst_corners_of_a_board_are_the_worst_of_the_simulators_32(tmp_path):
    """The battery board's highest losses and junctions and both ends of every net, over all corners of its spans.

    +24V, and with it the loss of U1, is highest inside the box: where Q1's table has not begun to rise, up to 25 °C,
    while the warmer Q2 already takes less current. By 7e-8 of itself, which no corner shows.
    """
    corners = kept("12-board-battery")
    result = run_board("battery_board", tmp_path)
    assert len(corners) == 32
    for ref, agrees in (("F1", near), ("Q1", near), ("Q2", near), ("R3", near), ("U1", at_least)):
        worst = max(corners, key=lambda c, ref=ref: c[f"p_{ref.lower()}"])
        row = max((p for p in result.operating_points if p.ref == ref), key=lambda p: p.power_w)
        assert row.power_w == agrees(worst[f"p_{ref.lower()}"]), ref
        assert row.current_a == near(worst[f"i_{ref.lower()}"]), ref
    junctions = {f.ref: f.value for f in result.findings if f.rule == "junction.steady"}
    assert junctions == {ref: near(max(c[f"t{ref.lower()}"] for c in corners)) for ref in ("Q1", "Q2", "U1")}
    for net, at in BATTERY_NETS.items():
        found, printed = [row.voltage_v for row in result.nets if row.net == net], [c[at] for c in corners]
        assert min(found) == near(min(printed)), net
        assert max(found) == (at_least if net == "+24V" else near)(max(printed)), net


# The kept numbers are what the simulator prints

@pytest.mark.skipif(shutil.which("ngspice") is None, reason="the simulator is not installed")
@pytest.mark.parametrize("deck", DECKS, ids=lambda deck: deck.stem)
def test_the_kept_numbers_are_what_the_simulator_prints(deck):
    """Other versions of it may round otherwise, so ten times the tolerance; where there is no equilibrium, none."""
    done = subprocess.run(["ngspice", "-b", deck.name], cwd=FOLDER, capture_output=True, text=True, timeout=60, check=False)
    fresh, before = read_points(done.stdout), kept(deck.stem)
    assert len(fresh) == len(before) > 0
    for new, old in zip(fresh, before, strict=True):
        if old.get("t_q1", 0.0) > NOT_A_TEMPERATURE_C:
            assert new["t_q1"] > NOT_A_TEMPERATURE_C
        else:
            assert new == {key: pytest.approx(value, rel=10 * RELATIVE, abs=10 * ABSOLUTE) for key, value in old.items()}
