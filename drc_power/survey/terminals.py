"""The terminals of a part of known kind: by pin names first, by the package's usual numbering after that."""

from __future__ import annotations

import re
from collections.abc import Callable

from drc_power.netlist.model import Part
from drc_power.survey import pins as tables
from drc_power.survey.pins import plain

Found = tuple[dict[str, tuple[str, ...]], tuple[str, ...]]

_TWO_ENDED = ("resistor", "capacitor", "inductor", "ferrite", "fuse", "thermistor", "net-tie", "switch", "crystal", "motor", "speaker")
BY_NETS = frozenset({"switch", "inductor"})
"""Kinds whose terminals depend on which pins are wired to which nets, not on the symbol alone."""

_COMMON = re.compile(r"^(COM\w*|AK|KA|A/K|K/A|A1K2|K1A2|AC|A_?C|COMMON|AN?/?CA?)$")
_GUESSED = ("terminals by the usual pin numbers of the package",)


def terminals_of(kind: str, part: Part) -> tuple[str, dict[str, tuple[str, ...]], tuple[str, ...]]:
    """(kind, terminals, notes). The kind may be refined, as a jumper that is drawn open becomes a switch."""
    finder = _FINDERS.get(kind)
    shown, notes = finder(part) if finder else ({}, ())
    if kind == "net-tie" and re.search(r"open", part.symbol, re.IGNORECASE) and re.search("solder", part.symbol + part.footprint, re.IGNORECASE):
        return "switch", shown, (*notes, "drawn as an open jumper")
    return kind, shown, notes


def _by_tables(kind: str, *needed: str) -> Callable[[Part], Found]:
    def finder(part: Part) -> Found:
        shown = tables.named(kind, part.pins)
        if all(name in shown for name in needed):
            return shown, ()
        guessed = tables.numbered(kind, part)
        return (guessed, _GUESSED) if guessed and not shown else (shown, ())

    return finder


_INDEXED = re.compile(r"^(?:([DGS])_?([12])|([12])_?([DGS]))(?:_?\d)?$")
_JOINED = re.compile(r"^(?:S1/?D2|D2/?S1|SW|VSW|PHASE)$")
_POWER_BLOCK = {"VIN": "drain", "PGND": "source_2", "TG": "gate", "BG": "gate_2", "D12": "drain+drain_2", "D1/D2": "drain+drain_2", "D": "drain+drain_2"}
_TERMINAL = {"D": "drain", "G": "gate", "S": "source", "C": "collector", "B": "base", "E": "emitter"}


def _two_channels(part: Part, letters_: str) -> dict[str, tuple[str, ...]]:
    """Terminals of a package with two transistors; those of the second carry `_2`. Empty when it has one."""
    pattern = re.compile(_INDEXED.pattern.replace("DGS", letters_))
    found: dict[str, list[str]] = {}
    for pin in part.pins:
        name = plain(pin.name)
        match = pattern.match(name)
        joined = "source+drain_2" if _JOINED.match(name) else _POWER_BLOCK.get(name, "")
        if match and name not in _POWER_BLOCK:
            letter, index = match[1] or match[4], match[2] or match[3]
            joined = _TERMINAL[letter] + ("_2" if index == "2" else "")
        for terminal in filter(None, joined.split("+")):
            found.setdefault(terminal, []).append(pin.number)
    control = _TERMINAL[letters_[1]]
    if control in found and control + "_2" in found:
        return {terminal: tuple(numbers) for terminal, numbers in found.items()}
    return {}


def _mosfet(part: Part) -> Found:
    double = _two_channels(part, "DGS")
    return (double, ("two transistors in one package",)) if double else _by_tables("mosfet", "drain", "source")(part)


def _bjt(part: Part) -> Found:
    double = _two_channels(part, "CBE")
    return (double, ("two transistors in one package",)) if double else _by_tables("bjt", "collector", "emitter")(part)


def _diode(part: Part) -> Found:
    """Anodes and cathodes in pairs: the first anode belongs to the first cathode, and so on."""
    anodes, cathodes, commons = [], [], []
    for pin in part.pins:
        name = plain(pin.name)
        target = commons if _COMMON.match(name) else anodes if re.match(r"^(A|AN|ANODE)\d?$", name) else cathodes if re.match(r"^(K|C|CATHODE|CATH|KATHODE)\d?$", name) else None
        if target is not None:
            target.append(pin.number)
    if {plain(p.name) for p in part.pins} in ({"A1", "A2"}, {"A", "A1"}, {"K1", "K2"}):
        return _two_ended(part)
    pairs = _pairs(anodes, cathodes, commons)
    if pairs:
        return {"anode": tuple(a for a, _ in pairs), "cathode": tuple(k for _, k in pairs)}, ()
    guessed = tables.numbered("diode", part)
    return (guessed, _GUESSED) if len(guessed) == 2 else ({}, ())


def _pairs(anodes: list[str], cathodes: list[str], commons: list[str]) -> list[tuple[str, str]]:
    if commons:
        return [(a, c) for a in anodes for c in commons] + [(c, k) for k in cathodes for c in commons]
    if len(anodes) == len(cathodes):
        return list(zip(anodes, cathodes, strict=True))
    return [(a, k) for a in anodes for k in cathodes]


def _two_ended(part: Part) -> Found:
    """`a` and `b`: the first pin and the last; packs of equal parts pair pins across the package."""
    numbers = [p.number for p in part.pins if plain(p.name) not in ("MP", "NC", "SHIELD", "GND") or len(part.pins) == 2]
    if len(numbers) < 2:
        numbers = [p.number for p in part.pins]
    if len(numbers) < 2:
        return {}, ()
    if len(numbers) >= 4 and len(numbers) % 2 == 0 and re.search(r"pack|network|^RN|array|_x0\d", part.symbol + part.ref, re.IGNORECASE):
        half = len(numbers) // 2
        return {"a": tuple(numbers[:half]), "b": tuple(reversed(numbers[half:]))}, ("a pack of several",)
    return {"a": (numbers[0],), "b": (numbers[-1],)}, ()


def _windings(part: Part) -> Found:
    """An inductor has two ends; with four pins it has two windings, 1-2 and 3-4."""
    numbers = [p.number for p in part.pins if p.net]
    if len(part.pins) == 4 and len(numbers) == 4:
        return {"a": (numbers[0], numbers[3]), "b": (numbers[1], numbers[2])}, ("two windings",)
    return _two_ended(part)


def _switch(part: Part) -> Found:
    """Two ends on different nets; a change-over switch has its common contact in the middle."""
    wired = [p for p in part.pins if p.net and not p.net.startswith("unconnected-")]
    nets = list(dict.fromkeys(p.net for p in wired))
    if len(part.pins) == 3:
        middle = next((p for p in part.pins if plain(p.name) in ("B", "C", "COM")), part.pins[1])
        others = tuple(p.number for p in part.pins if p is not middle)
        return {"a": (middle.number,), "b": others}, ()
    if len(nets) == 2:
        return {"a": tuple(p.number for p in wired if p.net == nets[0]), "b": tuple(p.number for p in wired if p.net == nets[1])}, ()
    return _two_ended(part)


def _regulator(kind: str) -> Callable[[Part], Found]:
    """By pin names; an input that no name shows is a supply pin, an output that no name shows a power output pin."""

    def finder(part: Part) -> Found:
        shown = tables.named(kind, part.pins)
        taken = {number for numbers in shown.values() for number in numbers}
        free = tuple(number for number in tables.supply_pins(part) if number not in taken)
        if "input" not in shown and free:
            shown["input"] = free
        outputs = tuple(p.number for p in part.pins if p.type == "power_out")
        if not {"output", "switch_node"} & set(shown) and outputs:
            shown["output"] = outputs
        guessed = {} if shown else tables.numbered(kind, part)
        return (guessed, _GUESSED) if guessed else (shown, ())

    return finder


def _bridge(part: Part) -> Found:
    shown = tables.named("bridge", part.pins)
    ac = shown.pop("ac", ())
    if "plus" not in shown or "minus" not in shown or len(ac) < 2:
        return {}, ()
    return {**shown, "ac1": ac[:1], "ac2": ac[1:2]}, ()


def _polar(kind: str) -> Callable[[Part], Found]:
    def finder(part: Part) -> Found:
        shown = tables.named(kind, part.pins)
        numbers = [p.number for p in part.pins]
        if {"plus", "minus"} <= set(shown):
            return shown, ()
        return ({"plus": (numbers[0],), "minus": (numbers[-1],)}, ()) if len(numbers) >= 2 else ({}, ())

    return finder


def _relay(part: Part) -> Found:
    shown = tables.named("relay", part.pins)
    contacts = shown.get("open", ()) or shown.get("closed", ())
    if "common" in shown and contacts:
        shown |= {"a": shown["common"], "b": contacts}
    return shown, ()


def _transformer(part: Part) -> Found:
    shown = tables.named("transformer", part.pins)
    if {"primary", "secondary"} <= set(shown):
        return shown, ()
    numbers = [p.number for p in part.pins]
    half = len(numbers) // 2
    return ({"primary": tuple(numbers[:half]), "secondary": tuple(numbers[half:])}, ()) if half else ({}, ())


def _chip(part: Part) -> Found:
    """Supply and ground pins; a chip with a current path of its own (a current sensor) also has `a` and `b`."""
    shown = {"supply": tables.supply_pins(part), "ground": tables.ground_pins(part)}
    plus = tuple(p.number for p in part.pins if re.match(r"^IP\+|^IS?\+$", plain(p.name)))
    minus = tuple(p.number for p in part.pins if re.match(r"^IP-|^IS?-$", plain(p.name)))
    if not plus:
        plus = tuple(p.number for p in part.pins if re.match(r"^V?IN\+$", plain(p.name)))
        minus = tuple(p.number for p in part.pins if re.match(r"^V?IN-$", plain(p.name)))
        if min(len(plus), len(minus)) < 2 or any(p.type == "input" for p in part.pins if p.number in plus):
            plus = ()
    if plus and minus:
        shown |= {"a": plus, "b": minus}
    return {name: numbers for name, numbers in shown.items() if numbers}, ()


_FINDERS: dict[str, Callable[[Part], Found]] = {
    **{kind: _two_ended for kind in _TWO_ENDED},
    "inductor": _windings,
    "switch": _switch,
    "mosfet": _mosfet,
    "bjt": _bjt,
    "igbt": _by_tables("igbt", "collector", "emitter"),
    "diode": _diode,
    "zener": _diode,
    "tvs": _diode,
    "led": _diode,
    "bridge": _bridge,
    "linear-regulator": _regulator("linear-regulator"),
    "switching-regulator": _regulator("switching-regulator"),
    "load-switch": _regulator("load-switch"),
    "battery": _polar("battery"),
    "source": _polar("source"),
    "relay": _relay,
    "transformer": _transformer,
    "ic": _chip,
    "gate-driver": _chip,
    "optocoupler": _chip,
    "unknown": _chip,
}
