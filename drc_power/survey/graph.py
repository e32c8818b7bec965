"""The power graph: nets as nodes, elements as directed edges, and which way supply current runs along each."""

from __future__ import annotations

from collections import deque
from collections.abc import Iterable, Mapping, Sequence
from typing import TYPE_CHECKING

from drc_power.survey.conduits import Conduit
from drc_power.survey.elements import Found
from drc_power.survey.standing import Standing

if TYPE_CHECKING:
    import networkx as nx

    from drc_power.survey.model import Survey


def distances(founds: Sequence[Found], nets: Standing, sources: Iterable[str], known: Mapping[str, int] | None = None) -> dict[str, int]:
    """Steps from the nearest source to each power net, along elements, never against a one-way element.

    With `known` steps, only nets that have none yet are given one, beyond all that are known.
    """
    ways: dict[str, list[str]] = {}
    for found in founds:
        c = found.conduit
        if found.verdict.group not in ("pass", "switch"):
            continue
        ways.setdefault(c.a, []).append(c.b)
        if not c.one_way:
            ways.setdefault(c.b, []).append(c.a)
    steps = dict(known or {})
    base = max(steps.values(), default=-1) + 1
    queue = deque(net for net in sources if net not in steps)
    steps |= dict.fromkeys(queue, base)
    while queue:
        net = queue.popleft()
        for other in ways.get(net, ()):
            if other not in steps and other not in nets.low:
                steps[other] = steps[net] + 1
                queue.append(other)
    return steps


def return_distances(founds: Sequence[Found], nets: Standing, backs: Iterable[str]) -> dict[str, int]:
    """Steps from the sources' returns to each return net, along pass elements: return current runs down them."""
    ways: dict[str, list[str]] = {}
    for c in (f.conduit for f in founds if f.verdict.group == "pass"):
        ways.setdefault(c.a, []).append(c.b)
        ways.setdefault(c.b, []).append(c.a)
    steps = {net: 0 for net in backs if net in nets.low}
    queue = deque(steps)
    while queue:
        net = queue.popleft()
        for other in ways.get(net, ()):
            if other not in steps and not nets.is_power(other):
                steps[other] = steps[net] + 1
                queue.append(other)
    return steps


def directed(found: Found, nets: Standing, steps: Mapping[str, int], back_steps: Mapping[str, int]) -> tuple[str, str]:
    """(from, to) of an element: along conduction, away from the source, from a supply down to a return."""
    c = found.conduit
    if c.one_way and c.kind not in ("zener", "tvs"):
        return c.a, c.b
    low_a, low_b = c.a in nets.low, c.b in nets.low
    if c.a in back_steps and c.b in back_steps and back_steps[c.a] != back_steps[c.b]:
        return (c.b, c.a) if back_steps[c.a] < back_steps[c.b] else (c.a, c.b)
    if low_a != low_b:
        return (c.b, c.a) if low_a else (c.a, c.b)
    if low_a and low_b:
        return (c.b, c.a) if c.a in nets.grounds and c.b not in nets.grounds else (c.a, c.b)
    coil = _at_converter(c, nets) if c.kind in ("inductor", "ferrite") else None
    if coil:
        return coil
    far = max(steps.values(), default=0) + 1
    return (c.b, c.a) if steps.get(c.b, far) < steps.get(c.a, far) else (c.a, c.b)


def _at_converter(c: Conduit, nets: Standing) -> tuple[str, str] | None:
    """An inductor at a chip's switch node runs to the output of a buck and from the input of a boost converter."""
    for node, other in ((c.a, c.b), (c.b, c.a)):
        for tap in nets.wiring.tied(node, "switching-regulator"):
            if tap.terminal == "switch_node" and "switch_node" not in nets.wiring.terminals_on(other):
                inputs = nets.wiring.nets_of(tap.ref, "input")[:1]
                onward = any(d.terminal == "anode" and nets.wiring.across(d) not in inputs for d in nets.wiring.tied(node, "diode"))
                return (other, node) if other in inputs or onward else (node, other)
    return None


def power_graph(survey: Survey) -> nx.MultiDiGraph:
    """A networkx MultiDiGraph of a survey: nodes are nets, edges are elements with ref, group and role.

    Parallel elements are parallel edges; islands are its weakly connected components.
    """
    import networkx as nx

    graph = nx.MultiDiGraph()
    for rail in survey.rails:
        graph.add_node(rail.net, rail=True)
    for element in survey.elements:
        graph.add_edge(element.from_net, element.to_net, key=f"{element.ref}:{element.from_net}:{element.to_net}",
                       ref=element.ref, group=element.group, role=element.role)
    return graph


def parallel(survey: Survey) -> tuple[tuple[str, ...], ...]:
    """References that share one current: same nets, same role, more than one part."""
    together: dict[tuple[str, str, str, str], list[str]] = {}
    for e in survey.elements:
        if e.group in ("pass", "switch"):
            together.setdefault((e.role, e.group, *sorted((e.from_net, e.to_net))), []).append(e.ref)
    return tuple(tuple(refs) for refs in together.values() if len(set(refs)) > 1)


def islands(survey: Survey) -> tuple[tuple[str, ...], ...]:
    """Nets that power connects, grounds left out, each island in the order of the elements; biggest first."""
    import networkx as nx

    grounds = set(survey.grounds)
    graph = nx.Graph()
    for e in survey.elements:
        if e.group in ("pass", "switch"):
            graph.add_nodes_from(net for net in (e.from_net, e.to_net) if net not in grounds)
            if e.from_net not in grounds and e.to_net not in grounds:
                graph.add_edge(e.from_net, e.to_net)
    order = {net: i for i, net in enumerate(graph.nodes)}
    parts = [tuple(sorted(nets, key=order.__getitem__)) for nets in nx.connected_components(graph)]
    return tuple(sorted(parts, key=lambda nets: (-len(nets), order[nets[0]])))
