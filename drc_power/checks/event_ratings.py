"""derating.STRESS of an event: the ratings of voltage, pulse current, pulse power and pulse energy that it exercises."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

from ..physics.fuse import melting_current_a, melting_share
from ..physics.surge import pulse_power_w, temperature_share
from .event_view import EventView
from .judgement import Judgement

Reading = Callable[[EventView], np.ndarray]


@dataclass(frozen=True, slots=True)
class EventStress:
    """One row: which kinds of part in which kinds of event, which key of `limits:`, and how it is read."""

    kinds: frozenset[str]
    key: str
    quantity: str
    unit: str
    read: Reading
    events: frozenset[str] | None = None
    must: bool = True


def ratings(element: EventView) -> Iterator[Judgement]:
    """`derating.*` of the event: what it puts on its part against the part's ratings."""
    for row in STRESSES:
        if element.event.role == "switch" and row.read is not _peak_v:
            continue  # its current is over when the clamp takes it
        if element.kind in row.kinds and (row.events is None or element.event.kind in row.events):
            if row.must or element.part.limit(row.key) is not None:
                yield _rating(element, row)
    if element.kind == "fuse":
        yield from _fuse(element)
    if element.kind in CLAMPS and element.event.role != "switch":
        yield _pulse_power(element)


def _rating(element: EventView, row: EventStress) -> Judgement:
    lacking = (*element.event.lacking, *(() if element.part.limit(row.key) is not None else (f"limits.{row.key}",)))
    value = row.read(element) if element.response is not None else element.view.unknown()
    return element.judgement(
        f"derating.{row.key}", row.quantity, row.unit, value, row.key, lacking=lacking, proven=np.isfinite(value),
        remedy=f"use a part with a higher {row.key} rating, or soften the event",
        inputs=lambda: element.sources(f"limits.{row.key}"))


def _peak_v(element: EventView) -> np.ndarray:
    return element.per_sample(element.response.path.peak_v)


def _peak_a(element: EventView) -> np.ndarray:
    return element.per_sample(element.response.path.peak_a)


def _energy_j(element: EventView) -> np.ndarray:
    return element.response.energy_j


def _pulse_power(element: EventView) -> Judgement:
    """Peak power of a clamp against the rating for the event's length, at the temperature that it starts from."""
    table, tj = element.part.limit("pulse_power"), element.part.limit("tj")
    lacking = (*element.event.lacking, *element.start_missing, *(() if table is not None else ("limits.pulse_power",)),
               *(() if tj is not None else ("limits.tj",)))
    known = element.response is not None and table is not None and tj is not None
    value = element.per_sample(element.response.path.p_w.max(axis=1)) if element.response is not None else element.view.unknown()
    rated = _rated_pulse_w(element, table, tj.min) if known else element.view.unknown()
    return element.judgement(
        "derating.pulse_power", "pulse power", "W", value, "pulse_power", rated, lacking=lacking,
        why=TOO_LONG if known and np.isnan(rated[element.solved]).any() else "",
        remedy="use a clamp with a higher pulse rating, or a shorter or weaker surge",
        inputs=lambda: element.sources("limits.pulse_power", "conduction.clamp"))


TOO_LONG = "the surge lasts longer than a pulse rating says anything about; give a longer row of limits.pulse_power"


def _rated_pulse_w(element: EventView, table, tj_max_c: float) -> np.ndarray:
    rated_w = pulse_power_w(element.response.lasts_s, table.column(0), table.column(1))
    return rated_w * temperature_share(element.point.tj_c, tj_max_c)


def _fuse(element: EventView) -> Iterator[Judgement]:
    """A fuse in a short must clear it within its length; in any other event it must hold."""
    table, rating, integral = (element.part.limit(key) for key in ("melts", "current", "i2t"))
    lacking = (*element.event.lacking, *(f"limits.{key}" for key, given in (("melts", table), ("current", rating)) if given is None))
    unknown = element.view.unknown()
    known = element.response is not None and not lacking
    peak = _peak_a(element) if element.response is not None else unknown
    inputs = {"inputs": lambda: element.sources("limits.melts", "limits.i2t", "limits.current")}
    if element.event.kind == "short":
        melts_a = unknown
        if known:
            i2t = integral.max if integral is not None else None
            melts_a = melting_current_a(element.response.lasts_s, table.column(0), table.column(1), i2t)
        yield element.judgement("derating.melts", "current that clears the fuse", "A", peak, "clears", melts_a, sense="at_least",
                                lacking=lacking, remedy="use a fuse that melts sooner, or let the part stand the fault for longer", **inputs)
        return
    rated = unknown
    if known:
        path = element.response.path
        share = element.per_sample(melting_share(path.t_s, np.sqrt(path.square_a), table.column(0), table.column(1), rating.min))
        with np.errstate(divide="ignore", invalid="ignore"):
            rated = np.where(share > 0.0, peak / share, table.column(1)[-1])
    yield element.judgement("derating.melts", "current that the fuse must hold", "A", peak, "melts", rated, lacking=lacking,
                            remedy="use a slower or larger fuse, or lower the current of the event", **inputs)
    # Past the shortest melting time heat leaves meanwhile: the curve decides there.
    if integral is not None and known and element.longest_s <= table.column(0)[0]:
        yield _melting_integral(element)


def _melting_integral(element: EventView) -> Judgement:
    path = element.response.path
    value = element.per_sample((np.diff(path.t_s, axis=1) * path.square_a).sum(axis=1))
    return element.judgement("derating.i2t", "melting integral", "A² s", value, "i2t",
                             remedy="use a slower fuse, or lower the current of the event",
                             inputs=lambda: element.sources("limits.i2t"))


CLAMPS = frozenset({"zener", "tvs"})
_MOSFET, _BIPOLAR = frozenset({"mosfet"}), frozenset({"bjt", "igbt"})
_DIODES = frozenset({"diode", "bridge"})
_RESISTORS = frozenset({"resistor", "thermistor", "potentiometer"})
_HELD = frozenset({"inrush", "short", "pulse", "waveform", "turn-off"})
_AVALANCHE = frozenset({"avalanche"})

STRESSES = (
    EventStress(_MOSFET, "vds", "drain-source voltage", "V", _peak_v, _HELD),
    EventStress(_MOSFET, "id_pulsed", "drain current, peak", "A", _peak_a, _HELD, must=False),
    EventStress(_MOSFET, "avalanche_current", "avalanche current", "A", _peak_a, _AVALANCHE),
    EventStress(_BIPOLAR, "vce", "collector-emitter voltage", "V", _peak_v, _HELD),
    EventStress(_BIPOLAR, "ic_pulsed", "collector current, peak", "A", _peak_a, _HELD, must=False),
    EventStress(_DIODES, "surge", "surge current", "A", _peak_a),
    EventStress(CLAMPS, "current", "clamp current, peak", "A", _peak_a, must=False),
    EventStress(_RESISTORS, "pulse_energy", "pulse energy", "J", _energy_j),
)
"""What is held against which limit. A row that `must` be judged is `unproven` where the rating is missing."""
