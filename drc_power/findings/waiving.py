"""What a team decided to live with, and for how long.

A waiver accepts one number of one finding until one day. It never hides that the number got worse, that the day has
passed, or that the thing it was for is gone: each of those yields a `rules.waiver` finding beside the finding itself,
which then counts again. Those extra findings are `close`: the finding that lost its cover fails the run by its own
verdict, counting it twice would not; and a waiver that nothing needs is untidy, not unsafe.
"""

from __future__ import annotations

import datetime
import math
from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

from drc_power.findings.identity import finding_id, named_subject
from drc_power.findings.model import Finding
from drc_power.findings.verdict import EQUAL_WITHIN
from drc_power.text import si, si_apart

WORSE_BY = 0.02
"""Share of the margin's scale by which a value may pass the waived one before the waiver stops to count."""

RULE = "rules.waiver"

_WAIVABLE = ("exceeded", "unproven", "close")


@dataclass(frozen=True, slots=True)
class Waiver:
    """One line of a waivers file. `value` is in SI units (°C), `until` an ISO date, inclusive.

    `unit` is the SI unit that the value was given in; None where nobody knows, and then it is taken to be right.
    """

    finding: str
    because: str
    by: str
    until: str
    value: float
    file: str = ""
    line: int = 0
    unit: str | None = None


def apply_waivers(findings: Iterable[Finding], waivers: Sequence[Waiver], today: str | None) -> tuple[Finding, ...]:
    """The findings with waivers applied, and one more `rules.waiver` finding per waiver that does not count.

    today: ISO date, or None where the run knows no date; then no waiver is out of date.
    A waived finding keeps its verdict as `was`, and its text says who waived it and why. The order of the findings
    stays; extra findings follow.
    """
    findings = tuple(findings)
    named: dict[str, list[Finding]] = {}
    for finding in findings:
        named.setdefault(finding.id, []).append(finding)
    waived: dict[str, Waiver] = {}
    reports = []
    lines_so_far: Counter[str] = Counter()
    for waiver in waivers:
        lines_so_far[waiver.finding] += 1
        reason = why_not(named.get(waiver.finding, []), waiver, today)
        if reason:
            subject = next(iter(named.get(waiver.finding, [])), None)
            reports.append(_report(waiver, lines_so_far[waiver.finding], reason, subject))
        else:
            waived[waiver.finding] = waiver
    return tuple(_waive(f, waived[f.id]) if f.id in waived else f for f in findings) + tuple(reports)


def why_not(findings: Sequence[Finding], waiver: Waiver, today: str | None) -> str:
    """Why the waiver does not count for the findings that bear its id, as the rest of a sentence; "" if it does."""
    if not findings:
        return "names no finding of this run: what it was for is gone, or its id is mistyped"
    if len(findings) > 1:
        return f"names {len(findings)} findings at once, because their parts share one UUID"
    finding = findings[0]
    if finding.verdict not in _WAIVABLE:
        return f"is no longer needed: the finding is {finding.verdict}"
    if today and datetime.date.fromisoformat(waiver.until) < datetime.date.fromisoformat(today):
        return f"ended on {waiver.until}"
    if not _is_number(finding.value):
        return "accepts a value, but the finding has none to hold against it"
    if waiver.unit not in (None, finding.unit):
        return f"accepts a value in {waiver.unit or 'no unit'}, but the finding's is in {finding.unit or 'no unit'}"
    if not worse_by(finding, waiver.value) <= WORSE_BY + EQUAL_WITHIN:
        granted, now = si_apart(waiver.value, finding.value, finding.unit)
        return f"was granted for {granted}; the value is now {now}"
    return ""


def worse_by(finding: Finding, waived_value: float) -> float:
    """How far the finding's value is past the waived one, as a share of the margin's scale [1]; negative if better.

    The scale is what the finding's own margin was divided by, so it is (value − allowed)/margin. Where the finding has
    no margin, or a margin of 0, neither scale nor direction is known: then every departure counts as worse. A margin of
    −1 that stands for "no meaning" gives the excess itself as scale, which is the stricter reading.
    """
    change = finding.value - waived_value
    if not (_is_number(finding.allowed) and _is_number(finding.margin) and finding.margin):
        scale = abs(finding.allowed if _is_number(finding.allowed) else waived_value)
        return _share(abs(change), scale)
    room = finding.allowed - finding.value
    rises_to_limit = (room < 0.0) == (finding.margin < 0.0)
    return _share(change if rises_to_limit else -change, abs(room / finding.margin))


def waiver_line(finding: Finding) -> str:
    """The line to paste into a waivers file; what only people know stands in capitals. "" where no value is known."""
    if finding.verdict not in _WAIVABLE or finding.rule == RULE or not _is_number(finding.value):
        return ""
    value = si(finding.value, finding.unit)
    return f"- {{finding: {finding.id}, because: REASON, by: NAME, until: YYYY-MM-DD, value: {value}}}"


def _share(change: float, scale: float) -> float:
    if scale:
        return change / scale
    return math.copysign(math.inf, change) if change else 0.0


def _is_number(value: float | None) -> bool:
    return value is not None and math.isfinite(value)


def _waive(finding: Finding, waiver: Waiver) -> Finding:
    """The finding as waived; its text ends with who decided so, until when and why."""
    decision = f"Waived by {waiver.by} until {waiver.until}: {waiver.because}"
    text = f"{finding.text} {decision}".lstrip()
    return replace(finding, verdict="waived", was=finding.verdict, text=text)


def _report(waiver: Waiver, nth: int, reason: str, subject: Finding | None) -> Finding:
    """The `rules.waiver` finding for the `nth` line on one id; it stands beside the finding it was meant for."""
    name = waiver.finding if nth == 1 else f"{waiver.finding} ({nth})"
    return Finding(
        id=finding_id(named_subject("waiver", name), rule=RULE),
        rule=RULE, stress=None, verdict="close", was=None,
        ref=subject and subject.ref, uuid=subject and subject.uuid, sheet=subject and subject.sheet,
        net=subject and subject.net, mode=subject and subject.mode, event=subject and subject.event,
        corner=None, quantity="waiver", value=None, allowed=None, rated=None, unit="", margin=None,
        text=f"The waiver of {waiver.finding} by {waiver.by} does not count: it {reason}.",
        remedy="Delete the line, or grant it anew with the present value and a new date.",
        file=waiver.file, line=waiver.line,
    )
