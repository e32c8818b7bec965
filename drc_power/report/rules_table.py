"""The limits in force as a table: what each says, where it was written, what it overrode, how many parts it is for."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

from drc_power.text import display_width, pad, printable

COLUMNS = ("limit", "stress", "says", "parts", "written", "source")


def rules_text(rows: Iterable[Mapping[str, Any]]) -> str:
    """One line per limit, columns as wide as their widest entry."""
    table = [COLUMNS, *(tuple(printable(str(row[name])) for name in COLUMNS) for row in rows)]
    widths = [max(display_width(row[k]) for row in table) for k in range(len(COLUMNS))]
    lines = ["  ".join(pad(cell, width) for cell, width in zip(row, widths, strict=True)).rstrip() for row in table]
    return "\n".join(lines) + "\n"
