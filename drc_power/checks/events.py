"""What now and then happens: junction.event, envelope.event and envelope.avalanche, event by event and part by part."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ..findings.identity import part_subject
from ..solve.events.impedance import FIT_WITHIN
from ..solve.events.probe import EventProbe
from .envelope import HAS_ENVELOPE
from .event_ratings import ratings
from . import linear, second_breakdown
from .event_steps import avalanche_steps, envelope_steps, junction_steps
from .event_view import EventView, deciding_point, deciding_share
from .heat import HAS_JUNCTION
from .judgement import Judgement
from .view import View

CLAMPS = frozenset({"zener", "tvs"})
SETTLED_S = 10.0
"""A stall or an overload of this length finds every junction in balance with its case."""

NEVER_ENDS = "the breakdown voltage does not lie above the supply, so the avalanche never ends"


def events(view: View) -> Iterator[Judgement]:
    """Every judgement of every event that starts from this mode."""
    for probe in view.solution.circuit.events:
        if view.only not in (None, probe.ref):
            continue
        solved = view.solution.circuit.probes.get(probe.ref)
        if solved is None:
            yield _not_solved(view, probe)
            continue
        element = EventView(view, view.mode.parts[probe.ref], view.solution.parts[probe.ref], solved, probe)
        for rule in RULES:
            yield from rule(element)


def _not_solved(view: View, probe: EventProbe) -> Judgement:
    part, unknown = view.mode.parts[probe.ref], view.unknown()
    return Judgement("coverage.data", part_subject(part.part.uuid, probe.ref), "operating point", "", unknown, unknown, unknown,
                     probe.note.mark, ref=probe.ref, mode=view.mode.name, event=probe.name,
                     lacking=view.solution.circuit.missing.get(probe.ref, ("device",)))


def junction(element: EventView) -> Iterator[Judgement]:
    """`junction.event`: the hottest moment of the junction."""
    wanted = element.kind in HAS_JUNCTION or element.part.limit("tj") is not None
    known = element.response is not None and element.response.rise_k is not None
    if not wanted or element.event.role == "switch" or (element.kind in CLAMPS and element.impedance is None):
        return
    lacking = (*element.event.lacking, *element.start_missing, *element.capacity_missing, *element.split_missing,
               *_impedance_missing(element), *(() if element.part.limit("tj") is not None else ("limits.tj",)))
    value = element.response.peak_c if known else element.view.unknown()
    yield element.judgement(
        "junction.event", "junction temperature", "°C", value, "tj", lacking=lacking,
        ambient_c=element.view.solution.ambient_c, steps=lambda k: junction_steps(element, k) if known else (),
        remedy="make the event shorter or its power lower, or start it from a cooler case",
        inputs=lambda: element.sources("limits.tj", "thermal.zth_jc", "thermal.foster", "thermal.cauer", "thermal.rth_jc"))


def _impedance_missing(element: EventView) -> tuple[str, ...]:
    impedance = element.impedance
    if impedance is None:
        # Slow against any junction: its steady resistance stands for it.
        slow = element.event.network is not None and element.shortest_s > SETTLED_S and element.part.device is not None
        return () if slow and element.part.device.thermal.rth_jc is not None else ("thermal.zth_jc",)
    if element.longest_s > impedance.reach_s:
        return (f"thermal.rth_jc, or a thermal.zth_jc beyond {impedance.reach_s:g} s",)
    if impedance.is_fitted and element.event.every is not None and impedance.foster.residual > FIT_WITHIN:
        return ("a thermal.zth_jc that a Foster network fits",)
    return ()


def envelope(element: EventView) -> Iterator[Judgement]:
    """`envelope.event`: the whole path against the safe area, every window of it by the lines of its length."""
    if element.kind not in HAS_ENVELOPE or element.event.kind == "avalanche" or element.event.role == "switch":
        return
    lacking = (*element.event.lacking, *element.start_missing, *element.capacity_missing, *element.split_missing,
               *_area_missing(element))
    known = element.response is not None and element.area is not None
    value, rated = _deciding(element) if known else (element.view.unknown(), element.view.unknown())
    yield element.judgement(
        "envelope.event", "current inside the safe area", "A", value, "envelope", rated, lacking=lacking,
        steps=lambda k: envelope_steps(element, k) if known else (),
        remedy="make the event shorter or its current lower, or use a part with a wider safe area",
        inputs=lambda: element.sources("limits.tj", "envelope.dc"))


def _area_missing(element: EventView) -> tuple[str, ...]:
    if element.part.limit("tj") is None:
        return ("limits.tj",)
    if element.area is None:
        return ("envelope",)
    return ("envelope.dc",) if element.longest_s > element.area.holds_for_s * (1.0 + 1e-12) else ()


def _deciding(element: EventView) -> tuple[np.ndarray, np.ndarray]:
    """Current at the deciding point, and what the area gives there for the window that decides."""
    share = deciding_share(element).max(axis=1)
    value, alone = (element.per_sample(x) for x in deciding_point(element)[1:])
    with np.errstate(divide="ignore", invalid="ignore"):
        # Without current nothing of the area is used: what it would give there is the point's own.
        return value, np.where(share > 0.0, value / share, np.where(share == 0.0, alone, np.nan))


def avalanche(element: EventView) -> Iterator[Judgement]:
    """`envelope.avalanche`: the energy of one avalanche, against the rating for one or for many."""
    if element.event.kind != "avalanche":
        return
    key = "avalanche_energy" if element.event.every is None else "avalanche_energy_repetitive"
    lacking = (*element.event.lacking, *(() if element.part.limit(key) is not None else (f"limits.{key}",)))
    known = element.response is not None
    value = element.response.energy_j if known else element.view.unknown()
    proven = element.solved & np.isfinite(value)
    yield element.judgement(
        "envelope.avalanche", "avalanche energy", "J", value, key, lacking=lacking, proven=proven,
        steps=lambda k: avalanche_steps(element, k) if known else (),
        why=NEVER_ENDS if known and not np.isfinite(value).all() else "", remedy="clamp the voltage, lower the inductance, or use a part with a higher avalanche rating",
        inputs=lambda: element.sources(f"limits.{key}", "limits.breakdown"))


def returning(element: EventView) -> Iterator[Judgement]:
    """`dissipation.part` of an event that returns: its mean loss, the mode's own loss between."""
    if element.event.every is None or element.part.limit("power") is None or element.event.role == "switch":
        return
    known = element.response is not None
    value = element.response.mean_w if known else element.view.unknown()
    yield element.judgement("dissipation.part", "mean dissipation", "W", value, "power", lacking=(*element.event.lacking, *element.missing), remedy="let the event return less often",
                     inputs=lambda: element.sources("limits.power"))


RULES = (junction, envelope, linear.event, second_breakdown.event, avalanche, returning, ratings)
