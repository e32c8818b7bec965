"""Current in equals current out and power in equals power out on every solved point of the demo, at random points too."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from drc_power.run import Run, read_board
from drc_power.solve.balance import current_imbalance, heat_imbalance, power_imbalance
from drc_power.solve.build import build_circuit
from drc_power.solve.solution import Engine

DEMO = Path(__file__).parents[2] / "fixtures" / "frost-fan"


@pytest.mark.parametrize("revision", ["rev-b", "rev-c"])
def test_every_point_balances(revision):
    board, _, _ = read_board(DEMO / f"{revision}.power.yaml", Run())
    for mode in board.modes:
        circuit = build_circuit(mode)
        low, high = circuit.box.bounds()
        points = low + np.random.default_rng(3).random((200, len(low))) * (high - low)
        solution = Engine(circuit).solve(points, polish=True)
        assert not solution.unsolved().any()
        assert current_imbalance(solution).max() < 1e-9
        assert power_imbalance(solution).max() < 1e-9
        assert heat_imbalance(solution).max() < 1e-9


def test_junction_case_and_ambient_are_in_order():
    """Heat flows outward: Tj ≥ Tcase ≥ ambient wherever a part dissipates."""
    board, _, _ = read_board(DEMO / "rev-c.power.yaml", Run())
    circuit = build_circuit(board.modes[0])
    low, high = circuit.box.bounds()
    points = low + np.random.default_rng(4).random((100, len(low))) * (high - low)
    solution = Engine(circuit).solve(points)
    for point in solution.parts.values():
        known = ~np.isnan(point.tj_c)
        assert (point.tj_c >= solution.ambient_c - 1e-9)[known].all()
        cased = ~np.isnan(point.case_c)
        assert (point.tj_c >= point.case_c - 1e-9)[cased].all()
        assert (point.case_c >= solution.ambient_c - 1e-9)[cased].all()


def test_no_random_point_beats_a_worst_corner():
    """10,000 random points of the demo's box, interior and corners: none is worse than what the search reports."""
    from drc_power.checks import House, judge
    from drc_power.checks.decide import objective_of
    from drc_power.solve.search import worst_corners

    board, _, _ = read_board(DEMO / "rev-c.power.yaml", Run())
    circuit, house = build_circuit(board.modes[0]), House(board.rules)
    engine = Engine(circuit)

    def objectives(points):
        values = np.vstack([objective_of(j) for j in judge(engine.solve(points), house)])
        return values, values[:0]

    worst = worst_corners(circuit.box, objectives)
    found = objectives(worst.points)[0][np.arange(len(worst.at)), worst.at]
    low, high = circuit.box.bounds()
    share = np.random.default_rng(5).random((10_000, len(low)))
    share[:5000] = np.round(share[:5000])
    sampled = objectives(low + share * (high - low))[0].min(axis=1)
    assert (sampled >= found - 0.005 * np.maximum(1.0, np.abs(found))).all()
    assert (sampled >= found - 1e-6).mean() > 0.99
