"""envelope.linear: a FET in linear mode whose own warmth draws more current: V_DS · Z_th(t) · dI_D/dT stays below 1."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from ..findings.model import Step
from ..physics.envelope import instability_gain
from ..physics.tables import interpolate_linear
from ..solve.events.impedance import impedance_of
from .event_view import EventView
from .judgement import Judgement
from .view import ElementView, View

LINEAR_EVENTS = frozenset({"inrush", "short", "pulse", "waveform", "turn-off"})
NO_GAIN, NO_CURRENT_A = 1e-3, 1e-9
"""A gain at or below 0 damps itself: it is shown as a current that is out of reach, not as an infinite one."""


def steady(view: View) -> Iterator[Judgement]:
    """`envelope.linear` of every FET that an annotation has in linear mode for good."""
    for element in view.elements():
        if element.kind == "mosfet" and element.probe.state == "linear":
            v_v, i_a = np.abs(element.point.voltage_v), element.point.peak_a
            yield from _judged(element, v_v[:, None], i_a[:, None], np.full(v_v.shape + (1,), np.inf), (), steady_judgement)


def event(element: EventView) -> Iterator[Judgement]:
    """`envelope.linear` along the path of an event that takes a FET through its linear range."""
    if element.kind != "mosfet" or element.event.kind not in LINEAR_EVENTS or element.event.role == "switch":
        return
    if element.response is None:
        none = element.view.unknown()[:, None]
        yield from _judged(element, none, none, none, element.event.lacking, element.judgement)
        return
    path, row = element.response.path, element.response.row
    yield from _judged(element, path.v_v[row], path.i_a[row], path.t_s[row], (), element.judgement)


def steady_judgement(element: ElementView, rule, quantity, unit, value, stress, rated, **more) -> Judgement:
    return Judgement(rule, element.subject, quantity, unit, value, rated, rated, element.view.board.where(element.part), stress,
                     element.ref, mode=element.view.mode.name, **{"proven": element.solved, **more})


def _judged(element: ElementView, v_v, i_a, t_s, lacking, make) -> Iterator[Judgement]:
    """The gain along paths of shape (sample, time), as a current: 1 − I/rated is 1 − gain."""
    alpha, device = _alpha(element), element.part.device
    if alpha is None and device is not None and device.envelope.dc is not None:
        return  # the line for any length holds what the maker found of the instability
    impedance = impedance_of(element.part) if alpha is not None else None
    lacking = (*lacking, *element.missing, *_missing(alpha, impedance, np.isinf(t_s).any(), element))
    gain = np.full(v_v.shape, np.nan)
    if alpha is not None and not lacking:
        zth = np.where(np.isinf(t_s), impedance.final_k_per_w, impedance.zth_k_per_w(np.where(np.isinf(t_s), 0.0, t_s)))
        gain = instability_gain(v_v, zth, interpolate_linear(i_a, alpha.column(0), alpha.column(1), above="hold"))
        gain = np.where(i_a > 0.0, gain, 0.0)
    at = np.argmax(np.nan_to_num(gain, nan=-np.inf), axis=1)[:, None]
    worst, value = (np.take_along_axis(x, at, axis=1)[:, 0] for x in (gain, i_a))
    rated = np.maximum(value, NO_CURRENT_A) / np.maximum(worst, NO_GAIN)
    volt, when = (np.take_along_axis(x, at, axis=1)[:, 0] for x in (v_v, t_s))
    more = {"lacking": lacking, "steps": lambda k: _steps(element, volt[k], value[k], when[k], worst[k], alpha, impedance, lacking),
            "remedy": "take voltage off it in linear mode, shorten the event, or use a part made for linear mode",
            "inputs": lambda: element.sources("transfer.alpha", "thermal.zth_jc", "thermal.foster", "thermal.cauer")}
    if make is steady_judgement:
        yield make(element, "envelope.linear", QUANTITY, "A", value, None, rated, **more)
    else:
        yield replace(make("envelope.linear", QUANTITY, "A", value, "linear", rated, **more), stress=None)


QUANTITY = "current in linear mode"


def _alpha(element: ElementView):
    return element.part.device.transfer.alpha if element.part.device else None


def _missing(alpha, impedance, for_good: bool, element: ElementView) -> tuple[str, ...]:
    if alpha is None:
        return ("transfer.alpha, or envelope.dc",)
    if impedance is None or (for_good and np.isfinite(impedance.reach_s)):
        return ("thermal.zth_jc",) if impedance is None else ("thermal.rth_jc",)
    longest_s = element.longest_s if isinstance(element, EventView) else 0.0
    return ("thermal.rth_jc",) if longest_s > impedance.reach_s else ()


def _steps(element, v, i, t, gain, alpha, impedance, lacking) -> tuple[Step, ...]:
    if lacking:
        return ()
    zth = impedance.final_k_per_w if np.isinf(t) else float(impedance.zth_k_per_w(np.array(t)))
    slope = float(interpolate_linear(i, alpha.column(0), alpha.column(1), above="hold"))
    return (Step("α", "dI_D/dT at constant gate voltage", f"at {i:.6g} A", slope, "A/K", "transfer.alpha"),
            Step("Z_th", "at the moment of the highest gain", f"{t:.6g} s", zth, "K/W", impedance.entry),
            Step("S", "V · Z_th · α", f"{v:.6g} · {zth:.6g} · {slope:.6g}", float(gain), "", "electrothermal instability above 1"))
