"""Numbers that carry their slopes, against central differences; and the derivatives of every group's law likewise."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

from drc_power.run import Run, read_board
from drc_power.solve.build import build_circuit
from drc_power.solve.duals import Dual, maximum, read, sqrt, where
from drc_power.solve.groups import Groups
from drc_power.solve.solution import Engine

sys.path.insert(0, str(Path(__file__).parents[1] / "boards"))
import converter_boards as boards
import test_bridge_boards as bridge
import test_gates_and_snubbers as cycles
import test_rectifier_board as rectifier
import test_sine_board as sine
from draw import write_board

FORMULAS = [
    lambda x, y: x * y + 2.0 * x - y / x, lambda x, y: 1.0 / (x + y) - (3.0 - x), lambda x, y: sqrt(x * x + y) ** 3,
    lambda x, y: maximum(x, 2.0) * y, lambda x, y: where(np.array([True]), x / y, y), lambda x, y: -x / np.array([4.0]) + np.array([2.0]) * y,
    lambda x, y: read(lambda v: (v**2, 2.0 * v), x + y)]


@pytest.mark.parametrize("formula", FORMULAS)
def test_slopes_are_central_differences(formula):
    def at(x, y):
        return formula(Dual.unknown("x", np.array([x])), Dual.unknown("y", np.array([y])))

    found, h = at(3.0, 1.5), 1e-6
    assert found.slopes["x"] == pytest.approx((at(3.0 + h, 1.5).value - at(3.0 - h, 1.5).value) / (2.0 * h), rel=1e-7)
    assert found.slopes["y"] == pytest.approx((at(3.0, 1.5 + h).value - at(3.0, 1.5 - h).value) / (2.0 * h), rel=1e-7)


BOARDS = {"buck": (boards.BUCK_PARTS, boards.BUCK_ANNOTATIONS, boards.BUCK_DEVICES),
          "boost": (boards.BOOST_PARTS, boards.BOOST_ANNOTATIONS, boards.BUCK_DEVICES),
          "bridge": (bridge.PARTS, bridge.ANNOTATIONS, bridge.DEVICES), "sine": (sine.PARTS, sine.ANNOTATIONS, sine.DEVICES),
          "sine by power": (sine.PARTS, sine.ANNOTATIONS.replace("draws: 14 A rms", "power: 300 W"), sine.DEVICES),
          "gates and snubber": (cycles.PARTS, cycles.ANNOTATIONS, cycles.DEVICES),
          "rectifier": (rectifier.PARTS, rectifier.ANNOTATIONS, rectifier.DEVICES)}


@pytest.mark.parametrize("name", BOARDS)
def test_the_derivatives_of_a_group_are_central_differences(tmp_path, name):
    board, _, _ = read_board(write_board(tmp_path, *BOARDS[name]), Run())
    circuit = build_circuit(board.modes[0])
    engine = Engine(circuit)
    solution = engine.solve(circuit.box.typical()[None, :])
    jacobian = engine.solver.jacobian(solution.x, solution.prepared)[0]
    for column in range(engine.system.n):
        h = 1e-5 * max(1.0, abs(solution.x[column, 0]))
        ends = []
        for step in (h, -h):
            x = solution.x.copy()
            x[column] += step
            ends.append(engine.system.evaluate(x, solution.prepared)[0][:, 0])
        difference = (ends[0] - ends[1]) / (2.0 * h)
        assert jacobian[:, column] == pytest.approx(difference, rel=1e-5, abs=1e-6), engine.system.layout
    assert any(isinstance(family, Groups) for family in engine.system.families)
