"""Reading the files of a project: bounded, plain files only, and nothing outside the project folder unasked."""

from __future__ import annotations

import hashlib
import os
import stat

from ..faults import Fault, InputError, Mark
from .record import shorten
from .tree import MOST_BYTES
from .values import SourceFile, Text


def read_file(path: str, role: str, folder: str, named_at: Mark | None = None) -> tuple[bytes, SourceFile]:
    """The bytes of one file and its record. Raises `InputError` at the place that names the file, else at the file."""
    place = named_at or Mark(path)
    try:
        with open(path, "rb", opener=_opened_without_waiting) as file:
            if not stat.S_ISREG(os.fstat(file.fileno()).st_mode):
                raise InputError(Fault(place, f"{shorten(path, 120)!r} is not a plain file", "name a file"))
            data = file.read(MOST_BYTES + 1)
    except (OSError, ValueError) as error:
        raise InputError(Fault(place, f"{shorten(path, 120)!r} cannot be read: {_reason(error)}", "check the path")) from None
    return data, SourceFile(role, relative(path, folder), hashlib.sha256(data).hexdigest())


def _opened_without_waiting(path: str, flags: int) -> int:
    return os.open(path, flags | getattr(os, "O_NONBLOCK", 0))


def _reason(error: Exception) -> str:
    if isinstance(error, FileNotFoundError):
        return "there is no such file"
    return (getattr(error, "strerror", None) or "the path is not valid").lower()


def relative(path: str, folder: str) -> str:
    """The path as seen from the project folder, with forward slashes."""
    return os.path.relpath(path, folder or ".").replace(os.sep, "/")


def inside(named: Text | str, beside: str, folder: str) -> str:
    """The path that a file in the folder `beside` names, if it stays inside the project folder, links followed."""
    mark = getattr(named, "mark", Mark(str(named)))
    path = os.path.normpath(os.path.join(beside, named))
    try:
        root, real = os.path.realpath(folder or "."), os.path.realpath(path)
        stays = os.path.commonpath([root, real]) == root
    except (OSError, ValueError):
        raise InputError(Fault(mark, f"{shorten(named)!r} is not a valid path", "check the path")) from None
    if not stays:
        found = f"{shorten(named)!r} leaves the project folder"
        raise InputError(Fault(mark, found, "keep packs and device data inside the project"))
    return path
