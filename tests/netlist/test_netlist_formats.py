"""One small board, written by hand as each KiCad from 4 to 10 writes it, is read as the same circuit."""

from pathlib import Path

import pytest

from drc_power.netlist import Node, Pin, read_netlist

FORMATS = Path(__file__).parent / "formats"
VERSIONS = range(4, 11)

PINS_OF_NETS = {
    "+12V": "C1.1 R2.1 U1.8",
    "/LAMP-": "Q1.2 R2.2",
    "/drive/GATE": "Q1.1 R10.2",
    "GND": "C1.2 Q1.3 U1.4",
    "Net-(R10-Pad1)": "R10.1 U1.1",
}


@pytest.fixture(scope="module", params=VERSIONS)
def version(request):
    return request.param


@pytest.fixture(scope="module")
def netlist(version):
    return read_netlist(FORMATS / f"kicad-{version}.net")


def test_heading(netlist, version):
    assert netlist.version == ("D" if version < 6 else "E")
    assert netlist.tool.startswith(f"Eeschema {version}.")
    assert netlist.source == ("lamp.sch" if version < 6 else "lamp.kicad_sch")
    assert (netlist.title, netlist.revision) == ("Lamp dimmer", "B")
    assert netlist.path.endswith(f"kicad-{version}.net")


def test_parts_are_in_natural_order(netlist):
    assert list(netlist.parts) == ["C1", "Q1", "R2", "R10", "U1"]


def test_values_in_utf_8_and_the_empty_one(netlist):
    values = {ref: part.value for ref, part in netlist.parts.items()}
    assert values == {"C1": "10µF", "Q1": "NF6008", "R2": "", "R10": "4k7Ω", "U1": "OA2712"}


def test_fields_are_the_parts_own(netlist):
    own = {name: value for name, value in netlist.parts["C1"].fields.items() if name in ("Voltage", "Note")}
    assert own == {"Voltage": "25V", "Note": 'keep "close" to Q1'}
    assert "Voltage" not in netlist.parts["Q1"].fields  # its sheet has a field of that name
    assert not any(part.fields.get("Datasheet") for part in netlist.parts.values())


def test_symbols(netlist, version):
    library, symbol = ("device" if version == 4 else "Device"), "Q_NMOS_GDS"
    assert (netlist.parts["Q1"].library, netlist.parts["Q1"].symbol) == (library, symbol)
    assert netlist.parts["C1"].description == "Unpolarized capacitor"
    assert netlist.parts["U1"].description == "Dual operational amplifier"
    assert netlist.parts["C1"].keywords == ("cap capacitor" if version >= 7 else "")


def test_footprints(netlist):
    assert "C_1206" in netlist.parts["C1"].footprint
    assert netlist.parts["R2"].footprint == ""


def test_marks(netlist, version):
    assert [ref for ref, part in netlist.parts.items() if part.dnp] == (["R2"] if version >= 7 else [])
    assert [ref for ref, part in netlist.parts.items() if part.exclude_from_bom] == (["R2"] if version >= 6 else [])


def test_sheets_and_uuid_paths(netlist, version):
    assert netlist.parts["C1"].sheet == "/"
    assert netlist.parts["Q1"].sheet == "/drive/"
    if version < 6:
        assert (netlist.parts["C1"].uuid, netlist.parts["Q1"].uuid) == ("/56E3B001", "/56E3A001/56E3B002")
    else:
        assert netlist.parts["C1"].uuid == "/7c1e0001-52a8-4b1f-9d3e-0a6b4c8d2e01"
        sheet = "/7c1e00a1-52a8-4b1f-9d3e-0a6b4c8d2ea1"
        assert netlist.parts["Q1"].uuid == f"{sheet}/7c1e0002-52a8-4b1f-9d3e-0a6b4c8d2e02"


def test_units(netlist, version):
    amplifier = netlist.parts["U1"]
    assert len(amplifier.uuids) == (1 if version < 6 else 3)
    assert amplifier.uuid.endswith(min(amplifier.uuids))
    assert amplifier.units == (("A", "B", "C") if version >= 10 else ())
    assert [pin.unit for pin in amplifier.pins] == (list("AAACBBBC") if version >= 10 else [""] * 8)


def test_nets(netlist):
    pins = {name: " ".join(f"{node.ref}.{node.pin}" for node in net.nodes) for name, net in netlist.nets.items()}
    assert {name: pins[name] for name in PINS_OF_NETS} == PINS_OF_NETS
    assert all(len(net.nodes) == 1 for name, net in netlist.nets.items() if name not in PINS_OF_NETS)


def test_net_class(netlist, version):
    assert netlist.nets["GND"].net_class == ("Default" if version >= 9 else "")
    assert netlist.nets["GND"].nodes[1] == Node("Q1", "3")


def test_pins_have_names_and_types(netlist):
    assert netlist.parts["Q1"].pins == (
        Pin("1", "G", "input", "/drive/GATE"),
        Pin("2", "D", "passive", "/LAMP-"),
        Pin("3", "S", "passive", "GND"),
    )
    assert [(pin.number, pin.name) for pin in netlist.parts["R2"].pins] == [("1", ""), ("2", "")]


def test_unconnected_pins_are_known(netlist, version):
    pins = {pin.number: pin for pin in netlist.parts["U1"].pins}
    assert list(pins) == list("12345678")
    assert (pins["6"].name, pins["6"].type.split("+")[0]) == ("-", "input")
    assert (pins["6"].net == "") == (version == 4)
    assert pins["6"].type == ("input+no_connect" if version >= 6 else "input")


def test_lines(netlist):
    lines = (FORMATS / Path(netlist.path).name).read_text(encoding="utf-8").splitlines()
    for ref, part in netlist.parts.items():
        assert lines[part.line - 1].strip().replace('"', "") == f"(comp (ref {ref})"
    for name, net in netlist.nets.items():
        assert f"(name {name})" in lines[net.line - 1].replace('"', "")
