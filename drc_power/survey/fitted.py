"""Which parts the schematic says are not fitted."""

from __future__ import annotations

import re

from drc_power.netlist.model import Part

_MARK = r"(?:DNP|DNF|DNI|DNM|DNS|NP|NF|NM|NA|N/A|DO NOT (?:POPULATE|FIT|PLACE|INSTALL|STUFF)|NOT (?:FITTED|POPULATED|PLACED|MOUNTED)|NO[ -]?POP|NO[ -]?STUFF|UNPOPULATED)"
_VALUE = re.compile(rf"^(?:{_MARK}(?:$|[\s(_/:,;-])|.*[\s(_/;,]{_MARK}\)?$)", re.IGNORECASE)
_FIELDS = {
    "dnp": "yes", "dnf": "yes", "dni": "yes", "dnm": "yes", "do not populate": "yes", "do not fit": "yes", "not fitted": "yes",
    "populate": "no", "fitted": "no", "fit": "no", "place": "no", "mount": "no", "config": "dnf", "assembly": "dnf",
}
_YES = {"yes", "y", "true", "1", "x", "dnp", "dnf", ""}
_NO = {"no", "n", "false", "0", "dnp", "dnf", "dni", "nf"}


def why_not_fitted(part: Part) -> str:
    """The mark by which `part` is left off the board, in words; empty when it is fitted."""
    if part.dnp:
        return "marked do not populate"
    if _VALUE.match(part.value.strip()):
        return f"value {part.value!r}"
    for name, value in part.fields.items():
        wanted = _FIELDS.get(name.strip().lower())
        text = value.strip().lower()
        if wanted == "yes" and text in _YES - {""}:
            return f"field {name} = {value!r}"
        if wanted in ("no", "dnf") and text in _NO and text:
            return f"field {name} = {value!r}"
    return ""
