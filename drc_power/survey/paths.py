"""Paths from each source to where its power ends, as net, element, net, element, net."""

from __future__ import annotations

from collections.abc import Sequence

from drc_power.survey.model import Element
from drc_power.survey.standing import Standing

_MOST = 500


def trace(elements: Sequence[Element], nets: Standing) -> tuple[tuple[str, ...], ...]:
    """One shortest path from a source to every power net at which power ends; at most 500 of them.

    A path reads source, net, element, net, and so on; it stops before the return. Of parallel elements the first
    stands for all.
    """
    outgoing: dict[str, list[Element]] = {}
    for e in elements:
        if e.group in ("pass", "switch") and e.to_net not in nets.low:
            outgoing.setdefault(e.from_net, []).append(e)
    found: list[tuple[str, ...]] = []
    for source in (e for e in elements if e.group == "source"):
        found.extend(_from(source, outgoing))
    return tuple(dict.fromkeys(found))[:_MOST]


def _from(source: Element, outgoing: dict[str, list[Element]]) -> list[tuple[str, ...]]:
    reached = {source.to_net: (source.ref, source.to_net)}
    queue = [source.to_net]
    inner = set()
    while queue:
        net = queue.pop(0)
        for e in outgoing.get(net, ()):
            if e.to_net not in reached:
                inner.add(net)
                reached[e.to_net] = (*reached[net], e.ref, e.to_net)
                queue.append(e.to_net)
    return [path for net, path in reached.items() if net not in inner]
