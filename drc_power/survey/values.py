"""Guesses of a part's own size from its value text, good enough to tell a shunt from a pull-up.

Nothing here is a figure that a check may use: values for solving are read strictly elsewhere.
"""

from __future__ import annotations

import re
from functools import lru_cache

_SCALE = {
    "": 1.0, "r": 1.0, "e": 1.0, "ω": 1.0, "ohm": 1.0, "ohms": 1.0,
    "p": 1e-12, "n": 1e-9, "u": 1e-6, "µ": 1e-6, "μ": 1e-6, "m": 1e-3, "k": 1e3, "g": 1e9, "meg": 1e6,
}
_UNIT = {"ohm": r"(?:r|e|Ω|ω|ohms?)", "F": r"f", "H": r"h", "W": r"w", "A": r"a"}
_NUMBER = r"(?P<whole>\d*(?:[.,]\d+)?)"
_STEM = re.compile(r"^(?:[RCL]\s*=\s*|[<>~≈≥]\s*)", re.IGNORECASE)
_SPLIT = re.compile(r"[\s_/;|()@±\[\]]+")


def _scaled(whole: str, prefix: str, rest: str) -> float | None:
    """`4`, `k`, `7` is 4700; `M` is mega and `m` is milli, as schematics write them."""
    if not whole and not rest:
        return None
    key = "meg" if prefix == "M" else prefix.lower()
    number = whole.replace(",", ".") or "0"
    if rest:
        number = f"{number}.{rest}" if "." not in number else number
    return float(number) * _SCALE[key]


@lru_cache(maxsize=4096)
def _tokens(text: str) -> tuple[str, ...]:
    return tuple(token for token in _SPLIT.split(_STEM.sub("", text.strip())) if token)


_OHM_TOKEN = re.compile(
    rf"^R?{_NUMBER}(?P<prefix>meg|[pnuµμmkKMgGRrEeΩω]|ohms?|)(?P<rest>\d*){_UNIT['ohm']}?(?:,?\d*[.]?\d*%)?$", re.IGNORECASE
)
_FORMULA = re.compile(r"['\"?{<>*]")
_MILLI = re.compile(r"^(\d+(?:\.\d+)?)MR$")
_R_FIRST = re.compile(r"^R(?P<rest>\d{2,4})$")
_PACKAGE = re.compile(r"^[RCL]?(?:0201|0402|0603|0805|1005|1206|1210|1608|1812|2010|2012|2512|3216|2725|2817|4527)$")


@lru_cache(maxsize=4096)
def ohms(text: str) -> float | None:
    """Resistance [ohm] that a value text seems to say; None when it says none.

    >>> ohms("4k7"), ohms("0R01"), ohms("R005"), ohms("R0402_4R7_1%_0.0625W"), ohms("5mR"), ohms("1u/25V")
    (4700.0, 0.01, 0.005, 4.7, 0.005, 1e-06)
    """
    if _FORMULA.search(text):
        return None
    tokens = _tokens(text)
    for token in tokens:
        if _PACKAGE.match(token) and len(tokens) > 1:
            continue
        first = _R_FIRST.match(token)
        if first:
            return float("0." + first["rest"])
        milli = _MILLI.match(token)
        if milli:
            return float(milli[1]) / 1000.0
        match = _OHM_TOKEN.match(token)
        if match:
            return _scaled(match["whole"], match["prefix"][:3] if match["prefix"].lower() == "meg" else match["prefix"][:1], match["rest"])
    return None


def _sized(text: str, unit: str, prefixes: str) -> float | None:
    pattern = _sized_pattern(unit, prefixes)
    for token in _tokens(text):
        match = pattern.match(token)
        if match:
            return _scaled(match["whole"], match["prefix"], match["rest"])
    return None


@lru_cache(maxsize=8)
def _sized_pattern(unit: str, prefixes: str) -> re.Pattern[str]:
    return re.compile(rf"^{_NUMBER}(?P<prefix>[{prefixes}]){_UNIT[unit]}?(?P<rest>\d*){_UNIT[unit]}?$", re.IGNORECASE)


@lru_cache(maxsize=4096)
def farads(text: str) -> float | None:
    """Capacitance [F] that a value text seems to say, or None.

    >>> farads("10uF/25V"), farads("4n7"), farads("100n")
    (1e-05, 4.7e-09, 1e-07)
    """
    value = _sized(text, "F", "pnuµμm")
    return None if value is None else float(f"{value:.6g}")


@lru_cache(maxsize=4096)
def henries(text: str) -> float | None:
    """Inductance [H] that a value text seems to say, or None.

    >>> henries("1.0uH/4.2A/DCR=35mR/20%"), henries("IND_175NH_15%"), henries("4u7")
    (1e-06, 1.75e-07, 4.7e-06)
    """
    value = _sized(text, "H", "pnuµμm")
    return None if value is None else float(f"{value:.6g}")


_WATT = re.compile(r"(?<![\d.,])(?P<top>\d+(?:[.,]\d+)?)(?:/(?P<bottom>\d+))?\s*(?P<milli>m?)W\b", re.IGNORECASE)
_AMPERE = re.compile(r"(?<![\w.,])(?P<number>\d+(?:[.,]\d+)?)\s*(?P<milli>m?)A(?![\w])")


def watts(text: str) -> float | None:
    """Power rating [W] that a text seems to say, or None.

    >>> watts("47R;1W"), watts("0R1 1/4W"), watts("10k")
    (1.0, 0.25, None)
    """
    match = _WATT.search(text.replace("_", " "))
    if not match:
        return None
    value = float(match["top"].replace(",", ".")) / float(match["bottom"] or 1)
    return value * (1e-3 if match["milli"] else 1.0)


def amperes(text: str) -> float | None:
    """Largest current [A] that a text seems to say, or None.

    >>> amperes("33A Id, 100V Vds, N-Channel MOSFET"), amperes("-0.18A Id"), amperes("600R/500mA")
    (33.0, 0.18, 0.5)
    """
    found = [float(m["number"].replace(",", ".")) * (1e-3 if m["milli"] else 1.0) for m in _AMPERE.finditer(text)]
    return max(found, default=None)
