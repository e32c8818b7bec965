"""Gate drive and RC snubbers on the buck converter's board: V · Q_g · f in the chip, C · V² · f in the resistor.

Sources: the gate's loss is common practice and listed by ROHM 64AN035E; the snubber's is Rashid, Power Electronics,
4th edition, example 4.5, for both edges.
"""

from __future__ import annotations

import numpy as np
import pytest
from converter_boards import BUCK_ANNOTATIONS, BUCK_DEVICES, BUCK_PARTS
from draw import write_board

from drc_power.run import Run, check, read_board
from drc_power.solve.balance import current_imbalance, power_imbalance
from drc_power.solve.build import build_circuit
from drc_power.solve.solution import Engine

V, F_HZ = 24.0, 200e3
PARTS = BUCK_PARTS | {"R9": ("R", "4R7", "/SW", "/SNUB"), "C9": ("C", "1n", "/SNUB", "GND")}
DEVICES = BUCK_DEVICES + "  chip-1206: {kind: resistor, source: \"invented\", limits: {power: 250 mW}}\n"
ANNOTATIONS = BUCK_ANNOTATIONS + "  R9: {device: chip-1206}\n"


def finding(result, ref, rule):
    found = [f for f in result.findings if (f.ref, f.rule) == (ref, rule)]
    assert len(found) == 1, [f"{f.ref} {f.rule}" for f in result.findings]
    return found[0]


@pytest.fixture(scope="module")
def result(tmp_path_factory):
    return check(write_board(tmp_path_factory.mktemp("gates"), PARTS, ANNOTATIONS, DEVICES))


def test_the_chip_burns_its_quiescent_current_and_both_gates(result):
    power = finding(result, "U1", "dissipation.part")
    assert power.value == pytest.approx(V * 3e-3 + V * (62e-9 + 90e-9) * F_HZ, rel=1e-6)
    gates = [step.value for step in power.workings if step.symbol == "P_gate"]
    assert gates == pytest.approx([V * 62e-9 * F_HZ, V * 90e-9 * F_HZ])


def test_the_snubber_s_resistor_burns_one_charge_a_cycle(result):
    power = finding(result, "R9", "dissipation.part")
    assert power.value == pytest.approx(1e-9 * V**2 * F_HZ, rel=1e-6)
    assert power.verdict == "met"


def test_both_come_out_of_the_supply(result, tmp_path):
    without = check(write_board(tmp_path, BUCK_PARTS, BUCK_ANNOTATIONS, DEVICES))
    drawn = [max(n.current_a for n in r.nets if n.net == "VIN") for r in (result, without)]
    assert drawn[0] - drawn[1] == pytest.approx(1e-9 * V * F_HZ, rel=1e-3)


def test_a_gate_charge_that_is_missing_leaves_the_chip_unproven(tmp_path):
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS, DEVICES.replace("charge: 90 nC, ", "")))
    found = finding(result, "U1", "dissipation.part")
    assert found.verdict == "unproven"
    assert "gate.charge of Q2" in found.remedy


@pytest.mark.parametrize("annotations", [
    ANNOTATIONS.replace("U1: {device: controller}", "U1: {device: controller, draws: 40 mA}"),
    ANNOTATIONS.replace('loads:\n', 'loads:\n  control: {net: VIN, draws: 40 mA, heats: U1}\n')])
def test_an_annotated_current_of_the_chip_counts_the_gates_already(tmp_path, annotations):
    result = check(write_board(tmp_path, PARTS, annotations, DEVICES))
    assert finding(result, "U1", "dissipation.part").value == pytest.approx(V * 40e-3, rel=1e-6)


def test_a_gate_behind_a_resistor_is_found(tmp_path):
    parts = PARTS | {"U1": ("PWM", "PW-100", "VIN", "GND", "/HO", "/GL", "/FB"), "R8": ("R", "4R7", "/HO", "/GH")}
    result = check(write_board(tmp_path, parts, ANNOTATIONS, DEVICES))
    assert finding(result, "U1", "dissipation.part").value == pytest.approx(V * 3e-3 + V * (62e-9 + 90e-9) * F_HZ, rel=1e-6)


def test_a_filter_to_an_amplifier_is_no_snubber(tmp_path):
    parts = PARTS | {"U3": ("MCU", "MC-01", "VIN", "GND", "/SNUB", "")}
    board, _, _ = read_board(write_board(tmp_path, parts, ANNOTATIONS, DEVICES), Run())
    assert not [b for b in build_circuit(board.modes[0]).branches if b.key == "R9 snubber"]


def test_random_points_balance(tmp_path):
    spread = ANNOTATIONS.replace("voltage: 24 V,", "voltage: 8 V .. 40 V,").replace("draws: 8 A", "draws: 0 A .. 10 A")
    board, _, _ = read_board(write_board(tmp_path, PARTS, spread, DEVICES), Run())
    circuit = build_circuit(board.modes[0])
    low, high = circuit.box.bounds()
    solution = Engine(circuit).solve(low + np.random.default_rng(11).random((200, len(low))) * (high - low), polish=True)
    assert not solution.unsolved().any()
    assert current_imbalance(solution).max() < 1e-9
    assert power_imbalance(solution).max() < 1e-9
