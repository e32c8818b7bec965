"""Guesses from value texts: sizes of resistors, capacitors, inductors; ratings; voltages in names; not-fitted marks."""

from __future__ import annotations

import pytest

from drc_power.netlist.model import Part
from drc_power.survey.fitted import why_not_fitted
from drc_power.survey.values import amperes, farads, henries, ohms, watts
from drc_power.survey.voltages import is_control_name, is_supply_name, reference_of_part, voltage_of_name, voltage_of_part


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("10k", 10e3), ("4k7", 4.7e3), ("4,7K", 4.7e3), ("1M", 1e6), ("1Meg", 1e6), ("10R", 10.0), ("0R", 0.0), ("0", 0.0), ("1", 1.0),
        ("0R01", 0.01), ("R005", 0.005), ("5m", 0.005), ("5mR", 0.005), ("2m/2W", 0.002), ("0.5mR", 0.0005), ("47R;1W", 47.0), ("230m", 0.23),
        ("3,3", 3.3), ("100Ω", 100.0), ("49.9k/1%/R0603", 49.9e3), ("R0402_1K4_1%_0.063W", 1400.0), ("R1206_0R_JUMPER", 0.0), ("0R(Board_Mounted)", 0.0),
        ("r=5", 5.0), ("1m 1%", 0.001), ("2.2k 0805", 2200.0),
        ("R = 'TIME > 350m ? 8 : 89'", None), ("shunt", None), ("", None), ("R", None), ("DNP", None),
    ],
)
def test_ohms(text, value):
    assert ohms(text) == (pytest.approx(value) if value is not None else None)


@pytest.mark.parametrize(("text", "value"), [("10uF/25V", 10e-6), ("100n", 100e-9), ("4n7", 4.7e-9), ("22µF", 22e-6), (">2200uF", 2200e-6), ("1uF 10V", 1e-6), ("0.1uF", 1e-7), ("C", None)])
def test_farads(text, value):
    assert farads(text) == (pytest.approx(value) if value is not None else None)


@pytest.mark.parametrize(("text", "value"), [("1.0uH/4.2A/DCR=35mR/20%", 1e-6), ("IND_175NH_15%", 175e-9), (">68uH", 68e-6), ("4u7", 4.7e-6), ("12nH", 12e-9), ("BLM18", None)])
def test_henries(text, value):
    assert henries(text) == (pytest.approx(value) if value is not None else None)


def test_ratings():
    assert watts("10R/2W") == 2.0
    assert watts("0R1 1/4W") == 0.25
    assert watts("R0603_0.1W") == pytest.approx(0.1)
    assert watts("10k") is None
    assert amperes("30A Id, 30V Vds") == 30.0
    assert amperes("0.2A Id, 200V Vds") == 0.2
    assert amperes("600R/500mA") == 0.5
    assert amperes("2N7002A") is None


@pytest.mark.parametrize(
    ("net", "volts"),
    [
        ("+3V3", 3.3), ("+3.3V", 3.3), ("3V3", 3.3), ("5V", 5.0), ("+5V", 5.0), ("VCC_1V8", 1.8), ("PP1V8", 1.8), ("VDD_3V3_A", 3.3), ("+24V", 24.0),
        ("P12V", 12.0), ("P0V85", 0.85), ("MGT_1V2", 1.2), ("5VREG", 5.0), ("-12V", -12.0), ("N12V", -12.0), ("/sheet/+3,3V_OUT", 3.3), ("12VA", 12.0),
        ("VBUS", 5.0), ("VDD33", 3.3), ("VCC18", 1.8), ("+1V05", 1.05), ("+12V0", 12.0),
        ("V+", None), ("VCC", None), ("BAT+", None), ("PACK+", None), ("GND", None), ("/SDA", None), ("Net-(U1-3V3)", None), ("VCC12", None),
        ("3V3_EN", None), ("PG_5V", None), ("EN_3V3", None), ("5V_SENSE", None), ("5VPG", None), ("~{5V_FAULT}", None),
    ],
)
def test_voltage_of_net_names(net, volts):
    assert voltage_of_name(net) == volts


def test_names_of_supplies_and_of_controls():
    for name in ("+3V3", "VCC", "VDD", "/mcu/VDDA", "BAT+", "PACK+", "V+", "VIN", "VBUS", "+VM", "HV", "VMOT"):
        assert is_supply_name(name), name
    for name in ("/SDA", "VREF", "Net-(U1-VCC)", "/VSENSE", "EN_3V3", "unconnected-(U1-VDD)", "/VS", "/PWM_A"):
        assert not is_supply_name(name), name
    assert is_control_name("EN_5V") and is_control_name("PGOOD_3V3") and not is_control_name("ENGINE_12V")


@pytest.mark.parametrize(
    ("part", "volts"),
    [
        ("7805", 5.0), ("LM7812CT", 12.0), ("78L05", 5.0), ("L7905", -5.0), ("AZ1117-3.3", 3.3), ("AP2112K-1.8", 1.8), ("TLV1117LV33", 3.3),
        ("LD1117S33", 3.3), ("XC6206P332MR", 3.3), ("MCP1700-3302E", 3.3), ("LM2596S-12", None), ("LM2940-5.0", 5.0), ("LM317", None), ("TPS54202", None),
    ],
)
def test_voltage_of_regulator_names(part, volts):
    """Suffixes as makers of fixed regulators commonly write them: common practice."""
    found = voltage_of_part(part)
    assert (found[0] if found else None) == volts


def test_reference_table_is_a_short_list_of_families():
    assert reference_of_part("LM317T") == 1.25
    assert reference_of_part("thing") is None


@pytest.mark.parametrize("value", ["DNP", "NA", "NA(10k)", "NA/R0603", "dnf", "10k DNP", "100n_DNF", "10k(DNP)", "NM", "DNP_10uF", "Do not fit"])
def test_not_fitted_values(value):
    assert why_not_fitted(Part("R1", value))


@pytest.mark.parametrize("value", ["10k", "NAND", "NA555", "NFET", "NP0 100p", "100p NP0", "74HC00", "NMOS", "DNPX1"])
def test_values_that_only_look_like_it(value):
    assert not why_not_fitted(Part("R1", value))


def test_not_fitted_marks_and_fields():
    assert why_not_fitted(Part("R1", "10k", dnp=True))
    assert why_not_fitted(Part("R1", "10k", fields={"DNF": "X"}))
    assert why_not_fitted(Part("R1", "10k", fields={"POPULATE": "0"}))
    assert why_not_fitted(Part("R1", "10k", fields={"Config": "DNF"}))
    assert not why_not_fitted(Part("R1", "10k", fields={"DNP": "", "Populate": "1", "Config": "+test"}))
