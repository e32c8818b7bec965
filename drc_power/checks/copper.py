"""sink.steady and copper.patch: how hot heat sinks and copper become, against what the house allows them.

A sink or a patch has no rating of its own: without a limit of the house there is nothing to judge.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ..board import Limit
from ..findings.identity import named_subject
from ..findings.model import Step
from ..solve.heat import AIR
from ..solve.heatpaths import copper_key
from .house import Conditions, Target, allowed
from .judgement import Judgement
from .view import View, beyond_text, key_text


def sinks(view: View) -> Iterator[Judgement]:
    """`sink.steady`: the temperature of a heat sink, for instance against what may be touched."""
    for name, note in view.board.annotations.sinks.items():
        if str(name) in view.solution.circuit.heat.sinks:
            yield from _temperature(view, str(name), str(name), "sink.steady", "sink", note.mark)


def patches(view: View) -> Iterator[Judgement]:
    """`copper.patch`: the temperature of the hottest place of a patch, against what the laminate may bear."""
    copper = view.board.annotations.copper
    for name, note in (copper.patches if copper else {}).items():
        if copper_key(name) in view.solution.circuit.heat.sinks:
            yield from _temperature(view, copper_key(name), str(name), "copper.patch", "patch", note.mark)


def _temperature(view: View, key: str, name: str, rule: str, kind: str, mark) -> Iterator[Judgement]:
    limit_c, limit = house_limit(view, kind, "temperature")
    if limit is None:
        return
    solution = view.solution
    members = [path.part for path in solution.circuit.heat.paths if key in path.sinks]
    ran = [flags for ref, flags in solution.runaway.items() if ref in solution.circuit.heat.coupled_with(members)]
    solved = view.solved & ~np.any(ran, axis=0) if ran else view.solved
    yield Judgement(
        rule, named_subject("copper" if kind == "patch" else "sink", name), f"temperature of {kind} {name}", "°C",
        solution.temperatures.sink_c[key], view.unknown(), limit_c, mark, "temperature", mode=view.mode.name, limit=limit,
        ambient_c=solution.ambient_c, proven=solved & solution.in_range([key]),
        why=beyond_text(solution, [key]), steps=lambda k: sink_steps(view, key, k),
        remedy="give it more area, thickness or air, or take heat off it")


def house_limit(view: View, kind: str, stress: str, nets: tuple[str, ...] = ()) -> tuple[np.ndarray, Limit | None]:
    """What the house allows a thing that has no rating, and the limit that says so."""
    conditions = Conditions(view.solution.ambient_c, view.unknown(), view.unknown())
    return allowed(view.house.limits_on(Target(kind, stress, view.mode.name, nets=nets)), view.unknown(), conditions)


def sink_steps(view: View, key: str, k: int) -> tuple[Step, ...]:
    """How a sink, patch or enclosure came by its temperature at one sample."""
    solution = view.solution
    sink, found = solution.circuit.heat.sinks[key], solution.temperatures
    around_c = found.sink_c[sink.into] if sink.into else solution.value(sink.start_c)
    r, heat_w = solution.sink_k_per_w(key)[k], found.sink_w[key][k]
    numbers = f"{around_c[k]:.6g} + {r:.6g} · {heat_w:.6g}"
    steps = [*sink_steps(view, sink.into, k)] if sink.into else []
    if sink.surface is None:
        return (*steps, Step("T_sink", "T_a + R_sink · ΣP", numbers, float(found.sink_c[key][k]), "°C", key_text(key)))
    said = "; ".join((sink.surface.said, *sink.surface.assumed))
    return (*steps, Step("R", f"rise over heat of {key_text(key)} at {heat_w:.6g} W: {said}", "", float(r), "K/W", sink.surface.source),
            Step("T_sink", "T_a + R · ΣP", numbers, float(found.sink_c[key][k]), "°C", key_text(key)))

