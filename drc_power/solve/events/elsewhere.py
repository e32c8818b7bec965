"""Building a stall or an overload: the network in the other condition, the parts that carry it, the box of both."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from ...board import EventNote, LoadNote, Mode, Span, StageNote, stage_parts
from ..branches import OneWay, Resistive
from ..circuit import Builder, Circuit
from ..heat import TRACKS
from ..track_family import Track
from ..variables import Box, Variable
from .other_mode import OtherNetwork
from .paths import rectangle
from .probe import EventProbe


def stalled(builder: Builder, event: EventNote) -> tuple[Mode | None, str]:
    """The mode with its load stalled: at the limit of the current, else at the stall resistance."""
    mode, name = builder.mode, str(event.load)
    load = mode.loads.get(name) if event.load else None
    if load is None:
        return None, "load"
    resistance = event.resistance or load.resistance
    if event.limit is None and resistance is None:
        return None, "limit"
    demand = {"draws": event.limit} if event.limit is not None else {"resistance": resistance}
    held = LoadNote.of(event.mark, **demand).over(load.without("draws", "power", "resistance", "kind"))
    stages = _held_by_duty(builder, event, load) if event.limit is not None and load.resistance is not None else {}
    view = replace(mode.view, loads={**mode.loads, name: held}, stages={**mode.view.stages, **stages})
    return replace(mode, view=view), ""


def _held_by_duty(builder: Builder, event: EventNote, load: LoadNote) -> dict[str, StageNote]:
    """A stage that holds a stalled motor at its limit does so by its duty: I · R over the supply."""
    supplies = [rail.voltage.span for rail in builder.mode.rails.values() if rail.voltage and rail.source]
    if not supplies:
        return {}
    most_v, least_v = max(span.max for span in supplies), min(span.min for span in supplies if span.max > 0.0)
    drop = event.limit.max * load.resistance.max, event.limit.min * load.resistance.min
    found = {}
    for name, stage in builder.mode.view.stages.items():
        if stage.duty is not None and str(stage.load) == str(event.load):
            low, high = (min(x, stage.duty.max) for x in (drop[1] / most_v, drop[0] / least_v))
            duty = replace(stage.duty, span=Span(low, (low + high) / 2.0, high), text=f"{low:.3g} .. {high:.3g}")
            found[name] = StageNote.of(stage.mark, duty=duty).over(stage)
    return found


def overloaded(builder: Builder, event: EventNote) -> tuple[Mode | None, str]:
    """The mode that the board is in for a while."""
    return (builder.board.in_mode(str(event.to)), "") if event.to else (None, "to")


OTHERS: dict[str, Callable[[Builder, EventNote], tuple[Mode | None, str]]] = {"stall": stalled, "overload": overloaded}


def elsewhere(builder: Builder, name: str, event: EventNote, condition, network_of: Callable[[Mode], Circuit]) -> list[EventProbe]:
    """A probe for every part that carries the event."""
    mode, missing = condition(builder, event)
    lasts = builder.span(f"{name} lasts", event.lasts)
    lacking = [f"events.{name}.{key}" for key in (missing, "" if lasts else "lasts") if key]
    if event.every is not None:
        lacking.append(f"a way to judge events.{name}.every (this version takes one {event.kind} alone)")
    inputs = {"lasts": lasts} if lasts else {}
    named = [str(ref) for ref in (event.parts or ((event.part,) if event.part else ()))]
    refs = named or (_carrying(builder, event) if event.kind == "stall" else sorted({path.part for path in builder.paths}))
    network = None
    if not lacking:
        circuit = network_of(mode)
        network = OtherNetwork(circuit, _columns(builder.box, circuit.box, name), lasts, tuple(refs))
    return [EventProbe(name, str(event.kind), ref, event, inputs, lambda values: rectangle(0.0, 0.0, values["lasts"]),
                       lacking=tuple(dict.fromkeys((*lacking, *(network.circuit.missing.get(ref, ()) if network else ())))),
                       network=network)
            for ref in refs if ref in builder.board.elements]


def _columns(box: Box, other: Box, name: str) -> np.ndarray:
    """Where each side of the other box stands in this one: the same side where it is the same span, else one of its own."""
    known = {variable.name: k for k, variable in enumerate(box.variables)}
    found = []
    for variable in other.variables:
        at = known.get(variable.name)
        if at is None or not _same(box.variables[at], variable):
            at = len(box.variables)
            box.variables.append(replace(variable, name=f"in {name}, {variable.name}"))
        found.append(at)
    return np.array(found, dtype=int)


def _same(one: Variable, other: Variable) -> bool:
    return (one.span, one.dimension, one.probe) == (other.span, other.dimension, other.probe)


def _carrying(builder: Builder, event: EventNote) -> list[str]:
    """The parts that a load's current goes through: its stage's, or those on the way from the supply and back to a ground."""
    load = builder.mode.loads.get(str(event.load)) if event.load else None
    if load is None:
        return []
    stages = [stage for stage in builder.mode.view.stages.values() if stage.load is not None and str(stage.load) == str(event.load)]
    own = [str(ref) for stage in stages for ref in stage_parts(stage)]
    fed = {builder.board.net(name) for name, rail in builder.mode.rails.items() if rail.source}
    grounds = set(builder.board.grounds)
    net, back = (builder.board.net(name) if name else None for name in (load.net, load.return_))
    if own:
        # What a chopping stage draws from its supply is its duty's share: of the parts before it, the fuses are asked.
        nets = {net for ref in own for net in builder.parts[ref].part.nets_of()} - grounds
        before = _way(builder, nets, fed, grounds, upstream=True)
        return list(dict.fromkeys((*own, *(ref for ref in before if builder.parts[ref].kind == "fuse"))))
    there = _way(builder, {net}, fed, grounds, upstream=True)
    again = _way(builder, {back}, grounds, {net}, upstream=False) if back and back not in grounds else []
    return list(dict.fromkeys((*there, *again)))


def _way(builder: Builder, nets: set[str], ends: set[str], closed: set[str], upstream: bool) -> list[str]:
    """The parts on the shortest way from the nets to one of the ends, against the current or with it."""
    links: dict[str, list[tuple[str, str]]] = {}
    for branch in builder.branches:
        if not isinstance(branch, (Resistive, OneWay, Track)) or branch.part is None or getattr(branch, "load", None) is not None:
            continue
        links.setdefault(branch.b if upstream else branch.a, []).append((branch.a if upstream else branch.b, branch.part))
        if isinstance(branch, (Resistive, Track)):
            links.setdefault(branch.a if upstream else branch.b, []).append((branch.b if upstream else branch.a, branch.part))
    came: dict[str, tuple[str, str] | None] = dict.fromkeys(sorted(nets - closed))
    queue = list(came)
    for net in queue:
        if net in ends:
            found = []
            while came[net] is not None:
                net, part = came[net]
                found.append(part)
            return [part for part in found if part != TRACKS]
        for other, part in links.get(net, ()):
            if other not in came and other not in closed:
                came[other] = (net, part)
                queue.append(other)
    return []
