"""Rails: what each net is fed by decides what a user has to say of it; voltages are left blank, guesses are remarks."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from drc_power.draft.loads import chip_rails
from drc_power.draft.writing import BLANK, Entry, commented, entry, listed, scalar
from drc_power.intake.not_built import NOT_BUILT
from drc_power.survey.model import Rail, Survey

REGULATORS = frozenset({"linear-regulator", "switching-regulator"})
_ALTERNATING = frozenset({"transformer", "bridge"})


def rail_entries(survey: Survey, is_known: Callable[[str], bool], with_hints: bool) -> Iterator[Entry]:
    """An entry for each net that a source feeds, then for each rail that the survey found, without those that are known.

    `with_hints`: with comments on the rails that need no entry.
    """
    sources: dict[str, list[str]] = {}
    for e in survey.elements:
        if e.group == "source" and e.ref not in sources.setdefault(e.to_net, []):
            sources[e.to_net].append(e.ref)
    rails = {rail.net: rail for rail in survey.rails}
    for net in dict.fromkeys((*sources, *rails)):
        made = _from_outside(survey, net, sources[net], rails.get(net)) if net in sources else _held(survey, rails[net])
        if not is_known(net) and (with_hints or not made.is_comment or not made.can_be_written):
            yield made


def _from_outside(survey: Survey, net: str, refs: list[str], rail: Rail | None) -> Entry:
    back = {e.from_net for e in survey.elements if e.group == "source" and e.to_net == net} - {*survey.grounds, ""}
    values = {"voltage": BLANK, "source": listed(refs)}
    if len(back) == 1:
        values["return"] = scalar(back.pop())
    if any(e.role in _ALTERNATING and e.from_net == net for e in survey.elements):
        values = {"ac": BLANK, "frequency": BLANK} | {key: value for key, value in values.items() if key != "voltage"}
        if NOT_BUILT["annotations"].get("rails.*.ac"):
            return commented(net, values, "alternating voltage is not supported yet", names={net})
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
