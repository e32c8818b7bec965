"""From pin names, types and numbers to the terminals that power flows through.

The tables are the trade's habits: pin names of symbol libraries, and, where a symbol names no pins, the usual
numbering of the package. A terminal that nothing shows is left out rather than invented.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from functools import lru_cache

from drc_power.netlist.model import Part, Pin
from drc_power.survey.patterns import one_of

Terminals = Mapping[str, tuple[str, ...]]

_GROUND = r"(A|P|D|S|Q)?GND\w*|(A|P|D)?VSS\w*|EP(AD)?|E?PAD|TH(ERMAL)?_?(PAD|VIA)?|PWPD|COM(MON)?|0V|VEE|G(R(OU)?ND)|GBD|G"
_ENABLE = r"N?EN\w*|ENABLE\w*|ON(/OFF)?|OFF|N?SHDN?\w*|SHUTDOWN|SD|CE|RUN\d?|STBY|INH(IBIT)?|CTRL|S/S|ON_OFF|CONTROL"
_FEEDBACK = r"V?FB\w*[+]?|ADJ(UST)?|V?SENSE\w*|VOS(NS)?|V?SNS\w*|COMP|VADJ|TRIM"
_IN_MANY = r"V_?IN\w*|P?VIN\w*|VI|IN\d?|INPUT|PVIN|VLDOIN|LINE|IN_?[A-D\d]|\+?VIN[+]?|UIN"
_OUT_MANY = r"V_?OUT\w*|VO\d?|OUT\d?|OUTPUT|(?!REF)\w+_?V?OUT\d?|OUT_\w+|\+VOUT|VOUT[+]|UOUT|Q"

PATTERNS: Mapping[str, tuple[tuple[str, str], ...]] = {
    "mosfet": (
        ("drain", r"D\d?|DRAIN\d?|TAB|DD?\d|D_?\d"), ("gate", r"G\d?|GATE\d?"), ("source", r"S\d?|SOURCE\d?|SRC\d?|KS|SS?\d"),
    ),
    "bjt": (("collector", r"C\d?|COLLECTOR\d?|COL|TAB"), ("base", r"B\d?|BASE\d?"), ("emitter", r"E\d?|EMITTER\d?|EM")),
    "igbt": (("collector", r"C\d?|COLLECTOR\d?|TAB"), ("gate", r"G\d?|GATE\d?"), ("emitter", r"E\d?|EMITTER\d?|KE")),
    "diode": (("anode", r"A\d?|ANODE\d?|AN"), ("cathode", r"K\d?|C\d?|CATHODE\d?|CATH|KATHODE|COM|TAB|KK")),
    "bridge": (("plus", r"\+|DC\+|P(OS)?|V\+|PLUS"), ("minus", r"-|DC-|N(EG)?|V-|MINUS"), ("ac", r"|AC\d?|A\d|IN\d?|L|N\d|\d")),
    "linear-regulator": (
        ("ground", _GROUND), ("enable", _ENABLE), ("feedback", _FEEDBACK), ("output", _OUT_MANY + r"|V?BAT\d?"), ("input", _IN_MANY),
    ),
    "switching-regulator": (
        ("ground", _GROUND), ("enable", _ENABLE), ("feedback", _FEEDBACK),
        ("switch_node", r"SW\d?|LX\d?|PH(ASE)?|PH(ASE)?_?\w|VSW|L\d?|SW_?\w|SWN|SWITCH|SW_?NODE|SW[CE]|LX_?\w|VSWH|OUT_?SW|LBUCK|LBOOST|IND"),
        ("output", _OUT_MANY + r"|V?(SYS|BAT)\d?"), ("input", _IN_MANY + r"|VBUS\w?"),
    ),
    "load-switch": (
        ("ground", _GROUND), ("output", r"V?OUT\w*|VO\d?|OUTPUT\d?|VOUT\w*|S\d?"),
        ("input", r"VBB|VS|V?IN\w*|VIN\w*|INPUT|D\d?|VBUS|VBAT"), ("enable", _ENABLE),
    ),
    "battery": (("plus", r"\+|P(OS)?|BAT\+|\+\d|V\+"), ("minus", r"-|N(EG)?|BAT-|GND|V-")),
    "source": (("plus", r"\+|E1|N\+|P|1"), ("minus", r"-|E2|N-|N|2")),
    "relay": (
        ("coil", r"A\d|COIL\w*|\+|-"), ("common", r"[12]1|COM\w*|C\d?|P\d?"), ("open", r"[12]4|NO\w*"), ("closed", r"[12]2|NC\w*"),
    ),
    "transformer": (("primary", r"A[AB]|P(RI)?\w*|\w*PRI\w*"), ("secondary", r"S[A-Z]?\d?|SEC\w*|\w*SEC\w*")),
}
SUPPLY_NAME = re.compile("^" + one_of(r"""
    [ADP]?V(?:CC|DD|IN|BAT|BUS|SYS|MOT|PP|BB|AA|EE|CCA|CCB|CCO|DDIO|DDA|LOGIC|REG|IO|PWR|BST|USB|M|S|P)\w* V_?\{?(?:CC|DD)\w*\}? V[+-] VS[+-]
    \+?\d+V\d*\w* PWR POWER \+VIN \w*VDD\w* \w*VCC\w* BAT\+?""") + "$")
NOT_SUPPLY_NAME = re.compile(r"REF|SENSE|SNS|_EN$|^EN|PG(OOD)?$|OUT_?OK|CAP$|^V_?(FB|REF)|DET")
GROUND_NAME = re.compile(r"^((A|P|D|S|E|C|I|Q)?GND\w*|GND.*|(A|D|P|I)?VSS\w*|EP|EPAD|THERMAL_?PAD|EXP_?PAD|0V|V_?\{?SS\w*\}?|VEE[TR]?|GROUND|CAGE)$")
BOOST_NAME = re.compile(r"^(C?BOOT\w*|BST\w*|CB|VB\d?|HB|BS|VBST\w*|BOOST\w*|CBOOT|CPP|VCP|CP\w?)$")
DRIVE_NAME = re.compile("^" + one_of(r"""
    [HL]O\d?[+-]? [HL]DRV\w* [UL]GATE\w* [UL]G\d? D[HL]\d? DRV[HL]\w* G[HL]\w{0,2} HG LG TG\d? BG\d? GATE\w* [ABCUVW]?H[ABCUVW]?_?OUT
    [HL]S?GATE INH[ABC]?GATE G[HL]S? DRV? G?DRIVE GD EXT [NP]DRV [NP]GATE CHG DSG""") + "$")

_TAIL = re.compile(r"[-_ ]?PAD\d*$|_\d+$")


@lru_cache(maxsize=8192)
def plain(name: str) -> str:
    """A pin name in capitals without overbars and without the pad number that some libraries append.

    >>> plain("D-Pad2"), plain("~{SHDN}"), plain("Source_3")
    ('D', 'SHDN', 'SOURCE')
    """
    text = name.upper().replace("~", "").replace("{SLASH}", "/").replace("{", "").replace("}", "").replace("#", "").strip()
    return _TAIL.sub("", text) if len(text) > 3 and not text.startswith("PAD") else text


@lru_cache(maxsize=512)
def _pattern(text: str) -> re.Pattern[str]:
    return re.compile(rf"^(?:{text})$")


def named(kind: str, pins: Iterable[Pin]) -> dict[str, tuple[str, ...]]:
    """Terminals that the pin names show; each pin goes to the first row of its kind that it matches."""
    found: dict[str, list[str]] = {}
    for pin in pins:
        name = plain(pin.name)
        for terminal, pattern in PATTERNS.get(kind, ()):
            shown = name or (pin.number if kind == "relay" else "")
            if (shown or kind == "bridge") and _pattern(pattern).match(shown):
                found.setdefault(terminal, []).append(pin.number)
                break
    return {terminal: tuple(numbers) for terminal, numbers in found.items()}


PINOUTS: tuple[tuple[str, str, Terminals], ...] = (
    ("mosfet", r"SO-?8|SOIC-?8|SON-?8|DFN-?8|PowerPAK|TDSON|LFPAK|PQFN|SuperSO8|5x6", {"source": ("1", "2", "3"), "gate": ("4",), "drain": ("5", "6", "7", "8")}),
    ("mosfet", r"SOT-?23|SOT95|SOT-?323|SC-?70|SC-?59", {"gate": ("1",), "source": ("2",), "drain": ("3",)}),
    ("mosfet", r"TO-?(220|247|252|263|251|262|264|3P)|D2?PAK|SOT-?223", {"gate": ("1",), "drain": ("2", "4"), "source": ("3",)}),
    ("bjt", r"SOT-?23|SOT95|SOT-?323|SC-?70|SC-?59", {"base": ("1",), "emitter": ("2",), "collector": ("3",)}),
    ("bjt", r"TO-?(220|247|252|263|126|225|251)|D2?PAK|SOT-?223|SOT-?89", {"base": ("1",), "collector": ("2", "4"), "emitter": ("3",)}),
    ("linear-regulator", r"SOT-?223|TO-?252|DPAK", {"ground": ("1",), "output": ("2", "4"), "input": ("3",)}),
    ("linear-regulator", r"TO-?220|TO-?263", {"input": ("1",), "ground": ("2", "4"), "output": ("3",)}),
    ("diode", r"", {"cathode": ("1",), "anode": ("2",)}),
    ("relay", r"", {}),
)

"""(kind, footprint, terminals): the usual numbering of a package whose symbol names no pins; the first match counts."""


def numbered(kind: str, part: Part) -> dict[str, tuple[str, ...]]:
    """Terminals by the usual pin numbers of the footprint, only those that the part has."""
    own = {pin.number for pin in part.pins}
    for wanted, footprint, terminals in PINOUTS:
        if wanted == kind and re.search(footprint, part.footprint, re.IGNORECASE):
            kept = {name: tuple(n for n in numbers if n in own) for name, numbers in terminals.items()}
            return {name: numbers for name, numbers in kept.items() if numbers}
    return {}


_FLOATING_NAME = re.compile(r"^(V[SB]|H[SB])[ABCUVW123]?$")
"""Supply and return of a high-side gate driver: they ride on the switch node and are no rails."""


def supply_pins(part: Part) -> tuple[str, ...]:
    """Pins through which a chip takes its supply, by name or type."""
    floats = any(DRIVE_NAME.match(plain(p.name)) for p in part.pins)
    return tuple(p.number for p in part.pins if _is_supply(p) and not (floats and _FLOATING_NAME.match(plain(p.name))))


@lru_cache(maxsize=8192)
def is_supply_name(name: str) -> bool:
    """Whether a pin of this plain name takes a chip's supply."""
    return bool(SUPPLY_NAME.match(name)) and not NOT_SUPPLY_NAME.search(name)


def _is_supply(pin: Pin) -> bool:
    name = plain(pin.name)
    if is_ground_pin(pin) or NOT_SUPPLY_NAME.search(name):
        return False
    return is_supply_name(name) or pin.type == "power_in"


def is_ground_pin(pin: Pin) -> bool:
    """Whether the pin's own name says ground."""
    return _is_ground_name(plain(pin.name))


@lru_cache(maxsize=8192)
def _is_ground_name(name: str) -> bool:
    return bool(GROUND_NAME.match(name))


def ground_pins(part: Part) -> tuple[str, ...]:
    """Pins whose name says ground."""
    return tuple(p.number for p in part.pins if is_ground_pin(p))
