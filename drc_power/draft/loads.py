"""Loads: one for each part and net that draws power, with its demand left blank."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, replace

from drc_power.draft.wiring import Wiring
from drc_power.draft.writing import BLANK, Entry, entry, listed, scalar, slug
from drc_power.netlist.model import Netlist
from drc_power.survey.model import Survey
from drc_power.survey.voltages import leaf

JUDGED_AS_PARTS = frozenset({"resistor", "thermistor", "potentiometer"})
"""Loads whose current follows from their own value: they stand under `parts`."""


@dataclass(frozen=True, slots=True)
class Consumer:
    """A part that draws from a net; `back` is where the current returns, "" if nobody knows.

    `between`: all the phases, of a load on a three-phase bridge.
    """

    ref: str
    net: str
    back: str
    role: str
    because: str
    between: tuple[str, ...] = ()

    @property
    def nets(self) -> tuple[str, ...]:
        """The nets that a load for it names in any case."""
        return self.between or (self.net,)


def consumers(survey: Survey, netlist: Netlist) -> list[Consumer]:
    """Who draws from which net. What hangs between two power nets counts once, from the rail if one of them is.

    What a chip draws from a rail that it makes itself is in what it draws from its own supply.
    """
    rails = {rail.net for rail in survey.rails}
    made = {(ref, net) for net, ref in chip_rails(survey).items()}
    chosen: dict[tuple[str, frozenset[str]], Consumer] = {}
    for e in survey.elements:
        if e.group == "load" and e.role not in JUDGED_AS_PARTS and (e.ref, e.from_net) not in made:
            key = e.ref, frozenset((e.from_net, e.to_net))
            if key not in chosen or e.from_net in rails and chosen[key].net not in rails:
                chosen[key] = Consumer(e.ref, e.from_net, e.to_net, e.role, e.because[0] if e.because else e.role)
    return _with_phases_together(survey, netlist, list(chosen.values()))


def _with_phases_together(survey: Survey, netlist: Netlist, found: list[Consumer]) -> list[Consumer]:
    """The consumers, with what hangs on the phases of a three-phase bridge as one."""
    for stage in survey.stages:
        phases = Wiring(survey, netlist).phases(stage) if stage.kind == "three-phase" else ()
        on_them = [consumer for consumer in found if consumer.net in phases]
        if on_them:
            first = replace(on_them[0], net=phases[0], back="", between=phases)
            found = [first if each is on_them[0] else each for each in found if each not in on_them[1:]]
    return found


def chip_rails(survey: Survey) -> dict[str, str]:
    """Rails that nothing feeds but a chip that is no regulator, by net, with the chip."""
    return {rail.net: rail.fed_by[0] for rail in survey.rails if len(rail.fed_by) == 1 and survey.parts[rail.fed_by[0]].kind == "ic"}


def load_names(found: Iterable[Consumer]) -> dict[Consumer, str]:
    """What to call each consumer's load: its reference, with the net behind it where it draws from several."""
    nets_of: dict[str, int] = {}
    several = list(found)
    for consumer in several:
        nets_of[consumer.ref] = nets_of.get(consumer.ref, 0) + 1
    return {c: slug(c.ref) + (f"-{slug(_short(c.net), 'net')}" if nets_of[c.ref] > 1 else "") for c in several}


def _short(net: str) -> str:
    """A net's own name; of one that KiCad named after a pin, the pin."""
    return leaf(net) or net.rpartition("-")[2]


def load_entries(survey: Survey, netlist: Netlist, names: Mapping[Consumer, str]) -> Iterator[Entry]:
    """The entries of loads under their names."""
    for consumer, name in names.items():
        values = {"between": listed(consumer.between)} if consumer.between else {"net": scalar(consumer.net)}
        if consumer.back and (consumer.back not in survey.grounds or len(survey.grounds) > 1):
            values["return"] = scalar(consumer.back)
        if consumer.role == "motor":
            values["kind"] = "motor"
        value = netlist.parts[consumer.ref].value
        told = f"{consumer.ref} {value}: {consumer.because}" + ("; the current of a phase, as A rms" if consumer.between else "")
        yield entry(name, values | {"draws": BLANK}, told, names={consumer.ref, *consumer.nets})
