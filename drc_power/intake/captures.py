"""Captures of an instrument or a simulator: columns of text by the user's own headings. `read_captures`."""

from __future__ import annotations

import csv
import hashlib
import io
import os
import stat
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np

from ..faults import Fault, InputError, Mark
from .annotations import Annotations
from .files import inside, relative
from .notes import EventNote
from .record import shorten
from .suggest import nearest
from .values import SourceFile

MOST_BYTES = 1_000_000_000
COLUMNS = ("time", "voltage", "current")
HEADING_WITHIN = 200
"""Lines in which the headings must stand: instruments write about themselves first."""

BRIDGED = 2
"""Readings in a row that may be missing: the curve goes on straight over them. More are a gap."""


@dataclass(frozen=True, slots=True)
class Capture:
    """One capture: times from 0, not falling [s], voltages [V] and currents [A], each of shape (sample,).

    gap_s: where readings are missing that nobody can know, each (from, to) in the file's own time; () where none are.
    """

    t_s: np.ndarray
    v_v: np.ndarray
    i_a: np.ndarray
    file: SourceFile
    gaps_s: tuple[tuple[float, float], ...] = ()


def read_captures(annotations: Annotations) -> Mapping[str, Capture]:
    """The capture of every event that names one, by the event. Raises `InputError` with every fault of them."""
    found, faults = {}, []
    for name, event in annotations.events.items():
        if event.kind == "waveform" and event.file:
            try:
                found[str(name)] = _read(event, annotations.folder)
            except InputError as error:
                faults += error.faults
    if faults:
        raise InputError(*faults)
    return found


def _read(event: EventNote, folder: str) -> Capture:
    path = inside(event.file, folder, folder)
    data = _bytes_of(path, event)
    file = SourceFile("capture", relative(path, folder), hashlib.sha256(data).hexdigest())
    text = data.decode("utf-8-sig", errors="replace")
    delimiter, first_row, places = _heading(text, event, path)
    table = _table(text, delimiter, first_row, places, path)
    scales = [event.scale[name].typ if name in event.scale else 1.0 for name in COLUMNS]
    return _cleaned(table * scales, file, event, path)


def _bytes_of(path: str, event: EventNote) -> bytes:
    named = shorten(str(event.file), 120)
    try:
        if not stat.S_ISREG(os.stat(path).st_mode):
            raise InputError(Fault(event.file.mark, f"{named!r} is not a plain file", "name a file of text columns"))
        if os.path.getsize(path) > MOST_BYTES:
            raise InputError(Fault(event.file.mark, f"{named!r} is larger than {MOST_BYTES // 10**6} MB", "cut it to the event"))
        with open(path, "rb") as file:
            return file.read()
    except OSError as error:
        reason = (error.strerror or "the path is not valid").lower()
        raise InputError(Fault(event.file.mark, f"{named!r} cannot be read: {reason}", "check the path")) from None


def _heading(text: str, event: EventNote, path: str) -> tuple[str, int, list[int]]:
    """The delimiter, the first line after the headings, and where each column stands."""
    wanted = [str(getattr(event.columns, name, None) or name) for name in COLUMNS] if event.columns else list(COLUMNS)
    seen: list[str] = []
    for number, line in enumerate(_lines(text)):
        for delimiter in (",", ";", "\t"):
            cells = [cell.strip() for cell in next(csv.reader([line], delimiter=delimiter), [])]
            if all(cells.count(name) == 1 for name in wanted):
                return delimiter, number + 1, [cells.index(name) for name in wanted]
            seen = cells if len(cells) > 1 and not seen and not _is_number(cells[0]) else seen
    missing = [name for name in wanted if name not in seen]
    mark = event.columns.mark if event.columns else event.file.mark
    raise InputError(Fault(mark, f"{shorten(str(event.file))!r} has no line with the headings {', '.join(map(shorten, missing or wanted))}",
                           nearest((missing or wanted)[0], seen) or "write columns: {time: ..., voltage: ..., current: ...}"))


def _lines(text: str) -> Iterator[str]:
    return (line for _, line in zip(range(HEADING_WITHIN), io.StringIO(text), strict=False))


def _is_number(cell: str) -> bool:
    try:
        float(cell.replace(",", "."))
    except ValueError:
        return False
    return True


def _table(text: str, delimiter: str, first_row: int, places: list[int], path: str) -> np.ndarray:
    """The three columns as numbers, shape (sample, 3); NaN where a cell is no number."""
    decimal_comma = delimiter == ";" and "," in "".join(_lines(text.split("\n", first_row)[-1]))
    body = text.replace(",", ".") if decimal_comma else text
    if not text.split("\n", first_row)[-1].strip():
        return np.empty((0, 3))
    try:
        return np.loadtxt(io.StringIO(body), delimiter=delimiter, skiprows=first_row, usecols=places, ndmin=2, comments=None)
    except ValueError:
        return _table_with_holes(body, delimiter, first_row, places)


def _table_with_holes(text: str, delimiter: str, first_row: int, places: list[int]) -> np.ndarray:
    """Row by row, for files with empty cells, words or a row of units under the headings."""
    rows = []
    for row in csv.reader(io.StringIO(text.split("\n", first_row)[-1]), delimiter=delimiter):
        if any(cell.strip() for cell in row):
            rows.append([_number(row[place]) if place < len(row) else np.nan for place in places])
    table = np.array(rows, dtype=float).reshape(-1, 3)
    without_units = 1 if len(table) and np.isnan(table[0]).all() else 0
    return table[without_units:]


def _number(cell: str) -> float:
    try:
        return float(cell)
    except ValueError:
        return np.nan


def _cleaned(table: np.ndarray, file: SourceFile, event: EventNote, path: str) -> Capture:
    """Times checked; single missing readings bridged, longer gaps named."""
    t_s = table[:, 0]
    timed = np.isfinite(t_s)
    backwards = np.flatnonzero(np.diff(t_s[timed]) < 0.0)
    if timed.sum() < 2:
        raise InputError(Fault(event.file.mark, f"{file.path} has fewer than two rows of numbers", "name a capture with a time column"))
    if len(backwards):
        row = int(np.flatnonzero(timed)[backwards[0] + 1])
        raise InputError(Fault(Mark(file.path), f"the time runs backwards at row {row + 1} of the data", "put the rows in order of time"))
    known = timed & np.isfinite(table).all(axis=1)
    if known.sum() < 2:
        raise InputError(Fault(event.file.mark, f"{file.path} has fewer than two rows with voltage and current", "check its columns"))
    rows = np.flatnonzero(known)
    holes = np.flatnonzero(np.diff(rows) > BRIDGED + 1)
    gaps = [(float(t_s[rows[k]]), float(t_s[rows[k + 1]])) for k in holes]
    for ends in ((0, rows[0]), (rows[-1], len(table) - 1)):
        if ends[1] - ends[0] > BRIDGED:
            gaps.append(tuple(float(x) for x in (np.nanmin(t_s[ends[0]:ends[1] + 1]), np.nanmax(t_s[ends[0]:ends[1] + 1]))))
    return Capture(t_s[rows] - t_s[rows[0]], table[rows, 1], table[rows, 2], file, tuple(sorted(gaps)))
