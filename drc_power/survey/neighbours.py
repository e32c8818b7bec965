"""What the parts around it say of a part: evidence that needs the nets, added to identities made without them."""

from __future__ import annotations

from dataclasses import replace

from drc_power.netlist.model import Netlist
from drc_power.survey.grounds import find_grounds
from drc_power.survey.model import Identity
from drc_power.survey.values import farads
from drc_power.survey.wiring import Wiring


def with_neighbours(netlist: Netlist, identities: dict[str, Identity], left_out: tuple[str, ...]) -> dict[str, Identity]:
    """The identities, refined where the circuit around a part shows more than its own texts."""
    wiring = Wiring(netlist, identities, left_out)
    grounds = find_grounds(wiring)
    refined = dict(identities)
    for part in wiring.parts():
        identity = identities[part.ref]
        if identity.kind == "switching-regulator":
            refined[part.ref] = _output_is_node(wiring, identity, grounds)
        elif identity.kind == "mosfet" and not identity.channel:
            refined[part.ref] = _channel_by_nets(wiring, identity, grounds)
    return refined


def _output_is_node(wiring: Wiring, identity: Identity, grounds: frozenset[str]) -> Identity:
    """An output with an inductor on it and no capacitor to hold it is a switch node, whatever the pin is called."""
    if "switch_node" in identity.terminals or "output" not in identity.terminals:
        return identity
    net = wiring.net(identity.ref, "output")
    held = any(wiring.across(t) in grounds and (farads(t.part.value) or 1.0) >= 1e-6 for t in wiring.tied(net, "capacitor"))
    if not wiring.tied(net, "inductor") or held:
        return identity
    shown = {name: pins for name, pins in identity.terminals.items() if name != "output"}
    shown["switch_node"] = identity.terminals["output"]
    return replace(identity, terminals=shown, because=(*identity.because, "an inductor at its output: a switch node"))


def _channel_by_nets(wiring: Wiring, identity: Identity, grounds: frozenset[str]) -> Identity:
    """A source on ground makes it n-channel."""
    if wiring.net(identity.ref, "source") in grounds:
        return replace(identity, channel="n", because=(*identity.because, "its source is on ground"))
    return identity
