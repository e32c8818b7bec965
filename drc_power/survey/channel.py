"""Polarity of a transistor from its texts: one row, one habit of naming; the first row that matches decides."""

from __future__ import annotations

from drc_power.netlist.model import Part
from drc_power.survey.clues import compiled

_FET_ROWS: tuple[tuple[str, str], ...] = (
    ("p", r"PMOS|P-?CH(AN|\b)|P-?MOS|\bP channel|_PMOS|Q_Dual_PMOS|\bPJFET"),
    ("n", r"NMOS|N-?CH(AN|\b)|N-?MOS|\bN channel|\bNJFET"),
    ("p", r"\b(IRF9\d|IRFU?9\d|IRF(49|53|54|62|72|73|74|75)\d\d|IRLML(5\d|64|93|22)\d\d|AO(34(01|05|07|09|13|15|19)|44(03|05|07|09|11|13|15|19|21|23|35)|D40[39]|D413|D417)"
          r"|SI(23(01|03|05|07|09|15|19|23|25|33|67|69|71|77)|44(03|05|09|13|23|25|35)|7(1|4)\d\d\w?P)|DMP|DMG(2301|2305|3415)|BSS84|BS250|VP\d{4}|TP0610|FDN(3(02|04|06|08|38|40|42|52|58|60)P)|FD[CS]\d+P|NDS(03|33|35)\d|NTR\d+P|NTD\d+P|FQP\d+P|FQA\d+P|SUD\d+P|PMV\d+X?P|IPD\d+P|SQ\w*P|STP\d+P|RZM|SSM\dJ|LP\d{4}|WPM|CJ(2301|2305|3401)|BSP(9|17\d|25)\d|FDV30[24]P)"),
)
_BJT_ROWS: tuple[tuple[str, str], ...] = (
    ("pnp", r"PNP"),
    ("npn", r"NPN"),
    ("pnp", r"\b(Q?2N(3906|2907|4403|5401|4036|2955|4126|5087|5771)|MMBT(3906|2907|4403|5401|A92)|P?MBT3906|3906|BC(30[789]|32[78]|55[6789]|560|80[78]|85[6789]|860|17[789]|416|640|638|636)|BCP5[123]|BCX5[123]|BCX17|BD(136|138|140|234|236|238|240|242|244|676|678|680|68[02]|912)|TIP(3[024]|4[02]|12[567]|10[567]|14[567]|2955|36)|MJ(2955|15004|15016|21195|21193|E2955|E15031|E15033|E350|D32|D45|D127|L4302|L1302)|S8550|SS8550|S9012|S9015|2S[AB]\d|FZT(7|9)\d\d|ZTX(5|7|9)\d\d|MPSA(92|93|5[56])|KSA\d|DTA\d|PBSS5\d|BCW(29|61|68)|NJW0302|PZT2907)"),
    ("npn", r"\b(Q?2N\d|MMBT|PMBT|3904|BC\d|BCP|BCX|BD\d|TIP\d|MJ\w?\d|S8050|SS8050|S901\d|2S[CD]\d|FZT|ZTX|MPSA|KSC|DTC|PBSS4|BCW|PZT|NJW|DTD|BF\d|BU\d)"),
)


def texts(part: Part) -> str:
    """The part's own words in one line: symbol, value, description, keywords, simulation fields."""
    model = " ".join(part.fields.get(name, "") for name in ("Sim.Device", "Sim.Type"))
    return " ".join((part.symbol, part.value, part.description, part.keywords, model))


def polarity(part: Part, kind: str) -> str:
    """`n` or `p` for a mosfet, `npn` or `pnp` for a bjt, empty when no text says it.

    >>> polarity(Part("Q1", value="BSS84", symbol="FET"), "mosfet")
    'p'
    """
    rows = {"mosfet": _FET_ROWS, "bjt": _BJT_ROWS}.get(kind, ())
    text = texts(part)
    return next((channel for channel, pattern in rows if compiled(pattern).search(text)), "")
