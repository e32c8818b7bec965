"""From a board in one mode to its circuit."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial

from ..board import Mode
from .branches import Linear, Resistive, Source, Switching
from .circuit import Builder, Circuit
from .converters import Converter
from .dividers import add_dividers
from .events.build import add_events
from .heatpaths import add_ambient, add_heat_paths
from .parts import MAKERS
from .rectifier import Rectifier
from .stage_converters import note_converters
from .stage_cycles import add_gate_drives, add_snubbers
from .stage_pairs import add_chopped
from .stages import add_stages
from .supply import REGULATORS, add_loads, add_rails, is_active, reference_of
from .system import temperature_dependent
from .tracks import add_tracks
from .variables import Box


def build_circuit(mode: Mode, levers: frozenset[str] = frozenset(), events: bool = True) -> Circuit:
    """The circuit of a board in one mode. Raises InputError where an annotation contradicts the netlist.

    levers: names of quantities that get a side of the box even where they are exact, so that sizing can move them.
    """
    builder = Builder(mode, Box(levers=levers))
    add_ambient(builder)
    note_converters(builder)
    add_rails(builder)
    add_stages(builder)
    add_loads(builder)
    add_snubbers(builder)
    add_gate_drives(builder)
    add_parts(builder)
    add_dividers(builder)
    add_tracks(builder)
    add_heat_paths(builder, temperature_dependent(builder.branches))
    if events:
        add_events(builder, partial(build_circuit, events=False))
    reference = _references(builder)
    return builder.finish(reference, nets_adrift(builder, reference))


def add_parts(builder: Builder) -> None:
    """Every part that needs a verdict and is in no stage, by its kind."""
    for ref in builder.board.elements:
        part = builder.parts[ref]
        if ref in builder.staged or not is_active(builder, part):
            continue
        if ref in builder.chopped:
            add_chopped(builder, ref)
        elif part.kind in MAKERS:
            MAKERS[part.kind](builder, part)
        else:
            builder.lack(ref, "a device whose kind the solver knows" if part.device else "device")


GROUND_LINK_OHM = 10.0
"""What links two grounds is a shunt, a bead or a net tie; a larger resistor between them is a load."""


def _references(builder: Builder) -> tuple[str, ...]:
    """The nets at zero volt: the reference, and every ground that no shunt, bead or net tie links to it."""
    reference = reference_of(builder)
    driven = {b.b for b in builder.branches if isinstance(b, (Linear, Switching))}
    driven |= {b.held for b in builder.branches if isinstance(b, Converter)}
    driven |= {b.a for b in builder.branches if isinstance(b, Source)}
    links: dict[str, set[str]] = {}
    for branch in builder.branches:
        if isinstance(branch, Resistive) and branch.load is None and branch.r_ohm.value <= GROUND_LINK_OHM:
            links.setdefault(branch.a, set()).add(branch.b)
            links.setdefault(branch.b, set()).add(branch.a)
    reached, queue = {reference}, [reference]
    while queue:
        for net in sorted(links.get(queue.pop(), set()) - reached - driven):
            reached.add(net)
            queue.append(net)
    return (reference, *(net for net in builder.board.grounds if net not in reached))


def nets_adrift(builder: Builder, reference: Sequence[str]) -> frozenset[str]:
    """The nets that nothing leads to from a source of known voltage, through any branch or blocked part.

    A rail that nobody annotated, a part in the way that the network could not take in: whatever lies behind would rest
    at zero volt and look safe.
    """
    links: dict[str, set[str]] = {}
    reached: list[str] = []
    for branch in builder.branches:
        nets = set(branch.nodes.values()) if hasattr(branch, "nodes") else {branch.a, branch.b}
        _link(links, nets - set(reference))
        if isinstance(branch, Source):
            reached.append(branch.a)
        elif isinstance(branch, Rectifier):
            reached += nets
    for probe in builder.probes.values():
        # A blocked part parts two nets that belong together; a regulator without a set voltage leads nowhere.
        if probe.kind not in REGULATORS or probe.state == "blocked" or probe.currents:
            _link(links, {net for net in (probe.a, probe.b) if net} - set(reference))
    found = set(reached)
    while reached:
        new = links.get(reached.pop(), set()) - found
        found |= new
        reached += new
    return frozenset(links.keys() - found)


def _link(links: dict[str, set[str]], nets: set[str]) -> None:
    for net in nets:
        links.setdefault(net, set()).update(nets)
