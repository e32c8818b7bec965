"""What a revision changed, as Markdown for a comment and as text for the terminal.

Both say the same: the comparison becomes sections of plain rows first, and each writer lays those out in its own way.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from drc_power.findings.compare import Comparison, Pair, Row, RowChanges, Standing
from drc_power.findings.model import Finding
from drc_power.report.markdown_text import code, folded, prose, table_head, table_row
from drc_power.report.phrases import (
    HEADLINES,
    NEEDS_ACTION,
    found_and_allowed,
    grouped,
    margin_text,
    other_modes,
    place_parts,
    subject_text,
)
from drc_power.text import NOT_KNOWN, cut, display_width, fit, natural_key, pad, printable, wrapped

MOST_ROWS = 12
_MOST_NAMES = 24
_NARROWEST = 60
_CELL_WIDTH = 44
_NAME_CHARS, _CORNER_CHARS = 80, 80
_MOST_CHANGE_LINES = 4


@dataclass(frozen=True, slots=True)
class Section:
    """A table under a title. The first cell of a row is a name. `more` says what is not listed."""

    title: str
    columns: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    more: str = ""
    open: bool = True


def comparison_markdown(comparison: Comparison) -> str:
    """The comparison as Markdown: a line that says which way it went, then what is new and worse, then the rest."""
    lines = [f"**Power check compared: {_direction(comparison)}** - {prose(_verdicts(comparison), 200)}", ""]
    for section in _sections(comparison):
        table = _markdown_table(section)
        body = [*table, *([""] if table and section.more else []), *([section.more] if section.more else [])]
        lines += [f"**{section.title}**", "", *body, ""] if section.open else folded(section.title, body)
    changes = _board_changes(comparison).items()
    lines += [f"- {title}: {_listed([code(name, _NAME_CHARS) for name in names])}" for title, names in changes]
    return "\n".join(lines).rstrip("\n") + "\n"


def comparison_table(comparison: Comparison, width: int = 100, colour: bool = False) -> str:
    """The comparison as text of at most `width` columns (60 at least), a newline at the end."""
    width = max(width, _NARROWEST)
    bold = ("\x1b[1m", "\x1b[0m") if colour else ("", "")
    lines = [fit(printable(f"{_direction(comparison)}: {_verdicts(comparison)}"), width)]
    for section in _sections(comparison):
        lines += ["", f"{bold[0]}{section.title}{bold[1]}", *_text_table(section, width)]
        lines += [fit(section.more, width)] if section.more else []
    changes = _board_changes(comparison).items()
    lines += [""] if changes else []
    for title, names in changes:
        lines += wrapped(f"{title}: {_listed(names)}", width, _MOST_CHANGE_LINES)
    return "\n".join(lines) + "\n"


def _direction(comparison: Comparison) -> str:
    """Which way the revision went: worse as soon as anything that needs action is new or worse."""
    new = [row for row in comparison.new if row["verdict"] in NEEDS_ACTION]
    if new or any(pair.head["verdict"] in NEEDS_ACTION for pair in comparison.worse) or comparison.coverage_lost:
        return "something got worse"
    gone = [row for row in comparison.gone if row["verdict"] in NEEDS_ACTION]
    if gone or comparison.better or comparison.coverage_gained:
        return "better"
    return "as good as before"


def _verdicts(comparison: Comparison) -> str:
    base, head = (HEADLINES.get(str(side.get("verdict")), "no verdict") for side in (comparison.base, comparison.head))
    board = comparison.head["board"]
    name = board["name"] or board["netlist"] or "unnamed board"
    revisions = [side["board"]["revision"] or "?" for side in (comparison.base, comparison.head)]
    return f"{name}, revision {revisions[0]} to {revisions[1]}: {base} → {head}"


def _sections(comparison: Comparison) -> list[Section]:
    """The tables that have something to show, what needs action first."""
    sections = [
        _pairs_section("Worse", comparison.worse, "head"),
        _rows_section("New", comparison.new),
        _pairs_section("No longer waived", comparison.no_longer_waived, "head"),
        _standings_section("Coverage lost", comparison.coverage_lost),
        _pairs_section("Better", comparison.better, "base", open=False),
        _rows_section("Gone", comparison.gone, open=False),
        _pairs_section("Newly waived", comparison.newly_waived, "base", open=False),
        _standings_section("Coverage gained", comparison.coverage_gained, open=False),
        _standings_section("Coverage otherwise changed", comparison.coverage_other, open=False),
    ]
    return [section for section in sections if section.rows or section.more]


def _pairs_section(title: str, pairs: Iterable[Pair], side: str, open: bool = True) -> Section:
    """Findings on both sides; those that need no action on the given side are only counted."""
    both = [(as_finding(pair.base), as_finding(pair.head)) for pair in pairs]
    deciding = 0 if side == "base" else 1
    partners = {id(pair[deciding]): pair for pair in both}
    shown = [pair[deciding] for pair in both if pair[deciding].verdict in NEEDS_ACTION]
    rows = [_pair_row(*partners[id(group[0])], other_modes(group)) for group in grouped(shown)]
    return _section(title, _FINDING_COLUMNS, rows, len(both) - len(shown), open)


def _rows_section(title: str, findings: Iterable[Row], open: bool = True) -> Section:
    """Findings on one side; those that need no action are only counted."""
    findings = [as_finding(row) for row in findings]
    shown = [finding for finding in findings if finding.verdict in NEEDS_ACTION]
    rows = [_row(group[0], other_modes(group)) for group in grouped(shown)]
    return _section(title, _FINDING_COLUMNS, rows, len(findings) - len(shown), open)


def _standings_section(title: str, standings: Iterable[Standing], open: bool = True) -> Section:
    return _section(title, ("Part", "Before", "Now"), [(s.ref, s.base, s.head) for s in standings], 0, open)


_FINDING_COLUMNS = ("Part", "What", "Verdict", "Found", "Allowed", "Margin", "Worst corner")


def _section(title: str, columns: Sequence[str], rows: Sequence[tuple[str, ...]], n_quiet: int, open: bool) -> Section:
    n_cut = max(0, len(rows) - MOST_ROWS)
    more = [f"{n_cut} more in the JSON"] if n_cut else []
    more += [f"{n_quiet} that need{'s' if n_quiet == 1 else ''} no action"] if n_quiet else []
    listed = tuple(rows[:MOST_ROWS])
    return Section(title, tuple(columns), listed, f"and {' and '.join(more)}" if more else "", open and bool(rows))


def as_finding(row: Row) -> Finding:
    """What the writers need of a row of the findings JSON, as a record."""
    names = ("id", "rule", "stress", "verdict", "was", "ref", "uuid", "net", "mode", "event", "corner", "quantity",
             "value", "allowed", "unit", "margin", "text")
    return Finding(sheet=None, rated=None, remedy="", **{name: row[name] for name in names})


def _row(finding: Finding, also: Sequence[str] = ()) -> tuple[str, ...]:
    place = cut(", ".join(place_parts(finding)), _CORNER_CHARS) + (f"; also in {', '.join(also)}" if also else "")
    return (subject_text(finding), finding.quantity, finding.verdict, *found_and_allowed(finding),
            margin_text(finding.margin), place)


def _pair_row(base: Finding, head: Finding, also: Sequence[str] = ()) -> tuple[str, ...]:
    """The row of head, with what it was before where that differs. The limit shown is head's."""
    before, now = _row(base), _row(head, also)
    part, what, _, _, allowed, _, place = now
    verdict, found, margin = (_arrow(before[i], now[i]) for i in (2, 3, 5))
    return part, what, verdict, found, allowed, margin, place


def _arrow(before: str, now: str) -> str:
    return now if before == now else f"{before} → {now}"


def _board_changes(comparison: Comparison) -> dict[str, list[str]]:
    """What changed on the board and in the annotation: for each kind of change that there is, the things changed."""
    changes = {
        "Parts added": [_named(part, "value") for part in comparison.parts_added],
        "Parts removed": [_named(part, "value") for part in comparison.parts_removed],
        "Value or device changed": [_changed(pair, "value", "device") for pair in comparison.revalued],
        "Re-annotated": [_arrow(pair.base["ref"], pair.head["ref"]) for pair in comparison.reannotated],
        "Moved": [f"{pair.head['ref']} ({_changed_from(pair, 'sheet')})" for pair in comparison.moved],
        "Sheets renamed": [_arrow(*names) for names in comparison.sheets_renamed],
        **_row_changes("Rails", comparison.rails),
        **_row_changes("Loads", comparison.loads),
        **_row_changes("Rules", comparison.rules),
    }
    return {title: sorted(names, key=natural_key) for title, names in changes.items() if names}


def _row_changes(kind: str, changes: RowChanges) -> dict[str, list[str]]:
    return {
        f"{kind} added": list(changes.added),
        f"{kind} removed": list(changes.removed),
        f"{kind} changed": [f"{name} ({what})" for name, what in changes.changed],
    }


def _named(part: Row, name: str) -> str:
    return f"{part['ref']} ({part[name]})" if part[name] else part["ref"]


def _changed(pair: Pair, *names: str) -> str:
    """The part under its present reference, and what changed in it."""
    return f"{pair.head['ref']} ({', '.join(_changed_from(pair, name) for name in names if _differs(pair, name))})"


def _differs(pair: Pair, name: str) -> bool:
    return pair.base[name] != pair.head[name]


def _changed_from(pair: Pair, name: str) -> str:
    return _arrow(pair.base[name] or NOT_KNOWN, pair.head[name] or NOT_KNOWN)


def _listed(names: Sequence[str]) -> str:
    more = [f"and {len(names) - _MOST_NAMES} more"] if len(names) > _MOST_NAMES else []
    return ", ".join([*names[:_MOST_NAMES], *more])


def _markdown_table(section: Section) -> list[str]:
    if not section.rows:
        return []
    head = table_head(**dict.fromkeys(section.columns, "left"))
    return [*head, *[table_row([code(row[0]), *[_cell(text) for text in row[1:]]]) for row in section.rows]]


def _cell(text: str) -> str:
    return prose(text, 160) if text and text != NOT_KNOWN else NOT_KNOWN


def _text_table(section: Section, width: int) -> list[str]:
    """Rows in columns; the last column takes what is left of the line."""
    rows = [[fit(printable(cell), _CELL_WIDTH) for cell in row] for row in section.rows]
    widths = [max(map(display_width, column)) for column in zip(*rows)]
    lines = ["  ".join(pad(cell, w) for cell, w in zip(row, widths)).rstrip() for row in rows]
    return [cut(line, width) for line in lines]
