"""Text for people: names of unknown origin made harmless, names in natural order, numbers with their unit.

Whatever a netlist or an annotation calls a thing may hold control characters that move a cursor, marks that turn
the reading direction round, or ten thousand letters. The functions here are what every writer passes such a name
through. They depend on no table that changes with Python's version, so the same input gives the same bytes.
"""

from __future__ import annotations

import math
import re
import textwrap
from decimal import Decimal

_C0 = r"\x00-\x1f"
_UNSEEN = (
    r"\x7f-\x9f\xad\u034f\u061c\u115f\u1160\u17b4\u17b5\u180b-\u180f\u200b-\u200f\u2028-\u202e\u2060-\u206f\u3164"
    r"\ufdd0-\ufdef\ufe00-\ufe0f\ufeff\uffa0\ufff0-\ufffb\ufffe\uffff"
    r"\U00013430-\U00013440\U0001bca0-\U0001bca3\U0001d173-\U0001d17a\U000e0000-\U000e0fff"
)
"""Controls, line separators, noncharacters, and what Unicode's Default_Ignorable_Code_Point calls invisible."""

_SURROGATES = r"\ud800-\udfff"

UNSEEN_BEYOND_ASCII = re.compile(f"[{_UNSEEN}{_SURROGATES}]")
"""What JSON's own escaping lets through although no reader can see it."""

_HIDDEN = re.compile(f"[{_C0}{_UNSEEN}{_SURROGATES}]")
_MARKS = (
    r"\u0300-\u036f\u0483-\u0489\u0591-\u05bd\u064b-\u065f\u0e31\u0e34-\u0e3a\u0e47-\u0e4e"
    r"\u1ab0-\u1aff\u1dc0-\u1dff\u20d0-\u20ff\ufe20-\ufe2f"
)
_PILED_MARKS = re.compile(f"(?<=[{_MARKS}]{{3}})[{_MARKS}]")
_MARK = re.compile(f"[{_MARKS}]")
_WIDE = re.compile(
    r"[\u1100-\u115f\u2e80-\u303e\u3041-\ua4cf\uac00-\ud7a3\uf900-\ufaff\ufe30-\ufe6f\uff01-\uff60\uffe0-\uffe6"
    r"\U0001f300-\U0001faff\U00020000-\U0003fffd]"
)
_SHORT_ESCAPES = {"\n": r"\n", "\r": r"\r", "\t": r"\t"}
_DIGITS = re.compile(r"([0-9]+)")

NOT_KNOWN = "-"
_PREFIXES = {-12: "p", -9: "n", -6: "u", -3: "m", 0: "", 3: "k", 6: "M", 9: "G"}
_TAKES_PREFIX = frozenset({"V", "A", "W", "J", "ohm", "Ω", "F", "H", "C", "s", "Hz", "m"})


def printable(text: str) -> str:
    r"""The text on one line with nothing invisible in it: such characters show as `\n` or `\u202e`.

    >>> printable("Q3\x1b[2J\u202e")
    'Q3\\u001b[2J\\u202e'
    """
    if text.isascii() and text.isprintable():
        return text
    return _PILED_MARKS.sub(_escape, _HIDDEN.sub(_escape, text))


def _escape(match: re.Match[str]) -> str:
    code = ord(match[0])
    return _SHORT_ESCAPES.get(match[0]) or (f"\\u{code:04x}" if code < 0x10000 else f"\\U{code:08x}")


def shorten(text: str, limit: int) -> str:
    """At most `limit` (3 or more) characters: the middle gives way, because both ends tell names apart.

    >>> shorten("Net-(U12-Pad37)", 9)
    'Net-…d37)'
    """
    if len(text) <= limit:
        return text
    tail = (limit - 1) // 2
    return f"{text[: limit - 1 - tail]}…{text[len(text) - tail :]}"


def display_width(text: str) -> int:
    """Columns that printable text takes on a terminal: two for East Asian wide letters, none for accents."""
    if text.isascii():
        return len(text)
    return len(text) + len(_WIDE.findall(text)) - len(_MARK.findall(text))


def fit(text: str, width: int) -> str:
    """The text shortened in the middle until it takes at most `width` (5 or more) columns."""
    limit = width
    while display_width(shortened := shorten(text, limit)) > width and limit > 3:
        limit -= 1
    return shortened


def cut(text: str, width: int) -> str:
    """The text cut at its end to at most `width` (3 or more) columns, for text whose start matters most."""
    if display_width(text) <= width:
        return text
    text = text[: 2 * width]
    while display_width(text) > width - 1:
        text = text[:-1]
    return f"{text}…"


def wrapped(text: str, width: int, most_lines: int) -> list[str]:
    """The text made printable, on at most `most_lines` lines of at most `width` (5 or more) columns."""
    shown = printable(text)[: 2 * most_lines * width]
    return [fit(line, width) for line in textwrap.wrap(shown, width, max_lines=most_lines, placeholder=" …")]


def pad(text: str, width: int, *, right: bool = False) -> str:
    """The text filled with spaces to `width` columns; `right` aligns it to the right."""
    fill = " " * max(0, width - display_width(text))
    return fill + text if right else text + fill


def natural_key(text: str) -> tuple[tuple[tuple[int, str], ...], str]:
    """Sort key that puts R2 before R10. Total: different texts have different keys.

    >>> sorted(["R10", "R2", "C1"], key=natural_key)
    ['C1', 'R2', 'R10']
    """
    pieces = _DIGITS.split(text)
    return tuple(_number_key(p) if i % 2 else (-1, p) for i, p in enumerate(pieces)), text


def _number_key(digits: str) -> tuple[int, str]:
    """Orders runs of digits by value without int(), which refuses very long ones."""
    bare = digits.lstrip("0")
    return len(bare), bare


def si(value: float | None, unit: str, digits: int = 4) -> str:
    """A number with its unit as an engineer writes it; temperatures in °C get one decimal.

    value: the number in SI units (°C for temperatures), None or NaN where there is none.

    >>> si(0.35, "A"), si(163.2, "°C"), si(0.0008, "ohm"), si(None, "W")
    ('350 mA', '163.2 °C', '800 uohm', '-')
    """
    if value is None or math.isnan(value):
        return NOT_KNOWN
    if math.isinf(value):
        return _with_unit("-∞" if value < 0 else "∞", unit)
    if unit == "°C":
        return f"{value:.{max(1, digits - 3)}f} °C".replace("-0.0 ", "0.0 ")
    return _engineering(value, unit, digits)


def _engineering(value: float, unit: str, digits: int) -> str:
    mantissa, _, exponent = f"{value:.{digits - 1}e}".partition("e")
    power = min(9, max(-12, 3 * (int(exponent) // 3))) if unit in _TAKES_PREFIX else 0
    if not float(mantissa):
        return _with_unit("0", unit)
    scaled = Decimal(mantissa).scaleb(int(exponent) - power)
    plain = -6 <= scaled.adjusted() <= 9
    number = f"{scaled.normalize():f}" if plain else f"{value:.{digits - 1}e}"
    return _with_unit(number, _PREFIXES[power] + unit)


def _with_unit(number: str, unit: str) -> str:
    return f"{number} {unit}" if unit else number


def si_apart(value: float | None, other: float | None, unit: str) -> tuple[str, str]:
    """Two numbers with as many digits as it takes to tell them apart, four at least and nine at most.

    >>> si_apart(5.0002, 5.0, "A")
    ('5.0002 A', '5 A')
    """
    for digits in range(4, 10):
        pair = si(value, unit, digits), si(other, unit, digits)
        if pair[0] != pair[1] or value == other:
            return pair
    return pair
