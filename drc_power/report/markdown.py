"""The result as a comment on a pull request, for people who did not run the tool."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Sequence
from typing import TypeVar

from drc_power.findings.model import VERDICTS, Finding, Result, Sensitivity, Step
from drc_power.findings.order import finding_key, gravest_first
from drc_power.findings.waiving import waiver_line
from drc_power.report.markdown_text import code, folded, prose, table_head, table_row
from drc_power.report.phrases import (
    READING_HELP,
    board_text,
    coverage_text,
    fails_run,
    found_and_allowed,
    grouped,
    headline,
    margin_text,
    needs_action,
    other_modes,
    place_parts,
    remarks,
    subject_text,
    tally_text,
)
from drc_power.text import NOT_KNOWN, natural_key, si

T = TypeVar("T")
Group = tuple[Finding, ...]

LIMIT_CHARS = 60_000
"""Comments may be no longer than this on the platforms that people use."""

_TABLE_SHARE, _REASONS_SHARE, _WAIVED_SHARE = 0.4, 0.7, 0.5
"""Of the room that is left at that point, how much each block may take; all parts get the rest."""

_LIST_CHARS = 4_000
_REMARKS_CHARS = 8_000
_FOLD_CHARS, _MORE_CHARS = 200, 80
_CORNER_CHARS = 80
_MOST_MODES = 8
_MOST_STEPS = 12
_MOST_SENSITIVITIES = 3


def to_markdown(result: Result, limit_chars: int = LIMIT_CHARS) -> str:
    """The result as Markdown, shorter than `limit_chars`: what does not fit is counted, and stands in the JSON.

    First one line with the verdict, then a table of what needs action, the gravest first, then the reasons and all
    parts, folded, then the coverage and the notes. limit_chars below 30,000 leaves no room for the fixed parts.
    """
    top = [_verdict_line(result), ""]
    bottom = [*_coverage_lines(result), "", *_remark_lines(result), f"<sub>{READING_HELP}</sub>", ""]
    room = limit_chars - _size(top) - _size(bottom) - 1
    groups = grouped(needs_action(result))
    table = _action_table(groups, int(_TABLE_SHARE * room))
    room -= _size(table)
    reasons = _reasons(groups, result, int(_REASONS_SHARE * room))
    room -= _size(reasons)
    waived = _waived(result, int(_WAIVED_SHARE * room))
    room -= _size(waived)
    return "\n".join([*top, *table, *reasons, *waived, *_all_parts(result, room), *bottom])


def _verdict_line(result: Result) -> str:
    board = f"{prose(board_text(result), 160)} ({code(result.netlist)}, {result.n_parts} parts, {result.n_nets} nets)"
    return f"**Power check: {headline(result)}** - {tally_text(result)} - {board}"


def _action_table(groups: Sequence[Group], room: int) -> list[str]:
    if not groups:
        return ["Nothing needs action.", ""]
    head = table_head(**{"Part": "left", "What": "left", "Found": "right", "Allowed": "right", "Margin": "right",
                         "Worst corner": "left"})
    return [*head, *_kept(groups, _action_row, room - _size(head), "finding", "\n", weight=len), ""]


def _action_row(group: Group) -> str:
    finding = group[0]
    found, allowed = found_and_allowed(finding)
    verdict = f"**{finding.verdict}**" if finding.verdict == "exceeded" else finding.verdict
    what = f"{verdict}: {prose(finding.quantity, 120)}"
    return table_row([code(subject_text(finding)), what, _number(found), _number(allowed),
                      margin_text(finding.margin), _place(finding, _CORNER_CHARS) + _also(group)])


def _also(group: Group) -> str:
    modes = ", ".join(prose(mode, _CORNER_CHARS) for mode in other_modes(group)[:_MOST_MODES])
    more = f" and {len(group) - 1 - _MOST_MODES} more modes" if len(group) - 1 > _MOST_MODES else ""
    return f"; also in {modes}{more}" if modes else ""


def _number(text: str) -> str:
    """A number with its unit; only the unit could be anything but plain."""
    return text if text == NOT_KNOWN else prose(text)


def _place(finding: Finding, limit: int = 160) -> str:
    return ", ".join(prose(part, limit) for part in place_parts(finding)) or NOT_KNOWN


def _reasons(groups: Sequence[Group], result: Result, room: int) -> list[str]:
    """Why each finding is as it is and what would help, folded."""
    if not groups:
        return []

    def entry(group: Group) -> str:
        return "\n".join(_reason(group, fails_run(group[0], result)))

    return folded("Why, and what would help", _kept(groups, entry, room - _FOLD_CHARS, "finding", weight=len))


def _waived(result: Result, room: int) -> list[str]:
    """What was waived, by whom and why, folded."""
    waived = gravest_first(finding for finding in result.findings if finding.verdict == "waived")
    if not waived:
        return []
    return folded("Waived", _kept(waived, _waived_line, room - _FOLD_CHARS, "finding"))


def _waived_line(finding: Finding) -> str:
    found, allowed = map(_number, found_and_allowed(finding))
    what = f"{code(subject_text(finding))} {prose(finding.quantity, 120)}, {finding.was}"
    return f"- {what}, found {found}, allowed {allowed} ({_place(finding)}): {prose(finding.text)}"


def _reason(group: Group, fails: bool) -> list[str]:
    finding, others = group[0], group[1 : 1 + _MOST_MODES]
    title = f"- **{code(subject_text(finding))} {prose(finding.quantity, 120)}: {finding.verdict}**"
    waivers = [(each, waiver_line(each)) for each in (finding, *others)] if fails else []
    lines = [
        f"{title} ({code(finding.rule)}, {_place(finding)})",
        f"  - {prose(finding.text)}" if finding.text else "",
        f"  - What would help: {prose(finding.remedy)}" if finding.remedy else "",
        f"  - What drives it: {_drivers(finding.sensitivity)}" if finding.sensitivity else "",
        *[f"  - {_step(step)}" for step in finding.workings[:_MOST_STEPS]],
        f"  - Written in {_written_in(finding)}" if finding.file else "",
        *[f"  - Also {_place(other)}: found {_number(si(other.value, other.unit))}, margin {margin_text(other.margin)}"
          for other in others],
        *[f"  - To waive it{_in_mode(each)}: {code(waiver, 200)}" for each, waiver in waivers if waiver],
    ]
    return [line for line in lines if line]


def _in_mode(finding: Finding) -> str:
    return f" in {prose(finding.mode, _CORNER_CHARS)}" if finding.mode else ""


def _written_in(finding: Finding) -> str:
    return code(finding.file, 80) + (f", line {finding.line}" if finding.line else "")


def _drivers(sensitivities: Iterable[Sensitivity]) -> str:
    strongest = sorted(sensitivities, key=lambda s: -abs(s.moves_by))[:_MOST_SENSITIVITIES]
    return ", ".join(f"{prose(s.name, 80)} over {prose(s.span, 80)} moves it by {_number(si(s.moves_by, s.unit))}"
                     for s in strongest)


def _step(step: Step) -> str:
    sides = [code(side, 120) for side in (step.symbol, step.formula, step.numbers) if side]
    source = f" ({prose(step.source, 160)})" if step.source else ""
    return f"{' = '.join([*sides, _number(si(step.value, step.unit))])}{source}"


def _all_parts(result: Result, room: int) -> list[str]:
    """Every part with findings on it, its gravest verdict and its least margin, folded."""
    by_ref: dict[str, list[Finding]] = {}
    for finding in sorted(result.findings, key=finding_key):
        if finding.ref:
            by_ref.setdefault(finding.ref, []).append(finding)
    if not by_ref:
        return []
    values = {part.ref: part.value for part in result.parts}
    head = table_head(**{"Part": "left", "Value": "left", "Verdict": "left", "Least margin": "right", "Of": "left"})

    def row(ref: str) -> str:
        return _part_row(ref, values.get(ref, ""), by_ref[ref])

    rows = _kept(list(by_ref), row, room - _size(head) - _FOLD_CHARS, "part", "\n")
    return folded("Every part with findings", [*head, *rows])


def _part_row(ref: str, value: str, findings: Sequence[Finding]) -> str:
    verdict = max((finding.verdict for finding in findings), key=VERDICTS.index)
    margins = [f for f in findings if f.margin is not None and not math.isnan(f.margin)]
    least = min(margins, key=lambda f: f.margin, default=None)
    of = f"{prose(least.quantity, 120)}, {_place(least)}" if least else NOT_KNOWN
    return table_row([code(ref), code(value) if value else NOT_KNOWN, verdict, margin_text(least and least.margin), of])


def _coverage_lines(result: Result) -> list[str]:
    coverage = result.coverage
    outside = sorted(coverage.outside, key=lambda o: natural_key(o.ref))
    sentences = [
        coverage_text(coverage),
        _listed("Unproven", sorted(coverage.unproven, key=natural_key), code),
        _listed("Left out by the annotation", outside, lambda o: f"{code(o.ref)} ({prose(o.because, 160)})"),
        _listed("Not fitted", sorted(coverage.not_fitted, key=natural_key), code),
    ]
    return [f"**Coverage.** {' '.join(filter(None, sentences))}"]


def _listed(title: str, items: Sequence[T], shown: Callable[[T], str]) -> str:
    names = _fitting(items, shown, _LIST_CHARS, separator=2)
    more = [f"and {len(items) - len(names)} more"] if len(names) < len(items) else []
    return f"{title}: {', '.join([*names, *more])}." if items else ""


def _remark_lines(result: Result) -> list[str]:
    notes = remarks(result)
    if not notes:
        return []
    return ["**Notes**", "", *_kept(notes, lambda note: f"- {prose(note)}", _REMARKS_CHARS, "note"), ""]


def _kept(items: Sequence[T], shown: Callable[[T], str], room: int, noun: str, gap: str = "",
          weight: Callable[[T], int] = lambda item: 1) -> list[str]:
    """As many items as fit in `room` characters, then how many more there are; `gap` ends a table first."""
    entries = _fitting(items, shown, room - _MORE_CHARS, separator=1)
    left = sum(map(weight, items[len(entries) :]))
    return [*entries, f"{gap}and {left} more {noun}{'s' if left > 1 else ''}, see the JSON"] if left else entries


def _fitting(items: Iterable[T], shown: Callable[[T], str], room: int, separator: int) -> list[str]:
    """The first items as text, none made in vain, as long as there is room for them."""
    entries = []
    for item in items:
        entry = shown(item)
        room -= len(entry) + separator
        if room < 0:
            break
        entries.append(entry)
    return entries


def _size(lines: Iterable[str]) -> int:
    return sum(len(line) + 1 for line in lines)
