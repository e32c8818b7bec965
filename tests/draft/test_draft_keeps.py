"""Whatever a user wrote, a draft onto it keeps every byte in its order, changes the meaning of none, and settles at once."""

from __future__ import annotations

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from drc_power.faults import InputError
from drc_power.intake.tree import tree_of

NETS = ["+24V", "+12V", "/VBAT", "/Drive/FAN+", "/SENS", "NET", "µ: #x"]
REFS = ["Q1", "Q3", "Q*", "R24 R25", "U4", "J2", "D?", "X9"]
VALUES = ["5 V", "{net: \"+12V\", draws: 1 A}", "{gate: 10 V}", "{}", "[a, b]", "", "'it''s'", '"say \\"x\\" # y"', "plain text", "{device: house-fet, heat: {sink: s}}"]
COMMENTS = ["", "   # mine", "   # U6 on +12V, {see}", "  #"]
LINES = ["", "# a line of mine", "  # indented: thought", "  # j5: {net: \"/SENS\", draws: }", "#    because: x D1"]
BLOCKS = ["|\n      kept\n        as it is", ">-\n      folded\n      text", "\n    net: \"+24V\"   # U1\n    # inside\n    draws: 1 A", "\n    - 1\n    - {a: b}", "two\n      lines"]


def quoted(name: str) -> str:
    return '"' + name + '"'


@st.composite
def entries(draw, names):
    name = draw(st.sampled_from(names))
    return quoted(name), draw(st.sampled_from([*VALUES, *BLOCKS])), draw(st.sampled_from(COMMENTS))


@st.composite
def sections(draw):
    """One section: its key and lines, in a style of its own, and whether it is written in braces."""
    key = draw(st.sampled_from(["rails", "loads", "parts", "stages", "modes", "sinks", "outside", "board", "mine"]))
    names = REFS if key == "parts" else NETS
    rows = draw(st.lists(entries(names), max_size=4, unique_by=lambda row: row[0]))
    style = draw(st.sampled_from(["block", "block", "braces", "brace line", "blank"]))
    if key == "outside" or style == "blank" or style == "block" and not rows:
        return key, [f"{key}:" + draw(st.sampled_from(COMMENTS)), *draw(st.lists(st.sampled_from(LINES), max_size=2))], False
    if style == "brace line":
        flat = [f"{name}: {value}" for name, value, _ in rows if "\n" not in value]
        return key, [f"{key}: {{" + ", ".join(flat) + "}" + draw(st.sampled_from(COMMENTS))], True
    if style == "braces":
        flat = [f"    {name}: {value},{comment}" for name, value, comment in rows if "\n" not in value]
        return key, [f"{key}: {{", *flat, draw(st.sampled_from(["}", "  }", "    # last\n  }"]))], True
    lines = [f"{key}:" + draw(st.sampled_from(COMMENTS))]
    indent = draw(st.sampled_from(["  ", "    "]))
    for name, value, comment in rows:
        lines += [line for line in draw(st.lists(st.sampled_from(LINES), max_size=1))]
        end = "" if value.startswith(("|", ">", "\n")) or "\n" in value else comment
        separator = "" if value.startswith("\n") else " "
        lines.append(f"{indent}{name}:{separator}{value}{end}".replace("\n", f"\n{indent}"))
    return key, lines, False


@st.composite
def files(draw):
    """A user's file, and whether some section of it is written in braces."""
    chosen = draw(st.lists(sections(), max_size=5, unique_by=lambda section: section[0]))
    lines = draw(st.lists(st.sampled_from(["format: 1", "netlist: board.net", "grounds: [GND]"]), max_size=3, unique=True))
    for _, body, _ in chosen:
        lines += [*draw(st.lists(st.sampled_from(["", "# between"]), max_size=2)), *body]
    newline = draw(st.sampled_from(["\n", "\n", "\r\n"]))
    text = newline.join(line.replace("\n", newline) for line in lines) + draw(st.sampled_from(["", newline, newline * 3]))
    return draw(st.sampled_from(["", "", "\ufeff", f"---{newline}"])) + text, any(braces for *_, braces in chosen)


def is_inside(before, after) -> bool:
    """Whether one sequence is the other with something in between."""
    rest = iter(after)
    return all(piece in rest for piece in before)


@settings(max_examples=100, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(files())
def test_every_byte_stays(desk, file):
    text, in_braces = file
    root, faults = tree_of(text.encode(), "x")
    assert not faults
    desk.write(text)
    try:
        desk.draft()
    except InputError:
        assert desk.path.read_bytes() == text.encode()
        return
    new = desk.path.read_bytes().decode()
    assert is_inside(text, new)
    assert in_braces or is_inside(text.splitlines(), new.splitlines())
    assert_superset(root or {}, desk.tree())
    assert ("\r\n" in new) == ("\r\n" in text) and new.count("\n") == new.count("\r\n") * ("\r\n" in text) + new.count("\n") * ("\r\n" not in text)
    assert desk.draft().files == {}


def assert_superset(old: dict, new: dict) -> None:
    for key, value in old.items():
        if value:
            assert new[key].items() >= value.items() if isinstance(value, dict) else new[key] == value


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(data=st.data())
def test_lines_of_a_draft_in_any_order_are_kept(desk, data):
    """A draft that a user has shortened: lines taken out at random come back, the others stay where they are."""
    desk.path.unlink(missing_ok=True)
    desk.draft()
    whole = desk.path.read_text()
    kept = [line for line in whole.splitlines() if not line.startswith("  ") or data.draw(st.booleans())]
    desk.write("\n".join(kept) + "\n")
    desk.draft()
    again = desk.path.read_text()
    assert is_inside(kept, again.splitlines())
    entries = {line.split(":")[0].strip() for line in whole.splitlines() if line.startswith("  ") and not line.startswith("  #")}
    refs = {ref for entry in entries for ref in entry.strip('"').split()}
    assert all(ref in again for ref in refs)
    assert desk.draft().files == {}


@pytest.mark.parametrize("newline", ["\n", "\r\n"])
def test_the_draft_itself_with_either_line_end_settles(desk, newline):
    desk.draft()
    for path in (desk.path, desk.devices):
        path.write_bytes(path.read_text().replace("\n", newline).encode())
    assert desk.draft().files == {}


def test_every_drawn_shape_of_file_is_reached():
    """The generator above makes what it says it makes: refusals are the exception."""
    from hypothesis import find

    assert find(files(), lambda f: f[1] and "rails: {" in f[0] and "{gate" in f[0])
    assert find(files(), lambda f: "\r\n" in f[0] and "|" in f[0])
