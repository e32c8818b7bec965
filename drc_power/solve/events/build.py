"""From annotated events to event probes: which part sees what, with which numbers, and what is missing."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from functools import partial

import numpy as np

from ...board import BoardPart, EventNote, Mode, Quantity
from ...physics.tables import interpolate_linear
from ..branches import Linear, Source, Switching
from ..circuit import Builder, Circuit
from ..variables import Param
from . import paths
from .captured import captured_path
from .elsewhere import OTHERS, elsewhere
from .probe import EventProbe

Inputs = dict[str, Param]

ZERO_UNLESS_GIVEN = ("charged_to", "with")
WAYS_TO_CHARGE: Mapping[tuple[str, ...], Callable] = {
    ("slew",): paths.inrush_slew, ("limit",): paths.inrush_limit, ("power_limit",): paths.inrush_power,
    ("limit", "power_limit"): paths.inrush_power, ("resistance",): paths.inrush_resistance,
}
"""What may hold an inrush back, and the path that it then takes."""


def add_events(builder: Builder, network_of: Callable[[Mode], Circuit]) -> None:
    """A probe for every part of every event that this mode is the start of.

    network_of: the circuit of another condition of the board, without events of its own.
    """
    for name, event in builder.board.annotations.events.items():
        if event.kind in MAKERS and (not event.from_ or builder.mode.name in event.from_):
            builder.events += MAKERS[event.kind](builder, str(name), event)
        elif event.kind in OTHERS and (not event.from_ or builder.mode.name in event.from_):
            builder.events += elsewhere(builder, str(name), event, OTHERS[event.kind], network_of)


def parts_of(event: EventNote) -> tuple[str, ...]:
    """The references that an event names."""
    return tuple(str(ref) for ref in (event.parts or ((event.part,) if event.part else ())))


def _probes(builder: Builder, name: str, event: EventNote, needs: str, may: str, path, **more) -> Iterator[EventProbe]:
    """One probe per part of the event, with its numbers and what is missing of them."""
    inputs, lacking = _inputs(builder, name, event, (*needs.split(), *may.split()))
    lacking += [f"events.{name}.{key}" for key in needs.split() if key not in inputs and key not in more.get("given", {})]
    inputs |= more.get("given", {})
    refs = parts_of(event)
    share = 1.0 / len(refs) if event.sharing == "even" and refs else 1.0
    every = builder.span(f"{name} every", event.every)
    for ref in refs:
        yield EventProbe(name, str(event.kind), ref, event, inputs, path, more.get("supplied_by", ()),
                         (*lacking, *more.get("lacking", ())), share, every)


def _inputs(builder: Builder, name: str, event: EventNote, keys: tuple[str, ...]) -> tuple[Inputs, list[str]]:
    given: Inputs = {}
    for key in keys:
        quantity = getattr(event, f"{key}_" if key == "from" else "with_" if key == "with" else key)
        if isinstance(quantity, Quantity):
            given[key] = builder.span(f"{name} {key.replace('_', ' ')}", quantity)
        elif key in ZERO_UNLESS_GIVEN:
            given[key] = Param(0.0)
    return given, []


def _inrush(builder: Builder, name: str, event: EventNote) -> list[EventProbe]:
    ways = tuple(key for key in ("slew", "limit", "power_limit", "resistance") if getattr(event, key) is not None)
    path = WAYS_TO_CHARGE.get(ways)
    lacking = () if path else (f"one of slew, limit, power_limit, resistance of events.{name}",)
    given: Inputs = {}
    if event.voltage is None:
        highest_v = _rail_maximum(builder, builder.parts[parts_of(event)[0]])
        if highest_v is not None:
            given["voltage"] = Param(highest_v)
    return list(_probes(builder, name, event, "capacitance voltage", f"charged_to with {' '.join(ways)}", path,
                        given=given, lacking=lacking))


def _rail_maximum(builder: Builder, part: BoardPart) -> float | None:
    """The highest voltage of the rail behind a part: the nearest that an annotation feeds, not through a regulator."""
    fed = {builder.board.net(name): rail.voltage.max for name, rail in builder.mode.rails.items() if rail.voltage and rail.source}
    closed = set(builder.board.grounds)
    links: dict[str, set[str]] = {}
    for branch in builder.branches:
        if not isinstance(branch, (Linear, Switching, Source)) and getattr(branch, "load", None) is None and hasattr(branch, "b"):
            links.setdefault(branch.a, set()).add(branch.b)
            links.setdefault(branch.b, set()).add(branch.a)
    reached = [net for net in part.part.nets_of() if net not in closed]
    for net in reached:
        if net in fed:
            return fed[net]
        reached += [other for other in sorted(links.get(net, ())) if other not in reached and other not in closed]
    return None


def _short(builder: Builder, name: str, event: EventNote) -> list[EventProbe]:
    found = []
    for ref in parts_of(event):
        part, given = builder.parts[ref], {}
        limit = part.device.conduction.current_limit if part.device and event.limit is None else None
        if limit is not None:
            given["limit"] = builder.span(f"{ref} current limit", limit)
        nets = [net for net in (*_probe_nets(builder, ref), event.net and builder.board.net(event.net)) if net]
        lacking = () if nets else (f"pins of {ref}",)
        found += [probe for probe in _probes(builder, name, event, "limit lasts", "", paths.short, given=given,
                                             supplied_by=tuple(dict.fromkeys(nets)), lacking=lacking) if probe.ref == ref]
    return found


def _probe_nets(builder: Builder, ref: str) -> tuple[str, ...]:
    probe = builder.probes.get(ref)
    return (probe.a, probe.b) if probe else ()


def _pulse(builder: Builder, name: str, event: EventNote) -> list[EventProbe]:
    path = partial(paths.pulse, shape=str(event.shape or "rectangle"))
    return list(_probes(builder, name, event, "voltage current lasts", "", path))


def _avalanche(builder: Builder, name: str, event: EventNote) -> list[EventProbe]:
    given, found = {"supply": Param(0.0)} if event.supply is None else {}, []
    for ref in parts_of(event):
        breakdown = builder.parts[ref].limit("breakdown")
        known = {**given, "clamp": Param(breakdown.min)} if breakdown is not None else {**given, "clamp": Param(np.nan)}
        lacking = () if breakdown is not None else ("limits.breakdown",)
        found += [probe for probe in _probes(builder, name, event, "inductance current", "supply", paths.avalanche,
                                             given=known, lacking=lacking) if probe.ref == ref]
    return found


def _surge(builder: Builder, name: str, event: EventNote) -> list[EventProbe]:
    found = []
    for ref in parts_of(event):
        clamping = clamping_of(builder.parts[ref])
        path = partial(_clamped, clamping, paths.surge)
        lacking = () if clamping else (_clamp_entry(builder.parts[ref]),)
        found += [probe for probe in _probes(builder, name, event, "current lasts", "", path, lacking=lacking)
                  if probe.ref == ref]
    return found


def _turn_off(builder: Builder, name: str, event: EventNote) -> list[EventProbe]:
    """The switch sees the clamping voltage; the part that clamps, or the switch itself, takes the energy."""
    if event.clamp is None or isinstance(event.clamp, Quantity):
        given = {"supply": Param(0.0)}
        return list(_probes(builder, name, event, "inductance current clamp", "", paths.avalanche, given=given))
    return [probe for ref in parts_of(event) for probe in _into_clamp(builder, name, event, ref, str(event.clamp))]


def _into_clamp(builder: Builder, name: str, event: EventNote, switch: str, clamp: str) -> Iterator[EventProbe]:
    clamping = clamping_of(builder.parts[clamp])
    lacking = () if clamping else (f"{_clamp_entry(builder.parts[clamp])} of {clamp}",)
    ends = {builder.parts[ref].ref: set(_probe_nets(builder, ref)) for ref in (switch, clamp)}
    across_switch = bool(ends[switch]) and ends[switch] == ends[clamp]
    supplied = tuple(sorted((ends[switch] | ends[clamp]) - {""}))
    if not supplied:
        lacking = (*lacking, f"pins of {switch}")
    path = partial(_clamped, clamping, partial(_into, across_switch))
    for probe in _probes(builder, name, event, "inductance current", "", path, supplied_by=supplied, lacking=lacking):
        if probe.ref == switch:
            seen = partial(_clamped, clamping, partial(_held_off, across_switch))
            yield _as(probe, switch, seen, "switch")
            yield _as(probe, clamp, path, "clamp")


def _as(probe: EventProbe, ref: str, path, role: str) -> EventProbe:
    return EventProbe(probe.name, probe.kind, ref, probe.note, probe.inputs, path, probe.supplied_by, probe.lacking,
                      probe.share, probe.every, role)


def _clamped(clamping: Callable | None, path: Callable, values: Mapping[str, np.ndarray]) -> paths.Path:
    """A path at the clamping voltage that belongs to the event's current."""
    clamp = clamping(values["current"]) if clamping else np.full_like(values["current"], np.nan)
    return path({**values, "clamp": clamp})


def _into(across_switch: bool, values: Mapping[str, np.ndarray]) -> paths.Path:
    """What the clamp takes: with the supply behind it where it lies across the switch, alone across the load."""
    supply = values["voltage"] if across_switch else 0.0 * values["voltage"]
    return paths.avalanche({**values, "supply": supply})


def _held_off(across_switch: bool, values: Mapping[str, np.ndarray]) -> paths.Path:
    """What the switch holds off meanwhile, without current: the clamp, on top of the supply across the load."""
    over = 0.0 * values["voltage"] if across_switch else values["voltage"]
    lasts_s = values["inductance"] * values["current"] / values["clamp"]
    return paths.rectangle(values["clamp"] + over, 0.0 * values["current"], lasts_s)


def _waveform(builder: Builder, name: str, event: EventNote) -> list[EventProbe]:
    capture = builder.board.captures.get(name)
    if capture is None:
        return list(_probes(builder, name, event, "file", "", None))
    gaps = tuple(f"what the capture lacks between {a:g} s and {b:g} s" for a, b in capture.gaps_s[:3])
    share = 1.0 / len(parts_of(event)) if event.sharing == "even" else 1.0
    found = captured_path(capture.t_s, capture.v_v, capture.i_a, share)
    return list(_probes(builder, name, event, "", "", lambda values: found, lacking=gaps))


def clamping_of(part: BoardPart) -> Callable[[np.ndarray], np.ndarray] | None:
    """The voltage of a clamp over its current; None where the device data does not say."""
    data = part.device.conduction if part.device else None
    if data is None:
        return None
    curve = data.clamp if data.clamp is not None else next(iter(sorted(data.forward.items())), (None, None))[1]
    if curve is not None:
        return partial(interpolate_linear, xs=curve.column(0), ys=curve.column(1))
    if data.knee is None:
        return None
    slope_ohm = data.slope.max if data.slope is not None else 0.0
    return lambda i_a: data.knee.max + slope_ohm * i_a


def _clamp_entry(part: BoardPart) -> str:
    return "conduction.clamp" if part.kind in ("zener", "tvs") else "conduction.knee"


MAKERS: Mapping[str, Callable[[Builder, str, EventNote], list[EventProbe]]] = {
    "inrush": _inrush, "short": _short, "pulse": _pulse, "avalanche": _avalanche, "surge": _surge, "turn-off": _turn_off,
    "waveform": _waveform,
}
"""How each kind of event is built."""
