"""Netlists of any size in the form KiCad 9 writes, of an invented board: rows of motor channels.

    python tests/benchmarks/generate_netlist.py 1507 > large.net
"""

from __future__ import annotations

import random
import sys
from textwrap import indent
from typing import NamedTuple

FIELDS_OF_A_LARGE_FILE = 36
"""House fields a part: with these a part takes 5.7 kB, and 1,507 parts 8.6 MB. With 5 it takes 1.5 kB."""


class Symbol(NamedTuple):
    """A library symbol: reference prefix, library, name, footprint, values to draw from, and its
    pins as (name, type, net). `{c}` in a net stands for the channel's sheet."""

    prefix: str
    library: str
    name: str
    footprint: str
    values: tuple[str, ...]
    pins: tuple[tuple[str, str, str], ...]


def _two_pins(prefix: str, name: str, footprint: str, values: str, *nets: str) -> Symbol:
    pins = tuple(("", "passive", net) for net in nets)
    return Symbol(prefix, "Device", name, footprint, tuple(values.split()), pins)


def _fet(name: str, value: str, gate: str, drain: str, source: str) -> Symbol:
    pins = ("G", "input", gate), ("D", "passive", drain), ("S", "passive", source)
    return Symbol("Q", "Device", name, "Package_TO_SOT_SMD:TO-252-2", (value,), pins)


_CHIP = "Resistor_SMD:R_0603_1608Metric"
_CERAMIC = "Capacitor_SMD:C_0805_2012Metric"
_TO252 = "Package_TO_SOT_SMD:TO-252-2"
_SO8 = "Package_SO:SOIC-8_3.9x4.9mm_P1.27mm"
_REGULATOR_PINS = (("GND", "power_in", "GND"), ("VO", "power_out", "{c}VCC"), ("VI", "power_in", "{c}VIN"))
_DRIVER_PINS = (
    ("VCC", "power_in", "{c}VCC"), ("HIN", "input", "+3V3"), ("LIN", "input", "GND"), ("GND", "power_in", "GND"),
    ("LO", "output", "{c}LO"), ("VS", "passive", "{c}OUT"), ("HO", "output", "{c}HO"), ("VB", "passive", "{c}VB"),
)  # fmt: skip

CHANNEL = (
    _two_pins("F", "Fuse", "Fuse:Fuse_1206_3216Metric", "5A 8A 10A", "+24V", "{c}FUSED"),
    _fet("Q_PMOS_GDS", "PF4012", "{c}REV", "{c}FUSED", "{c}VIN"),
    _two_pins("R", "R", _CHIP, "10k 22k 47k", "{c}REV", "GND"),
    _two_pins("D", "D_Zener", "Diode_SMD:D_SOD-123", "12V", "{c}VIN", "{c}REV"),
    _two_pins("C", "C", "Capacitor_SMD:C_1206_3216Metric", "10uF/50V 4u7/50V", "{c}VIN", "GND"),
    _two_pins("C", "C_Polarized", "Capacitor_SMD:CP_Elec_8x10", "220uF/35V", "{c}VIN", "GND"),
    Symbol("U", "Regulator_Linear", "VREG_TO252", _TO252, ("VR7812",), _REGULATOR_PINS),
    _two_pins("C", "C", _CERAMIC, "1uF 2u2", "{c}VCC", "GND"),
    _two_pins("C", "C", _CERAMIC, "100n", "{c}VB", "{c}OUT"),
    Symbol("U", "Driver_FET", "HB_DRIVER", _SO8, ("HD2108",), _DRIVER_PINS),
    _fet("Q_NMOS_GDS", "NF6008", "{c}GH", "{c}VIN", "{c}OUT"),
    _fet("Q_NMOS_GDS", "NF6008", "{c}GL", "{c}OUT", "{c}ISNS"),
    _two_pins("R", "R", _CHIP, "4R7 10R 22R", "{c}HO", "{c}GH"),
    _two_pins("R", "R", _CHIP, "4R7 10R 22R", "{c}LO", "{c}GL"),
    _two_pins("R", "R", _CHIP, "10k", "{c}GL", "{c}ISNS"),
    _two_pins("R", "R", "Resistor_SMD:R_2512_6332Metric", "5mR 10mR", "{c}ISNS", "GND"),
    _two_pins("D", "D_Schottky", "Diode_SMD:D_SMA", "SK5A60", "{c}OUT", "{c}VIN"),
    _two_pins("D", "D_Schottky", "Diode_SMD:D_SMA", "SK5A60", "GND", "{c}OUT"),
    _two_pins("L", "L", "Inductor_SMD:L_12x12mm_H8mm", "22uH 47uH", "{c}OUT", "{c}MOT"),
    _two_pins("J", "Conn_01x02_Pin", "Connector_Wire:SolderWire_1x02", "motor", "{c}MOT", "GND"),
)
SUPPLY = _two_pins("J", "Conn_01x02_Pin", "Connector_Wire:SolderWire_1x02", "supply", "+24V", "GND")

_WORDS = "lot reel supplier approved grade batch shelf stock drawing remark house order".split()


def clause(tag: str, /, *children: str, text: str = "", **attributes: str) -> str:
    """One clause as KiCad lays it out: attributes on the first line, each child on its own."""
    head = "".join(f' ({key} "{value}")' for key, value in attributes.items())
    words = f' "{text}"' if text else ""
    inside = "".join("\n" + indent(child, "  ") for child in children)
    return f"({tag}{head}{words}{inside})"


def generate(n_parts: int, seed: int, fields_per_part: int = FIELDS_OF_A_LARGE_FILE) -> str:
    """The netlist of a board of `n_parts` parts. The same arguments give the same text."""
    rng = random.Random(seed)
    counts: dict[str, int] = {}
    comps, nodes = [], {}
    for index in range(n_parts):
        channel, place = divmod(index - 1, len(CHANNEL))
        symbol = CHANNEL[place] if index else SUPPLY
        sheet = f"/channel {channel + 1}/" if index else "/"
        counts[symbol.prefix] = counts.get(symbol.prefix, 0) + 1
        ref = f"{symbol.prefix}{counts[symbol.prefix]}"
        comps.append(_comp(rng, ref, symbol, sheet, fields_per_part))
        for number, (name, kind, net) in enumerate(symbol.pins, start=1):
            function = {"pinfunction": name} if name else {}
            node = clause("node", ref=ref, pin=str(number), **function, pintype=kind)
            nodes.setdefault(net.format(c=sheet), []).append(node)
    nets = [
        clause("net", *nodes[name], code=str(code), name=name, **{"class": "Default"})
        for code, name in enumerate(sorted(nodes), start=1)
    ]
    return clause(
        "export",
        _design(),
        clause("components", *comps),
        clause("libparts", *map(_libpart, sorted({symbol.name: symbol for symbol in CHANNEL}.values()))),
        clause("libraries"),
        clause("nets", *nets),
        version="E",
    )


def _design() -> str:
    comments = (clause("comment", number=str(n), value="") for n in range(1, 10))
    title_block = clause("title_block", clause("title", text="Motor rows"), clause("rev", text="A"), *comments)
    sheet = clause("sheet", title_block, number="1", name="/", tstamps="/")
    return clause("design", clause("source", text="rows.kicad_sch"), clause("tool", text="Eeschema 9.0.8"), sheet)


def _comp(rng: random.Random, ref: str, symbol: Symbol, sheet: str, fields_per_part: int) -> str:
    own = [(f"House {n}", " ".join(rng.choices(_WORDS, k=4))) for n in range(1, fields_per_part + 1)]
    standard = [("Footprint", symbol.footprint), ("Datasheet", "~"), ("Description", "")]
    of_sheet = [("Sheetname", sheet.strip("/")), ("Sheetfile", "rows.kicad_sch"), ("ki_keywords", symbol.name.lower())]
    return clause(
        "comp",
        clause("value", text=rng.choice(symbol.values)),
        clause("footprint", text=symbol.footprint),
        clause("datasheet", text="~"),
        clause("fields", *(clause("field", name=name, text=text) for name, text in own + standard)),
        clause("libsource", lib=symbol.library, part=symbol.name, description="Invented"),
        *(clause("property", name=name, value=text) for name, text in own + of_sheet),
        clause("sheetpath", names=sheet, tstamps="/" if sheet == "/" else f"/{_uuid(random.Random(sheet))}/"),
        clause("tstamps", text=_uuid(rng)),
        ref=ref,
    )


def _libpart(symbol: Symbol) -> str:
    pins = (
        clause("pin", num=str(number), name=name, type=kind)
        for number, (name, kind, _) in enumerate(symbol.pins, start=1)
    )
    inside = clause("description", text="Invented"), clause("pins", *pins)
    return clause("libpart", *inside, lib=symbol.library, part=symbol.name)


def _uuid(rng: random.Random) -> str:
    digits = f"{rng.getrandbits(128):032x}"
    return "-".join((digits[:8], digits[8:12], digits[12:16], digits[16:20], digits[20:]))


if __name__ == "__main__":
    print(generate(int(sys.argv[1]), seed=1))
