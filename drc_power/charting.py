"""The safe-area chart of one part: its lines, and every mode and event at the corner that is worst for it."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from .board import Board, BoardPart, Mode
from .checks import House, Judgement, judge_all
from .checks.decide import make_finding, objective_of
from .checks.event_view import EventView, deciding_point
from .checks.safe_area import SafeArea, safe_area_of
from .checks.view import View
from .faults import Fault, InputError
from .findings.charts import AreaLine, AreaPath, AreaPoint, SafeAreaChart
from .solve.build import build_circuit
from .solve.search import Worst, worst_corners
from .solve.solution import Engine, Solution

T_DRAWN_C = 25.0
N_VOLTAGES = 241
SHOWN = ("envelope.steady", "envelope.event")


def safe_area_chart(board: Board, ref: str) -> SafeAreaChart:
    """The chart of one part. Raises InputError for a part that has no safe area to draw."""
    part = board.parts[ref]
    area = safe_area_of(part, board.rules.methods)
    if area is None:
        raise InputError(Fault(board.where(part), f"{ref} has no safe area to draw",
                               "give envelope: and limits.tj in its device data"))
    house, points, paths = House(board.rules), [], []
    for mode in board.modes:
        for judgement, sample, solution, verdict in _worst(mode, ref, house):
            if judgement.event is None:
                points.append(_point(judgement, sample, solution, verdict, ref))
            else:
                paths.append(_path(judgement, sample, solution, house, verdict, ref))
    found = [p for p in (*points, *paths) if np.isfinite(p.case_c)]
    hottest_c = max((p.case_c for p in found), default=T_DRAWN_C)
    name = " ".join(word for word in (board.annotations.board_name, board.annotations.board_revision) if word)
    return SafeAreaChart(name, ref, part.device.name, _lines(area, part, T_DRAWN_C), _lines(area, part, hottest_c),
                         _on_ohm(part), tuple(points), tuple(paths))


def _worst(mode: Mode, ref: str, house: House) -> Iterator[tuple[Judgement, int, Solution, str]]:
    """The part's judgements against its area in one mode, each at its worst corner."""
    circuit = build_circuit(mode)
    engine = Engine(circuit)

    def objectives(points: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        rows = [objective_of(j) for j in _shown(judge_all(engine.solve(points), house), ref)]
        return np.vstack(rows or [np.zeros((0, len(points)))]), np.zeros((0, len(points)))

    worst: Worst = worst_corners(circuit.box, objectives)
    final = engine.solve(worst.points)
    for k, judgement in enumerate(_shown(judge_all(final, house), ref)):
        sample = int(worst.at[k])
        finding = make_finding(mode.board, judgement, sample, "", ())
        yield judgement, sample, final, finding.verdict if finding else "met"


def _shown(judgements: list[Judgement], ref: str) -> list[Judgement]:
    return [j for j in judgements if j.ref == ref and j.rule in SHOWN]


def _point(judgement: Judgement, sample: int, solution: Solution, verdict: str, ref: str) -> AreaPoint:
    point = solution.parts[ref]
    case_c = point.case_c[sample] if np.isfinite(point.case_c[sample]) else point.tj_c[sample]
    volt = abs(point.voltage_v[sample])
    if solution.circuit.probes[ref].pulsed and point.current_a[sample] > 0.0:
        volt = point.power_w[sample] / point.current_a[sample]
    return AreaPoint(judgement.mode, float(volt), float(point.peak_a[sample]), float(case_c), verdict)


def _path(judgement: Judgement, sample: int, solution: Solution, house: House, verdict: str, ref: str) -> AreaPath:
    view = View(solution, house)
    probe = next(p for p in solution.circuit.events if (p.name, p.ref) == (judgement.event, ref) and p.role != "switch")
    element = EventView(view, view.mode.parts[ref], solution.parts[ref], solution.circuit.probes[ref], probe)
    nothing = np.zeros(0)
    if element.response is None:
        return AreaPath(judgement.event, judgement.mode, nothing, nothing, np.nan, np.nan, None, np.nan, verdict)
    row, path = element.response.row[sample], element.response.path
    volt, ampere = (float(x[row]) for x in deciding_point(element)[:2])
    rated = float(judgement.rated[sample])
    return AreaPath(judgement.event, judgement.mode, path.v_v[row], path.i_a[row], volt, ampere,
                    rated if np.isfinite(rated) else None, float(element.response.case_c[sample].max()), verdict)


def _lines(area: SafeArea, part: BoardPart, case_c: float) -> tuple[AreaLine, ...]:
    """Every line at one case, over the voltages that the part is rated for."""
    given = [v for _, curve in area.pulses for v in curve[0]] + list(area.dc[0] if area.dc else ())
    rated = next((part.limit(key).min for key in ("vds", "vce") if part.limit(key) is not None), 100.0)
    low, high = (min(given), max(given)) if given else (0.1, rated)
    volts = np.geomspace(low, high, N_VOLTAGES)
    lengths = [*(float(s) for s in area.lengths_s), *([None] if area.has_any_length else [])]
    currents = area.lines_a(volts, min(case_c, area.tj_max_c - 1e-6))
    keep = slice(None) if not area.is_derived else slice(0, None, 8)
    return tuple(AreaLine(length, case_c, volts, current) for length, current in
                 (list(zip(lengths, currents, strict=True))[keep]))


def _on_ohm(part: BoardPart) -> float | None:
    """The resistance of the channel when it is hot, for the line that shows what can be reached at all."""
    rds = part.device.conduction.rds
    scale = part.device.conduction.rds_scale
    if not rds:
        return None
    return max(row.max for row in rds.values()) * (scale.column(1)[-1] if scale is not None else 1.0)
