"""One check of one board, from files to a `Result`. Nothing here computes; it calls the rooms in order."""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field, replace

import numpy as np

from .board import Board, Mode, stage_parts
from .checks import House, Judgement, judge, judge_all, judge_events
from .checks.house import describe
from .checks.decide import finite_or_zero, make_finding, objective_of
from .findings.model import Coverage, Finding, InputFile, NetPoint, OperatingPoint, Outside, PartRow, Result, Sensitivity
from .findings.order import finding_key
from .findings.waiving import Waiver, apply_waivers
from .intake.annotations import Annotations, read_annotations
from .intake.captures import read_captures
from .intake.devices import read_devices
from .intake.rules import read_rules
from .intake.waivers import read_waivers
from .netlist.model import Netlist
from .netlist.schematic import read_board_netlist
from .quantity import DIMENSIONS, format_quantity
from .solve.build import build_circuit
from .solve.search import Worst, joined, worst_corners
from .solve.solution import Engine, Solution
from .survey import survey_netlist

Progress = Callable[[str], None]

MOVES = 1e-6
"""A side of the box that moves a quantity by less than this matters to nobody."""

NAMED_FROM = 0.02
"""A side is named in a corner when it moves the quantity by this share or more of what the strongest side does."""


@dataclass(slots=True)
class Run:
    """The options of one check."""

    today: str | None = None
    progress: Progress = lambda text: None
    confirm_netlist: bool = False
    self_check: bool = False
    n_samples: int = 0
    seed: int = 0
    distribution: str = "uniform"
    fails_from: str | None = None
    remarks: list[str] = field(default_factory=list)


def check(path: str | os.PathLike[str], run: Run | None = None) -> Result:
    """Check the board that an annotation file describes. Raises InputError where the check cannot be made."""
    run = run or Run()
    run.progress("reading")
    board, inputs, waivers = read_board(path, run)
    house = House(board.rules)
    findings: list[Finding] = []
    points: list[OperatingPoint] = []
    nets: list[NetPoint] = []
    for mode in board.modes:
        run.progress(f"solving mode {mode.name}")
        for found in _in_mode(board, mode, house, run):
            findings += found[0]
            points += found[1]
            nets += found[2]
    findings = list(apply_waivers(_once(findings), waivers, run.today))
    return _result(board, inputs, findings, points, nets, run)


def read_board(path: str | os.PathLike[str], run: Run) -> tuple[Board, tuple[InputFile, ...], tuple[Waiver, ...]]:
    """Read every file that belongs to a board."""
    annotations = read_annotations(path)
    netlist = _read_netlist(annotations)
    if run.confirm_netlist:
        from .netlist.confirm import confirm_netlist

        confirm_netlist(netlist)
    rules = read_rules(annotations.rules, annotations.folder)
    library = read_devices(annotations.devices, annotations.folder)
    waivers = read_waivers(annotations.waivers, annotations.folder) if annotations.waivers else None
    captures = read_captures(annotations)
    board = Board(annotations, netlist, survey_netlist(netlist), library, rules, captures=captures)
    board.check_names()
    files = [annotations.source_file, *library.files, *rules.files, *(waivers.files if waivers else ()),
             *dict.fromkeys(capture.file for capture in captures.values())]
    inputs = [InputFile("netlist", str(annotations.netlist), netlist.sha256)]
    inputs += [InputFile(f.role, f.path, f.sha256) for f in files]
    return board, tuple(inputs), _waivers(waivers)


def _read_netlist(annotations: Annotations) -> Netlist:
    return read_board_netlist(os.path.join(annotations.folder, str(annotations.netlist)))


def _waivers(found) -> tuple[Waiver, ...]:
    if found is None:
        return ()
    return tuple(Waiver(str(w.finding), str(w.because), str(w.by), w.until.isoformat(), w.value.typ, w.mark.file, w.mark.line,
                        DIMENSIONS[w.value.dimension].unit) for w in found.waivers)


def _in_mode(board: Board, mode: Mode, house: House, run: Run) -> Iterator[tuple[list[Finding], list[OperatingPoint], list[NetPoint]]]:
    """Search one mode's box and read findings and points off its worst corners."""
    circuit = build_circuit(mode)
    engine = Engine(circuit)

    worst = _worst(engine, house)
    final = engine.solve(worst.points, polish=True)
    if run.self_check:
        _self_check(final, run)
    judgements = judge_all(final, house)
    n_judged = len(judgements)
    gaps = _gaps(engine, house, worst, judgements)
    findings = []
    for k, judgement in enumerate(judgements):
        sample = int(worst.at[k])
        finding = make_finding(board, judgement, sample, _corner(circuit, worst, k, sample), gaps[k])
        if finding is not None:
            findings.append((k, finding))
    findings = _with_samples(engine, house, run, findings)
    findings = _with_sensitivity(engine, house, worst, findings)
    yield findings, _points(final, worst, n_judged), _nets(final, worst, n_judged)


def _worst(engine: Engine, house: House) -> Worst:
    """The worst corner of every steady judgement, of every event's, and of every extreme, in that order.

    Events cost far more to judge and depend on fewer sides: they are searched by themselves, thriftily.
    """
    def steady(points: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        solution = engine.solve(points)
        return _stacked(map(objective_of, judge(solution, house)), points), _stacked(_extremes(solution), points)

    def of_events(points: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        return _stacked(map(objective_of, judge_events(engine.solve(points), house)), points), np.empty((0, len(points)))

    box = engine.circuit.box
    worst = worst_corners(box, steady)
    if not engine.circuit.events:
        return worst
    n_steady = len(judge(engine.solve(worst.points[:1]), house))
    return joined(worst, n_steady, worst_corners(box, of_events, thrifty=True))


def _stacked(rows: Iterator[np.ndarray], points: np.ndarray) -> np.ndarray:
    return np.vstack([np.empty((0, len(points))), *rows])


BALANCED = 1e-9
"""Relative imbalance of current or power past which a solution is a fault of the tool."""


def _self_check(solution: Solution, run: Run) -> None:
    """Hold current and power balance of every solved point against `BALANCED`."""
    from .solve.balance import current_imbalance, heat_imbalance, power_imbalance

    solved = ~solution.unsolved()
    worst_i, worst_p, worst_q = (float(f(solution)[solved].max(initial=0.0))
                                 for f in (current_imbalance, power_imbalance, heat_imbalance))
    mode = solution.circuit.mode.name
    run.remarks.append(f"Self-check, mode {mode}: current in and out differ by {worst_i:.1e} of themselves, power by {worst_p:.1e}, "
                       f"heat by {worst_q:.1e}, at {int(solved.sum())} corners.")
    if max(worst_i, worst_p, worst_q) > BALANCED:
        raise ArithmeticError(f"mode {mode} does not balance: current {worst_i:.1e}, power {worst_p:.1e}, heat {worst_q:.1e}")


def _extremes(solution: Solution) -> Iterator[np.ndarray]:
    """Objectives besides the judgements: each part at its highest power and voltage, each net at both ends."""
    for point in solution.parts.values():
        yield -finite_or_zero(point.power_w)
        yield -np.abs(finite_or_zero(point.block_v))
    for net in solution.system.layout.of_kind("node"):
        yield solution.node_v(net)
        yield -solution.node_v(net)


def _gaps(engine: Engine, house: House, worst: Worst, judgements: list[Judgement]) -> list[list[str]]:
    """For each judgement the missing data that would make it worse, found by trying each of them."""
    variables = engine.circuit.box.variables
    missing = [k for k, v in enumerate(variables) if v.probe is not None]
    reasons: list[list[str]] = [[] for _ in judgements]
    if not missing:
        return reasons
    tried = np.repeat(worst.points, len(missing), axis=0)
    columns = np.tile(missing, len(worst.points))
    tried[np.arange(len(tried)), columns] = [variables[k].probe for k in columns]
    after = judge_all(engine.solve(tried), house)
    for k, (judgement, other) in enumerate(zip(judgements, after, strict=True)):
        sample = worst.at[k]
        was, now = judgement.margins()[sample], other.margins()[sample * len(missing) + np.arange(len(missing))]
        # Without a datum the check itself needs, nothing is left to compare.
        for column, margin in zip(missing, now, strict=True):
            change, least = margin - was, 1e-9 * max(1.0, abs(was))
            holds = abs(change) <= least if variables[column].either_way else change >= -least
            if not judgement.lacking and not holds:
                reasons[k].append(variables[column].why)
    return reasons


def _corner(circuit, worst: Worst, objective: int, sample: int) -> str:
    """The corner in words: the sides that matter, the strongest first."""
    moves = np.abs(worst.influence[objective])
    least = max(MOVES, NAMED_FROM * moves.max(initial=0.0))
    matter = [k for k in np.argsort(-moves, kind="stable") if moves[k] >= least]
    named = [f"{v.name} {format_quantity(worst.points[sample, k], v.dimension)}"
             for k in matter for v in (circuit.box.variables[k],)]
    return ", ".join(named) if named else "any corner"


def _with_samples(engine: Engine, house: House, run: Run, findings: list[tuple[int, Finding]]) -> list[tuple[int, Finding]]:
    """Each finding with what random samples of the mode's box say of it, where samples were asked for."""
    if not run.n_samples:
        return findings
    from .checks.statistics import sampled
    from .solve.sampling import sample_batches

    mode = engine.circuit.mode
    stream = mode.board.annotations.mode_names.index(mode.name)
    batches = sample_batches(engine.circuit.box, run.n_samples, run.seed, stream, run.distribution)
    tally = sampled(engine, house, batches, lambda done: run.progress(f"mode {mode.name}: {done} of {run.n_samples} samples"))
    return [(k, replace(finding, samples=tally.row(k))) for k, finding in findings]


N_SENSITIVITIES = 3


def _with_sensitivity(engine: Engine, house: House, worst: Worst, findings: list[tuple[int, Finding]]) -> list[Finding]:
    """Each finding that is not met with the inputs that move its value most, in its own unit, each alone across its span."""
    box = engine.circuit.box
    low, high = box.bounds()
    asked = []
    for k, finding in findings:
        moves = np.abs(worst.influence[k])
        strongest = [v for v in np.argsort(-moves, kind="stable")[:N_SENSITIVITIES] if moves[v] > MOVES]
        if finding.verdict != "met" and finding.value is not None:
            asked += [(k, int(v), end) for v in strongest for end in (low[v], high[v])]
    if not asked:
        return [finding for _, finding in findings]
    points = worst.points[worst.at[[k for k, _, _ in asked]]].copy()
    points[np.arange(len(asked)), [v for _, v, _ in asked]] = [end for _, _, end in asked]
    judged = judge_all(engine.solve(points), house)
    rows: dict[int, list[Sensitivity]] = {}
    for row in range(0, len(asked), 2):
        k, v, _ = asked[row]
        moved, variable = judged[k].value[row + 1] - judged[k].value[row], box.variables[v]
        if np.isfinite(moved):
            ends = " .. ".join(format_quantity(end, variable.dimension) for end in (low[v], high[v]))
            rows.setdefault(k, []).append(Sensitivity(variable.name.removesuffix(" at"), ends, float(moved), judged[k].unit))
    return [replace(finding, sensitivity=tuple(rows.get(k, ()))) for k, finding in findings]


def _points(solution: Solution, worst: Worst, first: int) -> list[OperatingPoint]:
    """Each part at its worst corner for power and at its worst for voltage."""
    rows, mode = [], solution.circuit.mode
    for k, (ref, point) in enumerate(solution.parts.items()):
        for objective in dict.fromkeys((first + 2 * k, first + 2 * k + 1)):
            s = int(worst.at[objective])
            numbers = (point.block_v, point.current_a, point.rms_a, point.power_w, point.tj_c, point.case_c)
            rows.append(OperatingPoint(mode.name, _corner(solution.circuit, worst, objective, s), ref,
                                       mode.parts[ref].kind, *(_finite(a[s]) for a in numbers)))
    return list(dict.fromkeys(rows))


def _nets(solution: Solution, worst: Worst, first: int) -> list[NetPoint]:
    """Each net at its lowest and at its highest voltage, with the current that flows into it."""
    rows, start = [], first + 2 * len(solution.parts)
    inflow = solution.inflow_a()
    for k, net in enumerate(solution.system.layout.of_kind("node")):
        if net not in solution.circuit.mode.board.netlist.nets:
            continue  # the other end of an annotated track
        for objective in (start + 2 * k, start + 2 * k + 1):
            s = int(worst.at[objective])
            rows.append(NetPoint(solution.circuit.mode.name, _corner(solution.circuit, worst, objective, s), net,
                                 _finite(solution.node_v(net)[s]), _finite(inflow[net][s])))
    return list(dict.fromkeys(rows))


def _finite(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None


def _once(findings: list[Finding]) -> list[Finding]:
    """Findings about what no mode changes are made once."""
    return list({(finding.id, finding.ref): finding for finding in reversed(findings)}.values())[::-1]


def _result(board: Board, inputs, findings: list[Finding], points, nets, run: Run) -> Result:
    judged = {f.ref for f in findings if f.ref and f.rule != "coverage.data"}
    unproven = sorted({f.ref for f in findings if f.ref and "unproven" in (f.verdict, f.was)} & set(board.elements))
    coverage = Coverage(len(board.elements), len(judged & set(board.elements)), tuple(unproven),
                        tuple(Outside(ref, why) for ref, why in board.outside.items()), tuple(sorted(board.not_fitted)))
    rows = tuple(PartRow(ref, part.part.uuid, part.part.sheet, part.part.value,
                         part.device.name if part.device else None, part.kind)
                 for ref, part in board.parts.items())
    annotations = board.annotations
    result = Result(
        annotations.board_name, annotations.board_revision, str(annotations.netlist), len(board.netlist.parts),
        len(board.netlist.nets), inputs, tuple(sorted(findings, key=finding_key)), coverage, run.today, rows, _rails(board),
        _loads(board), _rules(board), tuple(points), tuple(nets), (*board.notes, *_never_blocked(board)), board.rules.fails_from)
    return replace(result, fails_from=run.fails_from) if run.fails_from else result


def _never_blocked(board: Board) -> tuple[str, ...]:
    """Switches whose off-state no mode describes: what they hold off then is judged nowhere, and that must be said."""
    switches = [ref for ref in board.elements if board.parts[ref].kind in ("mosfet", "bjt", "igbt")]
    staged = {str(ref) for mode in board.modes for stage in mode.view.stages.values()
              if str(stage.kind) in ("half-bridge", "push-pull") or stage.frequency is not None for ref in stage_parts(stage)}
    blocked = {ref for mode in board.modes for ref in switches if str(mode.parts[ref].note.state) in ("blocked", "linear")}
    never = [ref for ref in switches if ref not in blocked | staged]
    if not never:
        return ()
    return (f"Blocked in no mode, so what they hold off when they are off is not judged: {', '.join(never)}. "
            "A mode with parts: {REF: {state: blocked}} does that.",)


def _rails(board: Board) -> tuple[dict, ...]:
    return tuple({"net": board.net(name), "voltage": rail.voltage.text if rail.voltage else None,
                  "source": [str(ref) for ref in rail.source], "held_by": str(rail.held_by) if rail.held_by else None}
                 for name, rail in sorted(board.annotations.rails.items()))


def _loads(board: Board) -> tuple[dict, ...]:
    rows = []
    for name, load in sorted(board.annotations.loads.items()):
        demand = {key: getattr(load, key).text for key in ("draws", "power", "resistance") if getattr(load, key) is not None}
        rows.append({"name": name, "net": str(load.net) if load.net else None, **demand})
    return tuple(rows)


def _rules(board: Board) -> tuple[dict, ...]:
    return tuple({"name": limit.name, "pack": limit.pack, "stress": str(limit.stress), "says": describe(limit),
                  "locked": limit.locked, "source": str(limit.source) if limit.source else None}
                 for limit in board.rules.limits.values())


def rules_in_force(path: str | os.PathLike[str]) -> tuple[dict, ...]:
    """Every limit in force for a board: what it says, where from, and how many parts it applies to."""
    from .checks.house import Target, applies

    board, _, _ = read_board(path, Run())
    targets = [Target(part.kind, "", mode.name, part) for mode in board.modes for ref, part in mode.parts.items()
               if ref in board.elements]
    rows = []
    for limit in board.rules.limits.values():
        fitting = {t.part.ref for t in targets if applies(limit, replace(t, stress=str(limit.stress)))}
        overrode = [f"{other.pack}" for other in board.rules.overridden if other.name == limit.name]
        says = describe(limit) + (", locked" if limit.locked else "")
        rows.append({"limit": limit.name, "stress": str(limit.stress), "says": says, "parts": len(fitting),
                     "written": f"{limit.pack}, {board.place(limit.mark)}" + (f", over {', '.join(overrode)}" if overrode else ""),
                     "source": str(limit.source or "-")})
    return tuple(rows)
