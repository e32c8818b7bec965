"""Which nets are grounds: names, ground pins, capacitors and sources add up."""

from __future__ import annotations

import re
from collections.abc import Iterable

from drc_power.netlist.model import Part
from drc_power.survey import pins
from drc_power.survey.values import farads, ohms
from drc_power.survey.voltages import leaf
from drc_power.survey.wiring import Tap, Wiring

_NAMES: tuple[tuple[str, float], ...] = (
    (r"^([ADPSEICQ]|PW|PWR|MOT|USB|ISO|SIG|BAT|CHG|HV|LV|ANA|DIG)?_?GND(A|D|P|S|PWR|REF|ISO|_\w+|\d*|[A-Z]{1,4})?$|^0V?$|^GROUND$|^[A-Z0-9]+_[AP]?GND$|^COM$", 6.0),
    (r"^[ADPV]?VSS[ADP]?$", 2.0),
    (r"^(PACK|BATT?|B|P|VBAT|CELL|CHG|C|SOLAR|PV|PANEL|IN|VIN|DCIN|SUPPLY|PWR|POWER)_?-$|^(BAT|PACK)_?(NEG|MINUS)$|^B0$|^CELL0$|^PV-$|^DC-$", 3.0),
)
_LIKELY = 4.0
_POSSIBLE = 3.0
_SMALL_NET = 40


def _name_score(net: str) -> float:
    return sum(weight for pattern, weight in _NAMES if re.match(pattern, leaf(net)))


def _score(wiring: Wiring, net: str, capacitors: int, has_plain: bool) -> float:
    """Evidence that a net is a ground. Beside a net with a plain ground's name, VSS may be a negative rail."""
    taps = wiring.taps(net)
    name = _name_score(net)
    named_pins = 1.5 * len({tap.ref for tap in taps if tap.kind not in ("capacitor", "resistor") and pins.is_ground_pin(tap.pin)})
    minus = sum(2.0 if tap.kind == "battery" else 1.0 for tap in taps if tap.terminal == "minus")
    if has_plain and name < _POSSIBLE and not named_pins:
        return 0.0
    share = sum(1 for tap in taps if tap.kind == "capacitor") / max(1, capacitors)
    return name + min(6.0, named_pins) + min(3.0, minus) + 3.0 * share


def find_grounds(wiring: Wiring) -> frozenset[str]:
    """The ground nets. Where no net is a likely one, the likeliest of all, so that every board has one."""
    capacitors = sum(1 for part in wiring.parts() if wiring.kind(part.ref) == "capacitor")
    has_plain = any(_name_score(net) >= _LIKELY for net in wiring.nets)
    scores = {net: _score(wiring, net, capacitors, has_plain) for net in wiring.nets}
    grounds = {net for net, score in scores.items() if score >= _LIKELY}
    if not grounds and scores:
        best = max(scores.values())
        grounds = {next(net for net, score in scores.items() if score == best)} if best > 0 else set()
    possible = {net for net, score in scores.items() if score >= _POSSIBLE}
    return frozenset(_joined(wiring, grounds, possible))


def _joined(wiring: Wiring, grounds: Iterable[str], possible: set[str]) -> set[str]:
    """Adds the possible grounds that a low resistance or a transistor's channel joins to a ground."""
    reached = set(grounds)
    waiting = sorted(reached)
    seen = set(waiting)
    while waiting:
        net = waiting.pop()
        for tap in wiring.taps(net):
            for other in _return_ends(wiring, tap):
                if other in possible:
                    reached.add(other)
                if other and other not in seen and (other in possible or len(wiring.taps(other)) <= _SMALL_NET):
                    seen.add(other)
                    waiting.append(other)
    return reached


def is_channel(tap: Tap) -> bool:
    """Whether the tap is an end of a transistor's channel."""
    return tap.kind == "mosfet" and tap.terminal.startswith(("drain", "source"))


def _return_ends(wiring: Wiring, tap: Tap) -> tuple[str, ...]:
    if tap.kind in ("net-tie", "ferrite") or tap.kind == "resistor" and is_low_ohm(tap.part):
        return (wiring.across(tap),)
    if is_channel(tap):
        suffix = "_2" if tap.terminal.endswith("_2") else ""
        other = ("source" if tap.terminal.startswith("drain") else "drain") + suffix
        return wiring.nets_of(tap.ref, other)
    return ()


_CALLED_LOAD = re.compile(r"^R_?L(OAD)?_?\d*$", re.IGNORECASE)
_SHUNT = re.compile(r"shunt|sense|current", re.IGNORECASE)


def is_low_ohm(part: Part, limit_ohm: float = 1.0) -> bool:
    """Whether a resistor is small enough to carry supply current, or is called a shunt and says no value."""
    value = ohms(part.value)
    if _CALLED_LOAD.match(part.ref):
        return False
    if value is None:
        return bool(_SHUNT.search(f"{part.value} {part.symbol} {part.description}"))
    return value <= limit_ohm


_FOOT_OHM = 5.0


def _has_foot(wiring: Wiring, net: str) -> bool:
    """A transistor stands on the net with its source or emitter."""
    return any(tap.terminal.startswith(("source", "emitter")) for tap in wiring.taps(net))


def _is_held(wiring: Wiring, net: str, grounds: frozenset[str]) -> bool:
    """A capacitor of 10 uF or more to a ground: a supply with a load on it rather than a return."""
    return any((farads(t.part.value) or 0.0) >= 1e-5 and wiring.across(t) in grounds for t in wiring.tied(net, "capacitor"))


def low_side(wiring: Wiring, grounds: frozenset[str], supplies: Iterable[str]) -> frozenset[str]:
    """Grounds and the nets that hang on them through shunts, beads and net ties: sources of low-side switches."""
    barred = set(supplies)
    found = set(grounds)
    waiting = sorted(found)
    while waiting:
        for tap in wiring.taps(waiting.pop()):
            if tap.kind in ("net-tie", "ferrite") or tap.kind == "resistor" and is_low_ohm(tap.part, _FOOT_OHM):
                other = wiring.across(tap)
                if tap.kind == "resistor" and not is_low_ohm(tap.part) and not _has_foot(wiring, other):
                    continue
                if other and other not in found and other not in barred and not _is_held(wiring, other, grounds):
                    found.add(other)
                    waiting.append(other)
    return frozenset(found)
