"""What every writer says in the same words: the verdict, a finding's numbers and place, the coverage."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence

from drc_power.findings.model import VERDICTS, Coverage, Finding, Result
from drc_power.findings.order import gravest_first
from drc_power.findings.verdict import overall_verdict, tally
from drc_power.text import NOT_KNOWN, si_apart

HEADLINES = {
    "exceeded": "limits exceeded",
    "unproven": "not shown to be safe",
    "close": "within limits, some of them close",
    "waived": "within limits except where waived",
    "met": "within all limits",
}

NEEDS_ACTION = ("exceeded", "unproven", "close")

READING_HELP = (
    "Found is the value at the worst corner of voltages, loads, tolerances and temperature. Allowed is the limit after "
    "house rules. Margin is the share of it that is left. Unproven means that a datum which the check needs is missing "
    "or that a model left its range: nothing says that such a part is safe."
)


def headline(result: Result) -> str:
    """The verdict of the run as a phrase."""
    return HEADLINES[overall_verdict(result)] if result.findings else "nothing was judged"


def tally_text(result: Result) -> str:
    """How many findings have each verdict: "1 exceeded, 2 unproven, 0 close, 0 waived, 31 met"."""
    return ", ".join(f"{count} {verdict}" for verdict, count in tally(result.findings).items())


def board_text(result: Result) -> str:
    """The board's name and revision, or its netlist where it has no name."""
    name = result.board_name or result.netlist or "unnamed board"
    return f"{name}, revision {result.board_revision}" if result.board_revision else name


def needs_action(result: Result) -> list[Finding]:
    """The findings that ask something of the reader, in the order they were found."""
    return [finding for finding in result.findings if finding.verdict in NEEDS_ACTION]


def grouped(findings: Iterable[Finding]) -> list[tuple[Finding, ...]]:
    """Findings that differ only in their mode together, the worst of each group first; groups the gravest first."""
    groups: dict[object, list[Finding]] = {}
    for finding in gravest_first(findings):
        groups.setdefault(_matter(finding), []).append(finding)
    return [tuple(group) for group in groups.values()]


def _matter(finding: Finding) -> object:
    """What a finding says apart from its mode; a finding without mode or subject stays by itself."""
    if not finding.mode or not (finding.ref or finding.net):
        return finding.id
    return (finding.verdict, finding.ref, finding.uuid, finding.net, finding.rule, finding.stress, finding.event,
            finding.quantity)


def other_modes(group: Sequence[Finding]) -> list[str]:
    """The modes of a group besides that of its worst finding."""
    return [finding.mode for finding in group[1:] if finding.mode]


def fails_run(finding: Finding, result: Result) -> bool:
    """Whether the finding alone makes the run fail."""
    return VERDICTS.index(finding.verdict) >= VERDICTS.index(result.fails_from)


def subject_text(finding: Finding) -> str:
    """The part's reference, else the net, else the board as a whole."""
    if finding.ref:
        return finding.ref
    return finding.net or "board"


def place_parts(finding: Finding) -> list[str]:
    """Mode, event and corner, as far as the finding has them."""
    return [name for name in (finding.mode, finding.event, finding.corner) if name]


def found_and_allowed(finding: Finding) -> tuple[str, str]:
    """Value and limit with units and enough digits to tell them apart; the limit says whether it is the least or most.

    Which one it is follows from the numbers alone: a value above its limit with a negative margin broke a maximum.
    """
    found, allowed = si_apart(finding.value, finding.allowed, finding.unit)
    return found, _LIMIT_SIGNS[_direction(finding)] + allowed


_LIMIT_SIGNS = {1: "≤ ", -1: "≥ ", 0: ""}


def _direction(finding: Finding) -> int:
    """1 for a maximum, −1 for a minimum, 0 where the numbers do not say."""
    if None in (finding.value, finding.allowed, finding.margin):
        return 0
    room, margin = finding.allowed - finding.value, finding.margin
    if not (math.isfinite(room) and math.isfinite(margin)) or not room or not margin:
        return 0
    return 1 if (room > 0.0) == (margin > 0.0) else -1


def margin_text(margin: float | None) -> str:
    """The margin in percent with one decimal; more where it would read as zero and is not; past ten times only that.

    >>> margin_text(-0.1389), margin_text(-0.00002), margin_text(-569.322), margin_text(None)
    ('-13.9 %', '-0.002 %', '< -999 %', '-')
    """
    if margin is None or not math.isfinite(margin):
        return NOT_KNOWN
    percent = 100.0 * margin
    if percent and abs(percent) < 0.05:
        return f"{percent:.1g} %"
    return "< -999 %" if percent < -999.0 else f"{percent + 0.0:.1f} %"


def coverage_text(coverage: Coverage) -> str:
    """One sentence on how much was judged."""
    elements, judged = coverage.elements, coverage.judged
    if not elements:
        return "No power elements were found."
    if judged == elements:
        return f"All {elements} power elements were judged." if elements > 1 else "The one power element was judged."
    return f"{judged} of {elements} power elements were judged."


def remarks(result: Result) -> list[str]:
    """The run's notes, and what a reader must know about its waivers."""
    undated = result.today is None and any(finding.verdict == "waived" for finding in result.findings)
    extra = ["The end dates of waivers were not judged, because the check was run without --today."] if undated else []
    return [*(note for note in result.notes if note.strip()), *extra]
