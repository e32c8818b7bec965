"""A netlist file as text: read whole, decoded strictly, able to say the line and column of any offset."""

from __future__ import annotations

import hashlib
import os
from bisect import bisect_right
from dataclasses import dataclass
from difflib import get_close_matches
from functools import cached_property
from itertools import accumulate

from drc_power.faults import Fault, InputError, Mark

MAX_FILE_BYTES = 128 * 2**20
"""Fifteen times a real netlist of 1,507 parts (8.6 MB). Beyond it the file is not a netlist."""

_SHOWN_CHARS = 60
_BYTE_ORDER_MARKS = ((b"\xff\xfe", "UTF-16"), (b"\xfe\xff", "UTF-16"))


@dataclass(frozen=True)
class Source:
    """The text of a file, its path as the user wrote it, and the SHA-256 of its bytes."""

    path: str
    text: str
    sha256: str

    @cached_property
    def _line_starts(self) -> list[int]:
        lengths = (len(line) + 1 for line in self.text.split("\n"))
        return list(accumulate(lengths, initial=0))[:-1]

    def line(self, offset: int) -> int:
        """The line of a character offset, counted from 1."""
        return bisect_right(self._line_starts, offset)

    def mark(self, offset: int) -> Mark:
        """File, line and column of a character offset; line and column count from 1."""
        line = self.line(offset)
        return Mark(self.path, line, offset - self._line_starts[line - 1] + 1)

    def fault(self, offset: int, found: str, instead: str = "") -> Fault:
        """A fault of this file at a character offset."""
        return Fault(self.mark(offset), found, instead)


def printable(text: str) -> str:
    """Text of a file as a message may hold it: on one line, without control characters, not too long."""
    cut = text if len(text) <= _SHOWN_CHARS else text[: _SHOWN_CHARS - 1] + "…"
    return "".join(c if c.isprintable() else c.encode("unicode_escape").decode("ascii") for c in cut)


def shown(text: str) -> str:
    """Text of a file as a message quotes it.

    >>> print(shown('10k\\n5 %'))
    "10k\\n5 %"
    """
    return f'"{printable(text)}"'


def read_source(path: str | os.PathLike[str]) -> Source:
    """Read a UTF-8 text file. Raises InputError if it is missing, too large or not UTF-8 text."""
    name = os.fspath(path)
    data = _read_bytes(name)
    return Source(name, _decode(name, data), hashlib.sha256(data).hexdigest())


def _read_bytes(path: str) -> bytes:
    try:
        with open(path, "rb") as file:
            data = file.read(MAX_FILE_BYTES + 1)
    except FileNotFoundError:
        raise InputError(Fault(Mark(path), "there is no such file", _nearest_file(path))) from None
    except IsADirectoryError:
        raise InputError(Fault(Mark(path), "this is a folder", "name the netlist file in it")) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError(Fault(Mark(path), f"the file cannot be read ({reason})")) from None
    if len(data) > MAX_FILE_BYTES:
        found = f"the file is larger than {MAX_FILE_BYTES // 2**20} MiB"
        raise InputError(Fault(Mark(path), found, "give a netlist exported by KiCad"))
    return data


def _nearest_file(path: str) -> str:
    folder, name = os.path.split(path)
    try:
        near = get_close_matches(name, sorted(os.listdir(folder or ".")), n=1, cutoff=0.75)
    except (OSError, ValueError):
        near = []
    return f"did you mean {os.path.join(folder, near[0])}?" if near else "check the path"


def _decode(path: str, data: bytes) -> str:
    for mark, encoding in _BYTE_ORDER_MARKS:
        if data.startswith(mark):
            raise InputError(Fault(Mark(path, 1, 1), f"the file is {encoding}", "save it as UTF-8"))
    zero = data.find(b"\0")
    if zero >= 0:
        found = "a zero byte, so this is not a text file"
        raise InputError(Fault(_mark_of_byte(path, data, zero), found, "give a netlist exported by KiCad"))
    try:
        return data.decode("utf-8").removeprefix("\ufeff")
    except UnicodeDecodeError as error:
        found = f"byte 0x{data[error.start]:02X} is not UTF-8 text"
        mark = _mark_of_byte(path, data, error.start)
        raise InputError(Fault(mark, found, "export the netlist again or save it as UTF-8")) from None


def _mark_of_byte(path: str, data: bytes, offset: int) -> Mark:
    start_of_line = data.rfind(b"\n", 0, offset) + 1
    before = data[start_of_line:offset].decode("utf-8", "replace").removeprefix("\ufeff")
    return Mark(path, data.count(b"\n", 0, offset) + 1, len(before) + 1)
