"""The result as a short table for the terminal."""

from __future__ import annotations

from collections.abc import Sequence

from drc_power.findings.model import Finding, Result
from drc_power.findings.verdict import tally
from drc_power.findings.waiving import waiver_line
from drc_power.report.phrases import (
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
)
from drc_power.text import cut, display_width, fit, natural_key, pad, printable, wrapped

MOST_ROWS = 40
MOST_WAIVER_LINES = 3
_MOST_NAMES = 12
_MOST_REASON_LINES, _MOST_NOTE_LINES = 2, 4
_NARROWEST = 60
_INDENT = " " * 10
_GAP = "  "
_PART_WIDTH, _NUMBER_WIDTH, _LEAST_WHAT_WIDTH = 16, 18, 8

_COLOURS = {"exceeded": "1;31", "unproven": "35", "close": "33", "waived": "36", "met": "32", "dim": "2"}


def to_table(result: Result, width: int = 100, colour: bool = False) -> str:
    """The result as text of at most `width` columns (60 at least; a line to paste stays whole), a newline at the end.

    What needs action comes first, the gravest on top, one row for all modes of the same matter, and below it the worst
    corner or, where nothing could be judged, the reason; then how many findings have each verdict, the coverage and
    the notes. Colour is only added where asked for, and no meaning rests on it.
    """
    width = max(width, _NARROWEST)
    paint = _Paint(colour)
    groups = grouped(needs_action(result))
    blocks = [
        _title(result, width, paint),
        _table(groups[:MOST_ROWS], width, paint),
        _more(sum(map(len, groups[MOST_ROWS:]))),
        _summary(result, width, paint),
        _waiver_lines([finding for group in groups for finding in group if fails_run(finding, result)], paint),
    ]
    return "\n\n".join("\n".join(block) for block in blocks if block) + "\n"


class _Paint:
    """Wraps text in a colour, or leaves it alone."""

    def __init__(self, colour: bool) -> None:
        self._colour = colour

    def __call__(self, name: str, text: str) -> str:
        return f"\x1b[{_COLOURS[name]}m{text}\x1b[0m" if self._colour and text else text


def _title(result: Result, width: int, paint: _Paint) -> list[str]:
    verdict = headline(result)
    board = fit(printable(board_text(result)), width - len(verdict) - len(_GAP))
    gap = " " * (width - display_width(board) - len(verdict))
    gravest = next((name for name, count in tally(result.findings).items() if count), "unproven")
    return [board + gap + paint(gravest, verdict), paint("dim", "─" * width)]


def _table(groups: Sequence[Sequence[Finding]], width: int, paint: _Paint) -> list[str]:
    rows = [_cells(group[0]) for group in groups]
    widths = _column_widths(rows, width)
    lines = []
    for group, cells in zip(groups, rows):
        part, what, *numbers = (fit(cell, limit) for cell, limit in zip(cells, widths))
        texts = [pad(part, widths[0]), pad(what, widths[1])]
        texts += [pad(number, limit, right=True) for number, limit in zip(numbers, widths[2:])]
        verdict = group[0].verdict
        lines.append(paint(verdict, pad(verdict, 8)) + _GAP + _GAP.join(texts).rstrip())
        lines += [paint("dim", _INDENT + line) for line in _lines_below(group, width - len(_INDENT))]
    return lines


def _cells(finding: Finding) -> list[str]:
    found, allowed = found_and_allowed(finding)
    texts = subject_text(finding), finding.quantity, found, allowed, margin_text(finding.margin)
    return [printable(text) for text in texts]


def _column_widths(rows: Sequence[Sequence[str]], width: int) -> list[int]:
    """As wide as the widest cell up to a limit; what is left of the line goes to the quantity's name."""
    limits = _PART_WIDTH, width, _NUMBER_WIDTH, _NUMBER_WIDTH, _NUMBER_WIDTH
    widths = [max(3, min(limit, max(map(display_width, column)))) for limit, column in zip(limits, zip(*rows))]
    if widths:
        others = sum(widths) - widths[1] + len(_INDENT) + 4 * len(_GAP)
        widths[1] = max(_LEAST_WHAT_WIDTH, min(widths[1], width - others))
    return widths


def _lines_below(group: Sequence[Finding], width: int) -> list[str]:
    """Where it is worst; for what could not be judged, why, on two lines at most."""
    worst = group[0]
    if worst.text and (worst.verdict == "unproven" or worst.value is None):
        return wrapped(worst.text, width, _MOST_REASON_LINES)
    also = f"; also in {', '.join(other_modes(group))}" if len(group) > 1 else ""
    also = fit(printable(also), width // 2)
    place = cut(printable(", ".join(place_parts(worst))), width - display_width(also))
    return [place + also] if place + also else []


def _more(n_left: int) -> list[str]:
    return [f"and {n_left} more finding{'s' if n_left > 1 else ''}, see the JSON"] if n_left > 0 else []


def _summary(result: Result, width: int, paint: _Paint) -> list[str]:
    counts = tally(result.findings).items()
    verdicts = "   ".join(paint(name if count else "dim", f"{count} {name}") for name, count in counts)
    sentences = [_coverage(result), *remarks(result)]
    return [verdicts, *[line for sentence in sentences for line in wrapped(sentence, width, _MOST_NOTE_LINES)]]


def _coverage(result: Result) -> str:
    coverage = result.coverage
    lists = {
        "Unproven": coverage.unproven,
        "Left out": [outside.ref for outside in coverage.outside],
        "Not fitted": coverage.not_fitted,
    }
    sentences = [f"{title}: {_listed(refs)}." for title, refs in lists.items() if refs]
    return " ".join([coverage_text(coverage), *sentences])


def _listed(refs: Sequence[str]) -> str:
    shown = [fit(printable(ref), _PART_WIDTH) for ref in sorted(refs, key=natural_key)[:_MOST_NAMES]]
    more = [f"and {len(refs) - len(shown)} more"] if len(refs) > len(shown) else []
    return ", ".join([*shown, *more])


def _waiver_lines(findings: Sequence[Finding], paint: _Paint) -> list[str]:
    """Lines to paste for the gravest of the findings that fail the run; the Markdown has them all."""
    lines = [line for line in map(waiver_line, findings) if line][:MOST_WAIVER_LINES]
    return [paint("dim", "To accept a finding, add its line to the waivers file:"), *lines] if lines else []
