"""Grounds, rails with their guessed voltages, stages, parallel parts and islands."""

from __future__ import annotations

import pytest

from drc_power.survey import survey_netlist
from drc_power.survey.graph import islands, parallel, power_graph


def _grounds(draw, text):
    return survey_netlist(draw(text).netlist).grounds


CHIP = "U{n} | A | m:A{n} | Package_QFP:LQFP-32 | chip | 1:VDD:power_in={vdd} 2:{name}:power_in={net} 3:{name}:power_in={net} 4:IO:bidirectional=/x{n}\n"


@pytest.mark.parametrize("name", ["GND", "GNDPWR", "GNDA", "AGND", "GNDD", "DGND", "PGND", "0", "GND1", "GND_ISO", "/sheet/GND"])
def test_grounds_by_name(draw, name):
    assert name in _grounds(draw, f"C1 C 100n +5V {name}\nC2 C 1u +5V {name}\n")


def test_grounds_by_their_pins_when_the_name_says_nothing(draw):
    text = "".join(CHIP.format(n=n, vdd="sup", net="xyz", name="VSS") for n in range(4)) + "C1 C 100n sup xyz\n"
    assert _grounds(draw, text) == ("xyz",)


def test_a_negative_rail_called_vss_is_no_ground_beside_a_ground(draw):
    text = """
V1 V 10 VDD GND
V2 V 10 GND VSS
U1 | OPA | Amplifier_Operational:OPA | m:SO8 | Operational amplifier | 2:-:input=/m 3:+:input=/p 4:V-:power_in=VSS 6::output=/o 7:V+:power_in=VDD
C1 C 100n VDD GND
C2 C 100n VSS GND
"""
    survey = survey_netlist(draw(text).netlist)
    assert survey.grounds == ("GND",)
    assert {"VDD", "VSS"} <= {rail.net for rail in survey.rails}


def test_battery_returns_join_the_ground_through_shunts_and_transistors(drawn_boards):
    board = next(b for b in drawn_boards if b.name == "battery-monitor")
    assert set(survey_netlist(board.netlist).grounds) == {"BAT-", "PACK-"}


def _rails(draw, text):
    return {rail.net: rail for rail in survey_netlist(draw(text).netlist).rails}


def test_voltage_from_the_net_name(draw):
    rail = _rails(draw, "U1 LDO XY GND +3V3 +5V\nC1 C 1u +3V3 GND\n")["+3V3"]
    assert (rail.voltage_v, rail.because, rail.fed_by) == (3.3, "net name", ("U1",))


def test_voltage_from_the_regulator_when_the_net_has_no_name(draw):
    rail = _rails(draw, "U1 LDO 7812 GND Net-(C1-Pad1) /RAW\nC1 C 1u Net-(C1-Pad1) GND\nC2 CP 100u /RAW GND\n")["Net-(C1-Pad1)"]
    assert rail.voltage_v == 12.0 and "78xx" in rail.because


def test_voltage_from_divider_and_usual_reference(draw):
    """LM317: 1.25 V · (1 + 1500/240) = 9.06 V, the formula of its data sheet without the adjust current."""
    text = """
U1 | LM317 | Regulator_Linear:LM317 | m:TO-220 | Adjustable Linear Regulator | 1:ADJ:input=/adj 2:VO:power_out=/out 3:VI:input=/in
R1 R 240 /out /adj
R2 R 1.5k /adj GND
C1 C 1u /out GND
C2 C 1u /in GND
"""
    rail = _rails(draw, text)["/out"]
    assert rail.voltage_v == pytest.approx(1.25 * (1 + 1500 / 240), rel=0.005)
    assert "divider" in rail.because


def test_bus_name_is_five_volts_only_beside_usb(draw):
    usb = "J1 | USB | m:USB_B | m:USB | | 1:VBUS=VBUS 2:D-=/m 3:D+=/p 4:GND=GND\nC1 C 10u VBUS GND\n"
    motor = "J1 J2 BATTERY VBUS GND\nC1 CP 1000u VBUS GND\n"
    assert _rails(draw, usb)["VBUS"].voltage_v == 5.0
    assert _rails(draw, motor)["VBUS"].voltage_v is None


def test_rail_behind_a_converters_inductor_is_fed_by_the_chip(drawn_boards):
    board = next(b for b in drawn_boards if b.name == "dc-motor-driver")
    rails = {rail.net: rail for rail in survey_netlist(board.netlist).rails}
    assert rails["+12V"].fed_by == ("U2",)


def test_freewheel_diode_does_not_feed_the_rail(drawn_boards):
    board = next(b for b in drawn_boards if b.name == "relay-valve-board")
    rails = {rail.net: rail for rail in survey_netlist(board.netlist).rails}
    assert not {"D2", "D3", "D4", "D5"} & set(rails["+24V"].fed_by)


def _stages(drawn_boards, name):
    board = next(b for b in drawn_boards if b.name == name)
    return {stage.kind: stage for stage in survey_netlist(board.netlist).stages}


def test_three_phase_bridge_with_shunts_and_motor(drawn_boards):
    stage = _stages(drawn_boards, "bldc-driver")["three-phase"]
    assert set(stage.parts["high"]) == {"FET1", "FET3", "FET5"}
    assert set(stage.parts["low"]) == {"FET2", "FET4", "FET6"}
    assert set(stage.parts["shunts"]) == {"R2", "R3", "R4"}
    assert stage.parts["load"] == ("CN2",)


def test_buck_with_outside_switches(drawn_boards):
    stages = _stages(drawn_boards, "buck-outside-switches")
    assert stages["buck"].parts == {"high": ("Q2",), "low": ("Q3", "Q4"), "inductor": ("L1",)}
    assert stages["buck"].node == "/SW"
    assert stages["hot-plug"].parts == {"parts": ("Q1",), "controller": ("U1",)}
    assert stages["or-ing"].parts["parts"] == ("D1", "D2")


def test_low_side_switch_names_its_clamp_and_load(drawn_boards):
    board = next(b for b in drawn_boards if b.name == "relay-valve-board")
    stages = [s for s in survey_netlist(board.netlist).stages if s.kind == "low-side"]
    valve = next(s for s in stages if s.parts["switch"] == ("T3",))
    assert valve.parts["clamp"] == ("D4",) and valve.parts["load"] == ("X4",)


def test_rectifier_names_its_reservoir(drawn_boards):
    stage = _stages(drawn_boards, "class-ab-amplifier")["rectifier"]
    assert stage.parts["bridge"] == ("D1",) and stage.parts["reservoir"] == ("C1",)


_SHARED = ("load", "controller", "reservoir", "shunts", "clamp", "chip")


def test_a_reference_is_in_at_most_one_stage(drawn_boards):
    for board in drawn_boards:
        used = [
            ref
            for stage in survey_netlist(board.netlist).stages
            for ref in {r for key, refs in stage.parts.items() if key not in _SHARED for r in refs}
        ]
        assert len(used) == len(set(used)), board.name


def test_parallel_parts_and_islands(drawn_boards):
    board = next(b for b in drawn_boards if b.name == "battery-monitor")
    survey = survey_netlist(board.netlist)
    assert ("Q1", "Q2", "Q3", "Q4") in parallel(survey)
    assert ("Q5", "Q6", "Q7", "Q8") in parallel(survey)
    nets = [net for island in islands(survey) for net in island]
    assert len(nets) == len(set(nets)) and not set(nets) & set(survey.grounds)


def test_power_graph_has_the_elements_as_edges(drawn_boards):
    board = next(b for b in drawn_boards if b.name == "dc-motor-driver")
    survey = survey_netlist(board.netlist)
    graph = power_graph(survey)
    assert graph.number_of_edges() == len(survey.elements)
    assert graph.has_edge("VBAT_RAW", "/VB_F")
    assert {data["group"] for _, _, data in graph.edges(data=True)} <= {"pass", "switch", "clamp", "source", "load"}
