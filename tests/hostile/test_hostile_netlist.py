"""Damaged and hostile netlists end in a netlist or in faults that say where; never in anything else."""

import random
from pathlib import Path

import pytest

from drc_power.faults import InputError
from drc_power.netlist import Netlist, parse_netlist, read_netlist, source

FORMATS = sorted((Path(__file__).parents[1] / "netlist" / "formats").glob("*.net"))


def outcome(path, data):
    """What reading these bytes gives: a netlist, or the faults, checked for their form."""
    path.write_bytes(data)
    try:
        netlist = read_netlist(path)
    except InputError as error:
        assert error.faults
        for fault in error.faults:
            assert fault.mark.file == str(path) and fault.mark.line >= 1 and fault.mark.column >= 1
            assert fault.found and "\n" not in str(fault)
        return error.faults
    assert isinstance(netlist, Netlist)
    return netlist


def only_fault(path, data):
    (fault,) = outcome(path, data)
    return f"{fault.mark.line}:{fault.mark.column}: {fault.found}"


@pytest.fixture
def path(tmp_path):
    return tmp_path / "hostile.net"


@pytest.mark.parametrize("good", FORMATS, ids=lambda good: good.stem)
def test_cut_short_anywhere(good, path):
    data = good.read_bytes().rstrip()
    assert isinstance(outcome(path, data), Netlist)
    for fiftieth in range(50):
        assert not isinstance(outcome(path, data[: len(data) * fiftieth // 50]), Netlist)
    assert "the file ends inside" in only_fault(path, data[:-1])


@pytest.mark.parametrize("good", FORMATS, ids=lambda good: good.stem)
def test_flipped_bits(good, path):
    data, rng = good.read_bytes(), random.Random(good.stem)
    for _ in range(150):
        flipped = bytearray(data)
        for _ in range(rng.choice((1, 1, 3))):
            flipped[rng.randrange(len(data))] ^= 1 << rng.randrange(8)
        outcome(path, bytes(flipped))


@pytest.mark.parametrize("good", FORMATS[-1:], ids=lambda good: good.stem)
def test_lines_left_out_doubled_and_swapped(good, path):
    lines, rng = good.read_bytes().splitlines(keepends=True), random.Random(7)
    for _ in range(150):
        changed = lines.copy()
        at, other = rng.randrange(len(lines)), rng.randrange(len(lines))
        match rng.randrange(3):
            case 0:
                del changed[at]
            case 1:
                changed.insert(other, lines[at])
            case 2:
                changed[at], changed[other] = lines[other], lines[at]
        outcome(path, b"".join(changed))


def inside(text):
    return f"(export (components) (nets)\n {text})".encode()


@pytest.mark.parametrize(
    "data, fault",
    [
        (b"(" * 10_000, "1:1: this is not a netlist"),
        (b"(export " * 10_000, "1:1601: parentheses nest deeper than 200"),
        (inside("(a " * 10_000 + "1" + ")" * 10_000), "2:599: parentheses nest deeper than 200"),
        (inside('(a "never closed)'), "2:5: a quoted text that does not end on its line"),
        (inside("(a 1)").replace(b"1", b"\0"), "2:5: a zero byte, so this is not a text file"),
        (b"\0" * 1000, "1:1: a zero byte, so this is not a text file"),
        (inside("(a 'µ')").decode().encode("latin-1"), "2:6: byte 0xB5 is not UTF-8 text"),
        (b"\xef\xbb\xbf(export \xff", "1:9: byte 0xFF is not UTF-8 text"),
        (inside("(a 1)").decode().encode("utf-16"), "1:1: the file is UTF-16"),
        (b"", "1:1: the file is empty"),
        (b" \r\n\t ", "1:1: the file is empty"),
        (b"# nothing but a comment\n", "1:1: this is not a netlist"),
        (random.Random(1).randbytes(100_000), None),
        (bytes(range(1, 256)) * 100, None),
        (b"\x1b[2J" * 1000, "1:1: this is not a netlist"),
        (b")" * 1_000_000, "1:1: this is not a netlist"),
        (b"(export)" + b")" * 1_000_000, "1:9: a closing parenthesis too many"),
    ],
)
def test_what_is_no_netlist(path, data, fault):
    found = only_fault(path, data)
    assert fault is None or found.startswith(fault)


MB = 2**20


@pytest.mark.parametrize(
    "text",
    [
        "(a " + "x" * 20 * MB + ")",
        '(a "' + "x" * 20 * MB + '")',
        "(" + "x" * 2 * MB + ' "1")',
        '(a "' + "\\n" * MB + '")',
        "(a " + '"' * (2 * MB + 1) + ")",
        "(a " + '"\\' * MB + ")",
        "(a" + " " * 2 * MB,
        "(a" + " \n" * MB + '"1',
        '(a "' * 200_000,
        "(a b" * 200_000,
        "(a 1)(" * 200_000,
        "#" * 2 * MB,
        "\n#" * MB,
    ],
    ids=lambda text: text[:6].replace("\n", " "),
)
def test_megabytes_of_one_thing_end_soon(path, text):
    """Each of these would take very long if any step were quadratic in the length of the text."""
    assert not isinstance(outcome(path, inside(text)), Netlist)


def test_thousands_of_faults_end_soon(path):
    nodes = "".join(f'(node (ref "X{n}") (pin "1"))\n' for n in range(50_000))
    comps = "".join(f'(comp (ref "R{n}"))\n' for n in range(2_000))
    faults = outcome(path, f'(export (components {comps}) (nets (net (name "A") {nodes})))'.encode())
    assert len(faults) == 20


def test_tens_of_thousands_of_joined_nets_end_soon():
    count = 20_000
    comps = "".join(f'(comp (ref "J{n}") (jumper_pin_groups (group (pin "1") (pin "2"))))' for n in range(count))
    nets = "".join(
        f'(net (name "N{n}") (node (ref "J{n}") (pin "1")) (node (ref "J{n + 1}") (pin "2")))' for n in range(count - 1)
    )
    netlist = parse_netlist(f"(export (components {comps}) (nets {nets}))", "j.net")
    assert list(netlist.nets) == ["N0"] and len(netlist.nets["N0"].aliases) == count - 2


def test_size_is_bounded(path, monkeypatch):
    monkeypatch.setattr(source, "MAX_FILE_BYTES", 2 * MB)
    path.write_bytes(b"(" + b" " * 2 * MB)
    with pytest.raises(InputError, match="the file is larger than 2 MiB"):
        read_netlist(path)
    path.write_bytes(inside("").ljust(2 * MB))
    assert isinstance(read_netlist(path), Netlist)


def test_a_device_without_end(monkeypatch):
    monkeypatch.setattr(source, "MAX_FILE_BYTES", 2 * MB)
    if not Path("/dev/zero").exists():
        pytest.skip("no such device here")
    with pytest.raises(InputError, match="the file is larger than 2 MiB"):
        read_netlist("/dev/zero")
