"""Polarity of a transistor from its texts: one row, one habit of naming; the first row that matches decides."""

from __future__ import annotations

from drc_power.netlist.model import Part
from drc_power.survey.patterns import compiled, one_of

_P_CHANNEL_NUMBERS = one_of(r"""
    IRF9\d IRFU?9\d IRF(?:49|53|54|62|72|73|74|75)\d\d IRLML(?:5\d|64|93|22)\d\d AO34(?:01|05|07|09|13|15|19)
    AO44(?:03|05|07|09|11|13|15|19|21|23|35) AOD40[39] AOD41[37] SI23(?:01|03|05|07|09|15|19|23|25|33|67|69|71|77)
    SI44(?:03|05|09|13|23|25|35) SI7[14]\d\d\w?P DMP DMG(?:2301|2305|3415) BSS84 BS250 VP\d{4} TP0610
    FDN3(?:02|04|06|08|38|40|42|52|58|60)P FD[CS]\d+P NDS(?:03|33|35)\d NTR\d+P NTD\d+P FQP\d+P FQA\d+P SUD\d+P PMV\d+X?P IPD\d+P
    SQ\w*P STP\d+P RZM SSM\dJ LP\d{4} WPM CJ(?:2301|2305|3401) BSP(?:9|17\d|25)\d FDV30[24]P""")
_PNP_NUMBERS = one_of(r"""
    Q?2N(?:3906|2907|4403|5401|4036|2955|4126|5087|5771) MMBT(?:3906|2907|4403|5401|A92) P?MBT3906 3906 BC30[789] BC32[78] BC55[6789] BC560
    BC80[78] BC85[6789] BC860 BC17[789] BC416 BC63[68] BC640 BCP5[123] BCX5[123] BCX17
    BD(?:136|138|140|234|236|238|240|242|244|676|678|680|682|912) TIP3[024] TIP4[02] TIP10[567] TIP12[567] TIP14[567] TIP2955 TIP36
    MJ(?:2955|15004|15016|21193|21195|4502) MJE(?:2955|15031|15033|350) MJL?(?:4302|1302) MJD(?:32|45|127) S8550 SS8550 S9012 S9015 2S[AB]\d
    FZT[79]\d\d ZTX[5-9]\d\d MPSA(?:92|93|55|56) KSA\d DTA\d PBSS5\d BCW(?:29|61|68) NJW0302 PZT2907""")
_NPN_NUMBERS = one_of(r"""
    Q?2N\d MMBT PMBT 3904 BC\d BCP BCX BD\d TIP\d MJ\w?\d S8050 SS8050 S901\d 2S[CD]\d FZT ZTX MPSA KSC DTC DTD PBSS4 BCW PZT NJW BF\d BU\d""")

_ROWS: dict[str, tuple[tuple[str, str], ...]] = {
    "mosfet": (
        ("p", r"PMOS|P-?CH(AN|\b)|P-?MOS|\bP channel|_PMOS|Q_Dual_PMOS|\bPJFET"),
        ("n", r"NMOS|N-?CH(AN|\b)|N-?MOS|\bN channel|\bNJFET"),
        ("p", rf"\b{_P_CHANNEL_NUMBERS}"),
    ),
    "bjt": (("pnp", "PNP"), ("npn", "NPN"), ("pnp", rf"\b{_PNP_NUMBERS}"), ("npn", rf"\b{_NPN_NUMBERS}")),
}


def texts(part: Part) -> str:
    """The part's own words in one line: symbol, value, description, keywords, simulation fields."""
    model = " ".join(part.fields.get(name, "") for name in ("Sim.Device", "Sim.Type"))
    return " ".join((part.symbol, part.value, part.description, part.keywords, model))


def polarity(part: Part, kind: str) -> str:
    """`n` or `p` for a mosfet, `npn` or `pnp` for a bjt, empty when no text says it.

    >>> polarity(Part("Q1", value="BSS84", symbol="FET"), "mosfet")
    'p'
    """
    text = texts(part)
    return next((channel for channel, pattern in _ROWS.get(kind, ()) if compiled(pattern).search(text)), "")
