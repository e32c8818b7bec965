"""From the annotations of heat to heat paths: which resistances lie between each junction and the ambient."""

from __future__ import annotations

from ..board import BoardPart, InterfaceNote
from .circuit import Builder
from .heat import HeatPath, Sink
from .variables import Param

GAP_K = 10.0
"""How far an unknown temperature is moved to see what depends on it."""

UNKNOWN_C = 25.0


def add_ambient(builder: Builder) -> None:
    """The ambient of the mode, or a gap where none is given."""
    ambient = builder.mode.view.surroundings.ambient
    given = builder.span("ambient", ambient)
    if given is None:
        builder.lack("", "surroundings: {ambient: ...}")
        given = builder.box.gap("ambient", UNKNOWN_C, UNKNOWN_C + GAP_K, "temperature", "surroundings.ambient",
                                builder.mode.view.surroundings.mark)
    builder.ambient_c = given


def add_heat_paths(builder: Builder, followed: set[str]) -> None:
    """A path for every part that has one. `followed` parts obey their temperature: without a path it is a gap."""
    heated = {part for branch in builder.branches if (part := getattr(branch, "part", None))} | builder.probes.keys()
    for ref in sorted(heated):
        part = builder.parts[ref]
        lacking = _add_path(builder, part)
        if lacking is None:
            continue
        builder.heat_missing[ref] = lacking
        if ref in followed:
            unknown = builder.box.gap(f"{ref} temperature", UNKNOWN_C, UNKNOWN_C + GAP_K, "temperature",
                                      f"{lacking} of {ref}", builder.board.where(part))
            builder.paths.append(HeatPath(ref, unknown, ()))


def _add_path(builder: Builder, part: BoardPart) -> str | None:
    """Add the annotated path; the name of the first missing datum where it is not complete."""
    heat, thermal = part.note.heat, part.device.thermal if part.device else None
    rth = {name: builder.span(f"{part.ref} {name}", getattr(thermal, name)) for name in ("rth_jc", "rth_ja")} \
        if thermal else {"rth_jc": None, "rth_ja": None}
    if heat is not None and heat.sink:
        return _to_sink(builder, part, rth["rth_jc"])
    if heat is not None and heat.case is not None:
        case = builder.span(f"{part.ref} case", heat.case)
        return _append(builder, part.ref, case, (("thermal.rth_jc", rth["rth_jc"]),), rth["rth_jc"])
    if heat is not None and heat.to_ambient is not None:
        board = builder.span(f"{part.ref} to ambient", heat.to_ambient)
        return _append(builder, part.ref, builder.ambient_c, (("heat.to_ambient", board),), rth["rth_jc"])
    return _append(builder, part.ref, builder.ambient_c, (("thermal.rth_ja", rth["rth_ja"]),), rth["rth_jc"])


def _to_sink(builder: Builder, part: BoardPart, rth_jc: Param | None) -> str | None:
    name = str(part.note.heat.sink)
    resistance = builder.span(f"sink {name}", builder.board.annotations.sinks[name].resistance)
    if resistance is None:
        return f"sinks.{name}.resistance"
    capacity = builder.board.annotations.sinks[name].capacity
    builder.sinks[name] = Sink(name, resistance, builder.ambient_c, capacity_j_per_k=capacity.min if capacity else 0.0)
    needed = (("thermal.rth_jc", rth_jc), ("heat.interface", _interface(builder, part)))
    return _append(builder, part.ref, builder.ambient_c, needed, rth_jc, name)


def _interface(builder: Builder, part: BoardPart) -> Param | None:
    interface = part.note.heat.interface
    if isinstance(interface, InterfaceNote):
        from ..quantity import Span

        thickness, conductivity, area = (getattr(interface, key).span for key in ("thickness", "conductivity", "area"))
        span = Span(thickness.min / (conductivity.max * area.max), thickness.typ / (conductivity.typ * area.typ),
                    thickness.max / (conductivity.min * area.min))
        return builder.box.param(f"{part.ref} interface", span, "thermal_resistance", interface.mark)
    return builder.span(f"{part.ref} interface", interface)


def _append(builder: Builder, ref: str, start: Param, needed, rth_jc: Param | None, sink: str | None = None) -> str | None:
    lacking = next((name for name, value in needed if value is None), None)
    if lacking is None:
        builder.paths.append(HeatPath(ref, start, tuple(value for _, value in needed), rth_jc, sink))
    return lacking
