"""derating.STRESS: every voltage, current and temperature of a part against its rating and the house's share of it.

What is held against which limit stands in `STRESSES`, a row per kind and key of `limits:`. A row that `must` be
judged is `unproven` where the rating is missing; the others are judged where the device data gives the rating.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

from ..board import BoardPart
from ..quantity import parse_value_field
from ..solve.rectifier import Rectifier
from .judgement import Judgement
from .view import ElementView, View

Reading = Callable[[ElementView], tuple[np.ndarray, tuple[str, ...]]]
"""A stress at every sample, and the data it lacks."""


@dataclass(frozen=True, slots=True)
class Stress:
    """One row: which kinds, which key of `limits:`, what it is called, how it is read."""

    kinds: frozenset[str]
    key: str
    quantity: str
    unit: str
    read: Reading
    must: bool = True


def derating(view: View) -> Iterator[Judgement]:
    """`derating.*` of every element."""
    for element in view.elements():
        for row in STRESSES:
            if element.kind in row.kinds and (row.must or element.part.limit(row.key) is not None or element.leaves_blank(row.key)):
                yield _judge(element, row)


def _judge(element: ElementView, row: Stress) -> Judgement:
    value, lacking = row.read(element)
    rated = element.rating(row.key)
    allowed, limit = element.allowed(row.key, rated)
    if element.part.limit(row.key) is None:
        lacking = (*lacking, f"limits.{row.key}")
    ambient_c = element.view.solution.ambient_c if row.unit == "°C" else None
    return Judgement(
        f"derating.{row.key}", element.subject, row.quantity, row.unit, value, rated, allowed,
        element.view.board.where(element.part), row.key, element.ref, mode=element.view.mode.name, limit=limit,
        ambient_c=ambient_c, proven=element.view.solved, lacking=lacking,
        remedy=f"use a part with a higher {row.key} rating, or lower what it sees",
        inputs=lambda: element.sources(f"limits.{row.key}"))


def _held_off(element: ElementView) -> tuple[np.ndarray, tuple[str, ...]]:
    """The voltage between a switch's terminals: while it blocks if it switches, ringing added."""
    if not element.probe.pulsed:
        return np.abs(element.point.voltage_v) + element.crest_v, ()
    # A rectifier's diodes count the crest of its output already.
    block_v = element.point.block_v + (0.0 if _rectifies(element) else element.crest_v)
    if element.probe.overshoot is None:
        return block_v, (f"parts.{element.ref}.overshoot",)
    return block_v + element.view.solution.value(element.probe.overshoot), ()


def _rectifies(element: ElementView) -> bool:
    return any(branch.key == element.probe.group and isinstance(branch, Rectifier) for branch in element.view.solution.circuit.branches)


def _reverse(element: ElementView) -> tuple[np.ndarray, tuple[str, ...]]:
    """The voltage that a diode holds off, 0 while it conducts."""
    if element.probe.pulsed:
        return _held_off(element)
    if element.kind == "bridge":
        return np.maximum(element.point.voltage_v, 0.0), ()
    reverse_v = np.maximum(-element.point.voltage_v, 0.0)
    return np.where(reverse_v > 0.0, reverse_v + element.crest_v, 0.0), ()


def _gate(element: ElementView) -> tuple[np.ndarray, tuple[str, ...]]:
    """The gate voltage: annotated, or what the network puts between gate and source."""
    gate, solution = element.probe.gate, element.view.solution
    if isinstance(gate, tuple):
        if all(solution.has_node(net) for net in gate):
            return np.abs(solution.node_v(gate[0]) - solution.node_v(gate[1])), ()
        gate = None
    if gate is None:
        return element.view.unknown(), (f"parts.{element.ref}.gate",)
    return np.abs(solution.value(gate)), ()


def _rms(element: ElementView) -> tuple[np.ndarray, tuple[str, ...]]:
    return element.point.rms_a, ()


def _mean(element: ElementView) -> tuple[np.ndarray, tuple[str, ...]]:
    return element.point.current_a, ()


def _peak(element: ElementView) -> tuple[np.ndarray, tuple[str, ...]]:
    return element.point.peak_a, ()


def _across(element: ElementView) -> tuple[np.ndarray, tuple[str, ...]]:
    if element.probe.push_pull is not None and element.probe.push_pull.resistor_ohm is not None:
        return element.point.peak_a * element.view.solution.value(element.probe.push_pull.resistor_ohm), ()
    return np.abs(element.point.voltage_v) + element.crest_v, ()


def _input(element: ElementView) -> tuple[np.ndarray, tuple[str, ...]]:
    """The input voltage of a regulator against its ground."""
    solution, ground = element.view.solution, element.probe.ground
    if not element.probe.a or not solution.has_node(element.probe.a):
        return element.view.unknown(), (f"parts.{element.ref}.pins.input",)
    volts = np.abs(solution.node_v(element.probe.a) - (solution.node_v(ground) if ground else 0.0))
    return volts + element.above_v(element.probe.a), ()


def _to_ground(element: ElementView) -> tuple[np.ndarray, tuple[str, ...]]:
    """The voltage that an interrupted circuit would put across the part: its higher terminal against the reference."""
    solution = element.view.solution
    nets = [net for net in (element.probe.a, element.probe.b) if net and solution.has_node(net)]
    if not nets:
        return element.view.unknown(), (f"parts.{element.ref}.pins",)
    return np.max([np.abs(solution.node_v(net)) for net in nets], axis=0) + element.above_v(*nets), ()


def _feeds(element: ElementView) -> tuple[np.ndarray, tuple[str, ...]]:
    """The current per contact of a connector: on its most loaded net, shared by the contacts on that net."""
    solution, part = element.view.solution, element.part.part
    by_net: dict[str, np.ndarray] = {}
    for source in solution.circuit.sources:
        refs = [str(ref) for ref in element.view.mode.rails[source.rail].source]
        if element.ref in refs:
            share = np.abs(solution.current_a(source.key)) / len(refs)
            for net in part.nets_of():
                by_net[net] = by_net.get(net, 0.0) + share
    for load in solution.circuit.loads:
        # A load that hangs on the connector has both its ends there, or its own end if it returns elsewhere.
        ends = [net for net in (load.a, load.b) if net in part.nets_of()]
        if len(ends) == 2 or (ends == [load.a] and load.a not in element.view.mode.rails):
            for net in ends:
                by_net[net] = by_net.get(net, 0.0) + np.abs(solution.current_a(load.key))
    contacts = {net: sum(pin.net == net for pin in part.pins) for net in by_net}
    zero = np.zeros(solution.n_samples)
    return np.max([by_net[net] / contacts[net] for net in by_net] or [zero], axis=0), ()


def _temperature(element: ElementView) -> tuple[np.ndarray, tuple[str, ...]]:
    """The part's own temperature; the ambient's where it dissipates nothing."""
    if not np.isnan(element.point.tj_c).all():
        return element.point.tj_c, ()
    if np.nanmax(element.point.power_w, initial=0.0) == 0.0:
        return element.view.solution.ambient_c, ()
    return element.view.unknown(), element.heat_missing or ("thermal.rth_ja",)


def _ripple(element: ElementView) -> tuple[np.ndarray, tuple[str, ...]]:
    """What converters, bridges and rectifiers ask of the capacitors between two nets, shared by capacitance."""
    nets = set(element.part.part.nets_of())
    asked = [ripple.rms_a for ripple in element.view.solution.ripples if {ripple.net, ripple.back} == nets]
    if not asked:
        return element.view.unknown(), (f"what ripple current {element.ref} carries (it is at no end of an annotated stage)",)
    beside = {ref: _capacitance_f(part) for ref, part in element.view.mode.parts.items()
              if part.kind == "capacitor" and set(part.part.nets_of()) == nets and ref not in element.view.board.not_fitted}
    unread = tuple(f"a capacitance as the value of {ref}" for ref, farads in beside.items() if farads is None)
    if unread:
        return element.view.unknown(), unread
    share = beside[element.ref] / sum(beside.values())
    return share * np.sqrt(sum(rms_a**2 for rms_a in asked)), ()


def _capacitance_f(part: BoardPart) -> float | None:
    """The capacitance that a schematic value gives."""
    read = parse_value_field(part.part.value, "capacitance")
    return read.span.typ if read else None


_TRANSISTORS = frozenset({"bjt", "igbt"})
_DIODES = frozenset({"diode", "bridge"})
_CONTACTS = frozenset({"fuse", "relay", "switch", "load-switch"})
_WINDINGS = frozenset({"inductor", "ferrite"})
_LINEAR, _SWITCHING = frozenset({"linear-regulator"}), frozenset({"switching-regulator"})
_CHIPS = frozenset({"ic", "gate-driver", "optocoupler"})
_RESISTORS = frozenset({"resistor", "thermistor", "potentiometer"})
_WITH_TEMPERATURE = _RESISTORS | _WINDINGS | {"fuse", "connector", "relay", "switch", "capacitor"}

STRESSES = (
    Stress(frozenset({"mosfet"}), "vds", "drain-source voltage", "V", _held_off),
    Stress(frozenset({"mosfet"}), "vgs", "gate-source voltage", "V", _gate),
    Stress(frozenset({"mosfet"}), "id", "drain current, rms", "A", _rms),
    Stress(frozenset({"mosfet"}), "id_pulsed", "drain current, peak", "A", _peak, must=False),
    Stress(_TRANSISTORS, "vce", "collector-emitter voltage", "V", _held_off),
    Stress(_TRANSISTORS, "ic", "collector current, peak", "A", _peak),
    Stress(_DIODES, "vr", "reverse voltage", "V", _reverse),
    Stress(_DIODES, "if", "forward current, mean", "A", _mean),
    Stress(frozenset({"zener", "tvs"}), "current", "clamp current", "A", _mean, must=False),
    Stress(_LINEAR, "vin", "input voltage", "V", _input),
    Stress(_LINEAR, "differential", "input-output voltage", "V", _across, must=False),
    Stress(_LINEAR, "current", "output current", "A", _mean),
    Stress(_SWITCHING, "vin", "input voltage", "V", _input),
    Stress(_SWITCHING, "current", "output current", "A", _mean),
    Stress(_CONTACTS, "current", "current, rms", "A", _rms),
    Stress(_CONTACTS, "voltage", "voltage to interrupt", "V", _to_ground, must=False),
    Stress(frozenset({"load-switch"}), "vin", "input voltage", "V", _to_ground, must=False),
    Stress(frozenset({"connector"}), "current", "current", "A", _feeds),
    Stress(_CHIPS, "vin", "supply voltage", "V", _input, must=False),
    Stress(_RESISTORS, "voltage", "voltage", "V", _across, must=False),
    Stress(_WINDINGS, "current", "current, rms", "A", _rms),
    Stress(_WINDINGS, "saturation", "current, peak", "A", _peak, must=False),
    Stress(frozenset({"capacitor"}), "voltage", "voltage", "V", _across),
    Stress(frozenset({"capacitor"}), "ripple", "ripple current, rms", "A", _ripple, must=False),
    Stress(_WITH_TEMPERATURE, "temperature", "temperature", "°C", _temperature, must=False),
)
"""Ratings that only an event can use up (avalanche, surge, i2t, pulse energy ...) belong to the events."""
