"""From the annotations of heat to heat paths: what lies between each junction and the ambient, and what is shared there."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from ..board import BoardPart, InterfaceNote, PatchNote, SinkNote, Span
from ..faults import Fault, InputError, Mark
from ..physics.range import OutsideRange
from . import cooling
from .circuit import Builder
from .heat import AIR, TRACKS, HeatPath, Sink, Way
from .outlines import ON_SINK_M2, pad_area_m2
from .surfaces import Surface
from .variables import ZERO, Param

GAP_K = 10.0
"""How far an unknown temperature is moved to see what depends on it."""

UNKNOWN_C = 25.0


@dataclass(frozen=True, slots=True)
class _End:
    """Where a way ends: in a sink, or at a temperature."""

    start_c: Param
    sink: str | None = None


def add_ambient(builder: Builder) -> None:
    """The ambient of the mode, or a gap where none is given; what an enclosure adds to it where that is given."""
    surroundings = builder.mode.view.surroundings
    given = builder.span("ambient", surroundings.ambient)
    if given is None:
        builder.lack("", "surroundings: {ambient: ...}")
        given = builder.box.gap("ambient", UNKNOWN_C, UNKNOWN_C + GAP_K, "temperature", "surroundings.ambient", surroundings.mark)
    enclosure = surroundings.enclosure
    rise = builder.span("rise inside the enclosure", enclosure.rise) if enclosure is not None else None
    builder.ambient_c = replace(given, plus=rise) if rise is not None else given
    if enclosure is not None and rise is None:
        around = cooling.air_around(surroundings)
        surface = _made(lambda: cooling.enclosure_surface(enclosure, replace(around, speed_m_per_s=0.0)), enclosure.mark)
        builder.sinks[AIR] = Sink(AIR, ZERO, builder.ambient_c, surface)


def add_heat_paths(builder: Builder, followed: set[str]) -> None:
    """A path for every part that has one. `followed` parts obey their temperature: without a path it is a gap."""
    heated = {part for branch in builder.branches if (part := getattr(branch, "part", None))} - {TRACKS} | builder.probes.keys()
    builder.inside = (*sorted(heated), TRACKS) if AIR in builder.sinks else ()
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
    heat, rth = part.note.heat, _resistances(builder, part)
    air = _End(builder.ambient_c, AIR if AIR in builder.sinks else None)
    if heat is not None and (heat.sink or heat.copper):
        return _onto(builder, part, rth)
    if heat is not None and heat.case is not None:
        case = _End(builder.span(f"{part.ref} case", heat.case))
        return _append(builder, part.ref, case, ("thermal.rth_jc", rth["rth_jc"]), rth["rth_jc"])
    if heat is not None and heat.to_ambient is not None:
        board = builder.span(f"{part.ref} to ambient", heat.to_ambient)
        return _append(builder, part.ref, air, ("heat.to_ambient", board), rth["rth_jc"])
    return _append(builder, part.ref, air, ("thermal.rth_ja", rth["rth_ja"]), rth["rth_jc"])


def _resistances(builder: Builder, part: BoardPart) -> dict[str, Param | None]:
    thermal = part.device.thermal if part.device else None
    return {name: builder.span(f"{part.ref} {name}", getattr(thermal, name) if thermal else None)
            for name in ("rth_jc", "rth_jb", "rth_ja")}


class _Missing(Exception):
    """A datum that a way of heat needs and nobody gave."""


def _onto(builder: Builder, part: BoardPart, rth: dict[str, Param | None]) -> str | None:
    """Onto a sink, a patch of copper, or both as parallel ways; the name of what is missing."""
    heat = part.note.heat
    try:
        ways = [make(builder, part, str(name), rth) for make, name in ((_to_sink, heat.sink), (_to_copper, heat.copper)) if name]
    except _Missing as missing:
        return str(missing)
    (sink, own), *others = ways
    beside = Way(others[0][1], others[0][0]) if others else None
    builder.paths.append(HeatPath(part.ref, builder.ambient_c, own, rth["rth_jc"], sink, beside))
    return None


def _to_sink(builder: Builder, part: BoardPart, name: str, rth: dict[str, Param | None]) -> tuple[str, tuple[Param, ...]]:
    """The sink, made on first use, and the resistances before it."""
    note = builder.board.annotations.sinks[name]
    if name not in builder.sinks:
        builder.sinks[name] = _sink(builder, name, note)
    own = _given(("thermal.rth_jc", rth["rth_jc"]), ("heat.interface", _interface(builder, part)))
    if note.resistance is not None:
        return name, own
    spread = _made(lambda: cooling.base_spreading_k_per_w(note, source_area_m2(part)[0]), note.mark)
    return name, (*own, Param(spread))


def _given(*needed: tuple[str, Param | None]) -> tuple[Param, ...]:
    """The values, of which none may be missing."""
    for name, value in needed:
        if value is None:
            raise _Missing(name)
    return tuple(value for _, value in needed)


def _sink(builder: Builder, name: str, note: SinkNote) -> Sink:
    """A sink by its resistance, or by its geometry."""
    capacity = note.capacity.min if note.capacity is not None else 0.0
    into = AIR if AIR in builder.sinks else None
    if note.resistance is not None or not note.is_geometry:
        resistance, = _given((f"sinks.{name}.resistance", builder.span(f"sink {name}", note.resistance)))
        return Sink(name, resistance, builder.ambient_c, None, into, capacity)
    for key in cooling.SINK_NEEDS:
        if getattr(note, key) is None:
            raise _Missing(f"sinks.{name}.{key}")
    surface = _made(lambda: cooling.sink_surface(note, _around(builder)), note.mark)
    return Sink(name, ZERO, builder.ambient_c, surface, into, capacity or cooling.sink_capacity_j_per_k(note))


def source_area_m2(part: BoardPart) -> tuple[float, str]:
    """Through what area a part heats the base of its sink, and why [m²]."""
    interface = part.note.heat.interface
    if isinstance(interface, InterfaceNote):
        return interface.area.span.min, "area of its interface"
    return pad_area_m2(part.part.footprint, ON_SINK_M2)


def copper_key(name: str) -> str:
    """The key of a patch among the sinks, where a heat sink may have the same name."""
    return f"copper {name}"


def _to_copper(builder: Builder, part: BoardPart, name: str, rth: dict[str, Param | None]) -> tuple[str, tuple[Param, ...]]:
    """The patch, made on first use, and the resistance before it."""
    key = copper_key(name)
    if key not in builder.sinks:
        builder.sinks[key] = _patch(builder, name, builder.board.annotations.copper.patches[name])
    return key, _given(("thermal.rth_jb", rth["rth_jb"] or rth["rth_jc"]))


def _patch(builder: Builder, name: str, note: PatchNote) -> Sink:
    if note.area is None:
        raise _Missing(f"copper.patches.{name}.area")
    for key in ("count", "drill") if note.vias is not None else ():
        if getattr(note.vias, key) is None:
            raise _Missing(f"copper.patches.{name}.vias.{key}")
    pad_m2, said = smallest_pad(builder, name)
    surface = _made(lambda: cooling.patch_surface(note, pad_m2, said, _around(builder)), note.mark)
    into = AIR if AIR in builder.sinks else None
    return Sink(copper_key(name), ZERO, builder.ambient_c, surface, into, cooling.patch_capacity_j_per_k(note))


def smallest_pad(builder: Builder, patch: str) -> tuple[float, str]:
    """The smallest pad of the parts on a patch, which all of its heat is taken to enter by."""
    on_it = [part for part in builder.parts.values() if part.note.heat is not None and part.note.heat.copper == patch]
    return min(pad_area_m2(part.part.footprint) for part in on_it)


def _around(builder: Builder) -> cooling.AirAround:
    return cooling.air_around(builder.mode.view.surroundings)


def _made(make: Callable[[], Surface | float], mark: Mark):
    """A surface or resistance; an equation that does not hold for its dimensions is a fault of the annotation."""
    try:
        made = make()
    except OutsideRange as error:
        raise InputError(Fault(mark, str(error), "check the dimensions")) from None
    if isinstance(made, Surface) and not np.isfinite(made.logs).all():
        raise InputError(Fault(mark, "no law of its surface holds for these dimensions", "check the dimensions"))
    return made


def _interface(builder: Builder, part: BoardPart) -> Param | None:
    interface = part.note.heat.interface
    if isinstance(interface, InterfaceNote):
        thickness, conductivity, area = (getattr(interface, key).span for key in ("thickness", "conductivity", "area"))
        span = Span(thickness.min / (conductivity.max * area.max), thickness.typ / (conductivity.typ * area.typ),
                    thickness.max / (conductivity.min * area.min))
        return builder.box.param(f"{part.ref} interface", span, "thermal_resistance", interface.mark)
    return builder.span(f"{part.ref} interface", interface)


def _append(builder: Builder, ref: str, end: _End, needed: tuple[str, Param | None], rth_jc: Param | None) -> str | None:
    name, value = needed
    if value is None:
        return name
    builder.paths.append(HeatPath(ref, end.start_c, (value,), rth_jc, end.sink))
    return None
