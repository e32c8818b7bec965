"""envelope.steady: the operating point against the safe operating area."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ..physics.envelope import power_line_a, safe_current_a
from ..physics.push_pull import class_b_locus
from .judgement import Judgement
from .view import ElementView, View

HAS_ENVELOPE = frozenset({"mosfet", "bjt", "igbt"})
ANGLES_RAD = np.linspace(0.0, np.pi, 91)
"""Where a half wave of a class-AB stage is held against the area."""


def envelope(view: View) -> Iterator[Judgement]:
    """`envelope.steady`: current at the voltage across the part, against the area for the time that it lasts."""
    for element in view.elements():
        if element.kind in HAS_ENVELOPE:
            yield _envelope(element)


def _envelope(element: ElementView) -> Judgement:
    lacking = (*element.missing, *_lacking(element))
    if lacking:
        value, rated = element.point.peak_a, element.view.unknown()
    else:
        value, rated = _deciding_point(element)
    allowed, limit = element.allowed("envelope", rated)
    return Judgement(
        "envelope.steady", element.subject, "current inside the safe area", "A", value, rated, allowed,
        element.view.board.where(element.part), "envelope", element.ref, mode=element.view.mode.name, limit=limit,
        proven=element.solved, lacking=lacking, remedy="use a part with a wider safe area, or take voltage off it",
        inputs=lambda: element.sources("limits.tj"))


def _lacking(element: ElementView) -> tuple[str, ...]:
    """What the area or its temperature scaling needs and does not have."""
    device, found = element.part.device, []
    if device is None or (device.envelope.dc is None and not device.envelope.pulses):
        derived = element.view.board.rules.methods.get("derived_envelope")
        if device is None or str(derived) in ("unproven", "None") or device.thermal.rth_jc is None:
            found.append("envelope")
    elif device.envelope.dc is None:
        found.append("envelope.dc")
    if element.part.limit("tj") is None:
        found.append("limits.tj")
    if np.isnan(_case_c(element)).all():
        found += element.heat_missing or ("thermal.rth_jc",)
    return tuple(found)


def _case_c(element: ElementView) -> np.ndarray:
    """The case temperature; the junction's, which is never cooler, where the case is not known."""
    return np.where(np.isnan(element.point.case_c), element.point.tj_c, element.point.case_c)


def safe_a(element: ElementView, voltage_v: np.ndarray, lasts_s: float, case_c: np.ndarray) -> np.ndarray:
    """The current that the area allows at a voltage for a time, at the case temperature [A]."""
    device, tj_max_c = element.part.device, element.part.limit("tj").min
    if device.envelope.dc is None and not device.envelope.pulses:
        return power_line_a(voltage_v, device.thermal.rth_jc.max, case_c, tj_max_c)
    scaling = str(element.view.board.rules.methods.get("envelope_scaling", "current"))
    pulses = [(length_s, (table.column(0), table.column(1))) for length_s, table in device.envelope.pulses]
    dc = device.envelope.dc
    dc_curve = (dc.column(0), dc.column(1)) if dc is not None else None
    return safe_current_a(voltage_v, lasts_s, case_c, tj_max_c, pulses, dc_curve, scaling=scaling)


def _deciding_point(element: ElementView) -> tuple[np.ndarray, np.ndarray]:
    """Current and safe current at the point of the cycle that uses most of the area."""
    if element.probe.push_pull is not None:
        return _worst_on_locus(element)
    point, case_c = element.point, _case_c(element)
    on = point.peak_a, safe_a(element, np.abs(_on_v(element)), np.inf, case_c)
    edge_s = _edge_s(element)
    if edge_s is None:
        return on
    edge = point.peak_a, safe_a(element, point.block_v, edge_s, case_c)
    with np.errstate(divide="ignore", invalid="ignore"):
        harder = edge[0] / edge[1] > on[0] / on[1]
    return np.where(harder, edge[0], on[0]), np.where(harder, edge[1], on[1])


def _on_v(element: ElementView) -> np.ndarray:
    """The voltage while the part conducts: of a switch that chops its load alone, its loss over its current."""
    if not element.probe.pulsed or element.probe.group is not None:
        return element.point.voltage_v
    with np.errstate(divide="ignore", invalid="ignore"):
        drop = element.point.power_w / element.point.current_a
    return np.where(element.point.current_a > 0.0, drop, 0.0)


def _edge_s(element: ElementView) -> float | None:
    """How long a switch of a pair crosses from blocking to conducting; None for a part that does not switch."""
    if not element.probe.pulsed:
        return None
    data = element.part.device.gate if element.kind == "mosfet" else element.part.device.switching
    times = [q.max for q in (data.rise, data.fall) if q is not None]
    return max(times) if times else None


def _worst_on_locus(element: ElementView) -> tuple[np.ndarray, np.ndarray]:
    """The point of the half wave at full output, resistive or reactive, that lies furthest out."""
    solution, swing = element.view.solution, element.probe.push_pull
    side_v = element.point.voltage_v / 2.0
    v, i = class_b_locus(side_v, side_v, solution.value(swing.load_ohm), solution.value(swing.phase_rad), ANGLES_RAD)
    case_c = _case_c(element)[:, None]
    safe = safe_a(element, v, np.inf, np.broadcast_to(case_c, v.shape)) if v.size else v
    with np.errstate(divide="ignore", invalid="ignore"):
        use = np.where(i > 0.0, i / safe, 0.0)
    worst = use.argmax(axis=1)[:, None]
    return np.take_along_axis(i, worst, axis=1)[:, 0], np.take_along_axis(safe, worst, axis=1)[:, 0]
