"""Where power goes: chips at each supply, contacts out, coils, motors, loudspeakers; and chips that drive them."""

from __future__ import annotations

from collections.abc import Sequence

from drc_power.netlist.model import Part
from drc_power.survey.chips import power_outputs
from drc_power.survey.inlets import End, return_of
from drc_power.survey.standing import Standing
from drc_power.survey.verdict import Verdict

_WORDS = {
    "ic": "supply pin of a chip",
    "unknown": "supply pin of a part that nothing else identifies",
    "gate-driver": "supply pin of a gate driver",
    "connector": "contact where power goes out",
    "motor": "motor",
    "speaker": "loudspeaker or sounder",
    "relay": "relay coil",
    "crystal": "supply pin of an oscillator",
}
_ONE_NET = frozenset({"motor", "speaker", "relay", "crystal"})


def find_loads(nets: Standing, sources: Sequence[End]) -> list[End]:
    """Everything that draws from a power net, once per part and net."""
    inlets = {(end.ref, end.net) for end in sources}
    found = []
    for part in nets.wiring.parts():
        kind = nets.wiring.kind(part.ref)
        if kind in _WORDS:
            for net in _drawing_nets(nets, part, kind):
                if (part.ref, net) not in inlets:
                    found.append(End(part.ref, net, return_of(nets, part) or _other_end(part, net), Verdict("load", (_WORDS[kind],), 0.7)))
    return found


def _drawing_nets(nets: Standing, part: Part, kind: str) -> list[str]:
    if kind in ("ic", "gate-driver", "unknown"):
        return [net for net in nets.wiring.nets_of(part.ref, "supply") if net in nets.supplies]
    wanted = nets.wiring.nets_of(part.ref, "coil") if kind == "relay" else part.nets_of()
    powered = [net for net in wanted if nets.is_power(net)]
    return powered[:1] if kind in _ONE_NET else powered


def _other_end(part: Part, net: str) -> str:
    return next((other for other in part.nets_of() if other != net and not other.startswith("unconnected-")), "")


def find_drivers(nets: Standing) -> list[End]:
    """Chips with power outputs of their own (motor bridges, audio power amplifiers): a switch for each output net."""
    found = []
    for part in nets.wiring.parts():
        if nets.wiring.kind(part.ref) == "ic":
            supply = next((net for net in nets.wiring.nets_of(part.ref, "supply") if net in nets.supplies), "")
            for net in power_outputs(part):
                if net not in nets.supplies and net not in nets.low:
                    verdict = Verdict("switch", ("chip with power outputs of its own",), 0.7)
                    found.append(End(part.ref, supply or return_of(nets, part), net, verdict))
    return found
