"""sink.steady and copper.*: how hot heat sinks and copper become, against what the house allows them.

A sink or a patch has no rating of its own: without a limit of the house there is nothing to judge. A track without a
limit on its rise is unproven, since nothing else says whether it is wide enough.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ..board import Limit
from ..findings.identity import Subject, named_subject, net_subject
from ..findings.model import Step
from ..solve.heat import AIR
from ..solve.heatpaths import copper_key
from ..solve.track_family import SOURCES, rise_by
from ..solve.tracks import TrackProbe, current_of
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


def tracks(view: View) -> Iterator[Judgement]:
    """`copper.track`: the rise of a track by its own current; its voltage drop too, where the house limits that."""
    for probe in view.solution.circuit.tracks:
        i_a = current_of(probe, view.solution)
        rise_k = probe.track.rise_k(i_a)
        yield _rise(view, probe, "copper.track", "track", f"rise of the track of {probe.name}", rise_k,
                    lambda k, probe=probe, i_a=i_a, rise_k=rise_k: _track_steps(view, probe, i_a, rise_k, k))
        drop_v, limit = house_limit(view, "track", "drop", (probe.net,))
        if limit is not None:
            across_v = np.abs(view.solution.node_v(probe.track.a) - view.solution.node_v(probe.track.b))
            yield Judgement(
                "copper.track", _subject(view, probe), f"voltage drop of the track of {probe.name}", "V", across_v, view.unknown(),
                drop_v, probe.note.mark, "drop", net=probe.net, mode=view.mode.name, limit=limit, proven=view.solved,
                remedy="make the track wider, thicker or shorter")


def vias(view: View) -> Iterator[Judgement]:
    """`copper.via`: the rise of the barrels of a track's vias, each as an inner track of its section."""
    for probe in view.solution.circuit.tracks:
        if probe.vias is None:
            continue
        area_m2, n_vias = probe.vias
        each_a = current_of(probe, view.solution) / n_vias
        rise_k = rise_by("ipc-2221", each_a, area_m2, inner=True)
        yield _rise(view, probe, "copper.via", "via", f"rise of the vias of {probe.name}", rise_k,
                    lambda k, each_a=each_a, rise_k=rise_k, area_m2=area_m2: (
                        Step("I", "current of one via", "", float(each_a[k]), "A", "network solution, shared evenly"),
                        Step("A", "π · (drill − plating) · plating", "", area_m2 * 1e6, "mm²", "geometry of a tube"),
                        Step("ΔT", "(I/(k · A^0.725))^(1/0.44)", "", finite(rise_k[k]), "K", "IPC-2221, inner track (common practice for barrels)")))


def _rise(view: View, probe: TrackProbe, rule: str, kind: str, quantity: str, rise_k: np.ndarray, steps) -> Judgement:
    may_k, limit = house_limit(view, kind, "rise", (probe.net,))
    if limit is None:
        may_k, limit = house_limit(view, "track", "rise", (probe.net,))
    lacking = () if limit is not None else (f"a house limit: {{applies_to: {{kind: {kind}}}, stress: rise, at_most: 20 K}}",)
    unknown = np.isnan(rise_k)
    why = f"the {quantity} lies outside what {probe.track.method} covers" if unknown.any() and not lacking else ""
    return Judgement(
        rule, _subject(view, probe), quantity, "K", rise_k, view.unknown(), may_k, probe.note.mark, "rise", net=probe.net,
        mode=view.mode.name, limit=limit, proven=view.solved & ~unknown, lacking=lacking, why=why, steps=steps,
        remedy="make it wider or thicker, share its current, or add vias",
        inputs=lambda: ((f"copper.tracks.{probe.name}", probe.note.width.text, view.board.place(probe.note.mark)),))


def _track_steps(view: View, probe: TrackProbe, i_a: np.ndarray, rise_k: np.ndarray, k: int) -> tuple[Step, ...]:
    track = probe.track
    assumed = f"; taken: {', '.join(probe.assumed)}" if probe.assumed else ""
    layer = "inner" if track.inner else "outer"
    return (Step("I", f"current of {probe.name}", "", float(i_a[k]), "A", "network solution, the rms of the part it leads to if more"),
            Step("A", "width · thickness", f"{track.width_m * 1e3:.6g} · {track.thickness_m * 1e3:.6g}", track.area_m2 * 1e6, "mm²",
                 f"{layer} layer{assumed}"),
            Step("ΔT", "rise of the track over the board", "", finite(rise_k[k]), "K", SOURCES[track.method]))


def _subject(view: View, probe: TrackProbe) -> Subject:
    """A track that carries all of its net by the net's pins; one of several by its name too."""
    alone = [other for other in view.solution.circuit.tracks if other.net == probe.net] == [probe]
    return net_of(view, probe.net) if alone else named_subject("copper", f"track {probe.name}")


def net_of(view: View, net: str) -> Subject:
    parts = view.board.netlist.parts
    pins = [(parts[node.ref].uuid, node.pin) for node in view.board.netlist.nets[net].nodes if node.ref in parts]
    return net_subject(pins, net)


def finite(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None


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

