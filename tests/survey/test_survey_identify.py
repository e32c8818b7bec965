"""What single parts are, their terminals and polarity: KiCad's own libraries, libraries of one's own, and no names at all."""

from __future__ import annotations

import pytest

from drc_power.netlist.model import Part, Pin
from drc_power.survey.identify import identify_part


def _part(ref: str, value: str, symbol: str = "", footprint: str = "", description: str = "", pins: str = "", **fields: str) -> Part:
    """`pins` is `1:G:input 2:D 3:S`: number, name, type; each pin on a net of its own."""
    made = []
    for text in pins.split():
        number, _, rest = text.partition(":")
        name, _, kind = rest.partition(":")
        made.append(Pin(number, name, kind or "passive", f"n{number}"))
    library, _, name = symbol.rpartition(":")
    return Part(ref, value, footprint, library, name, description, fields=fields, pins=tuple(made))


CASES = [
    ("resistor", _part("R1", "10k", "Device:R", pins="1 2")),
    ("resistor", _part("RSENSE1", "0R01", "lib:SHUNT", pins="1 2")),
    ("resistor", _part("X9", "R0402_4R7_1%", "Resistors SMD:R0402_4R7_1%", pins="1:1 2:2")),
    ("capacitor", _part("C1", "10uF/25V", "mine:CAP", pins="1 2")),
    ("capacitor", _part("C9", "1uF 10V", "mine:Csmall", "mine:1005_C", pins="1 2")),
    ("inductor", _part("L1", "1.0uH/4.2A/DCR=35mR/20%", "mine:L", pins="1:1 2:2")),
    ("inductor", _part("L1", "12uH", "Device:L_Ferrite", description="Inductor with ferrite core", pins="1:1 2:2")),
    ("ferrite", _part("FB1", "600R/2A", "mine:FERRITE_BEAD", pins="1 2")),
    ("ferrite", _part("L3", "BLM18PG121SN1D", "mine:BEAD", pins="1:1 2:2")),
    ("diode", _part("D1", "1N4007", "mine:DIODE", pins="1:K 2:A")),
    ("diode", _part("D1", "SS34", "mine:D", "mine:SMA", pins="1 2")),
    ("diode", _part("D3", "BAV99", "mine:BAV99", pins="1:A 2:K 3:COM")),
    ("zener", _part("D2", "5V6", "Device:D_Zener", description="Zener diode", pins="1:K 2:A")),
    ("zener", _part("D2", "BZX84C3V3", "Diodes:BZX84C3V3", pins="1:A 3:C")),
    ("tvs", _part("D3", "SMBJ24A", "mine:DIODE_BI", pins="1:A1 2:A2")),
    ("tvs", _part("VDR1", "14D390K", "Device:Varistor", description="Voltage dependent resistor", pins="1 2")),
    ("led", _part("D4", "RED", "Device:LED", description="Light emitting diode", pins="1:K 2:A")),
    ("led", _part("LED_RST1", "LED_RED", "mine:LED", pins="1:K 2:A")),
    ("bridge", _part("D5", "GBU606", "Device:D_Bridge_+-AA", description="Diode bridge", pins="1:+ 2:- 3 4")),
    ("mosfet", _part("FET1", "NK80", "mine:NK80", pins="1:GATE:input 2:DRAIN 3:SOURCE")),
    ("mosfet", _part("Q2", "NB30", "mine:FET8", pins="1:S1 2:S2 3:S3 4:G:input 9:D-Pad9")),
    ("mosfet", _part("T2", "BSS138", "Transistors:BSS138", pins="1:G 2:S 3:D")),
    ("mosfet", _part("Q3", "PB25", "mine:BLOCK", description="Dual N-channel power block", pins="1:VIN 3:TG:input 4:TGR 5:BG:input 6:SW 9:PGND")),
    ("bjt", _part("Q101", "3906", "mine:PNP", "mine:SOT23EBC", pins="1:E 2:B:input 3:C")),
    ("bjt", _part("Q7", "NT3281", "mine:NPN_TO3P", pins="1:B 2:C 3:E")),
    ("linear-regulator", _part("U3", "7805", "mine:7805", pins="1:VI:input 2:GND:input 3:VO:power_out")),
    ("linear-regulator", _part("VR201", "LR5", "mine:LR5", pins="1:OUT:power_out 2:SENSE:input 3:GND:power_in 4:SHDN:input 5:IN:input")),
    ("linear-regulator", _part("IC2", "LX5", "mine:LX5", pins="1:IN 2:GND 3:OUT")),
    ("linear-regulator", _part("U9", "CH40", "mine:CH40", description="Single cell Li-Ion charge management controller", pins="1:STAT 2:VSS 3:VBAT 4:VDD 5:PROG")),
    ("switching-regulator", _part("U1", "BK60", "mine:BK60", pins="1:GND:power_in 2:SW:output 3:VIN:power_in 4:FB:input 5:EN:input 6:BST")),
    ("switching-regulator", _part("U1", "SYX09", "mine:SYX09", pins="1:EN 2:GND 3:LX 4:IN 5:FB")),
    ("ic", _part("U1", "SBC5", "mine:SBC5", description="Synchronous buck controller", pins="1:VIN 2:EN 3:FB 4:GND 5:LO:output 6:VCC 7:HB 8:HO:output 9:SW")),
    ("load-switch", _part("U2", "LSW", "mine:LSW", pins="1:VDD:power_in 2:ON:input 3:D:power_in 5:S:power_out 7:CAP 8:GND")),
    ("gate-driver", _part("U1", "GD2", "mine:GD2", description="Half-bridge gate driver", pins="1:VCC 2:HIN:input 3:LIN:input 4:COM 5:LO:output 6:VS 7:HO:output 8:VB")),
    ("ic", _part("U5", "MC-48", "mine:MC48", "mine:QFN48", pins=" ".join(f"{n}:IO{n}:bidirectional" for n in range(1, 40)))),
    ("fuse", _part("F1", "FUSE", "mine:FUSE", pins="1 2")),
    ("fuse", _part("PTC1", "MF-MSM110", "mine:FUSE", pins="1:1 2:2")),
    ("connector", _part("TB201", "CONN_2", "mine:CONN_2", pins="1:P1 2:PM")),
    ("connector", _part("J7", "USB-A", "mine:USBA", pins="1:VBUS 2:D- 3:D+ 4:GND")),
    ("relay", _part("K1", "G5-24", "Relay:Relay_SPDT", pins="A1:A1 A2:A2 11 12 14")),
    ("switch", _part("PB1", "B3U", "Switches:PB_B3U", pins="1:1 2:2")),
    ("crystal", _part("Y1", "8MHz", "mine:CRYSTAL", pins="1:1 2:2")),
    ("net-tie", _part("JP1", "EXTPWR", "mine:JUMPER", pins="1:1 2:2")),
    ("net-tie", _part("NT1", "NetTie_2", "Device:NetTie_2", pins="1:1 2:2")),
    ("source", _part("V1", "12", "Simulation_SPICE:VDC", description="Voltage source, DC", pins="1 2")),
    ("source", _part("V1", "dc 0 SIN(0 170 60)", "pspice:VSOURCE", pins="1:E1 2:E2")),
    ("battery", _part("BT1", "LiPo", "Device:Battery_Cell", description="Single-cell battery", pins="1:+ 2:-")),
    ("transformer", _part("T1", "2x22V", "Device:Transformer_1P_2S", description="Transformer", pins="1:AA 2:AB 3:SA 4:SB")),
    ("test-point", _part("TP1", "x", "Connector:TestPoint", pins="1:1")),
    ("mechanical", _part("H1", "MountingHole", "Mechanical:MountingHole")),
    ("optocoupler", _part("OK1", "PC817", "Isolator:PC817", description="DC Optocoupler", pins="1 2 3 4")),
    ("mosfet", _part("Q1", "V-FET", "mine:X", pins="1:D 2:G 3:S", **{"Sim.Device": "NMOS"})),
    ("unknown", _part("ZZ1", "thing", "mine:THING", pins="1:X 2:Y 3:Z 4:W")),
]


@pytest.mark.parametrize(("kind", "part"), CASES, ids=lambda case: case if isinstance(case, str) else case.value)
def test_kind(kind, part):
    identity = identify_part(part)
    assert identity.kind == kind, identity
    assert 0.0 <= identity.confidence <= 1.0
    assert identity.because


TERMINALS = [
    (_part("Q1", "x", "Device:Q_NMOS_GDS", pins="1:G:input 2:D 3:S"), {"gate": ("1",), "drain": ("2",), "source": ("3",)}),
    (_part("Q1", "x", "m:NFET8", pins="1:S 2:S 3:S 4:G:input 5:D 6:D 7:D 8:D"), {"source": ("1", "2", "3"), "gate": ("4",), "drain": ("5", "6", "7", "8")}),
    (_part("Q1", "IRF7xx", "m:NMOS", "m:SO-8", "N-Channel MOSFET", pins="1 2 3 4 5 6 7 8"), {"source": ("1", "2", "3"), "gate": ("4",), "drain": ("5", "6", "7", "8")}),
    (_part("Q1", "BSS138", "m:NMOS", "m:SOT-23", pins="1:1 2:2 3:3"), {"gate": ("1",), "source": ("2",), "drain": ("3",)}),
    (_part("Q1", "x", "m:DUAL_NMOS", pins="1:S1 2:G1 3:S2 4:G2 5:D2 6:D2 7:D1 8:D1"),
     {"source": ("1",), "gate": ("2",), "source_2": ("3",), "gate_2": ("4",), "drain_2": ("5", "6"), "drain": ("7", "8")}),
    (_part("Q1", "x", "m:NMOS_DUAL", pins="1:S1 2:G1 3:G2 4:S2 5:D12"), {"source": ("1",), "gate": ("2",), "gate_2": ("3",), "source_2": ("4",), "drain": ("5",), "drain_2": ("5",)}),
    (_part("D1", "x", "m:DIODE", pins="1 2"), {"cathode": ("1",), "anode": ("2",)}),
    (_part("D1", "x", "m:DIODE", pins="1:A 2:C"), {"anode": ("1",), "cathode": ("2",)}),
    (_part("D1", "BAT54C", "m:D_Dual", pins="1:A 2:A 3:K"), {"anode": ("1", "2"), "cathode": ("3", "3")}),
    (_part("D1", "BAV99", "m:D_Series", pins="1:A 2:K 3:COM"), {"anode": ("1", "3"), "cathode": ("3", "2")}),
    (_part("D1", "SMBJ24", "m:D_TVS", pins="1:A1 2:A2"), {"a": ("1",), "b": ("2",)}),
    (_part("D1", "GBU4", "m:D_Bridge", pins="1:+ 2:- 3 4"), {"plus": ("1",), "minus": ("2",), "ac1": ("3",), "ac2": ("4",)}),
    (_part("U1", "LM317", "Regulator_Linear:LM317", pins="1:ADJ:input 2:VO:power_out 3:VI:input"), {"feedback": ("1",), "output": ("2",), "input": ("3",)}),
    (_part("U1", "7805", "Regulator_Linear:78XX", "m:TO-220", pins="1:1 2:2 3:3"), {"input": ("1",), "ground": ("2",), "output": ("3",)}),
    (_part("R1", "1m", "Device:R_Shunt", pins="1 2 3 4"), {"a": ("1",), "b": ("4",)}),
    (_part("R1", "4k7", "Device:R_Pack02", pins="1 2 3 4"), {"a": ("1", "2"), "b": ("4", "3")}),
    (_part("K1", "x", "Relay:Relay_SPDT", pins="A1:A1 A2:A2 11 12 14"),
     {"coil": ("A1", "A2"), "common": ("11",), "closed": ("12",), "open": ("14",), "a": ("11",), "b": ("14",)}),
    (_part("BT1", "x", "Device:Battery", pins="1:+ 2:-"), {"plus": ("1",), "minus": ("2",)}),
]


@pytest.mark.parametrize(("part", "wanted"), TERMINALS, ids=lambda case: f"{case.ref}-{case.symbol}-{case.value}" if isinstance(case, Part) else "")
def test_terminals(part, wanted):
    assert dict(identify_part(part).terminals) == wanted


@pytest.mark.parametrize(
    ("part", "channel"),
    [
        (_part("Q1", "AO3401A", "m:FET", pins="1:G 2:S 3:D"), "p"),
        (_part("Q1", "IRLML6402", "m:FET", pins="1:G 2:S 3:D"), "p"),
        (_part("Q1", "x", "Device:Q_PMOS_GSD", pins="1:G 2:S 3:D"), "p"),
        (_part("Q1", "x", "Device:Q_NMOS_GSD", pins="1:G 2:S 3:D"), "n"),
        (_part("Q1", "FQA46", "m:F", description="46A Id, 150V Vds, N-Channel MOSFET", pins="1:G 2:D 3:S"), "n"),
        (_part("Q1", "BC857", "m:T", pins="1:B 2:E 3:C"), "pnp"),
        (_part("Q1", "BC847", "m:T", pins="1:B 2:E 3:C"), "npn"),
        (_part("Q1", "x", "m:T", pins="1:G 2:S 3:D"), ""),
    ],
)
def test_polarity(part, channel):
    assert identify_part(part).channel == channel


def test_open_solder_jumper_is_a_switch_and_a_bridged_one_conducts():
    pins = "1:A 2:B"
    assert identify_part(_part("JP1", "x", "Jumper:SolderJumper_2_Open", "Jumper:SolderJumper-2_Open", pins=pins)).kind == "switch"
    assert identify_part(_part("JP1", "x", "Jumper:SolderJumper_2_Bridged", "Jumper:SolderJumper-2_Bridged", pins=pins)).kind == "net-tie"


def test_reasons_come_heaviest_first_and_name_what_was_read():
    because = identify_part(_part("D4", "RED", "Device:LED", description="Light emitting diode", pins="1:K 2:A")).because
    assert because[0].startswith("symbol name 'LED'")
    assert any("Light emitting diode" in reason for reason in because)


def test_a_description_in_a_field_counts():
    assert identify_part(_part("X1", "C-0603", "pasv-cap:C-0603", pins="1 2", BOM="CAP MLCC 100pF")).kind == "capacitor"
    assert identify_part(_part("Z5", "part-77", "m:P77", pins="1:1 2:2", Description="Ferrite bead")).kind == "ferrite"
