"""What a revision changed, from the findings JSON of before (base) and after (head).

Parts are matched by UUID path, then by their symbol's own UUID (the part moved to another sheet), and only where
there is no UUID by reference. Findings are matched by id, then by what they say of matched parts. What is left over
is new or gone.
"""

from __future__ import annotations

import json
import math
from collections import Counter
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from drc_power.findings.model import VERDICTS
from drc_power.text import natural_key

Row = Mapping[str, Any]
Document = Mapping[str, Any]
Match = tuple[Row | None, Row | None]
Key = Any
KeyOf = Callable[[Row], Key]

MARGIN_THRESHOLD = 0.01
"""Change of a margin [1] below which a finding is as good as before."""

NAMES_OF_ROWS = ("name", "net", "limit", "rule", "ref")
"""The key that names a row of `rails`, `loads` or `rules`: the first of these that it has."""

_NOT_JUDGED = "not judged"
_COVERAGE_LISTS = (("unproven", "unproven"), ("outside", "outside"), ("not_fitted", "not fitted"))
_PLACES_IN_FILES = frozenset({"file", "line", "column", "where"})


@dataclass(frozen=True, slots=True)
class Pair:
    """One thing before and after."""

    base: Row
    head: Row


@dataclass(frozen=True, slots=True)
class RowChanges:
    """How a list of named rows changed."""

    added: tuple[str, ...]
    removed: tuple[str, ...]
    changed: tuple[tuple[str, str], ...]
    """Name of the row, and what changed in it as text."""

    def __bool__(self) -> bool:
        return bool(self.added or self.removed or self.changed)


@dataclass(frozen=True, slots=True)
class Standing:
    """A part whose place in the coverage changed: judged, unproven, outside, not fitted or not judged."""

    ref: str
    base: str
    head: str


@dataclass(frozen=True, slots=True)
class Comparison:
    """Everything that differs between two runs. Findings and parts are rows of the findings JSON."""

    base: Document
    head: Document
    new: tuple[Row, ...]
    gone: tuple[Row, ...]
    worse: tuple[Pair, ...]
    better: tuple[Pair, ...]
    newly_waived: tuple[Pair, ...]
    no_longer_waived: tuple[Pair, ...]
    reannotated: tuple[Pair, ...]
    moved: tuple[Pair, ...]
    sheets_renamed: tuple[tuple[str, str], ...]
    revalued: tuple[Pair, ...]
    parts_added: tuple[Row, ...]
    parts_removed: tuple[Row, ...]
    rails: RowChanges
    loads: RowChanges
    rules: RowChanges
    coverage_gained: tuple[Standing, ...]
    coverage_lost: tuple[Standing, ...]
    coverage_other: tuple[Standing, ...]


def compare(base: Document, head: Document, threshold: float = MARGIN_THRESHOLD) -> Comparison:
    """What changed from base to head, two documents as `report.json_writer.load_result` returns them.

    threshold: how far a margin must move [1] for a finding with the same verdict to be worse or better.
    """
    parts = match_parts(base["parts"], head["parts"])
    findings = _match_findings(base, head, parts)
    pairs = [Pair(before, after) for before, after in findings if before and after]
    part_pairs = [Pair(before, after) for before, after in parts if before and after]
    standings = _standings(base, head, part_pairs)
    return Comparison(
        base=base,
        head=head,
        new=tuple(after for before, after in findings if before is None),
        gone=tuple(before for before, after in findings if after is None),
        worse=tuple(p for p in pairs if _change(p, threshold) < 0),
        better=tuple(p for p in pairs if _change(p, threshold) > 0),
        newly_waived=tuple(p for p in pairs if _is_waived(p.head) and not _is_waived(p.base)),
        no_longer_waived=tuple(p for p in pairs if _is_waived(p.base) and not _is_waived(p.head)),
        reannotated=_differing(part_pairs, "ref"),
        moved=_differing(part_pairs, "uuid"),
        sheets_renamed=_sheets_renamed(part_pairs),
        revalued=_differing(part_pairs, "value", "device"),
        parts_added=tuple(after for before, after in parts if before is None),
        parts_removed=tuple(before for before, after in parts if after is None),
        rails=_row_changes(base["rails"], head["rails"]),
        loads=_row_changes(base["loads"], head["loads"]),
        rules=_row_changes(base["rules"], head["rules"]),
        coverage_gained=tuple(s for s in standings if s.head == "judged"),
        coverage_lost=tuple(s for s in standings if s.base == "judged"),
        coverage_other=tuple(s for s in standings if "judged" not in (s.base, s.head)),
    )


def match_parts(base: Sequence[Row], head: Sequence[Row]) -> list[Match]:
    """Every part of either side with its partner on the other, None where there is none."""
    return _match(base, head, [(key, key) for key in (_uuid_path, _own_uuid, _ref_without_uuid)])


def _uuid_path(part: Row) -> str | None:
    return part["uuid"] or None


def _own_uuid(part: Row) -> str | None:
    """The symbol's own UUID, without the sheets above it; shared by all copies of a sheet used more than once."""
    return (part["uuid"] or "").rpartition("/")[2] or None


def _ref_without_uuid(part: Row) -> str | None:
    return None if part["uuid"] else part["ref"]


def _match_findings(base: Document, head: Document, parts: Iterable[Match]) -> list[Match]:
    """Findings by id, then by what they say of matched parts or of a net of the same name."""
    partner = {(b["uuid"], b["ref"]): (h["uuid"], h["ref"]) for b, h in parts if b and h}

    def in_base(row: Row) -> Key:
        part = row["uuid"], row["ref"]
        return partner.get(part, part), _matter(row)

    def in_head(row: Row) -> Key:
        return (row["uuid"], row["ref"]), _matter(row)

    return _match(base["findings"], head["findings"], [(_id, _id), (in_base, in_head)])


def _id(finding: Row) -> str:
    return finding["id"]


def _matter(finding: Row) -> Key:
    return tuple(finding[name] for name in ("net", "rule", "stress", "mode", "event"))


def _match(base: Sequence[Row], head: Sequence[Row], keys: Iterable[tuple[KeyOf, KeyOf]]) -> list[Match]:
    """Pairs rows by each (base key, head key) in turn where one row on each side has it; the rest stay alone."""
    found: list[Match] = []
    left_base, left_head = list(base), list(head)
    for base_key, head_key in keys:
        before, after = _by_unique_key(left_base, base_key), _by_unique_key(left_head, head_key)
        both = [key for key in before if key in after]
        found += [(before[key], after[key]) for key in both]
        left_base = _without(left_base, [before[key] for key in both])
        left_head = _without(left_head, [after[key] for key in both])
    return found + [(row, None) for row in left_base] + [(None, row) for row in left_head]


def _by_unique_key(rows: Iterable[Row], key_of: KeyOf) -> dict[Key, Row]:
    """Rows by key, without those that have none (None) or share theirs."""
    keyed = [(key_of(row), row) for row in rows]
    count = Counter(key for key, _ in keyed)
    return {key: row for key, row in keyed if key is not None and count[key] == 1}


def _without(rows: Iterable[Row], taken: Iterable[Row]) -> list[Row]:
    gone = {id(row) for row in taken}
    return [row for row in rows if id(row) not in gone]


def underlying_verdict(finding: Row) -> str:
    """The verdict without regard to a waiver."""
    return finding["was"] or finding["verdict"]


def _is_waived(finding: Row) -> bool:
    return finding["verdict"] == "waived"


def _change(pair: Pair, threshold: float) -> float:
    """Positive where head is better than base: by verdict, else by margin past the threshold; 0 for as good."""
    before, after = (VERDICTS.index(underlying_verdict(row)) for row in (pair.base, pair.head))
    if before != after:
        return float(before - after)
    margins = pair.base["margin"], pair.head["margin"]
    if any(m is None or not math.isfinite(m) for m in margins):
        return 0.0
    change = margins[1] - margins[0]
    return change if abs(change) > threshold else 0.0


def _differing(pairs: Iterable[Pair], *names: str) -> tuple[Pair, ...]:
    return tuple(p for p in pairs if any(p.base[name] != p.head[name] for name in names))


def _sheets_renamed(pairs: Iterable[Pair]) -> tuple[tuple[str, str], ...]:
    """Names before and after of the sheets whose parts stayed in them."""
    stayed = [p for p in pairs if p.base["uuid"] == p.head["uuid"]]
    return tuple(sorted({(p.base["sheet"] or "", p.head["sheet"] or "") for p in _differing(stayed, "sheet")}))


def _standings(base: Document, head: Document, pairs: Iterable[Pair]) -> list[Standing]:
    """Parts on both sides whose place in the coverage differs, under head's reference.

    A reference that stands in no list of parts is taken for the same part where both sides speak of it.
    """
    before, after = _places(base), _places(head)
    listed = {part["ref"] for part in [*base["parts"], *head["parts"]]}
    refs = [(p.base["ref"], p.head["ref"]) for p in pairs]
    refs += [(ref, ref) for ref in before if ref in after and ref not in listed]
    standings = [Standing(h, before.get(b, _NOT_JUDGED), after.get(h, _NOT_JUDGED)) for b, h in refs]
    return sorted((s for s in standings if s.base != s.head), key=lambda s: natural_key(s.ref))


def _places(document: Document) -> dict[str, str]:
    """Where each part stands: what the coverage lists say, else judged if there is a finding on it."""
    places = {row["ref"]: "judged" for row in document["findings"] if row["ref"] is not None}
    for listed, place in _COVERAGE_LISTS:
        places |= dict.fromkeys(document["coverage"][listed], place)
    return places


def _row_changes(base: Iterable[Row], head: Iterable[Row]) -> RowChanges:
    before, after = ({_name_of(row): row for row in rows} for rows in (base, head))
    differing = [(name, _differences(before[name], after[name])) for name in before if name in after]
    return RowChanges(
        added=_sorted_names(after.keys() - before.keys()),
        removed=_sorted_names(before.keys() - after.keys()),
        changed=tuple(sorted((d for d in differing if d[1]), key=lambda d: natural_key(d[0]))),
    )


def _sorted_names(names: Iterable[str]) -> tuple[str, ...]:
    return tuple(sorted(names, key=natural_key))


def _name_of(row: Row) -> str:
    return next((str(row[key]) for key in NAMES_OF_ROWS if row.get(key)), _as_text(row))


def _differences(before: Row, after: Row) -> str:
    """`key old → new` for every key that differs; where a row was written is no difference."""
    keys = [key for key in before | after if key not in _PLACES_IN_FILES]
    return ", ".join(
        f"{key} {_as_text(before.get(key))} → {_as_text(after.get(key))}"
        for key in keys if before.get(key) != after.get(key)
    )


def _as_text(value: Any) -> str:
    return value if isinstance(value, str) else json.dumps(value, ensure_ascii=False, sort_keys=True)
