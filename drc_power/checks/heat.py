"""dissipation.part and junction.steady: what a part burns, and how hot that makes it."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ..findings.model import Step
from ..solve.heatpaths import source_area_m2
from .copper import sink_steps
from .judgement import Judgement
from .view import ElementView, View, key_text

HAS_POWER = frozenset({"mosfet", "bjt", "igbt", "diode", "bridge", "zener", "tvs", "linear-regulator",
                       "switching-regulator", "resistor", "thermistor", "potentiometer", "ic", "gate-driver",
                       "optocoupler"})
HAS_JUNCTION = HAS_POWER - {"resistor", "thermistor", "potentiometer"}
"""Kinds whose device data has a power and a junction temperature among its limits; others only where they give one."""


def dissipation(view: View) -> Iterator[Judgement]:
    """`dissipation.part`: the mean loss against the rated power."""
    for element in view.elements():
        if element.kind in HAS_POWER or element.part.limit("power") is not None:
            yield _dissipation(element)


def _dissipation(element: ElementView) -> Judgement:
    rated = element.rating("power")
    allowed, limit = element.allowed("power", rated)
    lacking = element.missing + _contradiction(element) + (() if element.part.limit("power") is not None else ("limits.power",))
    return Judgement(
        "dissipation.part", element.subject, "dissipation", "W", element.point.power_w, rated, allowed,
        element.view.board.where(element.part), "power", element.ref, mode=element.view.mode.name, limit=limit,
        proven=element.solved, lacking=lacking, steps=lambda k: power_steps(element, k),
        remedy="use a part with a higher power rating, or take voltage or current off this one",
        inputs=lambda: element.sources("limits.power", "conduction.rds", "conduction.rds_scale", "conduction.knee",
                               "conduction.slope", "conduction.quiescent", "conduction.efficiency"))


def _contradiction(element: ElementView) -> tuple[str, ...]:
    """A converter chip that would lose less than nothing: its efficiency and the parts outside do not fit together."""
    if np.nanmin(element.point.power_w, initial=0.0) < -1e-9:
        return (f"an efficiency of {element.ref} that leaves room for the losses of the parts outside it",)
    return ()


def junction(view: View) -> Iterator[Judgement]:
    """`junction.steady`: the junction temperature that the loss and the annotated way of its heat lead to."""
    for element in view.elements():
        if element.kind in HAS_JUNCTION or element.part.limit("tj") is not None:
            yield _junction(element)


def _junction(element: ElementView) -> Judgement:
    rated = element.rating("tj")
    allowed, limit = element.allowed("tj", rated)
    lacking = (*element.missing, *_contradiction(element), *element.heat_missing,
               *(() if element.part.limit("tj") is not None else ("limits.tj",)))
    return Judgement(
        "junction.steady", element.subject, "junction temperature", "°C", element.point.tj_c, rated, allowed,
        element.view.board.where(element.part), "tj", element.ref, mode=element.view.mode.name, limit=limit,
        ambient_c=element.view.solution.ambient_c, proven=element.solved, lacking=lacking,
        why="" if lacking else element.beyond, steps=lambda k: (*power_steps(element, k), *temperature_steps(element, k)),
        remedy="lower its thermal resistance to the ambient, or its loss",
        inputs=lambda: element.sources("limits.tj", "thermal.rth_jc", "thermal.rth_ja"))


def power_steps(element: ElementView, k: int) -> tuple[Step, ...]:
    """How the loss at one sample came about."""
    point, ref = element.point, element.ref
    v, i, p = point.voltage_v[k], point.current_a[k], point.power_w[k]
    solved = f"network solution, mode {element.view.mode.name}"
    steps = [Step("V", f"voltage across {ref}", "", _number(v), "V", solved),
             Step("I", f"mean current through {ref}", "", _number(i), "A", solved)]
    kinds = element.view.solution.losses.get(ref, ())
    steps += [Step(loss.name, loss.formula, loss.written(k), _number(loss.power_w[k]), "W", loss.source) for loss in kinds]
    law = (" + ".join(dict.fromkeys(loss.name for loss in kinds)), "", "power balance") if kinds else _law(element, k)
    steps.append(Step("P", law[0], law[1], _number(p), "W", law[2]))
    return tuple(steps)


def _law(element: ElementView, k: int) -> tuple[str, str, str]:
    """The law of the loss in symbols and in numbers, and where it comes from."""
    point = element.point
    v, i, rms, p = (array[k] for array in (point.voltage_v, point.current_a, point.rms_a, point.power_w))
    if element.probe.push_pull is not None:
        return "worst output of class B", "", "worst mean loss at 2/π of the swing, class B"
    if element.probe.pulsed:
        return "conduction + edges", "", "duty-weighted conduction"
    if element.kind in ("linear-regulator", "switching-regulator"):
        return "V_in · I_in − V_out · I_out", "", "power balance of the regulator"
    if element.kind == "mosfet" and rms > 0.0:
        return "I_rms² · R_DS(on)(Tj)", f"{rms:.6g}² · {p / rms**2:.6g}", "Joule's law, resistance at Tj"
    return "V · I", f"{v:.6g} · {i:.6g}", "power balance"


def temperature_steps(element: ElementView, k: int) -> tuple[Step, ...]:
    """How the loss leads to the junction temperature, from the ambient inward."""
    solution = element.view.solution
    path = next((p for p in solution.circuit.heat.paths if p.part == element.ref), None)
    if path is None:
        return ()
    own = sum(solution.value(param)[k] for param in path.own_k_per_w)
    tj, p = element.point.tj_c[k], solution.temperatures.first_w[element.ref][k]
    start, steps = solution.value(path.start_c)[k], []
    if path.sink:
        steps += sink_steps(element.view, path.sink, k)
        start = solution.temperatures.sink_c[path.sink][k]
    if path.beside:
        steps += sink_steps(element.view, path.beside.sink, k)
        steps.append(Step("P₁", f"both ways lead to one Tj: what {key_text(path.sink)} takes", "", _number(p), "W", "parallel ways of heat"))
    steps.append(Step("Tj", "T + R_th · P", f"{start:.6g} + {own:.6g} · {p:.6g}", _number(tj), "°C",
                      "steady heat flow, " + _way(element)))
    return tuple(steps)


def _way(element: ElementView) -> str:
    heat, thermal = element.part.note.heat, element.part.device.thermal if element.part.device else None
    if heat is None:
        return "rth_ja to the ambient"
    if heat.sink:
        note = element.view.board.annotations.sinks[str(heat.sink)]
        return "rth_jc + interface to the sink" + ("" if note.resistance is not None else f" + spreading in its base {_source(element)}")
    if heat.copper:
        return f"{'rth_jb' if thermal and thermal.rth_jb else 'rth_jc'} to the copper"
    return "rth_jc to a case held at its temperature" if heat.case is not None else "the board's own figure to the ambient"


def _source(element: ElementView) -> str:
    area_m2, said = source_area_m2(element.part)
    return f"(Lee, Song, Au and Moran 1995) from {area_m2 * 1e6:.3g} mm² ({said})"


def _number(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None
