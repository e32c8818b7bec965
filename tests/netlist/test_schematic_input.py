"""A schematic as input: `kicad-cli` run on a leash, and one sentence where there is none."""

from __future__ import annotations

import os
import shutil
import stat
import sys
import time
from dataclasses import replace
from pathlib import Path

import pytest

from drc_power.faults import InputError
from drc_power.netlist import read_netlist, schematic
from drc_power.netlist.schematic import confirm_board_netlist, is_schematic, read_board_netlist

DEMO = Path(__file__).parents[2] / "fixtures" / "frost-fan"
EXPORT = DEMO / "rev-c.net"

pytestmark = pytest.mark.skipif(sys.platform == "win32", reason="the stand-in for kicad-cli is a script")


@pytest.fixture
def drawn(tmp_path):
    """A schematic's file; what is in it only matters to the real program."""
    path = tmp_path / "fan.kicad_sch"
    path.write_text("(kicad_sch)")
    return path


@pytest.fixture
def pretend(tmp_path, monkeypatch):
    """Puts a script in the place of kicad-cli; it finds the path to write at in `out`."""

    def put(body: str) -> Path:
        folder = tmp_path / "programs"
        folder.mkdir()
        program = folder / "kicad-cli"
        program.write_text(f"#!{sys.executable}\nimport os, sys, time\nout = sys.argv[sys.argv.index('-o') + 1]\n{body}\n")
        program.chmod(program.stat().st_mode | stat.S_IXUSR)
        monkeypatch.setenv("PATH", f"{folder}{os.pathsep}{os.environ['PATH']}")
        return tmp_path

    return put


def refusal(path: Path) -> str:
    with pytest.raises(InputError) as caught:
        read_board_netlist(path)
    assert len(caught.value.faults) == 1
    return str(caught.value.faults[0]).replace(str(path), path.name)


def test_a_netlist_is_read_as_before():
    assert read_board_netlist(EXPORT) == read_netlist(EXPORT)
    assert is_schematic("A.KICAD_SCH") and not is_schematic("a.kicad_sch.net")


def test_the_export_of_a_schematic_is_its_netlist(drawn, pretend):
    pretend(f"open(out, 'w').write(open({str(EXPORT)!r}).read())")
    found, written = read_board_netlist(drawn), read_netlist(EXPORT)
    assert {ref: replace(part, line=0) for ref, part in written.parts.items()} == dict(found.parts)
    assert {name: replace(net, line=0) for name, net in written.nets.items()} == dict(found.nets)
    assert (found.path, found.source) == (str(drawn), "fan.kicad_sch")
    assert found.sha256 == schematic.read_source(drawn).sha256


def test_the_program_gets_a_list_of_arguments_and_little_else(drawn, pretend, monkeypatch):
    told = drawn.parent / "told.txt"
    monkeypatch.setenv("SECRET_OF_THE_USER", "x")
    pretend(f"open({str(told)!r}, 'w').write(repr((sys.argv[1:], sorted(os.environ), os.getcwd(), os.environ['HOME'])))\nsys.exit(1)")
    refusal(drawn)
    arguments, names, cwd, home = eval(told.read_text())
    assert arguments[:5] == ["sch", "export", "netlist", "--format", "kicadsexpr"]
    assert arguments[-1] == str(drawn)
    assert "SECRET_OF_THE_USER" not in names and "PATH" in names
    assert os.path.realpath(cwd) == os.path.realpath(home) and not os.path.exists(home)


def test_a_name_full_of_signs_is_one_argument(pretend, tmp_path):
    hostile = tmp_path / "-o $(touch pwned) `x`; 'a\".kicad_sch"
    hostile.write_text("(kicad_sch)")
    pretend(f"assert sys.argv[-1] == {str(hostile)!r}\nopen(out, 'w').write(open({str(EXPORT)!r}).read())")
    assert len(read_board_netlist(hostile).parts) == len(read_netlist(EXPORT).parts)
    assert not list(tmp_path.rglob("pwned"))


def test_without_the_program_one_sentence_gives_the_line_to_run(drawn, tmp_path, monkeypatch):
    monkeypatch.setenv("PATH", str(tmp_path))
    assert refusal(drawn) == (
        "fan.kicad_sch: reading a schematic takes kicad-cli, which is not on the PATH; run this where KiCad is installed, "
        "and name the netlist instead: kicad-cli sch export netlist -o fan.net fan.kicad_sch")


def test_the_line_to_run_quotes_what_a_shell_would_take_apart(tmp_path, monkeypatch):
    monkeypatch.setenv("PATH", str(tmp_path))
    path = tmp_path / "my fan; x.kicad_sch"
    path.write_text("(kicad_sch)")
    assert refusal(path).endswith("-o 'my fan; x.net' 'my fan; x.kicad_sch'")


def test_its_failure_is_told_in_its_words(drawn, pretend):
    pretend(r"sys.stderr.write('Failed to\x1b[2J load\n  schematic\n'); sys.exit(3)")
    assert refusal(drawn) == (r"fan.kicad_sch: kicad-cli could not export it: Failed to\x1b[2J load schematic; "
                              "open it in KiCad to see what is wrong with it")


def test_a_missing_schematic_is_said_before_anything_runs(tmp_path, pretend):
    ran = tmp_path / "ran"
    pretend(f"open({str(ran)!r}, 'w')")
    assert "there is no such file" in refusal(tmp_path / "gone.kicad_sch")
    assert not ran.exists()


def test_what_hangs_is_stopped_with_its_children(drawn, pretend, monkeypatch):
    monkeypatch.setattr(schematic, "MAX_EXPORT_S", 0.8)
    alive = drawn.parent / "alive"
    pretend(f"if not os.fork():\n    while True: open({str(alive)!r}, 'a').write('.'); time.sleep(0.05)\ntime.sleep(60)")
    begun = time.monotonic()
    assert "kicad-cli was stopped: its export took longer than 0.8 s" in refusal(drawn)
    assert time.monotonic() - begun < 10.0
    size = alive.stat().st_size
    time.sleep(0.2)
    assert size and alive.stat().st_size == size


@pytest.mark.parametrize("where", ["open(out, 'w')", "sys.stdout", "sys.stderr"])
def test_what_never_ends_its_output_is_stopped(drawn, pretend, monkeypatch, where):
    monkeypatch.setattr(schematic, "MAX_FILE_BYTES", 2**20)
    pretend(f"where = {where}\nwhile True: where.write('x' * 100_000); where.flush(); time.sleep(0.001)")
    assert "kicad-cli was stopped: its export grew past 1 MiB" in refusal(drawn)


@pytest.mark.parametrize(("body", "said"), [
    ("pass", "kicad-cli ended well and wrote no netlist"),
    ("open(out, 'w')", "its exported netlist is not right: the file is empty"),
    ("open(out, 'wb').write(b'\\x00\\xff' * 99)", "its exported netlist is not right: a zero byte"),
    ("open(out, 'w').write('(export (components (comp')", "its exported netlist is not right: "),
    ("open(out, 'w').write('<?xml version=\"1.0\"?>')", "this is an XML file"),
    ("os.mkdir(out)", "its exported netlist is not right: this is a folder"),
])
def test_garbage_is_refused_at_the_schematic(drawn, pretend, body, said):
    pretend(body)
    told = refusal(drawn)
    assert told.startswith("fan.kicad_sch: ") and said in told
    assert "board.net" not in told.replace("-o board.net", "")


def test_a_program_that_cannot_run_is_an_error_of_one_line(drawn, pretend):
    folder = pretend("pass")
    (folder / "programs" / "kicad-cli").write_text("#!/nowhere/at/all\n")
    assert "kicad-cli cannot be run (No such file or directory)" in refusal(drawn)


def test_the_second_reader_confirms_the_export(drawn, pretend):
    small = Path(__file__).parent / "formats" / "kicad-9.net"
    pretend(f"open(out, 'w').write(open({str(small)!r}, encoding='utf-8').read())")
    found = read_board_netlist(drawn)
    confirm_board_netlist(found)
    confirm_board_netlist(read_netlist(small))
    other = replace(found, parts={**found.parts, "R2": replace(found.parts["R2"], value="wrong")})
    with pytest.raises(InputError) as caught:
        confirm_board_netlist(other)
    assert str(caught.value).startswith(f"{drawn}: the second reader differs: the value of R2")
    drawn.write_text("(kicad_sch changed)")
    with pytest.raises(InputError, match="the file changed while it was read"):
        confirm_board_netlist(found)


@pytest.mark.skipif(not shutil.which("kicad-cli"), reason="kicad-cli is not installed")
@pytest.mark.parametrize("name", ["rev-b", "rev-c"])
def test_the_demo_drawn_and_exported_is_the_same_board(name, tmp_path):
    for sheet in DEMO.glob(f"{name}*.kicad_sch"):
        shutil.copy(sheet, tmp_path)
    before = {path: path.read_bytes() for path in tmp_path.iterdir()}
    found, written = read_board_netlist(tmp_path / f"{name}.kicad_sch"), read_netlist(DEMO / f"{name}.net")
    assert {ref: replace(part, line=0) for ref, part in written.parts.items()} == dict(found.parts)
    assert [n.name for n in found.nets.values()] == [n.name for n in written.nets.values()]
    assert {path: path.read_bytes() for path in tmp_path.iterdir()} == before
