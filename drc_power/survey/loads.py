"""Does a node drive a load? What hangs on it adds up, one row per habit of the trade."""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import NamedTuple

from drc_power.netlist.model import Part
from drc_power.survey.channel import texts
from drc_power.survey.grounds import is_low_ohm
from drc_power.survey.patterns import compiled, one_of
from drc_power.survey.pins import plain
from drc_power.survey.standing import CONTROLS, MAIN_ENDS, SWITCHING_PIN, Standing
from drc_power.survey.values import amperes, farads, ohms, watts
from drc_power.survey.wiring import Tap


class Hang(NamedTuple):
    """One row: each tap on the node for which `holds` is true counts `weight`, all together at most `limit`."""

    holds: Callable[[Standing, Tap], bool]
    weight: float
    limit: float
    words: str


def _resistor(test: Callable[[Standing, Tap, float], bool]) -> Callable[[Standing, Tap], bool]:
    def holds(nets: Standing, tap: Tap) -> bool:
        value = ohms(tap.part.value) if tap.kind == "resistor" else None
        return value is not None and nets.wiring.across(tap) not in ("", tap.pin.net) and test(nets, tap, value)

    return holds


def _freewheels(nets: Standing, tap: Tap) -> bool:
    """A diode from the node up to a supply, or up to the node from a return."""
    other = nets.wiring.across(tap)
    if tap.kind not in ("diode", "zener"):
        return False
    return tap.terminal == "anode" and nets.is_power(other) or tap.terminal == "cathode" and other in nets.low


def _other_channel(nets: Standing, tap: Tap) -> bool:
    """Another transistor between the node and a supply or a return: half a bridge."""
    if tap.terminal not in MAIN_ENDS:
        return False
    twin = {"drain": "source", "source": "drain", "collector": "emitter", "emitter": "collector"}
    base, _, index = tap.terminal.partition("_")
    far = nets.wiring.net(tap.ref, twin[base] + (f"_{index}" if index else ""))
    return far in nets.supplies or far in nets.low


def _to_gate(nets: Standing, tap: Tap) -> bool:
    return tap.terminal in ("gate", "base", "gate_2", "base_2") or tap.kind == "resistor" and nets.wiring.across(tap) in nets.gates


def _power_resistor(nets: Standing, tap: Tap, value: float) -> bool:
    rated = watts(f"{tap.part.value} {tap.part.description}") or 0.0
    return 1.0 < value <= 200.0 and (rated >= 1.0 or bool(re.search(r"heater|TO-?2|DIN0[4-9]|25\d\d|L\d\d\.\dmm", f"{tap.part.value} {tap.part.footprint}", re.I)))


def _on_to_supply(nets: Standing, tap: Tap) -> bool:
    """A part without loss whose far end is a supply."""
    small = tap.kind in ("ferrite", "net-tie", "fuse") or tap.kind == "resistor" and is_low_ohm(tap.part)
    return small and nets.wiring.across(tap) in nets.supplies


def _precharge(nets: Standing, tap: Tap, value: float) -> bool:
    """A resistor of power size on to another power net: it limits an inrush."""
    return 5.0 < value <= 1000.0 and nets.is_power(nets.wiring.across(tap)) and has_power_size(tap.part)


def has_power_size(part: Part) -> bool:
    """Whether a resistor's value, description or footprint speaks of half a watt or more."""
    rated = watts(f"{part.value} {part.description}") or 0.0
    return rated >= 0.5 or bool(re.search(r"(?<!\d)(2010|2512|5025|6332|2816|4527)(?!\d)|DIN0[3-9]|TO-?2|wirewound|MELF_0207|Power", part.footprint, re.IGNORECASE))


def _coupled(nets: Standing, tap: Tap) -> bool:
    """A large capacitor in series with a contact or loudspeaker."""
    if tap.kind != "capacitor" or (farads(tap.part.value) or 0.0) < 4.7e-6:
        return False
    other = nets.wiring.across(tap)
    return other not in nets.low and other not in nets.supplies and bool(nets.wiring.tied(other, "connector") or nets.wiring.tied(other, "speaker"))


def _ballast(nets: Standing, tap: Tap) -> bool:
    """A resistor to the return that is called a load, or a formula of a simulated one."""
    value = ohms(tap.part.value)
    return tap.kind == "resistor" and nets.wiring.across(tap) in nets.grounds and (value is None or value < 47.0) and not is_low_ohm(tap.part)


HANGS: tuple[Hang, ...] = (
    Hang(lambda n, t: t.kind == "inductor", 3.0, 3.0, "an inductor"),
    Hang(lambda n, t: t.kind == "transformer", 3.0, 3.0, "a transformer"),
    Hang(lambda n, t: t.kind == "relay" and t.terminal not in ("a", "b", "common"), 3.0, 3.0, "a relay's coil"),
    Hang(lambda n, t: t.kind == "motor", 3.0, 3.0, "a motor"),
    Hang(lambda n, t: t.kind == "resistor" and bool(re.search(r"heat(er|ing)|lamp|peltier", f"{t.part.symbol} {t.part.value}", re.I)), 3.0, 3.0, "a heater or lamp"),
    Hang(lambda n, t: t.kind == "speaker", 1.0, 1.0, "a sounder"),
    Hang(lambda n, t: t.kind == "connector", 1.5, 1.5, "a connector"),
    Hang(_freewheels, 2.0, 2.0, "a freewheel diode"),
    Hang(_other_channel, 2.0, 2.0, "another transistor to a supply or return"),
    Hang(lambda n, t: t.kind in ("ic", "gate-driver") and bool(SWITCHING_PIN.match(plain(t.pin.name))), 1.5, 1.5, "a driver's switch-node pin"),
    Hang(lambda n, t: t.kind == "switching-regulator" and t.terminal == "switch_node", 3.0, 3.0, "a converter's switch node"),
    Hang(_resistor(_power_resistor), 2.0, 2.0, "a power resistor"),
    Hang(_resistor(lambda n, t, r: r < 10 and not _to_gate(n, t)), 0.7, 0.7, "a low resistance"),
    Hang(lambda n, t: t.kind == "led", 0.5, 0.5, "a light-emitting diode"),
    Hang(lambda n, t: t.kind == "led" and bool(re.search(r"laser|high.?power|\dW\b|\bCOB\b|strip", texts(t.part), re.I)), 1.5, 1.5, "a power light-emitting diode"),
    Hang(_ballast, 1.5, 1.5, "a load resistor"),
    Hang(_on_to_supply, 2.0, 2.0, "a bead or link on to a supply"),
    Hang(_coupled, 2.0, 2.0, "a load behind a coupling capacitor"),
    Hang(_resistor(lambda n, t, r: r >= 47 and not has_power_size(t.part)), -0.6, -1.8, "resistors of signal size"),
    Hang(lambda n, t: t.kind in ("ic", "unknown") and t.terminal == "" and t.pin.type != "passive" and not SWITCHING_PIN.match(plain(t.pin.name)), -1.0, -2.0, "signal pins"),
    Hang(_resistor(_precharge), 2.5, 2.5, "a precharge resistor to a supply"),
    Hang(lambda n, t: t.terminal == "supply" and t.kind in ("ic", "gate-driver"), 1.0, 2.0, "supply pins"),
    Hang(lambda n, t: t.kind == "optocoupler", -2.0, -2.0, "an optocoupler"),
    Hang(lambda n, t: t.terminal in ("gate", "base", "gate_2", "base_2"), -3.0, -3.0, "a gate"),
    Hang(_resistor(lambda n, t, r: n.wiring.across(t) in n.gates), -1.5, -1.5, "a gate behind a resistor"),
)


def load_on(nets: Standing, node: str, without: str = "") -> tuple[float, tuple[str, ...]]:
    """(weight, words) of what hangs on `node`, looked at through beads, ties and low resistances."""
    if node in nets.grounds:
        return 0.0, ()
    if node in nets.supplies:
        return 1.5, ("a supply",)
    total, words = 0.0, []
    own = {net for name in CONTROLS for net in nets.wiring.nets_of(without, name)} if without else set()
    taps = [
        t for net in sorted(nets.far(node, without)) for t in nets.wiring.taps(net)
        if t.ref != without and not (own and t.kind == "resistor" and nets.wiring.across(t) in own)
    ]
    for row in HANGS:
        weight = row.weight * sum(1 for tap in taps if row.holds(nets, tap))
        weight = max(weight, row.limit) if row.limit < 0 else min(weight, row.limit)
        total += weight
        if weight > 0:
            words.append(row.words)
    return total, tuple(words)


class OwnRow(NamedTuple):
    """What a transistor itself says of its size."""

    pattern: str
    weight: float
    words: str


_PACKAGES: tuple[OwnRow, ...] = (
    OwnRow(r"TO-?(220|247|3P|3(?!\d)|252|263|251|262|264|268|218|126|225)|D2?PAK|SOT-?227|TOLL|HSOF|PowerPAK|LFPAK|SO-?8|SOIC-?8|SON-?8|DFN-?8|TDSON|TSDSON|PQFN|DirectFET|SuperSO|5x6|3[.x]?3x3", 1.5, "power package"),
    OwnRow(r"SOT-?(223|89)|TSOP-?6|SOT-?23-?6|TSOT", 0.5, "medium package"),
    OwnRow(r"TO-?92|SOT-?(23(?!-?[5-9])|323|363|563|523|723|883)|SC-?(70|75|59|88|89)|SOT95|SOT65|DFN1006|X2SON", -0.5, "small package"),
)
_SMALL = r"\b" + one_of(r"""
    2N700[02] BSS1[23]8 BSS84 BS170 BS250 FDV30 NX7002 BSN20 DMG1012 DMN(?:26D|53D|62D|65D) 2N390[46] 2N2222 2N2907 MMBT PMBT BC[58]\d{2}
    BC337 BC327 S8050 S8550 DT[ACD]\d MUN\d NTR4003 RU[EM]00 SSM3 2SK3018 2SC(?:1815|2240|2712) 2SA(?:970|1015) BCW BCV BSR FJV PDT""")


def own_size(part: Part) -> tuple[float, tuple[str, ...]]:
    """(weight, words) of what the transistor's package, description and part number say of its size."""
    rows = [(row.weight, row.words) for row in _PACKAGES if re.search(row.pattern, part.footprint, re.IGNORECASE)][:1]
    current = amperes(part.description)
    if current is not None and current >= 1.0:
        rows.append((1.5, f"described for {current:g} A"))
    elif current is not None and current < 0.6:
        rows.append((-1.0, f"described for {current:g} A"))
    if compiled(_SMALL).search(texts(part)):
        rows.append((-1.0, "small-signal type"))
    return sum(w for w, _ in rows), tuple(words for _, words in rows)
