"""From a board in one mode to its circuit."""

from __future__ import annotations

from functools import partial

from ..board import Mode
from .branches import Linear, Resistive, Source, Switching
from .circuit import Builder, Circuit
from .converters import Converter
from .dividers import add_dividers
from .events.build import add_events
from .heatpaths import add_ambient, add_heat_paths
from .parts import MAKERS
from .stage_converters import note_converters
from .stage_cycles import add_gate_drives, add_snubbers
from .stage_pairs import add_chopped
from .stages import add_stages
from .supply import add_loads, add_rails, is_active, reference_of
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
    return builder.finish(_references(builder))


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
