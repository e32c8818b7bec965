"""How fast networks are solved, as ratios within one run: python tests/benchmarks/solving.py

Rows: 10,000 samples of the demo's whole operating point; the same network's equations by scipy's root finder, sample by
sample; growth with samples and with islands; a tree of 1,000 regulators.
"""

from __future__ import annotations

import sys
import time
from pathlib import Path

import numpy as np

ROOT = Path(__file__).parents[2]
sys.path.insert(0, str(ROOT / "tests" / "solve"))

from circuits import P, RDS_SCALE, own_heat  # noqa: E402

from drc_power.run import Run, read_board  # noqa: E402
from drc_power.solve.branches import CurrentLoad, Linear, Resistive, Source  # noqa: E402
from drc_power.solve.build import build_circuit  # noqa: E402
from drc_power.solve.heat import HeatModel  # noqa: E402
from drc_power.solve.newton import Solver  # noqa: E402
from drc_power.solve.solution import Engine  # noqa: E402
from drc_power.solve.start import starting_point  # noqa: E402
from drc_power.solve.system import System  # noqa: E402


def seconds(work, repeats: int = 3) -> float:
    """The least of some runs after one that is not counted."""
    work()
    times = []
    for _ in range(repeats):
        begin = time.perf_counter()
        work()
        times.append(time.perf_counter() - begin)
    return min(times)


def random_points(box, n: int) -> np.ndarray:
    low, high = box.bounds()
    return low + np.random.default_rng(1).random((n, len(low))) * (high - low)


def demo_engine() -> Engine:
    board, _, _ = read_board(ROOT / "fixtures/frost-fan/rev-c.power.yaml", Run())
    return Engine(build_circuit(board.modes[0]))


def by_scipy(engine: Engine, points: np.ndarray) -> None:
    """The same equations, one sample after the other, by scipy's hybrid method from the same start."""
    from scipy.optimize import root

    system = engine.system
    for point in points:
        prepared = system.prepare(point[None])
        start = starting_point(system, point[None])

        def residual(x, prepared=prepared):
            return system.evaluate(np.append(x, 0.0)[:, None], prepared)[0][:, 0]

        root(residual, start[:-1, 0], method="hybr", tol=1e-10)


def regulators(n: int) -> tuple[System, np.ndarray]:
    """Chains of ten regulators, each feeding the next and a load, on one supply with a FET that warms."""
    branches = [Source("V", "in", "0", P(60.0)), Resistive("Q", "in", "bus", P(0.001), "Q", RDS_SCALE)]
    for k in range(n):
        chain, depth = divmod(k, 10)
        supply = "bus" if depth == 0 else f"out{k - 1}"
        branches += [Linear(f"U{k}", supply, f"out{k}", "0", P(48.0 - 4.0 * depth), P(0.5), P(0.001), f"U{k}"),
                     CurrentLoad(f"L{k}", f"out{k}", "0", P(0.001 * (1 + chain % 7)))]
    heat = own_heat(("Q", 40.0, 5.0))
    return System(branches, HeatModel(heat.paths, {}), ["0"]), np.zeros((1, 0))


def solve_once(system: System, points: np.ndarray) -> np.ndarray:
    return Solver(system).solve(starting_point(system, points), system.prepare(points))[1]


def main() -> None:
    engine = demo_engine()
    points = random_points(engine.circuit.box, 10_000)
    whole = seconds(lambda: engine.solve(points))
    few = points[:20]
    scipy_s = seconds(lambda: by_scipy(engine, few), 1) / len(few) * len(points)
    print(f"10,000 samples of the demo ({engine.system.n} unknowns): {whole:.2f} s; "
          f"scipy's root sample by sample: {scipy_s / whole:.0f} times as long")
    times = {n: seconds(lambda n=n: engine.solve(points[:n])) for n in (1_000, 2_500, 10_000)}
    slope = np.polyfit(np.log(list(times)), np.log(list(times.values())), 1)[0]
    print(f"growth exponent over samples: {slope:.2f}")
    sizes = {}
    for n in (125, 250, 500, 1000):
        system, point = regulators(n)
        sizes[n] = seconds(lambda system=system, point=point: solve_once(system, point), 1)
        assert solve_once(system, point).all()
    slope = np.polyfit(np.log(list(sizes)), np.log(list(sizes.values())), 1)[0]
    print(f"1,000 regulators in chains of ten: {sizes[1000]:.2f} s; growth exponent over regulators: {slope:.2f}")


if __name__ == "__main__":
    main()
