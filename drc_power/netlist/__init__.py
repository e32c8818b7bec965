"""Reading netlists: `read_netlist` gives the immutable `Netlist` of model.py; confirm.py reads again by other means."""

from drc_power.netlist.model import Net, Netlist, Node, Part, Pin
from drc_power.netlist.natural import natural_key
from drc_power.netlist.reader import parse_netlist, read_netlist

__all__ = ["Net", "Netlist", "Node", "Part", "Pin", "natural_key", "parse_netlist", "read_netlist"]
