"""The second reader agrees with the first where it can read the file, and finds what is made wrong."""

from dataclasses import replace
from pathlib import Path
from types import MappingProxyType

import pytest

from drc_power.faults import InputError
from drc_power.netlist import Node, read_netlist
from drc_power.netlist.confirm import confirm_netlist

FORMATS = Path(__file__).parent / "formats"


@pytest.mark.parametrize("version", range(4, 10))
def test_the_readers_agree(version):
    confirm_netlist(read_netlist(FORMATS / f"kicad-{version}.net"))


def test_a_format_that_it_cannot_read_is_said_so():
    with pytest.raises(InputError) as raised:
        confirm_netlist(read_netlist(FORMATS / "kicad-10.net"))
    (fault,) = raised.value.faults
    assert "kicad-10.net: the second reader cannot read this netlist, which Eeschema 10.0.0 wrote" in str(fault)
    assert "KiCad 4 to 9" in fault.instead


def with_part(netlist, ref, **changes):
    parts = {**netlist.parts, ref: replace(netlist.parts[ref], **changes)}
    return replace(netlist, parts=MappingProxyType(parts))


def with_net(netlist, name, **changes):
    nets = {**netlist.nets, name: replace(netlist.nets[name], **changes)}
    return replace(netlist, nets=MappingProxyType(nets))


def without(netlist, kind, name):
    rest = {key: value for key, value in getattr(netlist, kind).items() if key != name}
    return replace(netlist, **{kind: MappingProxyType(rest)})


def renamed(netlist):
    nets = {name: net for name, net in netlist.nets.items() if name != "GND"}
    return replace(netlist, nets=MappingProxyType(nets | {"GNDA": replace(netlist.nets["GND"], name="GNDA")}))


@pytest.mark.parametrize(
    "change, difference",
    [
        (lambda n: with_part(n, "C1", value="10uF"), 'the value of C1 is "10uF" here and "10µF" there'),
        (lambda n: with_part(n, "R2", value="1k"), 'the value of R2 is "1k" here and "" there'),
        (lambda n: with_part(n, "Q1", footprint="TO-220"), 'the footprint of Q1 is "TO-220" here and "Package_TO'),
        (lambda n: with_part(n, "C1", fields={}), 'field "Voltage" of C1 is "" here and "25V" there'),
        (
            lambda n: with_part(n, "C1", fields={**n.parts["C1"].fields, "Voltage": "50V"}),
            'field "Voltage" of C1 is "50V" here and "25V" there',
        ),
        (
            lambda n: with_part(n, "R10", fields={"Power": "1 W"}),
            'field "Power" of R10 is "1 W" here and missing there',
        ),
        (
            lambda n: with_net(n, "GND", nodes=n.nets["GND"].nodes[:-1]),
            'pin 4 of U1 is on net "GND" there only',
        ),
        (
            lambda n: with_net(n, "GND", nodes=(*n.nets["GND"].nodes, Node("R2", "1"))),
            'pin 1 of R2 is on net "GND" here only',
        ),
        (lambda n: without(n, "parts", "R2"), 'it finds a part "R2", which is missing here'),
        (lambda n: without(n, "nets", "GND"), 'it finds a net "GND", which is missing here'),
        (renamed, 'it finds a net "GND", which is missing here'),
        (
            lambda n: replace(n, parts=MappingProxyType({**n.parts, "R3": replace(n.parts["R2"], ref="R3")})),
            'part "R3" is missing there',
        ),
    ],
)
def test_the_first_difference_stops_the_check(change, difference):
    with pytest.raises(InputError) as raised:
        confirm_netlist(change(read_netlist(FORMATS / "kicad-8.net")))
    (fault,) = raised.value.faults
    assert fault.found.startswith(f"the second reader differs: {difference}")


def test_texts_that_a_parser_may_get_wrong(tmp_path):
    r"""Escapes, tabs, parentheses and quotes within texts, and a field that is empty."""
    path = tmp_path / "texts.net"
    text = r"""(export (version "E")
      (design (source "a") (tool "t"))
      (components
        (comp (ref "R1") (value "5 \"long\" (two)") (fields (field (name "A\tB") "1	2") (field (name "Empty")))
          (libsource (lib "L") (part "P") (description "")) (property (name "More") (value "x\\y"))))
      (nets (net (code "1") (name "/a b \"c\"") (node (ref "R1") (pin "A1")) (node (ref "#PWR1") (pin "1")))))"""
    path.write_text(text, encoding="utf-8")
    netlist = read_netlist(path)
    assert netlist.parts["R1"].fields == {"A\tB": "1\t2", "Empty": "", "More": "x\\y"}
    confirm_netlist(netlist)


def test_joined_nets_and_unconnected_pins_are_no_difference(tmp_path):
    """The second reader knows no jumpers: they stand in the symbol here, where the first reader finds them."""
    path = tmp_path / "plain.net"
    path.write_text(
        """(export (version "E") (design (source "a"))
          (components (comp (ref "J1") (value "J") (libsource (lib "L") (part "P") (description ""))))
          (nets (net (code "1") (name "A") (node (ref "J1") (pin "1")))
                (net (code "2") (name "B") (node (ref "J1") (pin "2")))))""",
        encoding="utf-8",
    )
    netlist = read_netlist(path)
    nodes = netlist.nets["A"].nodes + netlist.nets["B"].nodes
    joined = replace(netlist.nets["A"], nodes=nodes, aliases=("B",))
    confirm_netlist(replace(netlist, nets=MappingProxyType({"A": joined})))


def test_a_file_that_changed_meanwhile(tmp_path):
    path = tmp_path / "a.net"
    path.write_text('(export (version "E") (components) (nets))', encoding="utf-8")
    netlist = read_netlist(path)
    path.write_text('(export (version "D") (components) (nets))', encoding="utf-8")
    with pytest.raises(InputError, match="the file changed while it was read"):
        confirm_netlist(netlist)
