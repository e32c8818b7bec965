"""Boards drawn as short texts, so that a test reads like a schematic; see `boards/README.md`."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path

import pytest

from drc_power.netlist.model import Net, Netlist, Node, Part, Pin
from drc_power.text import natural_key

BOARDS = Path(__file__).parent / "boards"

_P = "passive"
_TWO = (("1", "", _P), ("2", "", _P))
SYMBOLS: Mapping[str, tuple[str, str, str, tuple[tuple[str, str, str], ...]]] = {
    "R": ("Device:R", "Resistor_SMD:R_0603_1608Metric", "Resistor", _TWO),
    "C": ("Device:C", "Capacitor_SMD:C_0603_1608Metric", "Unpolarized capacitor", _TWO),
    "CP": ("Device:C_Polarized", "Capacitor_THT:CP_Radial_D10.0mm_P5.00mm", "Polarized capacitor", _TWO),
    "L": ("Device:L", "Inductor_SMD:L_1210_3225Metric", "Inductor", (("1", "1", _P), ("2", "2", _P))),
    "FB": ("Device:FerriteBead", "Inductor_SMD:L_0805_2012Metric", "Ferrite bead", _TWO),
    "F": ("Device:Fuse", "Fuse:Fuse_1206_3216Metric", "Fuse", _TWO),
    "D": ("Device:D", "Diode_SMD:D_SMA", "Diode", (("1", "K", _P), ("2", "A", _P))),
    "DS": ("Device:D_Schottky", "Diode_SMD:D_SMB", "Schottky diode", (("1", "K", _P), ("2", "A", _P))),
    "DZ": ("Device:D_Zener", "Diode_SMD:D_SOD-123", "Zener diode", (("1", "K", _P), ("2", "A", _P))),
    "TVS": ("Device:D_TVS", "Diode_SMD:D_SMC", "Bidirectional transient-voltage-suppression diode", (("1", "A1", _P), ("2", "A2", _P))),
    "LED": ("Device:LED", "LED_SMD:LED_0603_1608Metric", "Light emitting diode", (("1", "K", _P), ("2", "A", _P))),
    "BR": ("Device:D_Bridge_+-AA", "Diode_THT:Diode_Bridge_Round_D9.8mm", "Diode bridge", (("1", "+", _P), ("2", "-", _P), ("3", "", _P), ("4", "", _P))),
    "NFET": ("Device:Q_NMOS_GDS", "Package_TO_SOT_SMD:TO-252-2", "N-MOSFET transistor, gate/drain/source", (("1", "G", "input"), ("2", "D", _P), ("3", "S", _P))),
    "PFET": ("Device:Q_PMOS_GDS", "Package_TO_SOT_SMD:TO-252-2", "P-MOSFET transistor, gate/drain/source", (("1", "G", "input"), ("2", "D", _P), ("3", "S", _P))),
    "nfet": ("Device:Q_NMOS_GSD", "Package_TO_SOT_SMD:SOT-23", "N-MOSFET transistor, gate/source/drain", (("1", "G", "input"), ("3", "D", _P), ("2", "S", _P))),
    "pfet": ("Device:Q_PMOS_GSD", "Package_TO_SOT_SMD:SOT-23", "P-MOSFET transistor, gate/source/drain", (("1", "G", "input"), ("3", "D", _P), ("2", "S", _P))),
    "npn": ("Device:Q_NPN_BEC", "Package_TO_SOT_SMD:SOT-23", "NPN transistor, base/emitter/collector", (("1", "B", "input"), ("3", "C", _P), ("2", "E", _P))),
    "pnp": ("Device:Q_PNP_BEC", "Package_TO_SOT_SMD:SOT-23", "PNP transistor, base/emitter/collector", (("1", "B", "input"), ("3", "C", _P), ("2", "E", _P))),
    "NPN": ("Device:Q_NPN_BCE", "Package_TO_SOT_THT:TO-220-3_Vertical", "NPN transistor, base/collector/emitter", (("1", "B", "input"), ("2", "C", _P), ("3", "E", _P))),
    "PNP": ("Device:Q_PNP_BCE", "Package_TO_SOT_THT:TO-220-3_Vertical", "PNP transistor, base/collector/emitter", (("1", "B", "input"), ("2", "C", _P), ("3", "E", _P))),
    "J1": ("Connector_Generic:Conn_01x01", "", "Generic connector", (("1", "Pin_1", _P),)),
    "J2": ("Connector:Screw_Terminal_01x02", "TerminalBlock_Phoenix:TerminalBlock_1x02", "Generic screw terminal", (("1", "Pin_1", _P), ("2", "Pin_2", _P))),
    "J3": ("Connector:Screw_Terminal_01x03", "TerminalBlock_Phoenix:TerminalBlock_1x03", "Generic screw terminal", tuple((str(n), f"Pin_{n}", _P) for n in (1, 2, 3))),
    "H4": ("Connector_Generic:Conn_01x04", "Connector_PinHeader_2.54mm:PinHeader_1x04", "Generic connector", tuple((str(n), f"Pin_{n}", _P) for n in (1, 2, 3, 4))),
    "H6": ("Connector_Generic:Conn_01x06", "Connector_PinHeader_2.54mm:PinHeader_1x06", "Generic connector", tuple((str(n), f"Pin_{n}", _P) for n in range(1, 7))),
    "JP": ("Jumper:SolderJumper_2_Bridged", "Jumper:SolderJumper-2_P1.3mm_Bridged", "Solder Jumper, 2-pole, closed/bridged", (("1", "A", _P), ("2", "B", _P))),
    "NT": ("Device:NetTie_2", "NetTie:NetTie-2_SMD_Pad0.5mm", "Net tie, 2 pins", (("1", "1", _P), ("2", "2", _P))),
    "SW": ("Switch:SW_Push", "Button_Switch_SMD:SW_SPST_B3U", "Push button switch, generic, two pins", (("1", "1", _P), ("2", "2", _P))),
    "LDO": ("Regulator_Linear:LDO", "Package_TO_SOT_SMD:SOT-223-3_TabPin2", "Low-dropout linear regulator", (("1", "GND", "power_in"), ("2", "VO", "power_out"), ("3", "VI", "power_in"))),
    "TP": ("Connector:TestPoint", "TestPoint:TestPoint_Pad_D1.0mm", "test point", (("1", "1", _P),)),
    "Y": ("Device:Crystal", "Crystal:Crystal_HC49-U_Vertical", "Two pin crystal", (("1", "1", _P), ("2", "2", _P))),
    "RLY": ("Relay:Relay_SPDT", "Relay_THT:Relay_SPDT", "Relay SPDT", (("A1", "A1", _P), ("A2", "A2", _P), ("11", "", _P), ("14", "", _P), ("12", "", _P))),
    "V": ("Simulation_SPICE:VDC", "", "Voltage source, DC", _TWO),
}


@dataclass(frozen=True)
class Board:
    """A drawn board and what its author says is on the power path."""

    name: str
    netlist: Netlist
    truth: Mapping[str, frozenset[str]]

    @property
    def wanted(self) -> frozenset[str]:
        """References that pass or switch power."""
        return self.truth.get("pass", frozenset()) | self.truth.get("switch", frozenset())


_PIN = re.compile(r"^(?P<number>[^:=]+)(?::(?P<name>[^:=]*))?(?::(?P<type>\w+))?=(?P<net>\S+)$")


def _part(line: str) -> Part:
    """`REF SYMBOL VALUE NET NET ...` or `REF | value | lib:symbol | footprint | description | 1:NAME:type=NET ...`."""
    if "|" in line:
        ref, value, symbol, footprint, description, pins = (piece.strip() for piece in line.split("|"))
        library, _, name = symbol.partition(":")
        return Part(ref, value, footprint, library, name, description, pins=tuple(_pin(text) for text in pins.split()))
    ref, key, value, *nets = line.split()
    symbol, footprint, description, pins = SYMBOLS[key]
    library, _, name = symbol.partition(":")
    wired = tuple(Pin(number, pin, kind, "" if net == "-" else net) for (number, pin, kind), net in zip(pins, nets, strict=True))
    return Part(ref, value.replace("~", " "), footprint, library, name, description, pins=wired)


def _pin(text: str) -> Pin:
    match = _PIN.match(text)
    assert match, text
    net = match["net"]
    return Pin(match["number"], match["name"] or "", match["type"] or _P, "" if net == "-" else net)


def netlist_of(parts: list[Part], path: str = "drawn.net") -> Netlist:
    """A Netlist with these parts; nets and parts in natural order."""
    nodes: dict[str, list[Node]] = {}
    for part in parts:
        for pin in part.pins:
            if pin.net:
                nodes.setdefault(pin.net, []).append(Node(part.ref, pin.number))
    nets = {name: Net(name, nodes=tuple(sorted(nodes[name], key=lambda n: (natural_key(n.ref), natural_key(n.pin))))) for name in sorted(nodes, key=natural_key)}
    by_ref = {part.ref: part for part in sorted(parts, key=lambda p: natural_key(p.ref))}
    return Netlist(path, "", "E", "drawn", "", "", "", by_ref, nets)


def draw(text: str, name: str = "drawn") -> Board:
    """A board from its text: one part per line, `#` comments, `group: REFS` for the truth."""
    parts, truth = [], {}
    for line in text.splitlines():
        line = line.split(" #")[0].strip()
        if not line or line.startswith("#"):
            continue
        label = re.match(r"^(pass|switch|clamp|source|stage [\w-]+):(.*)$", line)
        if label:
            truth[label[1]] = truth.get(label[1], frozenset()) | frozenset(label[2].split())
        else:
            parts.append(_part(line))
    return Board(name, netlist_of(parts, f"{name}.net"), truth)


def boards() -> list[Board]:
    """All drawn boards."""
    return [draw(path.read_text(encoding="utf-8"), path.stem) for path in sorted(BOARDS.glob("*.txt"))]


def renamed(netlist: Netlist, new_refs: Mapping[str, str], new_nets: Mapping[str, str]) -> Netlist:
    """The same circuit under other references and net names."""
    parts = [
        replace(part, ref=new_refs[ref], pins=tuple(replace(pin, net=new_nets.get(pin.net, pin.net)) for pin in part.pins))
        for ref, part in netlist.parts.items()
    ]
    return netlist_of(parts, netlist.path)


@pytest.fixture(name="draw")
def _draw():
    return draw


@pytest.fixture(scope="session", name="drawn_boards")
def _drawn_boards() -> list[Board]:
    return boards()


@pytest.fixture(name="renamed")
def _renamed():
    return renamed


@pytest.fixture(name="netlist_of")
def _netlist_of():
    return netlist_of
