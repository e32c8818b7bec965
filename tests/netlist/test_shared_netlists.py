"""Netlists that KiCad itself wrote, where somebody has put some beside the checkout."""

import re
from pathlib import Path

import pytest

from drc_power.netlist import natural_key, read_netlist
from drc_power.netlist.confirm import confirm_netlist

FOLDER = Path(__file__).parents[3] / "shared" / "netlists"
PATHS = sorted(FOLDER.glob("*.net"))

pytestmark = pytest.mark.skipif(not PATHS, reason="no netlists beside the checkout")


@pytest.fixture(params=PATHS, ids=lambda path: path.stem)
def path(request):
    return request.param


def test_as_many_parts_nets_and_nodes_as_the_text_has(path):
    text = path.read_text(encoding="utf-8")
    netlist = read_netlist(path)
    assert list(netlist.parts) == sorted(netlist.parts, key=natural_key)
    assert set(netlist.parts) == set(re.findall(r'\(comp \(ref "([^"]+)"\)', text))
    assert set(netlist.nets) == set(re.findall(r'\(net \(code "\d+"\) \(name "([^"]+)"\)', text))
    nodes = re.findall(r'\(node \(ref "([^"]+)"\) \(pin "([^"]+)"\)', text)
    assert sorted(nodes) == sorted((node.ref, node.pin) for net in netlist.nets.values() for node in net.nodes)


def test_every_node_is_a_pin_of_its_part(path):
    netlist = read_netlist(path)
    for net in netlist.nets.values():
        for node in net.nodes:
            (pin,) = [pin for pin in netlist.parts[node.ref].pins if pin.number == node.pin]
            assert pin.net == net.name and pin.type


@pytest.mark.parametrize("path", [path for path in PATHS if path.stat().st_size < 30_000], ids=lambda path: path.stem)
def test_the_second_reader_agrees(path):
    confirm_netlist(read_netlist(path))
