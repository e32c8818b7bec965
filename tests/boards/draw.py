"""Small boards for tests of whole runs: netlists as KiCad 9 writes them, drawn part by part, and files beside them."""

from __future__ import annotations

import uuid
from collections import defaultdict
from pathlib import Path

NAMESPACE = uuid.UUID("7a1d5d1e-6c1b-4e0e-9f59-3c1f3f0d9a11")

PINS = {
    "Conn_01x02": [("1", "Pin_1", "passive"), ("2", "Pin_2", "passive")],
    "Fuse": [("1", "", "passive"), ("2", "", "passive")],
    "R": [("1", "", "passive"), ("2", "", "passive")],
    "L": [("1", "1", "passive"), ("2", "2", "passive")],
    "C": [("1", "", "passive"), ("2", "", "passive")],
    "D_Schottky": [("1", "K", "passive"), ("2", "A", "passive")],
    "D": [("1", "K", "passive"), ("2", "A", "passive")],
    "Q_NMOS_GDS": [("1", "G", "input"), ("2", "D", "passive"), ("3", "S", "passive")],
    "Q_PMOS_GDS": [("1", "G", "input"), ("2", "D", "passive"), ("3", "S", "passive")],
    "REG": [("1", "VI", "power_in"), ("2", "GND", "power_in"), ("3", "VO", "power_out")],
    "D_Bridge": [("1", "+", "passive"), ("2", "-", "passive"), ("3", "~", "passive"), ("4", "~", "passive")],
    "BOOST": [("1", "VIN", "power_in"), ("2", "GND", "power_in"), ("3", "SW", "passive"), ("4", "FB", "input")],
    "PWM": [("1", "VIN", "power_in"), ("2", "GND", "power_in"), ("3", "HO", "output"), ("4", "LO", "output"), ("5", "FB", "input")],
    "MCU": [("1", "VDD", "power_in"), ("2", "VSS", "power_in"), ("3", "PA0", "bidirectional"), ("4", "PA1", "bidirectional")],
}

LIBRARIES = {"Conn_01x02": "Connector_Generic", "REG": "Regulator_Linear", "PWM": "Regulator_Controller", "BOOST": "Regulator_Switching", "MCU": "MCU_Generic"}

DESCRIPTIONS = {
    "Fuse": "Fuse", "R": "Resistor", "C": "Unpolarized capacitor", "L": "Inductor", "D": "Diode", "D_Schottky": "Schottky diode",
    "D_Bridge": "Diode bridge rectifier",
    "Q_NMOS_GDS": "N-MOSFET transistor, gate/drain/source", "Q_PMOS_GDS": "P-MOSFET transistor, gate/drain/source",
    "REG": "Positive 800mA fixed linear regulator", "BOOST": "Boost converter, adjustable output", "PWM": "Synchronous PWM controller, external switches", "MCU": "Microcontroller",
    "Conn_01x02": "Generic connector, single row, 01x02",
}


def netlist(parts: dict[str, tuple], extra_fields: dict[str, dict[str, str]] | None = None) -> str:
    """The text of a netlist. parts: reference → (symbol, value, net of pin 1, net of pin 2, ...)."""
    nodes = defaultdict(list)
    components = []
    for ref, (symbol, value, *nets) in parts.items():
        library = LIBRARIES.get(symbol, "Device")
        fields = "".join(f'\n        (field (name "{k}") "{v}")' for k, v in (extra_fields or {}).get(ref, {}).items())
        components.append(f"""    (comp (ref "{ref}")
      (value "{value}")
      (fields{fields}
        (field (name "Footprint"))
        (field (name "Datasheet") "~"))
      (libsource (lib "{library}") (part "{symbol}") (description "{DESCRIPTIONS[symbol]}"))
      (sheetpath (names "/") (tstamps "/"))
      (tstamps "{uuid.uuid5(NAMESPACE, ref)}"))""")
        for (number, name, kind), net in zip(PINS[symbol], nets, strict=True):
            if net:
                function = f' (pinfunction "{name}")' if name else ""
                nodes[net].append(f'      (node (ref "{ref}") (pin "{number}"){function} (pintype "{kind}"))')
    nets = [f'    (net (code "{k}") (name "{name}") (class "Default")\n' + "\n".join(rows) + ")"
            for k, (name, rows) in enumerate(sorted(nodes.items()), 1)]
    return ('(export (version "E")\n  (design\n    (source "board.kicad_sch")\n    (date "2026-11-03T10:00:00+0000")\n'
            '    (tool "Eeschema 9.0.2"))\n  (components\n' + "\n".join(components) + ")\n  (nets\n" + "\n".join(nets) + "))\n")


def write_board(folder: Path, parts: dict[str, tuple], annotations: str, devices: str, rules: str = "",
                extra_fields: dict[str, dict[str, str]] | None = None) -> Path:
    """All files of a board in a folder; the annotation file's path."""
    (folder / "board.net").write_text(netlist(parts, extra_fields), encoding="utf-8")
    (folder / "devices.yaml").write_text("format: 1\ndevices:\n" + devices, encoding="utf-8")
    head = "format: 1\nnetlist: board.net\nboard: {name: Test board, revision: A}\ndevices: [devices.yaml]\n"
    if rules:
        (folder / "house.rules.yaml").write_text("format: 1\nname: Test rules\n" + rules, encoding="utf-8")
        head += "rules: [house.rules.yaml]\n"
    path = folder / "board.power.yaml"
    path.write_text(head + annotations, encoding="utf-8")
    return path
