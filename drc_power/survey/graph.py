"""The power graph: nets as nodes, elements as directed edges, and which way supply current runs along each."""

from __future__ import annotations

from collections import deque
from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING, NamedTuple

from drc_power.survey.elements import Found
from drc_power.survey.standing import Standing

if TYPE_CHECKING:
    import networkx as nx

    from drc_power.survey.model import Survey


class Edge(NamedTuple):
    """An element's run from one net to another; `index` is its place in the list of finds."""

    index: int
    from_net: str
    to_net: str


def distances(founds: Sequence[Found], nets: Standing, sources: Iterable[str]) -> dict[str, int]:
    """Steps from the nearest source to each power net, along elements, never against a one-way element."""
    ways: dict[str, list[str]] = {}
    for found in founds:
        c = found.conduit
        if found.verdict.group not in ("pass", "switch"):
            continue
        ways.setdefault(c.a, []).append(c.b)
        if not c.one_way:
            ways.setdefault(c.b, []).append(c.a)
    steps = {net: 0 for net in sources}
    queue = deque(steps)
    while queue:
        net = queue.popleft()
        for other in ways.get(net, ()):
            if other not in steps and other not in nets.low:
                steps[other] = steps[net] + 1
                queue.append(other)
    return steps


def directed(found: Found, nets: Standing, steps: dict[str, int]) -> tuple[str, str]:
    """(from, to) of an element: along conduction, away from the source, from a supply down to a return."""
    c = found.conduit
    if c.one_way:
        return c.a, c.b
    low_a, low_b = c.a in nets.low, c.b in nets.low
    if low_a != low_b:
        return (c.b, c.a) if low_a else (c.a, c.b)
    if low_a and low_b:
        return (c.b, c.a) if c.a in nets.grounds and c.b not in nets.grounds else (c.a, c.b)
    far = max(steps.values(), default=0) + 1
    near_a, near_b = steps.get(c.a, far), steps.get(c.b, far)
    if near_a != near_b:
        return (c.a, c.b) if near_a < near_b else (c.b, c.a)
    return (c.a, c.b)


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
