"""Rails: what each net is fed by decides what a user has to say of it; voltages are left blank, guesses are remarks."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from drc_power.draft.alternating import AlternatingRail, alternating_rails, feeds_a_transformer
from drc_power.draft.loads import chip_rails
from drc_power.draft.writing import BLANK, Entry, commented, entry, listed, scalar
from drc_power.intake.not_built import NOT_BUILT
from drc_power.netlist.model import Netlist
from drc_power.survey.model import Rail, Survey

REGULATORS = frozenset({"linear-regulator", "switching-regulator"})


def rail_entries(survey: Survey, netlist: Netlist, is_known: Callable[[str], bool], with_hints: bool) -> Iterator[Entry]:
    """An entry for each net that a source feeds, for each that alternates, then for each rail that the survey found.

    Those that are known are left out. `with_hints`: with comments on the rails that need no entry.
    """
    made = {rail.net: _alternating(rail) for rail in alternating_rails(survey, netlist)}
    sources: dict[str, list[str]] = {}
    for e in survey.elements:
        if e.group == "source" and e.ref not in sources.setdefault(e.to_net, []):
            sources[e.to_net].append(e.ref)
    rails = {rail.net: rail for rail in survey.rails}
    alternating = {net for rail in alternating_rails(survey, netlist) for net in (rail.net, rail.back)}
    made |= {net: _from_outside(survey, net, refs, rails.get(net)) for net, refs in sources.items() if net not in alternating}
    made |= {net: _held(survey, rail) for net, rail in rails.items() if net not in made and net not in alternating}
    for net, each in made.items():
        if not is_known(net) and (with_hints or not each.is_comment or not each.can_be_written):
            yield each


def _alternating(rail: AlternatingRail) -> Entry:
    values = {"ac": BLANK, "frequency": BLANK} | ({"source": scalar(rail.source)} if rail.source else {})
    values |= {"return": scalar(rail.back)} if rail.back else {}
    if NOT_BUILT["annotations"].get("rails.*.ac"):
        return commented(rail.net, values, "alternating voltage is not supported yet", names={rail.net})
    return entry(rail.net, values, "rms voltage", names={rail.net})


def _from_outside(survey: Survey, net: str, refs: list[str], rail: Rail | None) -> Entry:
    back = {e.from_net for e in survey.elements if e.group == "source" and e.to_net == net} - {*survey.grounds, ""}
    values = {"voltage": BLANK, "source": listed(refs)}
    if len(back) == 1:
        values["return"] = scalar(back.pop())
    if transformer := feeds_a_transformer(survey, net):
        return commented(net, values, f"feeds {transformer.ref}: give the voltage of its secondary instead", names={net})
    return entry(net, values, _guess(rail), names={net})


def _held(survey: Survey, rail: Rail) -> Entry:
    """A rail that something on the board feeds: a regulator holds it, a chip makes it, or it is only passed on."""
    kinds = {ref: survey.parts[ref].kind for ref in rail.fed_by}
    holders = [ref for ref, kind in kinds.items() if kind in REGULATORS]
    values = {"voltage": BLANK}
    if len(holders) == 1:
        return entry(rail.net, values | {"held_by": scalar(holders[0])}, _guess(rail), names={rail.net})
    if holders:
        return entry(rail.net, values, _guess(rail), f"{' and '.join(holders)} both drive it: add held_by: PART", names={rail.net})
    if maker := chip_rails(survey).get(rail.net):
        return _made(survey, rail, maker)
    if _is_converted(survey, rail):
        return entry(rail.net, values, _guess(rail), f"held by a converter through {', '.join(rail.fed_by)}", names={rail.net})
    if rail.fed_by:
        fed = f"solved, fed through {', '.join(rail.fed_by)}: give a voltage only if something else holds it"
        return commented(rail.net, values, fed, _guess(rail), names={rail.net})
    return entry(rail.net, values, _guess(rail), "nothing was found that feeds it: add source: PART or held_by: PART", names={rail.net})


def _made(survey: Survey, rail: Rail, maker: str) -> Entry:
    """A rail that a chip makes: like one from outside for those who use it, of no concern where only the chip does."""
    used = any(rail.net in (e.from_net, e.to_net) and e.ref != maker for e in survey.elements)
    values = {"voltage": BLANK, "source": scalar(maker)}
    if not used:
        return commented(rail.net, values, f"made and used inside {maker} alone", _guess(rail), names={rail.net})
    return entry(rail.net, values, _guess(rail), f"made inside {maker}: count what it gives as a load of {maker}'s own supply too", names={rail.net})


def _is_converted(survey: Survey, rail: Rail) -> bool:
    """Whether the rail is the output of a converter whose switches stand outside a chip."""
    converters = [stage for stage in survey.stages if stage.kind in ("buck", "boost")]
    return any(set(rail.fed_by) & {ref for refs in stage.parts.values() for ref in refs} for stage in converters)


def _guess(rail: Rail | None) -> str:
    return f"guess: {rail.voltage_v:g} V ({rail.because})" if rail and rail.voltage_v is not None else ""
