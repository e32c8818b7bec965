"""Kinds of parts, the nets that they conduct between, and the phases of a three-phase bridge."""

from __future__ import annotations

from collections.abc import Sequence

from drc_power.netlist.model import Netlist
from drc_power.survey.model import Stage, Survey

SWITCHES = frozenset({"mosfet", "bjt", "igbt"})
DIODES = frozenset({"diode", "led"})
_ENDS = ("drain", "source", "collector", "emitter", "anode", "cathode", "a", "b")


class Wiring:
    """The survey's parts on the netlist's nets."""

    def __init__(self, survey: Survey, netlist: Netlist) -> None:
        self.survey, self.netlist = survey, netlist

    def of(self, refs: Sequence[str], kinds: frozenset[str]) -> list[str]:
        """Those of some parts that are of a kind."""
        return [ref for ref in refs if self.survey.parts[ref].kind in kinds]

    def switches(self, refs: Sequence[str]) -> list[str]:
        """Those of some parts that switch."""
        return self.of(refs, SWITCHES)

    def carries_back(self, refs: Sequence[str]) -> bool:
        """Whether parts side by side carry a current in both directions: by a diode, or by being MOSFETs."""
        return bool(self.of(refs, DIODES)) or len(self.of(refs, frozenset({"mosfet"}))) == len(refs)

    def nets(self, ref: str) -> frozenset[str]:
        """The nets at the ends of a part, all of them where nothing says which pins they are."""
        part, terminals = self.netlist.parts[ref], self.survey.parts[ref].terminals
        ends = [nets[0] for name in _ENDS if (nets := part.nets_of(*terminals.get(name, ("",))))]
        return frozenset(ends or part.nets_of())

    def phases(self, stage: Stage) -> tuple[str, ...]:
        """The three nets that a bridge of MOSFETs drives, each by one side high and one low; () if there are not three.

        The low parts lead to one net, or have a shunt each.
        """
        high, low, shunts = (stage.parts.get(key, ()) for key in ("high", "low", "shunts"))
        above, below = ({net for ref in refs for net in self.nets(ref)} for refs in (high, low))
        phases = tuple(sorted(above & below))
        feet = below - set(phases)
        by_phase = all(len(self.nets(ref) & set(phases)) == 1 for ref in (*high, *low))
        complete = len(phases) == 3 and by_phase and len(self.of((*high, *low), frozenset({"mosfet"}))) == len(high) + len(low)
        return phases if complete and (len(feet) == 1 or len(feet) <= len(shunts)) else ()
