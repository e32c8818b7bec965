"""What a device entry asks for, kind by kind, in the order of a data sheet: only what a check cannot do without.

A key stands here if the check that needs it is unproven without it, so that a blank is never passed over. What has a
meaning when it is left out (a temperature coefficient, say) stands as a comment instead.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Row:
    """A key of a section. `hint`: what to write. `measures`: the unit of a reading that belongs to it.

    switching: only for parts that switch. aside: a comment, for a key that may well be left out.
    """

    key: str
    hint: str = ""
    measures: str = ""
    switching: bool = False
    aside: bool = False


@dataclass(frozen=True, slots=True)
class Part:
    """A section of a device entry, and the table or figure of a data sheet that usually holds it."""

    section: str
    place: str
    rows: tuple[Row, ...]


def _limits(*rows: Row) -> Part:
    return Part("limits", "absolute maximum ratings", rows)


def _thermal(*keys: str) -> Part:
    return Part("thermal", "thermal characteristics", tuple(Row(key) for key in keys))


_TJ, _POWER = Row("tj", "highest junction temperature"), Row("power", "at 25 °C case, or ambient if no case is given", "W")
_CURVE_HINT = "points of each curve, [[1 V, 50 A], ...]; give shorter pulses as 10 ms: and so on"
_ENVELOPE = Part("envelope", "figure: safe operating area", (Row("dc", _CURVE_HINT),))
_SCALE = Row("rds_scale", "[[25 °C, 1.0], [150 °C, ...]]   figure: RDS(on) over junction temperature; without it the channel counts as cold", aside=True)

_MOSFET = (
    _limits(Row("vds", "", "V"), Row("vgs"), Row("id", "continuous, at 25 °C case", "A"), _POWER, _TJ),
    _thermal("rth_jc", "rth_ja"),
    Part("conduction", "static characteristics", (Row("rds", "RDS(on) by gate voltage, {10 V: {typ: 6 mohm, max: 8 mohm}}", "ohm"), _SCALE)),
    Part("gate", "dynamic characteristics", (Row("rise", switching=True), Row("fall", switching=True))),
    Part("charge", "dynamic characteristics", (Row("output", "Qoss", switching=True), Row("recovery", "Qrr of the body diode", switching=True))),
    _ENVELOPE,
)
_TRANSISTOR = (
    _limits(Row("vce", "", "V"), Row("ic", "continuous", "A"), _POWER, _TJ),
    _thermal("rth_jc", "rth_ja"),
    Part("conduction", "static characteristics", (Row("saturation", "VCE(sat) at the current on this board"),)),
    Part("switching", "switching times", (Row("rise", switching=True), Row("fall", switching=True))),
    _ENVELOPE,
)
_DIODE = (
    _limits(Row("vr", "repetitive peak reverse voltage", "V"), Row("if", "mean forward current", "A"), _POWER, _TJ),
    _thermal("rth_jc", "rth_ja"),
    Part("conduction", "figure: forward characteristics", (Row("forward", "{25 °C: [[1 A, 0.42 V], ...], 125 °C: ...}, or knee: and slope: instead"),)),
    Part("charge", "dynamic characteristics", (Row("recovery", "Qrr; 0 nC for a Schottky diode", switching=True),)),
)
_BRIDGE = (
    _limits(Row("vr", "repetitive peak reverse voltage", "V"), Row("if", "mean forward current", "A"), _POWER, _TJ),
    _thermal("rth_jc", "rth_ja"),
    Part("conduction", "forward characteristics of one diode", (
        Row("knee", "its line is knee + slope · I, drawn through the charging peak"), Row("slope", "20 mohm, say", aside=True))),
)
_CLAMP = (
    _limits(_POWER, _TJ),
    _thermal("rth_ja"),
    Part("conduction", "electrical characteristics", (Row("clamp", "clamping voltage over current, [[1 A, 33 V], ...]"),)),
)
_REGULATOR_LIMITS = _limits(Row("vin", "", "V"), Row("current", "output current", "A"), _POWER, _TJ)
_CONTACTS = (_limits(Row("current", "", "A")), Part("conduction", "electrical characteristics", (Row("resistance", "of the closed contacts", "ohm"),)))
_WOUND = (_limits(Row("current", "rated, for the temperature rise it is given at", "A")),
          Part("conduction", "electrical characteristics", (Row("winding", "DC resistance, largest", "ohm"),)))
_BEAD = (_limits(Row("current", "rated", "A")), Part("conduction", "electrical characteristics", (Row("winding", "DC resistance, largest"),)))
_CHIP = (_limits(_POWER, _TJ), _thermal("rth_ja"), Part("conduction", "electrical characteristics", (Row("quiescent", "supply current"),)))
_VALUED = (_limits(Row("power", "at 70 °C, by size", "W")),)

SHEETS: Mapping[str, tuple[Part, ...]] = {
    "mosfet": _MOSFET, "bjt": _TRANSISTOR, "igbt": _TRANSISTOR,
    "diode": _DIODE, "bridge": _BRIDGE, "zener": _CLAMP, "tvs": _CLAMP,
    "linear-regulator": (_REGULATOR_LIMITS, _thermal("rth_jc", "rth_ja"),
                         Part("conduction", "electrical characteristics", (Row("dropout", "at the current on this board"), Row("quiescent")))),
    "switching-regulator": (_REGULATOR_LIMITS, _thermal("rth_jc", "rth_ja"),
                            Part("conduction", "figure: efficiency", (Row("efficiency", "[[0.1 A, 82 %], ...] at the input voltage of this board"),
                                                                      Row("quiescent", "supply current without load", aside=True)))),
    "load-switch": (_limits(Row("current", "output current", "A"), _TJ), _thermal("rth_ja"),
                    Part("conduction", "electrical characteristics", (Row("resistance", "on-resistance, largest", "ohm"),))),
    "fuse": (_limits(Row("current", "", "A")), Part("conduction", "electrical characteristics", (Row("resistance", "cold", "ohm"),))),
    "connector": (_limits(Row("current", "per contact", "A")),),
    "relay": _CONTACTS, "switch": _CONTACTS,
    "resistor": _VALUED, "thermistor": _VALUED, "potentiometer": _VALUED,
    "inductor": _WOUND, "transformer": _WOUND, "ferrite": _BEAD,
    "capacitor": (_limits(Row("voltage", "", "V")),),
    "ic": _CHIP, "gate-driver": _CHIP, "optocoupler": _CHIP,
}
"""The sections of every kind that device data knows."""
