"""The `nets` section: which pins each net joins, after jumpers inside parts have joined nets."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from itertools import islice

from drc_power.faults import Fault, InputError
from drc_power.netlist.clauses import only_value, plain
from drc_power.netlist.components import Component
from drc_power.netlist.joins import JoinedNames
from drc_power.netlist.model import Net, Node
from drc_power.netlist.natural import natural_key
from drc_power.netlist.sexpr import Clause
from drc_power.netlist.source import Source, printable, shown

MAX_FAULTS = 20
"""As many faults as a reader of them can use; a damaged file may hold thousands."""


@dataclass(frozen=True, slots=True)
class Connection:
    """One `node` clause: a pin of a part on a net, with what the net says about the pin."""

    net: str
    ref: str
    pin: str
    function: str
    type: str
    at: int


@dataclass(frozen=True, slots=True)
class WrittenNet:
    """One `net` clause."""

    name: str
    code: str
    net_class: str
    connections: tuple[Connection, ...]
    at: int


def read_nets(source: Source, clauses: Iterable[Clause]) -> dict[str, WrittenNet]:
    """The nets by name as they are written. Raises InputError if one name has two sets of pins."""
    nets: dict[str, WrittenNet] = {}
    for clause in clauses:
        net = _net(source, clause)
        known = nets.setdefault(net.name, net)
        if known is not net and _pins(known) != _pins(net):
            found = f"net {shown(net.name)} is written twice with different pins, first at line {source.line(known.at)}"
            raise InputError(source.fault(net.at, found, "export the netlist again"))
    return nets


def _pins(net: WrittenNet) -> set[tuple[str, str]]:
    return {(connection.ref, connection.pin) for connection in net.connections}


def _net(source: Source, clause: Clause) -> WrittenNet:
    code, name = clause.value("code"), only_value(source, clause, "name")
    if not name and not code:
        raise InputError(source.fault(clause.at, "a net without a name", "export the netlist again"))
    name = name or f"N-00000{code}"  # the name that KiCad itself gives such a net
    connections = (_connection(source, name, node) for node in clause.each("node"))
    # Power symbols are no parts, and a pad without a number, as of a mounting hole, is no pin that anything could name.
    of_parts = tuple(each for each in connections if not each.ref.startswith("#") and each.pin)
    return WrittenNet(name, code, clause.value("class"), of_parts, clause.at)


def _connection(source: Source, net: str, node: Clause) -> Connection:
    value = dict(node.values)
    ref, pin = value.get("ref"), value.get("pin")
    if not ref or pin is None:
        found = f"net {shown(net)} lists a node without a {'pin' if ref else 'part'}"
        raise InputError(source.fault(node.at, found, "export the netlist again"))
    return Connection(net, ref, pin, plain(value.get("pinfunction", "")), value.get("pintype", ""), node.at)


Connections = Mapping[str, Mapping[str, list[Connection]]]
"""The connections of each pin, by reference and pin number. More than one means joined nets."""


def connections_of_parts(
    source: Source, written: Mapping[str, WrittenNet], components: Mapping[str, Component]
) -> Connections:
    """What the nets say about each part's pins. Raises InputError for nodes that name unknown parts."""
    by_part: dict[str, dict[str, list[Connection]]] = {ref: {} for ref in components}
    unknown: dict[str, Connection] = {}
    for net in written.values():
        for connection in net.connections:
            if connection.ref in by_part:
                by_part[connection.ref].setdefault(connection.pin, []).append(connection)
            else:
                unknown.setdefault(connection.ref, connection)
    refuse(_unknown_part(source, connection, components) for connection in unknown.values())
    return by_part


def _unknown_part(source: Source, connection: Connection, components: Mapping[str, Component]) -> Fault:
    found = f"net {shown(connection.net)} names part {shown(connection.ref)}, which is not in the netlist"
    near = get_close_matches(connection.ref, components, n=1)
    instead = f"did you mean {printable(near[0])}?" if near else "export the netlist again"
    return source.fault(connection.at, found, instead)


def joined_names(source: Source, connections: Connections, components: Mapping[str, Component]) -> JoinedNames:
    """The net names that jumper pins join. Raises InputError for a pin on two nets that nothing joins."""
    names = JoinedNames()
    for ref, component in components.items():
        pins = connections[ref]
        for group in component.jumpers.groups:
            names.join(each.net for pin in group for each in pins.get(pin, ()))
        if component.jumpers.same_number:
            for on_pin in pins.values():
                names.join(each.net for each in on_pin)
    refuse(_torn_pins(source, connections, names))
    return names


def _torn_pins(source: Source, connections: Connections, names: JoinedNames) -> Iterator[Fault]:
    for ref, pins in connections.items():
        for pin, (first, *others) in pins.items():
            for other in others:
                if names.spokesman(other.net) != names.spokesman(first.net):
                    where = f"two nets, {shown(first.net)} and {shown(other.net)}"
                    found = f"pin {printable(pin)} of {printable(ref)} is on {where}"
                    yield source.fault(other.at, found, "connect it to one of them and export again")


def join_nets(source: Source, written: Mapping[str, WrittenNet], names: JoinedNames) -> dict[str, Net]:
    """The nets in natural order of name, each with the names and pins of all nets joined into it."""
    groups: dict[str, list[WrittenNet]] = {}
    for name in sorted(written, key=natural_key):
        groups.setdefault(names.spokesman(name), []).append(written[name])
    return {name: _joined(source, written[name], groups[name]) for name in sorted(groups, key=natural_key)}


def _joined(source: Source, spokesman: WrittenNet, nets: list[WrittenNet]) -> Net:
    pins = {(each.ref, each.pin) for net in nets for each in net.connections}
    in_order = sorted(pins, key=lambda pin: (natural_key(pin[0]), natural_key(pin[1])))
    return Net(
        name=spokesman.name,
        code=spokesman.code,
        net_class=spokesman.net_class,
        nodes=tuple(Node(ref, pin) for ref, pin in in_order),
        aliases=tuple(net.name for net in nets if net is not spokesman),
        line=source.line(spokesman.at),
    )


def refuse(faults: Iterable[Fault]) -> None:
    """Raise InputError with the first of the faults, if there are any."""
    if first := list(islice(faults, MAX_FAULTS)):
        raise InputError(*first)
