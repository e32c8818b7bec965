"""What nothing feeds: a part on a net that no known source reaches carries nothing, which proves nothing."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import replace

from ..solve.branches import Linear, Source, Switching
from ..solve.circuit import Circuit, Probe
from ..solve.rectifier import Rectifier
from ..solve.supply import REGULATORS
from .judgement import Judgement
from .view import View

_NO_WAY = frozenset({*REGULATORS, "capacitor"})
"""Kinds that lead power nowhere by themselves: a regulator does once its rail has a voltage, by a branch of its own."""


def held_back(view: View, judgements: Iterable[Judgement]) -> Iterator[Judgement]:
    """The judgements, with those on parts and nets that nothing feeds short of a supply. An event brings its own."""
    circuit = view.solution.circuit
    grounds = frozenset((*view.board.grounds, *circuit.reference))
    fed = view.house.once("fed", circuit, lambda: fed_nets(circuit, grounds))
    for judgement in judgements:
        nets = _nets_of(circuit, judgement)
        if judgement.lacking or judgement.event or judgement.only_if_exceeded or not nets or _is_fed(circuit, nets, fed, grounds):
            yield judgement
        else:
            yield replace(judgement, lacking=(f"what feeds {min(nets - grounds or nets)} (a voltage and a source under rails)",))


def _is_fed(circuit: Circuit, nets: set[str], fed: frozenset[str], grounds: frozenset[str]) -> bool:
    """Whether a source reaches one of the nets. What lies in a return may carry anybody's current: nothing may be unfed."""
    return bool(nets & fed) if nets - grounds else bool(fed) and not circuit.unfed


def _nets_of(circuit: Circuit, judgement: Judgement) -> set[str]:
    """The nets of a judgement's part or load; a part of a class-AB stage lives on the stage's supplies."""
    probe = circuit.probes.get(judgement.ref or "")
    if probe is None:
        return {judgement.net} if judgement.rule == "network.voltage" and judgement.net else set()
    swing = {probe.push_pull.plus, probe.push_pull.minus} if probe.push_pull is not None else set()
    return ({probe.a, probe.b} | swing) - {""}


def fed_nets(circuit: Circuit, grounds: frozenset[str]) -> frozenset[str]:
    """The nets that a source with a voltage reaches along branches and parts, whatever these are in this mode; no ground."""
    ways: dict[str, set[str]] = {}
    for ends in _ways(circuit):
        for net in ends:
            ways.setdefault(net, set()).update(ends)
    onward = [(b.a, b.b) for b in circuit.branches if isinstance(b, (Linear, Switching))]
    for net, to in onward:
        ways.setdefault(net, set()).add(to)
    starts = [net for b in circuit.branches if isinstance(b, Source) for net in (b.a, b.b)]
    starts += [net for b in circuit.branches if isinstance(b, Rectifier) for net in b.nodes.values()]
    fed, waiting = set(), [net for net in starts if net not in grounds]
    while waiting:
        net = waiting.pop()
        if net not in fed:
            fed.add(net)
            waiting += ways.get(net, set()) - grounds - fed
    return frozenset(fed)


def _ways(circuit: Circuit) -> Iterator[tuple[str, ...]]:
    """Nets that power may get across between, either way."""
    keys = set()
    for branch in circuit.branches:
        keys.add(branch.key)
        if hasattr(branch, "nodes"):
            yield tuple(branch.nodes.values())
        elif not isinstance(branch, (Source, Linear, Switching)):
            yield branch.a, branch.b
    for probe in circuit.probes.values():
        if _leads_on(circuit, probe, keys):
            yield probe.a, probe.b


def _leads_on(circuit: Circuit, probe: Probe, keys: set[str]) -> bool:
    """Whether power gets across a part: not into what its state keeps dead for want of a voltage."""
    note = circuit.mode.parts[probe.ref].note
    if not probe.a or not probe.b or (probe.group is not None and probe.group not in keys):
        return False
    return probe.kind not in _NO_WAY or str(note.state) == "blocked"
