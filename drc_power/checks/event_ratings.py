"""derating.STRESS of an event: the ratings of voltage, pulse current, pulse power and pulse energy that it exercises."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

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
    return element.per_sample(np.abs(element.response.path.v_v).max(axis=1))


def _peak_a(element: EventView) -> np.ndarray:
    return element.per_sample(np.abs(element.response.path.i_a).max(axis=1))


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
