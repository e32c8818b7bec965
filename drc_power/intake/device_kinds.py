"""What device data may say, as tables: the kinds, the limits and behaviour each kind has, and how a limit is read."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from .fields import Reader, reader, table_reader
from .tree import Row


@dataclass(frozen=True, slots=True)
class Kind:
    """One kind of device: the keys under `limits`, `conduction` and `charge`, and its further sections."""

    limits: tuple[str, ...]
    conduction: tuple[str, ...] = ()
    sections: tuple[str, ...] = ()
    charge: tuple[str, ...] = ()
    channels: tuple[str, ...] = ()


def _kind(limits: str, conduction: str = "", sections: str = "", charge: str = "", channels: str = "") -> Kind:
    return Kind(*(tuple(words.split()) for words in (limits, conduction, sections, charge, channels)))


_MOSFET = _kind(
    "vds vgs id id_pulsed power tj avalanche_energy avalanche_energy_repetitive avalanche_current breakdown",
    "rds rds_scale at_gate", "gate charge body transfer envelope", "output recovery at", "n p",
)
_BJT = _kind("vce vbe ic ic_pulsed power tj second_breakdown", "saturation slope gain", "switching envelope", "", "npn pnp")
_IGBT = _kind("vce vbe ic ic_pulsed power tj second_breakdown", "saturation slope gain", "switching envelope", "", "n p")
_DIODE = _kind("vr if surge power tj", "knee slope knee_tempco forward", "charge leakage", "recovery at")
_CLAMP = _kind("power current tj pulse_power", "clamp standoff")
_SWITCH = _kind("vin current voltage i2t melts tj temperature", "resistance")
_RESISTOR = _kind("power voltage temperature pulse_energy", "resistance tempco")
_INDUCTOR = _kind("current saturation temperature", "winding")
_TRANSFORMER = _kind("current saturation temperature", "winding primary secondary ratio")
_CHIP = _kind("vin power tj", "quiescent")

KINDS: Mapping[str, Kind] = {
    "mosfet": _MOSFET,
    "bjt": _BJT,
    "igbt": _IGBT,
    "diode": _DIODE,
    "bridge": _DIODE,
    "zener": _CLAMP,
    "tvs": _CLAMP,
    "linear-regulator": _kind("vin differential current power tj", "dropout quiescent reference minimum_load current_limit"),
    "switching-regulator": _kind("vin current power tj", "efficiency quiescent"),
    "load-switch": _SWITCH,
    "fuse": _SWITCH,
    "connector": _SWITCH,
    "relay": _SWITCH,
    "switch": _SWITCH,
    "resistor": _RESISTOR,
    "thermistor": _RESISTOR,
    "potentiometer": _RESISTOR,
    "inductor": _INDUCTOR,
    "ferrite": _INDUCTOR,
    "transformer": _TRANSFORMER,
    "capacitor": _kind("voltage ripple temperature", "esr"),
    "ic": _CHIP,
    "gate-driver": _CHIP,
    "optocoupler": _CHIP,
}
"""Every kind of device. All of them may have `thermal`."""

SECTIONS_OF_ALL = ("kind", "channel", "matches", "source", "limits", "conduction", "thermal")

_TIME = reader("time", above=0)
_VOLTAGE, _CURRENT, _POWER = (reader(each, above=0) for each in ("voltage", "current", "power"))


def _second_breakdown(node: Any) -> Any:
    """A current, an energy, or a curve of current over voltage."""
    if isinstance(node, Row):
        return table_reader(_VOLTAGE, _CURRENT)(node)
    return reader("current", "energy", above=0)(node)


LIMITS: Mapping[str, Reader] = {
    "vds": _VOLTAGE, "vgs": _VOLTAGE, "vce": _VOLTAGE, "vbe": _VOLTAGE, "vr": _VOLTAGE, "vin": _VOLTAGE,
    "voltage": _VOLTAGE, "differential": _VOLTAGE, "breakdown": _VOLTAGE,
    "id": _CURRENT, "id_pulsed": _CURRENT, "ic": _CURRENT, "ic_pulsed": _CURRENT, "if": _CURRENT, "surge": _CURRENT,
    "current": _CURRENT, "saturation": _CURRENT, "ripple": _CURRENT, "avalanche_current": _CURRENT,
    "power": _POWER, "pulse_power": table_reader(_TIME, _POWER),
    "avalanche_energy": reader("energy", above=0), "avalanche_energy_repetitive": reader("energy", above=0),
    "pulse_energy": reader("energy", above=0), "i2t": reader("i2t", above=0), "melts": table_reader(_TIME, _CURRENT),
    "tj": reader("temperature"), "temperature": reader("temperature"),
    "second_breakdown": _second_breakdown,
}
"""How each limit is read. Limits are magnitudes."""

STRESSES: Mapping[str, tuple[str, ...]] = {
    **dict.fromkeys(("vds", "vgs", "vce", "vbe", "vr", "vin", "voltage", "differential", "breakdown"), ("voltage",)),
    **dict.fromkeys(("id", "id_pulsed", "ic", "ic_pulsed", "if", "surge", "current", "saturation", "ripple",
                     "avalanche_current", "melts", "envelope"), ("current",)),
    **dict.fromkeys(("power", "pulse_power"), ("power",)),
    **dict.fromkeys(("avalanche_energy", "avalanche_energy_repetitive", "pulse_energy"), ("energy",)),
    **dict.fromkeys(("tj", "temperature"), ("temperature",)),
    "i2t": ("i2t",),
    "second_breakdown": ("current", "energy"),
    "rise": ("temperature_difference",),
    "drop": ("voltage",),
    "headroom": ("voltage",),
}
"""What house rules may limit, and the dimension that an absolute limit has."""
