"""How long reading a netlist takes, as a multiple of merely splitting its text into tokens.

    python tests/benchmarks/netlist_reading.py [NETLIST]

Without a netlist it generates one of 1,507 parts. The time of splitting stands for the speed of the
machine, so that the multiples can be compared between machines; the seconds cannot.
"""

from __future__ import annotations

import re
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

from generate_netlist import generate

from drc_power.netlist import read_netlist
from drc_power.netlist.sexpr import collector_paused, parse_clauses
from drc_power.netlist.source import read_source

REPEATS = 5
BARE_TOKEN = re.compile(r'"(?:[^"\\]|\\.)*"|[()]|[^\s()"]+')


def best_s(work: Callable[[], object]) -> float:
    """The shortest of several times that the work takes, in seconds."""
    times = []
    for _ in range(REPEATS):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return min(times)


def tree(path: Path) -> None:
    """Read and parse, without making the model."""
    with collector_paused():
        parse_clauses(read_source(path))


def main(path: Path) -> None:
    text = path.read_text(encoding="utf-8")
    split_s = best_s(lambda: BARE_TOKEN.findall(text))
    netlist = read_netlist(path)
    print(f"{len(text.encode()) / 1e6:.1f} MB, {len(netlist.parts)} parts, {len(netlist.nets)} nets")
    print(f"splitting into tokens  {split_s:6.3f} s   1.0")
    for name, work in {"clauses": tree, "netlist": read_netlist}.items():
        work_s = best_s(lambda work=work: work(path))
        print(f"{name:21}  {work_s:6.3f} s  {work_s / split_s:4.1f}")


if __name__ == "__main__":
    if len(sys.argv) > 1:
        main(Path(sys.argv[1]))
    else:
        with tempfile.TemporaryDirectory() as folder:
            generated = Path(folder) / "generated.net"
            generated.write_text(generate(1507, seed=1), encoding="utf-8")
            main(generated)
