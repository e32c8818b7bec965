"""Every row of textual evidence is hit by an example that a library or schematic of the trade would hold."""

from __future__ import annotations

import pytest

from drc_power.survey.clues import CLUES, matching
from drc_power.survey.patterns import compiled

EXAMPLES = {
    "reference": """R resistor|RX resistor|RN resistor|TH thermistor|RV potentiometer|RV tvs|C capacitor|CV capacitor|L inductor|FB ferrite
        |D diode|ZD zener|TVS tvs|LED led|BR bridge|Q mosfet|Q bjt|FET mosfet|F fuse|J connector|USBC connector|U ic|K relay|SW switch|Y crystal
        |Q crystal|BT battery|JP net-tie|T transformer|TP test-point|H mechanical|M motor|OK optocoupler|VR linear-regulator
        |PS switching-regulator|V source|LS speaker|DTVS tvs""",
    "symbol": """R_Small resistor|Heater resistor|Solar_Cell battery|Thermistor_NTC thermistor|R_Potentiometer potentiometer|Varistor tvs
        |C_Polarized capacitor|L_Core_Iron inductor|L_Core_Ferrite inductor|FerriteBead ferrite|D_Schottky diode|D_Zener zener|D_TVS tvs
        |LED_RGB led|D_Bridge_+-AA bridge|Q_NMOS_GSD mosfet|Q_PNP_BEC bjt|Q_NIGBT_GCE igbt|Polyfuse fuse|Conn_01x04 connector|Relay_SPDT relay
        |SolidStateRelay relay|SW_Push switch|Crystal_GND24 crystal|Battery_Cell battery|NetTie_2 net-tie|Transformer_1P_1S transformer
        |TestPoint test-point|MountingHole mechanical|Motor_DC motor|Optocoupler_DC optocoupler|VDC source|LoadSwitch load-switch|Speaker speaker
        |Opamp_Dual ic""",
    "library": """Regulator_Linear linear-regulator|Converter_DCDC switching-regulator|Regulator_SwitchedCapacitor switching-regulator
        |Regulator_Controller ic|Regulators linear-regulator|Regulators switching-regulator|Power_Management load-switch|Battery_Management ic
        |Transistor_FET mosfet|Transistor_BJT bjt|Transistor_IGBT igbt|Transistors mosfet|Transistors bjt|Diode_Bridge bridge|Diodes diode
        |Power_Protection tvs|LEDs led|Driver_FET gate-driver|Driver_Motor ic|MCU_Maker ic|Standard Logic ic|Oscillators crystal|Relay relay
        |Connector_Generic connector|Switches switch|Jumper net-tie|Resistors SMD resistor|Capacitors capacitor|Inductors SMD inductor
        |Transformers transformer|Fuses fuse|Isolator optocoupler|Isolator_Analog ic|Mechanical mechanical|Motor motor""",
    "text": """N-Channel MOSFET mosfet|NPN transistor bjt|600V IGBT igbt|Schottky diode diode|Schottky 60V 3A diode|Diode bridge bridge|Zener diode zener
        |Bidirectional transient-voltage-suppression diode tvs|Light emitting diode led|Low-dropout linear regulator linear-regulator
        |Li-Ion charge management controller linear-regulator|Buck battery charger switching-regulator|PMIC switching-regulator
        |Synchronous step-down converter switching-regulator|Reg Buck 3A switching-regulator|PWM controller ic|Load switch load-switch
        |Half-bridge gate driver gate-driver|Resettable fuse fuse|Ferrite bead ferrite|Power inductor inductor|Toroidal transformer transformer
        |Current sense resistor resistor|NTC thermistor thermistor|Potentiometer potentiometer|Ceramic capacitor capacitor
        |Generic connector connector|Power relay relay|Push button switch|Crystal oscillator crystal|Single-cell battery battery|Net tie net-tie
        |test point test-point|Mounting hole mechanical|DC motor motor|Optocoupler optocoupler|Voltage source, DC source|Loudspeaker, speaker speaker
        |Dual operational amplifier ic|Voltage reference ic|Battery fuel gauge ic""",
    "footprint": """Resistor_SMD:R_0603 resistor|Capacitor_SMD:C_0603 capacitor|Inductor_SMD:L_1210 inductor|Diode_SMD:D_SMA diode|LED_SMD:LED_0603 led
        |Diode_THT:Diode_Bridge_Round bridge|Fuse:Fuse_1206 fuse|Connector_PinHeader:PinHeader_1x04 connector|Crystal:Crystal_HC49 crystal
        |TestPoint:TestPoint_Pad test-point|MountingHole:MountingHole_3mm mechanical|Relay_THT:Relay_SPDT relay|Button_Switch_SMD:SW_SPST switch
        |Transformer_THT:T transformer|Potentiometer_THT:P potentiometer|Battery:Holder battery|Jumper:SolderJumper-2 net-tie
        |Package_QFP:LQFP-48 ic|Buzzer_Beeper:Buzzer speaker|OptoDevice:X optocoupler|My:motor motor""",
    "value": """L7805CV linear-regulator|AMS1117-3.3 linear-regulator|LM317T linear-regulator|MCP73831 linear-regulator|LM2596S-5 switching-regulator
        |IRF540N mosfet|BC847 bjt|1N4007 diode|KBP206 bridge|BZX84C5V1 zener|SMBJ24A tvs|BLM18PG121 ferrite|MF-R110 fuse|TPS2051 load-switch
        |IR2104 gate-driver|ULN2003 ic|NE555 ic""",
    "model": "R resistor|C capacitor|L inductor|D diode|NMOS mosfet|PNP bjt|V source|SW switch",
}


def _examples(source: str) -> list[tuple[str, str]]:
    rows = (" ".join(line.split()) for line in EXAMPLES[source].replace("\n", " ").split("|"))
    return [(row.rpartition(" ")[0], row.rpartition(" ")[2]) for row in rows]


@pytest.mark.parametrize("source", sorted(EXAMPLES))
def test_each_example_speaks_for_its_kind(source):
    for text, kind in _examples(source):
        assert kind in {clue.kind for clue in matching(source, text)}, (text, kind)


def test_each_row_has_an_example():
    lonely = [
        (clue.source, clue.kind, clue.pattern)
        for clue in CLUES
        if not any(kind == clue.kind and compiled(clue.pattern).search(text) for text, kind in _examples(clue.source))
    ]
    assert not lonely


def test_rows_are_distinct_and_weighted():
    assert len({(c.source, c.kind, c.pattern) for c in CLUES}) == len(CLUES)
    assert all(0 < clue.weight <= 10 and clue.words for clue in CLUES)
