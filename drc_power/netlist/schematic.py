"""A KiCad schematic as input: `kicad-cli`, where it is installed, exports its netlist into a temporary folder.

The schematic comes from anybody, so the export runs with an argument list and no shell, in a folder of its own that is
also its home, with little of our environment, for a limited time, and is stopped when its files grow too large.
"""

from __future__ import annotations

import contextlib
import os
import shlex
import shutil
import signal
import subprocess
import tempfile
import time
from collections.abc import Iterator
from dataclasses import replace
from types import MappingProxyType
from typing import IO

from drc_power.faults import Fault, InputError, Mark
from drc_power.netlist.model import Netlist
from drc_power.netlist.reader import parse_netlist, read_netlist
from drc_power.netlist.source import MAX_FILE_BYTES, printable, read_source

SUFFIX = ".kicad_sch"
PROGRAM = "kicad-cli"
MAX_EXPORT_S = 120.0
"""A real schematic of 1,500 parts takes a few seconds; whoever needs more exports by hand."""

_INHERITED = ("PATH", "SYSTEMROOT", "SYSTEMDRIVE", "WINDIR", "LD_LIBRARY_PATH", "DYLD_LIBRARY_PATH")
_HOMES = ("HOME", "USERPROFILE", "APPDATA", "TEMP", "TMP", "TMPDIR")
_LOOK_EVERY_S = 0.05
_MOST_SAID_BYTES = 2_000


def read_board_netlist(path: str | os.PathLike[str]) -> Netlist:
    """The netlist of a board from a netlist file or, by its suffix, from a KiCad schematic.

    Of a schematic, `path` and `sha256` are those of the root sheet's file alone: a change in a sheet below it is not
    seen in the hash. Lines are 0, for the export's own lines say nothing about the schematic.
    Raises InputError, also where there is no `kicad-cli` or where it fails.
    """
    name = os.fspath(path)
    return _from_schematic(name) if is_schematic(name) else read_netlist(name)


def confirm_board_netlist(netlist: Netlist) -> None:
    """As `confirm_netlist`, also for what `read_board_netlist` made of a schematic, which is then exported once more."""
    from drc_power.netlist.confirm import confirm_netlist

    if not is_schematic(netlist.path):
        confirm_netlist(netlist)
        return
    if read_source(netlist.path).sha256 != netlist.sha256:
        raise InputError(Fault(Mark(netlist.path), "the file changed while it was read", "run the check again"))
    text = export_netlist(netlist.path)
    with tempfile.TemporaryDirectory(prefix="drc-power-") as folder:
        exported = os.path.join(folder, "board.net")
        with open(exported, "w", encoding="utf-8", newline="") as file:
            file.write(text)
        try:
            confirm_netlist(replace(netlist, path=exported, sha256=read_source(exported).sha256))
        except InputError as error:
            raise InputError(*(replace(fault, mark=Mark(netlist.path)) for fault in error.faults)) from None


def is_schematic(path: str) -> bool:
    """Whether a path names a KiCad schematic.

    >>> is_schematic("fan.kicad_sch"), is_schematic("fan.net")
    (True, False)
    """
    return path.casefold().endswith(SUFFIX)


def export_netlist(path: str) -> str:
    """The text of the netlist that `kicad-cli` exports of a schematic. Raises InputError where it cannot."""
    program = shutil.which(PROGRAM)
    if program is None:
        raise InputError(Fault(Mark(path), f"reading a schematic takes {PROGRAM}, which is not on the PATH", _by_hand(path)))
    with tempfile.TemporaryDirectory(prefix="drc-power-") as folder:
        exported = os.path.join(folder, "board.net")
        _run(path, [program, "sch", "export", "netlist", "--format", "kicadsexpr", "-o", exported, os.path.abspath(path)], folder)
        return _text_of(path, exported)


def _from_schematic(path: str) -> Netlist:
    root = read_source(path)
    try:
        netlist = parse_netlist(export_netlist(path), path, root.sha256)
    except InputError as error:
        raise InputError(*(fault if fault.mark == Mark(path) else _of_export(path, fault) for fault in error.faults)) from None
    return _without_lines(replace(netlist, source=os.path.basename(path)))


def _of_export(path: str, fault: Fault) -> Fault:
    """A fault of the exported text, as one of the schematic: the user never sees the text."""
    return Fault(Mark(path), f"its exported netlist is not right: {fault.found}", _by_hand(path))


def _without_lines(netlist: Netlist) -> Netlist:
    parts = {ref: replace(part, line=0) for ref, part in netlist.parts.items()}
    nets = {name: replace(net, line=0) for name, net in netlist.nets.items()}
    return replace(netlist, parts=MappingProxyType(parts), nets=MappingProxyType(nets))


def _by_hand(path: str) -> str:
    stem = os.path.splitext(os.path.basename(path))[0]
    names = shlex.quote(f"{stem}.net"), shlex.quote(f"{stem}{SUFFIX}")
    return f"run this where KiCad is installed, and name the netlist instead: {PROGRAM} sch export netlist -o {names[0]} {names[1]}"


def _run(path: str, command: list[str], folder: str) -> None:
    """Run the export to its end. What it says goes into a file, so that it can neither fill memory nor block."""
    said = os.path.join(folder, "said.txt")
    try:
        with open(said, "wb") as out, _ended(_started(command, folder, out)) as process:
            problem = _watched(process, folder)
    except OSError as error:
        raise InputError(Fault(Mark(path), f"{PROGRAM} cannot be run ({error.strerror})", _by_hand(path))) from None
    if problem:
        raise InputError(Fault(Mark(path), f"{PROGRAM} was stopped: {problem}", _by_hand(path)))
    if process.returncode:
        raise InputError(Fault(Mark(path), f"{PROGRAM} could not export it{_words(said)}", "open it in KiCad to see what is wrong with it"))


def _started(command: list[str], folder: str, out: IO[bytes]) -> subprocess.Popen:
    environment = {name: os.environ[name] for name in _INHERITED if name in os.environ}
    environment |= dict.fromkeys(_HOMES, folder) | {"LANG": "C.UTF-8", "LC_ALL": "C.UTF-8"}
    return subprocess.Popen(command, cwd=folder, env=environment, stdin=subprocess.DEVNULL, stdout=out, stderr=out,
                            start_new_session=True)


def _watched(process: subprocess.Popen, folder: str) -> str:
    """Wait for the end of a process; what it does too much of, if it does, else nothing."""
    last_s = time.monotonic() + MAX_EXPORT_S
    while True:
        with contextlib.suppress(subprocess.TimeoutExpired):
            process.wait(timeout=_LOOK_EVERY_S)
            return ""
        if time.monotonic() > last_s:
            return f"its export took longer than {MAX_EXPORT_S:g} s"
        if _largest_bytes(folder) > MAX_FILE_BYTES:
            return f"its export grew past {MAX_FILE_BYTES // 2**20} MiB"


def _largest_bytes(folder: str) -> int:
    """The size of the largest file in a folder, while files there come and go."""
    largest = 0
    for name in os.listdir(folder):
        with contextlib.suppress(OSError):
            largest = max(largest, os.lstat(os.path.join(folder, name)).st_size)
    return largest


@contextlib.contextmanager
def _ended(process: subprocess.Popen) -> Iterator[subprocess.Popen]:
    """A process that is gone afterwards, with whatever it started if it had to be stopped."""
    try:
        yield process
    finally:
        if process.poll() is None:
            os.killpg(process.pid, signal.SIGKILL) if hasattr(os, "killpg") else process.kill()
            process.wait()


def _text_of(path: str, exported: str) -> str:
    if not os.path.lexists(exported):
        raise InputError(Fault(Mark(path), f"{PROGRAM} ended well and wrote no netlist", _by_hand(path)))
    try:
        return read_source(exported).text
    except InputError as error:
        raise InputError(_of_export(path, error.faults[0])) from None


def _words(said: str) -> str:
    """What the program said, as the end of a sentence; nothing if it said nothing."""
    with open(said, "rb") as file:
        text = file.read(_MOST_SAID_BYTES).decode("utf-8", "replace")
    words = " ".join(text.split())
    return f": {printable(words)}" if words else ""
