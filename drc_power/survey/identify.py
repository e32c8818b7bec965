"""What each part is: evidence from texts and pins adds up, the heaviest kind wins, and the reasons are kept."""

from __future__ import annotations

import re
from collections import defaultdict
from collections.abc import Mapping
from functools import lru_cache

from drc_power.netlist.model import Netlist, Part
from drc_power.survey import clues, terminals
from drc_power.survey.channel import polarity
from drc_power.survey.model import Identity
from drc_power.survey.pin_clues import pin_clues

_ENOUGH = 1.5
_LETTERS = re.compile(r"^[A-Za-z_]+")
_COPY = re.compile(r"_\d+$")


def identify(netlist: Netlist) -> dict[str, Identity]:
    """An Identity for every part, in the netlist's order. Equal parts are weighed once."""
    known: dict[tuple, Identity] = {}
    found = {}
    for ref, part in netlist.parts.items():
        key = _likeness(part)
        if key not in known:
            known[key] = identify_part(part)
        found[ref] = _renamed(known[key], part)
    return found


def _likeness(part: Part) -> tuple:
    pins = tuple((p.number, p.name, p.type) for p in part.pins)
    model = tuple(part.fields.get(name, "") for name in ("Sim.Device", "Sim.Type", "Spice_Primitive"))
    return (letters(part.ref), part.library, part.symbol, part.value, part.footprint, part.description, part.keywords, model, pins,
            _fields(part, _DESCRIBING), _fields(part, _NAMING))


def _renamed(identity: Identity, part: Part) -> Identity:
    shown = identity.terminals
    if identity.kind in terminals.BY_NETS:
        shown = terminals.terminals_of(identity.kind, part)[1]
    return Identity(part.ref, identity.kind, identity.confidence, identity.because, shown, identity.channel)


def letters(ref: str) -> str:
    """The letters that a reference starts with, in capitals.

    >>> letters("VR201"), letters("FET1"), letters("RCAN201")
    ('VR', 'FET', 'RCAN')
    """
    match = _LETTERS.match(ref)
    return match[0].upper().rstrip("_") if match else ""


@lru_cache(maxsize=4096)
def bare_symbol(symbol: str) -> str:
    """The symbol's name without a library inside it and without the number that KiCad gives to edited copies.

    >>> bare_symbol("Connector:Screw_Terminal_01x02_1"), bare_symbol("D_Zener_2")
    ('Screw_Terminal_01x02', 'D_Zener')
    """
    return _COPY.sub("", symbol.rpartition(":")[2]) if len(symbol) > 3 else symbol


_DESCRIBING = frozenset({"bom", "desc", "description", "comment", "partdescription", "part description", "manufacturer_description"})
_NAMING = frozenset({"mpn", "part number", "partnumber", "part", "mfg#", "manf#", "manufacturer_part_number", "mfr part number", "mfr. no", "mpn1"})


def _fields(part: Part, wanted: frozenset[str]) -> str:
    """The texts of the part's own fields of these names, those that repeat its value left out."""
    texts = (value for name, value in part.fields.items() if name.strip().lower() in wanted)
    return " ".join(text for text in texts if text not in (part.value, part.description))


def _texts(part: Part) -> dict[str, str]:
    symbol = bare_symbol(part.symbol)
    return {
        "reference": letters(part.ref),
        "symbol": symbol,
        "library": part.library.rpartition("/")[2],
        "text": f"{part.description} {part.keywords} {_fields(part, _DESCRIBING)}".strip(),
        "footprint": part.footprint,
        "value": part.value if clues.matching("value", part.value) else _fields(part, _NAMING) or part.value,
        "model": part.fields.get("Sim.Device", "") or part.fields.get("Spice_Primitive", ""),
    }


def weigh(part: Part) -> dict[str, list[tuple[float, str]]]:
    """Evidence by kind: (weight, words) of every row that holds for the part."""
    evidence: dict[str, list[tuple[float, str]]] = defaultdict(list)
    texts = _texts(part)
    for source, text in texts.items():
        for clue in clues.matching(source, text):
            evidence[clue.kind].append((clue.weight, f"{clue.words} {text.strip()!r}"))
    for clue in clues.matching("value", texts["symbol"]) if texts["symbol"] != part.value else ():
        evidence[clue.kind].append((clue.weight, f"symbol name {texts['symbol']!r}"))
    for clue in pin_clues(part):
        evidence[clue.kind].append((clue.weight, clue.words))
    return _with_family(evidence)


_SHAPE = ("reference letters", "footprint", "pins named")


def _with_family(evidence: dict[str, list[tuple[float, str]]]) -> dict[str, list[tuple[float, str]]]:
    """What shows a diode by its shape alone speaks as much for a Zener diode or a suppressor, where anything does."""
    shape = [item for item in evidence.get("diode", ()) if item[1].startswith(_SHAPE)]
    for kind in ("zener", "tvs"):
        if kind in evidence:
            evidence[kind] = evidence[kind] + shape
    return evidence


def _total(items: list[tuple[float, str]]) -> float:
    return sum(weight for weight, _ in items)


def identify_part(part: Part) -> Identity:
    """The heaviest kind of one part. Below a floor of evidence it stays `unknown`."""
    evidence = weigh(part)
    ranking = sorted(evidence.items(), key=lambda item: (-_total(item[1]), item[0]))
    if not ranking or _total(ranking[0][1]) < _ENOUGH:
        return Identity(part.ref, "unknown", 0.0, ("nothing says what it is",), terminals.terminals_of("unknown", part)[1], "")
    kind, items = ranking[0]
    best = _total(items)
    second = max(0.0, _total(ranking[1][1])) if len(ranking) > 1 else 0.0
    confidence = round(best / (best + 2.0) * (1.0 - 0.4 * second / best), 2)
    reasons = tuple(words for weight, words in sorted(items, key=lambda i: (-i[0], i[1])) if weight > 0)
    kind, shown, notes = terminals.terminals_of(kind, part)
    return Identity(part.ref, kind, confidence, reasons + notes, shown, polarity(part, kind))


def kinds(identities: Mapping[str, Identity]) -> dict[str, int]:
    """How many parts there are of each kind."""
    counted: dict[str, int] = defaultdict(int)
    for identity in identities.values():
        counted[identity.kind] += 1
    return dict(sorted(counted.items()))
