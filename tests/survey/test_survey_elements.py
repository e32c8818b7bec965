"""Small circuits, one habit of the trade each: group and direction of the element, or the reason why it is signal."""

from __future__ import annotations

import pytest

from drc_power.survey import survey_netlist

SUPPLY = """
C90 CP 470u/25V +12V GND
U90 LDO 7805 GND +5V +12V
C91 C 10u +5V GND
U91 | MC | m:MC | Package_QFP:LQFP-32 | Microcontroller | 1:VDD:power_in=+5V 2:GND:power_in=GND 3:P1:bidirectional=/IO1 4:P2:bidirectional=/IO2
"""


def _survey(draw, text):
    return survey_netlist(draw(SUPPLY + text).netlist)


def _element(survey, ref):
    found = [e for e in survey.elements if e.ref == ref and e.group in ("pass", "switch", "clamp", "source", "load")]
    assert found, [s for s in survey.signal if s.ref == ref]
    return found[0]


def _reason(survey, ref):
    assert not [e for e in survey.elements if e.ref == ref], [e for e in survey.elements if e.ref == ref]
    return next(s.because for s in survey.signal if s.ref == ref)


ON_PATH = [
    ("fuse", "J9 J2 POWER +12V GND\nF1 F 2A +12V /A\nJ1 J2 OUT /A GND", "F1", ("pass", "+12V", "/A")),
    ("linear regulator", "", "U90", ("pass", "+12V", "+5V")),
    ("bead in a supply", "FB1 FB 600R +5V VDDA\nC1 C 1u VDDA GND\nU1 | A | m:A | m:X | op amp | 1:V+:power_in=VDDA 2:V-:power_in=GND 3:+:input=/IO1 4::output=/O", "FB1", ("pass", "+5V", "VDDA")),
    ("series diode at the input", "J1 J2 IN /IN GND\nD1 D 1N5401 +12V /IN", "D1", ("pass", "/IN", "+12V")),
    ("reversed diode across the supply", "D1 D 1N4007 +12V GND", "D1", ("clamp", "GND", "+12V")),
    ("suppressor across the supply", "D1 TVS SMBJ15A +12V GND", "D1", ("clamp", "+12V", "GND")),
    ("Zener across the supply", "D1 DZ 5V6 +5V GND", "D1", ("clamp", "+5V", "GND")),
    ("diode back over a regulator", "D1 D 1N4007 +12V +5V", "D1", ("clamp", "+5V", "+12V")),
    ("p-channel reverse-polarity FET", "J1 J2 BAT /BAT GND\nQ1 PFET PX /G /BAT +12V\nR1 R 100k /G GND", "Q1", ("pass", "/BAT", "+12V")),
    ("p-channel load switch", "J9 J2 POWER +12V GND\nQ1 pfet PX /G +5V_SW +5V\nR1 R 100k /G +5V\nC1 C 10u +5V_SW GND\nJ1 J2 OUT +5V_SW GND", "Q1", ("pass", "+5V", "+5V_SW")),
    ("FET in the return", "J1 J2 BAT +12V PACK-\nQ1 NFET NX +12V PACK- GND", "Q1", ("pass", "GND", "PACK-")),
    ("low-side switch of a heater", "J1 J2 HEATER +12V /H\nQ1 NFET NX /G1 /H GND\nR1 R 100 /IO1 /G1", "Q1", ("switch", "/H", "GND")),
    ("low-side switch with a shunt", "J1 J2 HEATER +12V /H\nQ1 NFET NX /G1 /H /S\nR2 R 0R1/1W /S GND\nR1 R 100 /IO1 /G1", "Q1", ("switch", "/H", "/S")),
    ("shunt under a switch", "J1 J2 HEATER +12V /H\nQ1 NFET NX /G1 /H /S\nR2 R 0R1/1W /S GND\nR1 R 100 /IO1 /G1", "R2", ("pass", "/S", "GND")),
    ("small transistor that drives a relay", "K1 RLY G5 +12V /K - - -\nQ1 npn BC847 /B /K GND\nR1 R 4k7 /IO1 /B\nD1 D 1N4148 +12V /K", "Q1", ("switch", "/K", "GND")),
    ("freewheel diode of a relay", "K1 RLY G5 +12V /K - - -\nQ1 npn BC847 /B /K GND\nR1 R 4k7 /IO1 /B\nD1 D 1N4148 +12V /K", "D1", ("switch", "/K", "+12V")),
    ("high side of a half bridge", "Q1 NFET NX /GH +12V /SW\nQ2 NFET NX /GL /SW GND\nJ1 J2 MOTOR /SW GND\nR1 R 10 /IO1 /GH\nR2 R 10 /IO2 /GL", "Q1", ("switch", "+12V", "/SW")),
    ("low side of a half bridge", "Q1 NFET NX /GH +12V /SW\nQ2 NFET NX /GL /SW GND\nJ1 J2 MOTOR /SW GND\nR1 R 10 /IO1 /GH\nR2 R 10 /IO2 /GL", "Q2", ("switch", "/SW", "GND")),
    ("boost rectifier", "L1 L 22u +5V /LX\nQ1 NFET NX /G1 /LX GND\nR1 R 10 /IO1 /G1\nD1 DS SS34 /HV /LX\nC1 C 10u/50V /HV GND\nJ1 J2 OUT /HV GND", "D1", ("switch", "/LX", "/HV")),
    ("boost inductor", "L1 L 22u +5V /LX\nQ1 NFET NX /G1 /LX GND\nR1 R 10 /IO1 /G1\nD1 DS SS34 /HV /LX\nC1 C 10u/50V /HV GND\nJ1 J2 OUT /HV GND", "L1", ("pass", "+5V", "/LX")),
    ("sense resistor in a supply", "J9 J2 POWER +12V GND\nR1 R 10m +12V /VM\nC1 CP 100u /VM GND\nJ1 J2 OUT /VM GND", "R1", ("pass", "+12V", "/VM")),
    ("zero-ohm link between supplies", "R1 R 0R +5V VDD_A\nC1 C 1u VDD_A GND\nU1 | A | m:A | m:X | sensor | 1:VDD:power_in=VDD_A 2:GND:power_in=GND 3:O:output=/IO1", "R1", ("pass", "+5V", "VDD_A")),
    ("supply filter resistor", "R1 R 10R +5V VDD_A\nC1 C 1u VDD_A GND\nU1 | A | m:A | m:X | sensor | 1:VDD:power_in=VDD_A 2:GND:power_in=GND 3:O:output=/IO1", "R1", ("pass", "+5V", "VDD_A")),
    ("bridged jumper in a supply", "JP1 JP x +5V VDD_A\nC1 C 1u VDD_A GND\nU1 | A | m:A | m:X | sensor | 1:VDD:power_in=VDD_A 2:GND:power_in=GND 3:O:output=/IO1", "JP1", ("pass", "+5V", "VDD_A")),
    ("tie between grounds", "NT1 NT x GND AGND\nU1 | A | m:A | m:X | ADC | 1:VDD:power_in=+5V 2:AGND:power_in=AGND 3:AGND:power_in=AGND 4:O:output=/IO1\nC1 C 1u +5V AGND", "NT1", ("pass", None, None)),
    ("bleeder", "R1 R 1k/2W +12V GND", "R1", ("load", "+12V", "GND")),
    ("rectifier bridge", "D1 BR GBU4 /RAW GND /AC1 /AC2\nJ1 J2 AC /AC1 /AC2\nC1 CP 1000u /RAW GND\nU1 LDO 7812 GND +12V /RAW", "D1", ("switch", "/AC1", "/RAW")),
    ("precharge transistor and resistor", "Q1 NFET NX /G1 +12V /LOAD\nC1 CP 1000u /LOAD GND\nJ1 J2 LOAD /LOAD GND\nQ2 nfet BSS138 /G2 +12V /PRE\nR1 | 330 | Device:R | Resistor_SMD:R_2512 | Resistor | 1=/PRE 2=/LOAD", "Q2", ("pass", "+12V", "/PRE")),
    ("power switch between contact and fuse", "J1 J2 IN /IN GND\nSW1 | SW | Switch:SW_SPST | m:TOGGLE | Single pole switch | 1=/IN 2=/INS\nF1 F 2A /INS +12V", "SW1", ("pass", "/IN", "/INS")),
]


@pytest.mark.parametrize(("text", "ref", "wanted"), [case[1:] for case in ON_PATH], ids=[case[0] for case in ON_PATH])
def test_on_the_power_path(draw, text, ref, wanted):
    element = _element(_survey(draw, text), ref)
    assert element.group == wanted[0]
    if wanted[1]:
        assert (element.from_net, element.to_net) == wanted[1:]
    assert element.because and 0 < element.confidence <= 1


SIGNAL = [
    ("pull-up", "R1 R 10k +5V /IO1", "R1", "pull-up"),
    ("pull-down", "R1 R 10k /IO1 GND", "R1", "pull-down"),
    ("gate resistor", "J1 J2 H +12V /H\nQ1 NFET NX /G1 /H GND\nR1 R 10 /IO1 /G1", "R1", "gate or base resistor"),
    ("base resistor of 1 ohm", "J1 J2 H +12V /H\nQ1 NFET NX /G1 /H GND\nR1 R 1 /IO1 /G1", "R1", "gate or base resistor"),
    ("series resistor on a data line", "R1 R 22R /IO1 /OUT\nJ1 J2 DATA /OUT GND", "R1", "series resistor on a signal"),
    ("zero-ohm link on a data line", "R1 R 0R /IO1 /OUT\nJ1 J2 DATA /OUT GND", "R1", "series resistor on a signal"),
    ("strap to ground", "R1 R 0R /IO1 GND", "R1", "to ground"),
    ("feedback divider", "U1 | BK | m:BK | m:S | | 1:GND=GND 2:SW:output=/SW 3:VIN=+12V 4:FB:input=/FB 6:BST=/B\nL1 L 10u /SW +3V3\nC1 C 22u +3V3 GND\nR1 R 31k6 +3V3 /FB\nR2 R 10k /FB GND", "R1", "feedback divider"),
    ("resistor of an LED", "R1 R 330 +5V /L\nD1 LED g GND /L", "R1", "light-emitting"),
    ("LED", "R1 R 330 +5V /L\nD1 LED g GND /L", "D1", "indicator"),
    ("snubber", "Q1 NFET NX /GH +12V /SW\nQ2 NFET NX /GL /SW GND\nJ1 J2 M /SW GND\nR1 R 4R7 /SW /SN\nC1 C 1n /SN GND", "R1", "snubber"),
    ("level shifter", "Q1 nfet BSS138 +5V /A /IO1\nR1 R 10k +5V /IO1\nR2 R 10k +12V /A\nJ1 J2 X /A GND", "Q1", "signal-level"),
    ("small FET with a pull-up", "Q1 nfet 2N7002 /IO1 /X GND\nR1 R 10k +5V /X\nU1 | L | m:L | m:S | logic | 1:A:input=/X 2:VCC:power_in=+5V 3:GND:power_in=GND", "Q1", "signal-level"),
    ("gate pull-down transistor", "Q1 pfet PX /G +5V_SW +5V\nR1 R 100k /G +5V\nC1 C 10u +5V_SW GND\nQ2 nfet 2N7002 /IO1 /G GND\nJ1 J2 O +5V_SW GND", "Q2", "drives a gate"),
    ("ESD part on a data line", "D1 TVS PESD5 /IO1 GND\nJ1 J2 DATA /IO1 GND", "D1", "protects or limits a signal"),
    ("pair of clamp diodes", "D1 D BAT43 +5V /IO1\nD2 D BAT43 /IO1 GND\nJ1 J2 DATA /IO1 GND", "D1", "clamps a signal"),
    ("gate Zener", "J1 J2 H +12V /H\nQ1 NFET NX /G1 /H GND\nD1 DZ 12V /G1 GND\nR1 R 10 /IO1 /G1", "D1", "gate"),
    ("bootstrap diode", "U1 | GD | m:GD | m:S | Half-bridge gate driver | 1:VCC=+12V 2:HIN:input=/IO1 4:COM=GND 5:LO:output=/GL 6:VS=/SW 7:HO:output=/GH 8:VB=/VB\nD1 D 1N4148 /VB +12V\nC1 C 1u /VB /SW\nQ1 NFET NX /GH +12V /SW\nQ2 NFET NX /GL /SW GND\nJ1 J2 M /SW GND", "D1", "bootstrap"),
    ("button", "SW1 SW x /IO1 GND\nR1 R 10k +5V /IO1", "SW1", "switch to ground"),
    ("bead on a data line", "FB1 FB 600R /IO1 /OUT\nJ1 J2 DATA /OUT GND", "FB1", "filter bead"),
    ("jumper on signals", "JP1 JP x /IO1 /IO2", "JP1", "jumper"),
    ("decoupling", "C1 C 100n +5V GND", "C1", "capacitor"),
    ("test point", "TP1 TP x +5V", "TP1", "test point"),
]


@pytest.mark.parametrize(("text", "ref", "words"), [case[1:] for case in SIGNAL], ids=[case[0] for case in SIGNAL])
def test_not_on_a_power_path_and_why(draw, text, ref, words):
    assert words in _reason(_survey(draw, text), ref)


def test_not_fitted_parts_neither_conduct_nor_appear(draw):
    survey = _survey(draw, "R1 R DNP +12V /VM\nC1 CP 100u /VM GND\nJ1 J2 OUT /VM GND")
    assert survey.not_fitted == ("R1",)
    assert "R1" not in {e.ref for e in survey.elements} | {s.ref for s in survey.signal}
    assert "R1" in survey.parts


def test_every_fitted_part_is_an_element_or_has_a_reason(drawn_boards):
    for board in drawn_boards:
        survey = survey_netlist(board.netlist)
        placed = {e.ref for e in survey.elements} | {s.ref for s in survey.signal} | set(survey.not_fitted)
        assert placed == set(board.netlist.parts)
        assert set(survey.parts) == set(board.netlist.parts)


def test_dual_transistor_gives_two_elements(draw):
    survey = _survey(draw, "Q1 | DX | m:DUAL_NMOS | m:SO-8 | Dual N-Channel MOSFET 5A | 1:S1=GND 2:G1=/G1 3:S2=GND 4:G2=/G2 5:D2=/B 6:D2=/B 7:D1=/A 8:D1=/A\nJ1 J3 VALVES +12V /A /B\nR1 R 100 /IO1 /G1\nR2 R 100 /IO2 /G2")
    assert [(e.from_net, e.to_net, e.control) for e in survey.elements if e.ref == "Q1"] == [("/A", "GND", "/G1"), ("/B", "GND", "/G2")]


def test_two_anodes_or_two_supplies(draw):
    survey = _survey(draw, "J1 J2 IN1 /A GND\nJ2 J2 IN2 /B GND\nD1 | DX | m:D_Dual | m:DPAK | Schottky diode | 1:A=/A 3:A=/B 2:K=+12V")
    assert {(e.from_net, e.to_net) for e in survey.elements if e.ref == "D1"} == {("/A", "+12V"), ("/B", "+12V")}


def test_empty_and_tiny_netlists(netlist_of, draw):
    assert survey_netlist(netlist_of([])).elements == ()
    survey = survey_netlist(draw("R1 R 10k /A /B").netlist)
    assert [s.ref for s in survey.signal] == ["R1"]
