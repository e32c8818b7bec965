"""Stages: elements that work together. Every finder looks for one shape and leaves alone what is already taken."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field
from functools import cached_property

from drc_power.survey.channel import texts
from drc_power.survey.grounds import is_low_ohm
from drc_power.survey.model import Element, Stage
from drc_power.survey.standing import Standing
from drc_power.survey.values import farads
from drc_power.survey.wiring import Wiring

TRANSISTORS = frozenset({"mosfet", "bjt", "igbt"})
_BANK_F = 470e-6


@dataclass
class Scene:
    """What the finders look at, and which references they have already put into a stage."""

    wiring: Wiring
    nets: Standing
    elements: Sequence[Element]
    taken: set[str] = field(default_factory=set)

    @cached_property
    def switches(self) -> list[Element]:
        return [e for e in self.elements if e.group == "switch" and e.role in TRANSISTORS]

    @cached_property
    def diodes(self) -> list[Element]:
        return [e for e in self.elements if e.group == "switch" and e.role == "diode"]

    def free(self, elements: Iterable[Element]) -> list[Element]:
        return [e for e in elements if e.ref not in self.taken]

    def inductors_at(self, net: str) -> list[Element]:
        return [e for e in self.elements if e.role == "inductor" and net in (e.from_net, e.to_net)]

    def near(self, net: str) -> set[str]:
        """The node with what hangs on it through emitter or sense resistors."""
        return self.nets.far(net) - self.nets.supplies - self.nets.low

    def stage(self, kind: str, node: str | None, **parts: Iterable[str]) -> Stage:
        kept = {key: tuple(dict.fromkeys(refs)) for key, refs in parts.items()}
        kept = {key: refs for key, refs in kept.items() if refs}
        self.taken |= {ref for key, refs in kept.items() if key not in ("load", "controller", "reservoir") for ref in refs}
        return Stage(kind, kept, node)


def refs(elements: Iterable[Element]) -> list[str]:
    """The references of elements, in order."""
    return [e.ref for e in elements]


def nodes(scene: Scene) -> list[str]:
    """Switched nodes: neither supply nor return, in the order of the elements."""
    ends = (net for e in scene.switches for net in (e.from_net, e.to_net))
    return [net for net in dict.fromkeys(ends) if net and net not in scene.nets.supplies and net not in scene.nets.low]


def high_at(scene: Scene, node: str) -> list[Element]:
    """Transistors that switch a supply onto the node."""
    return [e for e in scene.switches if e.to_net in scene.near(node) and e.from_net not in scene.near(node)]


def low_at(scene: Scene, node: str) -> list[Element]:
    """Transistors that switch the node to a return or to a negative supply."""
    return [e for e in scene.switches if e.from_net in scene.near(node) and e.to_net not in scene.near(node)]


def _control_ends_at(scene: Scene, element: Element, node: str) -> bool:
    """Whether a transistor's source or emitter is at the node, as in a follower."""
    suffixed = [end + tail for end in ("source", "emitter") for tail in ("", "_2")]
    return any(net in scene.near(node) for end in suffixed for net in scene.wiring.nets_of(element.ref, end))


def push_pull(scene: Scene) -> list[Stage]:
    """Two complementary followers joined at the output."""
    found = []
    for node in nodes(scene):
        at = [e for e in scene.free(scene.switches) if {e.from_net, e.to_net} & scene.near(node) and _control_ends_at(scene, e, node)]
        channels = {scene.wiring.identities[e.ref].channel for e in at}
        if {"n", "p"} <= channels or {"npn", "pnp"} <= channels:
            found.append(scene.stage("push-pull", node, pair=refs(at), load=loads_at(scene, node)))
    return found


def loads_at(scene: Scene, node: str) -> list[str]:
    """References of connectors, coils, motors and speakers on a node, looked at through filter inductors."""
    reach = set(scene.near(node))
    for coil in scene.inductors_at(node):
        reach |= {coil.from_net, coil.to_net} - scene.nets.supplies - scene.nets.low
    kinds = ("connector", "relay", "motor", "speaker")
    return [t.ref for net in sorted(reach) for t in scene.wiring.taps(net) if t.kind in kinds]


@dataclass(frozen=True)
class _Half:
    node: str
    supply: str
    high: list[Element]
    low: list[Element]


def _halves(scene: Scene) -> list[_Half]:
    found = []
    for node in nodes(scene):
        high, low = scene.free(high_at(scene, node)), scene.free(low_at(scene, node))
        down = [d for d in scene.diodes if d.to_net in scene.near(node) and d.from_net in scene.nets.low]
        if high and (low or down):
            found.append(_Half(node, high[0].from_net, high, low or down))
    return found


def half_bridges(scene: Scene) -> list[Stage]:
    """Converters, half bridges, and three of them as one three-phase bridge."""
    stages, bridges = [], []
    for half in _halves(scene):
        coil = _converter_coil(scene, half)
        if coil and coil.from_net in scene.near(half.node):
            stages.append(scene.stage("buck", half.node, high=refs(half.high), low=refs(half.low), inductor=[coil.ref]))
        elif coil:
            stages.append(scene.stage("boost", half.node, high=refs(half.high), low=refs(half.low), inductor=[coil.ref]))
        else:
            bridges.append(half)
    return stages + _bridges(scene, bridges)


def _converter_coil(scene: Scene, half: _Half) -> Element | None:
    """The inductor that makes a half bridge a converter: its far end is a supply, or the low side is a diode."""
    for coil in scene.inductors_at(half.node):
        other = coil.to_net if coil.from_net == half.node else coil.from_net
        diode_below = all(e.role == "diode" for e in half.low)
        if _leads_to_supply(scene, other) or diode_below and not any(t.kind in ("connector", "speaker") for t in scene.wiring.taps(other)):
            return coil
    return None


def _leads_to_supply(scene: Scene, net: str) -> bool:
    """A supply, or a net with a sense resistor on to one."""
    behind = (scene.wiring.across(t) for t in scene.wiring.tied(net, "resistor") if is_low_ohm(t.part))
    return net in scene.nets.supplies or any(other in scene.nets.supplies for other in behind)


def _bridges(scene: Scene, halves: Sequence[_Half]) -> list[Stage]:
    by_supply: dict[str, list[_Half]] = {}
    for half in halves:
        by_supply.setdefault(half.supply, []).append(half)
    stages = []
    for group in by_supply.values():
        full = [half for half in group if all(e.role in TRANSISTORS for e in half.low)]
        if len(full) == 3:
            high, low = [e for h in full for e in h.high], [e for h in full for e in h.low]
            stages.append(scene.stage("three-phase", None, high=refs(high), low=refs(low), shunts=_shunts(scene, low), load=[r for h in full for r in loads_at(scene, h.node)]))
            group = [half for half in group if half not in full]
        stages += [
            scene.stage("half-bridge", h.node, high=refs(h.high), low=refs(h.low), shunts=_shunts(scene, h.low), load=loads_at(scene, h.node))
            for h in group
        ]
    return stages


def _shunts(scene: Scene, low: Sequence[Element]) -> list[str]:
    feet = {e.to_net for e in low} - scene.nets.grounds
    return [e.ref for e in scene.elements if e.role == "resistor" and e.group == "pass" and {e.from_net, e.to_net} & feet]


def chip_converters(scene: Scene) -> list[Stage]:
    """A regulator with its switches inside and the inductor outside."""
    found = []
    for chip in [e for e in scene.elements if e.role == "switching-regulator"]:
        for coil in scene.inductors_at(chip.to_net):
            if coil.ref in scene.taken or chip.to_net in scene.nets.supplies:
                continue
            kind = "buck" if coil.from_net == chip.to_net else "boost"
            diodes = [d for d in scene.free(scene.diodes) if chip.to_net in (d.from_net, d.to_net)]
            side = "low" if kind == "buck" else "high"
            found.append(scene.stage(kind, chip.to_net, chip=[chip.ref], inductor=[coil.ref], **{side: refs(diodes)}))
    return found


def boosts(scene: Scene) -> list[Stage]:
    """A low-side switch, an inductor from the supply, a diode onward."""
    found = []
    for node in nodes(scene):
        low = scene.free(low_at(scene, node))
        up = [d for d in scene.free(scene.diodes) if d.from_net == node]
        coils = [c for c in scene.inductors_at(node) if c.to_net == node]
        if low and up and coils and coils[0].from_net not in {d.to_net for d in up}:
            found.append(scene.stage("boost", node, low=refs(low), high=refs(up), inductor=refs(coils[:1])))
    return found


def single_switches(scene: Scene) -> list[Stage]:
    """What remains: one switch, or several in parallel, between a node and a return or a supply."""
    found = []
    for node in nodes(scene):
        for kind, at in (("low-side", low_at(scene, node)), ("high-side", high_at(scene, node))):
            free = scene.free(at)
            if free:
                clamps = [d.ref for d in scene.elements if d.role in ("diode", "zener", "tvs") and d.group in ("switch", "clamp") and node in (d.from_net, d.to_net)]
                found.append(scene.stage(kind, node, switch=refs(free), clamp=clamps, load=loads_at(scene, node)))
    return found


def rectifiers(scene: Scene) -> list[Stage]:
    """A bridge and the largest capacitor behind it."""
    found = []
    for bridge in [e for e in scene.elements if e.role == "bridge"]:
        if bridge.ref not in scene.taken:
            caps = [(farads(t.part.value) or 0.0, t.ref) for t in scene.wiring.tied(bridge.to_net, "capacitor")]
            biggest = [max(caps)[1]] if caps else []
            found.append(scene.stage("rectifier", bridge.to_net, bridge=[bridge.ref], reservoir=biggest))
    return found


def or_ing(scene: Scene) -> list[Stage]:
    """Two or more series diodes or transistors from different nets into one."""
    into: dict[str, list[Element]] = {}
    for e in scene.elements:
        if e.group == "pass" and (e.role == "diode" or e.role == "mosfet"):
            into.setdefault(e.to_net, []).append(e)
    found = []
    for net, group in into.items():
        free = scene.free(group)
        if len({e.from_net for e in free}) >= 2 and net not in scene.nets.low:
            found.append(scene.stage("or-ing", net, parts=refs(free), controller=_controllers(scene, free)))
    return found


def _controllers(scene: Scene, group: Sequence[Element]) -> list[str]:
    """Chips and transistors at the gates of pass transistors, straight or through a resistor."""
    found = []
    for e in group:
        if e.control:
            reached = [e.control, *(scene.wiring.across(t) for t in scene.wiring.tied(e.control, "resistor"))]
            for net in reached:
                if net not in scene.nets.supplies and net not in scene.nets.low:
                    found += [t.ref for t in scene.wiring.taps(net) if t.ref != e.ref and (t.kind in ("ic", "gate-driver") or t.kind in TRANSISTORS and t.terminal in ("drain", "collector"))]
    return found


_HOT_PLUG = re.compile(r"hot.?(swap|plug)|inrush|LM5069|LM5060|LTC42\d\d|TPS24\d\d|TPS249|ADM117|LT4(256|363)", re.IGNORECASE)
_LINEAR = frozenset({"zener"})


def pass_stages(scene: Scene) -> list[Stage]:
    """Pass transistors by what controls them: hot-plug, linear pass, or load switch; parallel ones together."""
    groups: dict[tuple[str, str, str], list[Element]] = {}
    for e in scene.elements:
        if e.group == "pass" and e.role in TRANSISTORS and e.ref not in scene.taken and e.to_net not in scene.nets.low:
            groups.setdefault((e.from_net, e.to_net, e.control or ""), []).append(e)
    found = []
    for (_, to_net, control), group in groups.items():
        kind = _pass_kind(scene, group[0], to_net, control)
        if kind:
            found.append(scene.stage(kind, to_net, parts=refs(group), controller=_controllers(scene, group)))
    return found + [scene.stage("load-switch", e.to_net, parts=[e.ref]) for e in scene.elements if e.role == "load-switch" and e.ref not in scene.taken]


def _pass_kind(scene: Scene, e: Element, to_net: str, control: str) -> str:
    """Empty for a transistor that only guards against reversed polarity."""
    identity = scene.wiring.identities[e.ref]
    controllers = _controllers(scene, [e])
    if any(_HOT_PLUG.search(texts(scene.wiring.netlist.parts[ref])) for ref in controllers):
        return "hot-plug"
    if e.role == "mosfet" and to_net in scene.wiring.nets_of(e.ref, "source") and identity.channel == "p":
        return ""
    if e.role == "mosfet" and controllers and _bank(scene, to_net) >= _BANK_F:
        return "hot-plug"
    follower = to_net in (*scene.wiring.nets_of(e.ref, "source"), *scene.wiring.nets_of(e.ref, "emitter"))
    held = any(t.kind in _LINEAR for t in scene.wiring.taps(control)) or any(t.kind == "ic" for t in scene.wiring.taps(control))
    if e.role == "bjt" and (follower or held) or follower and any(t.kind in _LINEAR for t in scene.wiring.taps(control)):
        return "linear-pass"
    return "load-switch"


def _bank(scene: Scene, net: str) -> float:
    return sum(farads(t.part.value) or 0.0 for t in scene.wiring.tied(net, "capacitor"))


_FINDERS: tuple[Callable[[Scene], list[Stage]], ...] = (
    push_pull, half_bridges, boosts, chip_converters, rectifiers, single_switches, or_ing, pass_stages,
)


def find_stages(wiring: Wiring, nets: Standing, elements: Sequence[Element]) -> tuple[Stage, ...]:
    """All stages, in the order of the finders and of the elements."""
    scene = Scene(wiring, nets, elements)
    return tuple(stage for finder in _FINDERS for stage in finder(scene))
