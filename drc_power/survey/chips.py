"""Judges regulators, load switches, rectifier bridges, relays, transformers, current sensors and power chips."""

from __future__ import annotations

import re

from drc_power.netlist.model import Part
from drc_power.survey.channel import texts
from drc_power.survey.conduits import Conduit
from drc_power.survey.diodes import is_small_diode
from drc_power.survey.patterns import one_of
from drc_power.survey.pins import plain
from drc_power.survey.standing import Standing
from drc_power.survey.verdict import Verdict, signal
from drc_power.survey.wiring import Tap

_REFERENCE = re.compile(r"voltage reference|\bREF\d{2,4}|ADR\d|LT146\d|MAX61\d\d|LM4[01][0-9]\d", re.IGNORECASE)
_BRIDGE_CHIP = re.compile(
    r"\b" + one_of(r"""DRV8(?!3[0-2]|35)\d{3} L29[38] L6(?:20|2[03]|47|48)\d\w* A(?:49|39|59)\d\d TMC(?:2\d\d\d|51\d\d) TB6[56]\d\d VNH\w+ BTN\w+
        BTS79\d\w* STSPIN\w* STK\d LB19\d\d TLE\d{4} MC33(?:88|92)\d\w* TPA3\d\w* TAS5\d\w* TDA(?:7\d{3}|20\d\d|89\d\d)\w*
        LM(?:3886|4780|3875|1875|4766)\w* PAM8\d\w* MAX98\d\w* ULN2\d{3}\w* TPIC\w* SN754410""")
    + r"|(motor|stepper|h.bridge|bldc) driver|class.?d.{0,20}amplifier|^(?!.*protect).*audio power amp|darlington.{0,20}arrays?",
    re.IGNORECASE,
)
_OUT = re.compile(r"^(OUT|O|SPK|MOT|M|[ABUVW]O)[A-Z0-9_]{0,5}[+-]?$|^[ABUVW]?OUT\w{0,4}[+-]?$|^[12][AB]$|^O[AB][12]$|^\dC$|^C\d$|^Y\d$")


def judge_regulator(nets: Standing, c: Conduit) -> Verdict:
    """A regulator or load switch passes supply current; a reference does not."""
    part = nets.wiring.netlist.parts[c.ref]
    if _REFERENCE.search(texts(part)) and c.kind == "linear-regulator" and not re.search("regulator", part.description, re.IGNORECASE):
        return signal("voltage reference")
    return Verdict("pass", (f"{c.kind.replace('-', ' ')} from its input to its output",), 0.95)


def judge_bridge(nets: Standing, c: Conduit) -> Verdict:
    """A rectifier bridge."""
    return Verdict("switch", ("rectifier bridge",), 0.95)


def judge_relay(nets: Standing, c: Conduit) -> Verdict:
    """A relay's contacts: on the path unless they only touch signals."""
    kinds = {tap.kind for net in (c.a, c.b) for tap in nets.wiring.taps(net) if tap.ref != c.ref}
    if nets.is_any(c.a) or nets.is_any(c.b) or "connector" in kinds:
        return Verdict("switch", ("relay contacts",), 0.8)
    return signal("relay contacts on signals")


def judge_transformer(nets: Standing, c: Conduit) -> Verdict:
    """A transformer counts where a source, a transistor or a converter drives it or a rectifier follows it."""
    windings = [net for side in ("primary", "secondary") for net in nets.wiring.nets_of(c.ref, side)]
    if any(_drives_winding(tap) for net in windings for tap in nets.wiring.taps(net) if tap.ref != c.ref):
        return Verdict("pass", ("transformer on a power path",), 0.8)
    return signal("signal transformer")


def _drives_winding(tap: Tap) -> bool:
    if tap.kind in ("source", "bridge", "fuse") or tap.terminal in ("switch_node", "drain", "collector", "drain_2", "collector_2"):
        return True
    if tap.kind == "diode":
        return not is_small_diode(tap.part)
    return tap.kind in ("ic", "switching-regulator") and plain(tap.pin.name) in ("D", "DRAIN", "SW", "HV")


def judge_chip(nets: Standing, c: Conduit) -> Verdict:
    """A chip with a current path of its own, such as a current sensor."""
    return Verdict("pass", ("current path through a sensor",), 0.8)


def power_outputs(part: Part) -> tuple[str, ...]:
    """Nets of the outputs of a chip that drives motors or loudspeakers itself; empty for any other chip."""
    if not _BRIDGE_CHIP.search(texts(part)):
        return ()
    nets = (pin.net for pin in part.pins if _OUT.match(plain(pin.name)) and pin.net and not pin.net.startswith("unconnected-"))
    return tuple(dict.fromkeys(nets))
