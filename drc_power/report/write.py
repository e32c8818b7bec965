"""Files on disk: all of them whole, or none of them touched."""

from __future__ import annotations

import contextlib
import os
import stat
import tempfile
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass

from drc_power.faults import Fault, InputError, Mark
from drc_power.text import printable

_NEW_FILE_MODE = 0o666


@dataclass(frozen=True, slots=True)
class _Staged:
    """What lies written in full at `beside`, to be renamed to `target`."""

    path: str
    target: str
    beside: str


def write_file(path: str, text: str) -> None:
    """Writes text as UTF-8 to a file, beside it first and then renamed, so that no reader sees half of it.

    A symbolic link stays and its target is replaced; permissions of an existing file stay; a device or a pipe is
    written straight. Raises InputError where that cannot be done; the old file is then as it was.
    """
    write_files({path: text})


def write_files(texts: Mapping[str, str | bytes]) -> None:
    """Writes several files, none before every one of them lies on the disk in full.

    texts: the text, or the bytes of a picture, of each path. Raises InputError, like `write_file`, also where two paths are one file.
    """
    data = {path: text.encode() if isinstance(text, str) else text for path, text in texts.items()}
    _refuse_same_file(data)
    with contextlib.ExitStack() as undo:
        streams = [path for path in data if _is_stream(path)]
        staged = [_stage(path, data[path], undo) for path in data if path not in streams]
        for path in streams:
            with _faults_of(path), open(path, "wb") as stream:
                stream.write(data[path])
        for file in staged:
            with _faults_of(file.path):
                os.replace(file.beside, file.target)


def _stage(path: str, data: bytes, undo: contextlib.ExitStack) -> _Staged:
    with _faults_of(path):
        target = os.path.realpath(path)
        if os.path.isdir(target):
            raise IsADirectoryError(0, "it is a folder")
        handle, beside = tempfile.mkstemp(prefix=".drc-power-", dir=os.path.dirname(target))
        undo.callback(_remove_if_there, beside)
        with open(handle, "wb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        os.chmod(beside, _mode_for(target))
    return _Staged(path, target, beside)


def _mode_for(target: str) -> int:
    """The permissions of the file that is there, else what the user's umask leaves of a new one's."""
    with contextlib.suppress(FileNotFoundError):
        return stat.S_IMODE(os.stat(target).st_mode)
    umask = os.umask(0)
    os.umask(umask)
    return _NEW_FILE_MODE & ~umask


def _is_stream(path: str) -> bool:
    """Whether the path is a device or a pipe, which renaming would replace by a file."""
    try:
        mode = os.stat(path).st_mode
    except (OSError, ValueError):
        return False
    return not (stat.S_ISREG(mode) or stat.S_ISDIR(mode))


def _refuse_same_file(paths: Iterable[str]) -> None:
    first: dict[str, str] = {}
    for path in paths:
        if _is_stream(path):
            continue
        with _faults_of(path):
            other = first.setdefault(os.path.realpath(path), path)
        if other != path:
            found = f"would be written twice, it is the same file as {printable(other)}"
            raise InputError(Fault(Mark(printable(path)), found, "give every output a file of its own"))


def _remove_if_there(path: str) -> None:
    with contextlib.suppress(OSError):
        os.unlink(path)


@contextlib.contextmanager
def _faults_of(path: str) -> Iterator[None]:
    """Turns what the operating system refuses into a fault that names the path as the user wrote it."""
    try:
        yield
    except (OSError, ValueError) as error:
        reason = (getattr(error, "strerror", None) or str(error)).lower()
        instead = "name a file in a folder that exists and that you may write to"
        raise InputError(Fault(Mark(printable(path)), f"cannot be written: {reason}", instead)) from None
