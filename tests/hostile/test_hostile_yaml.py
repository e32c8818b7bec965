"""Input files made to hurt: each ends in records or in `InputError`, one line per fault, in bounded time."""

import os
import time

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from drc_power.faults import InputError
from drc_power.intake import read_annotations, read_devices, read_rules, read_waivers
from drc_power.intake.tree import MOST_BYTES, MOST_FAULTS

SECONDS = 5.0
"""What one file may take here, however bad; a plain one takes hundredths."""

READERS = {
    "annotations": lambda folder: read_annotations(os.path.join(folder, "f.yaml")),
    "devices": lambda folder: read_devices(["f.yaml"], folder),
    "rules": lambda folder: read_rules(["f.yaml"], folder),
    "waivers": lambda folder: read_waivers("f.yaml", folder),
}


def refusal(reader, folder, data):
    """The faults of a file, or none if it was read. Anything but `InputError` fails the test by itself."""
    with open(os.path.join(folder, "f.yaml"), "wb") as file:
        file.write(data if isinstance(data, bytes) else data.encode("utf-8", "surrogatepass"))
    start = time.monotonic()
    try:
        READERS[reader](folder)
        faults = ()
    except InputError as error:
        faults = error.faults
        assert faults and all(str(fault).isprintable() and fault.mark.file for fault in faults)
        assert len(faults) <= MOST_FAULTS + 1
    assert time.monotonic() - start < SECONDS
    return faults


def bomb(levels, width=10):
    """Aliases of aliases: `width` to the power of `levels` values from a few lines."""
    lines = ["a0: &a0 [" + ", ".join(["x"] * width) + "]"]
    lines += [f"a{n}: &a{n} [" + ", ".join([f"*a{n - 1}"] * width) + "]" for n in range(1, levels)]
    return "\n".join(lines)


HOSTILE = {
    "alias bomb": bomb(9),
    "alias bomb of mappings": "a: &a {x: 1, y: 2}\n" + "\n".join(f"k{n}: &k{n} {{p: *{'a' if n == 0 else f'k{n - 1}'}, q: *{'a' if n == 0 else f'k{n - 1}'}}}" for n in range(40)),
    "alias to itself": "a: &a\n  b: *a\n",
    "object": "format: !!python/object/apply:os.system ['true']\n",
    "object in a key": "? !!python/name:os.system\n: 1\n",
    "binary": "format: !!binary aGVsbG8=\n",
    "deep lists": "[" * 10_000 + "]" * 10_000,
    "deep mappings": "{a: " * 10_000 + "}" * 10_000,
    "deep blocks": "\n".join(" " * n + "a:" for n in range(2_000)),
    "deep and unfinished": "{" * 10_000,
    "duplicate keys": "format: 1\n" * 1_000,
    "many unknown keys": "".join(f"key{n}: 1\n" for n in range(20_000)),
    "many wrong values": "format: 1\nnetlist: x\nrails: {" + ", ".join(f"r{n}: {{voltage: {n}}}" for n in range(20_000)) + "}",
    "many modes": "format: 1\nnetlist: x\nmodes: {" + ", ".join(f"m{n}: {{like: m{n - 1}}}" for n in range(1, 5_000)) + ", m0: {}}",
    "long word": "format: " + "x" * 1_000_000,
    "long key": "? " + "x" * 5_000 + "\n: 1\n",
    "long number": "format: 1\nnetlist: x\nrails: {a: {voltage: " + "9" * 100_000 + " V}}",
    "many documents": "--- 1\n" * 1_000,
    "tabs": "format: 1\n\tnetlist: x\n",
    "carriage returns": "format: 1\rnetlist: x\r",
    "line separators": "format: 1\u2028netlist: x\u0085board: {name: [}\n",
    "null byte": b"format: 1\nnetlist: \0\n",
    "escape codes": "format: \x1b[31mred\n",
    "escaped escape codes": 'format: "\\e[31mred"\nnetlist: "\\0"\n"\\e": 1\n',
    "right to left": 'format: "1\u202e"\nnetlist: "a\u202eb"\n"\u202e": 1\n',
    "not UTF-8": b"format: \xff\n",
    "UTF-16": "format: 1\nnetlist: x\n".encode("utf-16"),
    "lone surrogate": "format: \ud800\n",
    "escaped surrogate": 'format: "\\ud800"\nnetlist: "\\ud800"\n',
    "byte order marks": "\ufeff\ufeffformat: 1\n",
    "too large": b"#" * (MOST_BYTES + 1),
    "no text": b"",
    "directives": "%YAML 9.9\n%TAG ! tag:x,1:\n---\nformat: 1\n",
    "merge keys": "base: &b {format: 1}\n<<: *b\n",
    "complex keys": "? {a: 1}\n: 2\n? [1, 2]\n: 3\n",
    "not a number": "format: 1\nnetlist: x\nrails: {a: {voltage: .nan}, b: {voltage: .inf V}, c: {voltage: 1e999 V}}",
    "set and pairs": "format: !!set {a, b}\nnetlist: !!pairs [a: b]\n",
}


HARMLESS = {("carriage returns", "annotations"), ("no text", "waivers")}


@pytest.mark.parametrize("reader", READERS)
@pytest.mark.parametrize("name", HOSTILE)
def test_hostile(reader, name, tmp_path):
    assert refusal(reader, str(tmp_path), HOSTILE[name]) or (name, reader) in HARMLESS


def test_tags_run_nothing(tmp_path):
    witness = tmp_path / "witness"
    for call in (f"!!python/object/apply:os.system ['touch {witness}']", f"!!python/object/new:os.system ['touch {witness}']"):
        for reader in READERS:
            assert refusal(reader, str(tmp_path), f"format: {call}\nnetlist: {call}\n")
    assert not witness.exists()


@pytest.mark.parametrize("reader", READERS)
def test_devices_and_pipes_are_no_files(reader, tmp_path):
    os.mkfifo(tmp_path / "f.yaml")
    with pytest.raises(InputError, match="is not a plain file"):
        READERS[reader](str(tmp_path))


def test_a_folder_where_a_file_is_due(tmp_path):
    (tmp_path / "f.yaml").mkdir()
    for reader in READERS:
        with pytest.raises(InputError):
            READERS[reader](str(tmp_path))


@pytest.mark.parametrize("name", ["\0", "a" * 5_000, "", "."])
def test_names_that_no_file_can_have(name, tmp_path):
    for read in (lambda: read_devices([name], str(tmp_path)), lambda: read_rules([name], str(tmp_path)), lambda: read_waivers(name, str(tmp_path))):
        with pytest.raises(InputError):
            read()


GOOD = {
    "annotations": "format: 1\nnetlist: b.net\nrails:\n  \"+5V\": {voltage: 5 V ± 2 %, source: [J1, J2]}\nloads: {x: {net: A, draws: 1 A .. 2 A}}\n"
                   "modes: {run: {}, off: {like: run, loads: {x: 0 A}}}\nparts: {\"Q1 Q2\": {heat: {interface: {thickness: 1 mm, conductivity: 1 W/(m K), area: 1 cm²}}}}\n",
    "devices": "format: 1\ndevices:\n  a: {kind: mosfet, limits: {vds: {typ: 60 V, source: x}}, conduction: {rds: {10 V: 1 mohm}}, envelope: {dc: [[1 V, 1 A]], 1 ms: [[1 V, 2 A]]}}\n",
    "rules": "format: 1\nname: n\nlimits: {a: {applies_to: {kind: [fuse]}, stress: current, at_most: [[25 °C, 75 %], [85 °C, 50 %]]}}\nfields: {not_fitted: {P: \"0\"}}\n",
    "waivers": "- {finding: a, because: b, by: c, until: 2027-03-31, value: 151 °C}\n",
}  # fmt: skip


@pytest.mark.parametrize("reader", READERS)
def test_the_good_files_are_good(reader, tmp_path):
    assert refusal(reader, str(tmp_path), GOOD[reader]) == ()


@pytest.mark.parametrize("reader", READERS)
def test_every_truncation(reader, tmp_path):
    data = GOOD[reader].encode()
    for length in range(len(data)):
        refusal(reader, str(tmp_path), data[:length])


@settings(max_examples=150, deadline=None)
@given(data=st.data())
@pytest.mark.parametrize("reader", READERS)
def test_flipped_bits_and_foreign_bytes(reader, data, tmp_path_factory):
    text = bytearray(GOOD[reader].encode())
    for _ in range(data.draw(st.integers(1, 4))):
        text[data.draw(st.integers(0, len(text) - 1))] = data.draw(st.one_of(st.integers(0, 255), st.sampled_from(list(b"{}[]:,&*!|>'\"%@-?# \n\t~"))))
    refusal(reader, str(tmp_path_factory.getbasetemp()), bytes(text))


WORDS = st.sampled_from(
    ["1", "format", "netlist", "rails", "loads", "modes", "parts", "stages", "events", "sinks", "copper", "outside", "devices", "limits", "kind", "mosfet",
     "heat", "sink", "like", "conduction", "rds", "efficiency", "vin", "at", "envelope", "dc", "matches", "applies_to", "stress", "vds", "at_most", "lowest_of",
     "5 V", "5.0 V", "1 A", "80 %", "25 °C", "25.0 °C", "10 ms", "0.01 s", "diode", "forward", "switching-regulator", "thermal", "foster", "1 K/W", "~", "", "*", "x", "motor", "buck", "min", "max", "typ", "source", "name", "based_on", "fields", "not_fitted"]
)  # fmt: skip
TREES = st.recursive(WORDS, lambda inner: st.one_of(st.lists(inner, max_size=3), st.dictionaries(WORDS, inner, max_size=4)), max_leaves=25)


def as_yaml(tree):
    if isinstance(tree, dict):
        return "{" + ", ".join(f'"{key}": {as_yaml(value)}' for key, value in tree.items()) + "}"
    return "[" + ", ".join(map(as_yaml, tree)) + "]" if isinstance(tree, list) else f'"{tree}"' if tree not in ("~", "") else tree


FOUND = [
    ("devices", "{devices: {a: {kind: []}}}"),
    ("devices", "{devices: {a: {kind: mosfet, channel: [n]}}}"),
    ("devices", "{devices: {a: {kind: mosfet, conduction: {rds: {5 V: 1 ohm, 5.0 V: 1 ohm}}}}}"),
]
"""What once ended in a traceback."""


@pytest.mark.parametrize(("reader", "text"), FOUND)
def test_crashes_of_the_past(reader, text, tmp_path):
    assert refusal(reader, str(tmp_path), text)


@settings(max_examples=250, deadline=None)
@given(tree=st.dictionaries(WORDS, TREES, max_size=6))
@pytest.mark.parametrize("reader", READERS)
def test_the_right_words_in_wrong_places(reader, tree, tmp_path_factory):
    refusal(reader, str(tmp_path_factory.getbasetemp()), as_yaml({"format": "1", **tree}))
