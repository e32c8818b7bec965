"""network.*: headroom of regulators, voltage at loads, current of sources, and heat that feeds itself."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ..findings.identity import named_subject
from ..findings.model import Step
from .house import Conditions, Target, allowed
from .judgement import Judgement
from .view import ElementView, View


def headroom(view: View) -> Iterator[Judgement]:
    """`network.headroom`: what a linear regulator has between input and set output, against its dropout."""
    for element in view.elements():
        if element.kind == "linear-regulator" and element.probe.currents:
            yield _headroom(element)


def _headroom(element: ElementView) -> Judgement:
    solution = element.view.solution
    branch = next(b for b in solution.circuit.branches if b.key == element.ref)
    below_v = solution.ripple_voltages[branch.a][0] if branch.a in solution.ripple_voltages else 0.0  # a ripple's valley is the least it has
    value = solution.node_v(branch.a) - below_v - solution.node_v(branch.ground) - solution.value(branch.setpoint_v)
    given = element.part.device.conduction.dropout if element.part.device else None
    rated = element.view.constant(given.max if given is not None else None)
    need, limit = element.required("headroom", rated)
    return Judgement(
        "network.headroom", element.subject, "input voltage above the set output", "V", value, rated, need,
        element.view.board.where(element.part), "headroom", element.ref, mode=element.view.mode.name, sense="at_least",
        limit=limit, proven=element.view.solved, lacking=() if given is not None else ("conduction.dropout",),
        remedy="raise the input voltage, lower the load, or use a regulator with less dropout",
        inputs=lambda: element.sources("conduction.dropout"))


def load_voltage(view: View) -> Iterator[Judgement]:
    """`network.voltage`: the voltage at a load against what it needs."""
    solution = view.solution
    for load in solution.circuit.loads:
        if load.needs is None:
            continue
        value = solution.node_v(load.a) - solution.node_v(load.b)
        low, high = (solution.value(end) for end in load.needs)
        if load.a in solution.ripple_voltages:
            below_v, above_v = solution.ripple_voltages[load.a]
            value = np.where(value - below_v - low < high - value - above_v, value - below_v, value + above_v)
        sense = "between" if load.needs[0].value < load.needs[1].value else "at_least"
        yield Judgement(
            "network.voltage", named_subject("load", load.name), f"voltage at {load.name}", "V", value,
            view.unknown(), high if sense == "between" else low, load.mark, "voltage", net=load.a,
            mode=view.mode.name, sense=sense, low=low, proven=view.solved,
            remedy="lower the drop between source and load, or change the rail",
            inputs=lambda load=load: ((f"loads.{load.name}.needs", view.mode.loads[load.name].needs.text, view.board.place(load.mark)),))


def source_limit(view: View) -> Iterator[Judgement]:
    """`network.limit`: the current that a rail's source gives, against what it may."""
    solution = view.solution
    for source in solution.circuit.sources:
        if source.limit_a is None:
            continue
        rated = solution.value(source.limit_a)
        conditions = Conditions(solution.ambient_c, view.unknown(), view.unknown())
        limits = view.house.limits_on(Target("rail", "limit", view.mode.name, nets=(source.net,)))
        may, limit = allowed(limits, rated, conditions)
        yield Judgement(
            "network.limit", named_subject("rail", source.rail), f"current from the source of {source.rail}", "A",
            solution.current_a(source.key), rated, may, source.mark, "limit", net=source.net, mode=view.mode.name,
            limit=limit, proven=view.solved, remedy="take load off the rail, or give it a stronger source",
            inputs=lambda source=source: ((f"rails.{source.rail}.limit", view.mode.rails[source.rail].limit.text, view.board.place(source.mark)),))


def runaway(view: View) -> Iterator[Judgement]:
    """`network.runaway`: parts whose heat feeds itself, by the gain of that loop; silent where it settles."""
    solution = view.solution
    for ref in [solution.system.paths[row].part for row in solution.system.followed]:
        if ref not in solution.circuit.probes or ref not in view.board.elements:
            continue
        element = ElementView(view, view.mode.parts[ref], solution.parts[ref], solution.circuit.probes[ref])
        ran = solution.runaway.get(ref, np.zeros(solution.n_samples, dtype=bool))
        gain = np.where(ran, np.maximum(solution.gain, 1.0), 0.0)
        yield Judgement(
            "network.runaway", element.subject, "loop gain of loss and temperature", "", gain, view.constant(1.0),
            np.where(ran, 1.0 - 1e-6, 1.0), view.board.where(element.part), None, ref, mode=view.mode.name,
            only_if_exceeded=True, remedy=f"lower the thermal resistance of {ref}, or its on-resistance, or the current",
            steps=lambda k, e=element, g=gain: (Step("G", "R_th · dP/dT", "", float(g[k]), "", "linearised network"),))


def unsolved(view: View) -> Iterator[Judgement]:
    """`coverage.data` for a network that has no operating point somewhere in the box."""
    solution = view.solution
    gone = ~view.solved
    yield Judgement(
        "coverage.data", named_subject("rule", "operating point"), "operating point", "", gone.astype(float),
        view.unknown(), np.where(gone, np.nan, 1.0), solution.circuit.mode.view.mark, None, mode=view.mode.name,
        proven=~gone, why="the network has no operating point there: a load asks for more than its supply can give",
        remedy="lower the load, or the resistance before it", only_if_exceeded=True)
