"""Finds the elements: every conduit is judged again and again until no more power nets come to light."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from drc_power.survey import chips, diodes, series, transistors
from drc_power.survey.conduits import Conduit, conduits
from drc_power.survey.standing import Standing
from drc_power.survey.verdict import Verdict
from drc_power.survey.wiring import Wiring

Judge = Callable[[Standing, Conduit], Verdict]

JUDGES: Mapping[str, Judge] = {
    "fuse": series.judge_fuse,
    "net-tie": series.judge_tie,
    "switch": series.judge_switch,
    "ferrite": series.judge_ferrite,
    "inductor": series.judge_inductor,
    "resistor": series.judge_resistor,
    "thermistor": series.judge_thermistor,
    "diode": diodes.judge_diode,
    "zener": diodes.judge_clamp,
    "tvs": diodes.judge_clamp,
    "led": diodes.judge_led,
    "mosfet": transistors.judge_transistor,
    "bjt": transistors.judge_transistor,
    "igbt": transistors.judge_transistor,
    "linear-regulator": chips.judge_regulator,
    "switching-regulator": chips.judge_regulator,
    "load-switch": chips.judge_regulator,
    "bridge": chips.judge_bridge,
    "relay": chips.judge_relay,
    "transformer": chips.judge_transformer,
    "ic": chips.judge_chip,
}
_ROUNDS = 12


@dataclass(frozen=True, slots=True)
class Found:
    """A conduit with its verdict."""

    conduit: Conduit
    verdict: Verdict


def judge_all(wiring: Wiring, nets: Standing) -> list[Found]:
    """Every conduit of every fitted part with its final verdict, in the netlist's order.

    A found element carries power to both its ends, which may make its neighbours elements in the next round.
    Verdicts of one round see only what the rounds before found, so the order of parts cannot matter.
    """
    ways = [c for part in wiring.parts() for c in conduits(wiring, wiring.identities[part.ref])]
    settled: dict[Conduit, Verdict] = {}
    fresh: dict[Conduit, Verdict] = {}
    for _ in range(_ROUNDS):
        fresh = {c: JUDGES[c.kind](nets, c) for c in ways if c not in settled}
        on_path = {c: verdict for c, verdict in fresh.items() if verdict.group in ("pass", "switch")}
        if not on_path:
            break
        settled |= on_path
        for conduit, verdict in on_path.items():
            nets.power |= _energised(nets, conduit, verdict)
    return [Found(c, _after_all(nets, c, settled.get(c) or fresh[c])) for c in ways]


def _energised(nets: Standing, conduit: Conduit, verdict: Verdict) -> set[str]:
    """Nets that an element carries power to; a pass element with an end on a return carries return current only."""
    ends = {conduit.a, conduit.b}
    if verdict.group == "pass" and ends & nets.low and not conduit.one_way:
        return set()
    return ends - nets.low - nets.gates


def _after_all(nets: Standing, conduit: Conduit, verdict: Verdict) -> Verdict:
    """What was judged a pass element early may have turned out to stand at a switched node: semiconductors are judged once more."""
    if conduit.kind in ("mosfet", "bjt", "igbt", "diode") and verdict.on_path:
        again = JUDGES[conduit.kind](nets, conduit)
        return again if again.group in ("pass", "switch") else verdict
    return verdict


_PLAIN_REASONS: Mapping[str, str] = {
    "capacitor": "capacitor: carries no steady current",
    "led": "indicator",
    "crystal": "crystal or oscillator",
    "test-point": "test point",
    "mechanical": "mechanical part",
    "optocoupler": "signal isolator",
    "potentiometer": "potentiometer on a signal",
    "ic": "chip without a supply pin that was found",
    "gate-driver": "gate driver without a supply pin that was found",
    "connector": "connector on signals only",
    "unknown": "nothing says what it is",
    "source": "source that feeds no power net",
    "battery": "battery on no power net",
    "motor": "motor on no power net",
    "speaker": "sounder on signals",
    "relay": "relay without contacts that were found",
}


def plain_reason(kind: str) -> str:
    """Why a part that has no conduit is not on a power path."""
    return _PLAIN_REASONS.get(kind, "its terminals are not known or not on two nets")
