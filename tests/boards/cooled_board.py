"""Battery, two low-side FETs, and two linear regulators: on a computed heat sink, on a patch of copper, and on both."""

PARTS = {
    "J1": ("Conn_01x02", "BATTERY", "VBAT", "GND"),
    "F1": ("Fuse", "10A", "VBAT", "+24V"),
    "U1": ("REG", "REG-12V", "+24V", "GND", "+12V"),
    "U2": ("REG", "REG-5V0", "+12V", "GND", "+5V"),
    "U3": ("MCU", "MC-01", "+5V", "GND", "", ""),
    "J2": ("Conn_01x02", "HEATER", "+24V", "/HEAT-"),
    "Q1": ("Q_NMOS_GDS", "NF6008", "/GATE", "/HEAT-", "GND"),
    "J3": ("Conn_01x02", "PUMP", "+24V", "/PUMP-"),
    "Q2": ("Q_NMOS_GDS", "NF6008", "/GATE2", "/PUMP-", "GND"),
}

DEVICES = """
  fuse-10a: {kind: fuse, source: "invented, table 1", limits: {current: 10 A, voltage: 63 V}, conduction: {resistance: 9 mohm}}
  nfet-60v: {kind: mosfet, channel: n, source: "invented, table 2", limits: {vds: 60 V, vgs: 20 V, id: 50 A, tj: 175 °C, power: 110 W},
    conduction: {rds: 80 mohm, rds_scale: [[25 °C, 1.0], [125 °C, 1.5]], at_gate: 10 V},
    thermal: {rth_jc: 1.4 K/W, rth_jb: 3 K/W}, envelope: {dc: [[0.4 V, 50 A], [60 V, 0.6 A]]}}
  ldo: {kind: linear-regulator, source: "invented, table 3", limits: {vin: 40 V, differential: 38 V, current: 0.8 A, power: 20 W, tj: 150 °C},
    conduction: {dropout: 1.2 V, quiescent: 5 mA}, thermal: {rth_jc: 3 K/W}}
"""

ANNOTATIONS = """
surroundings: {ambient: 40 °C}
grounds: [GND]
rails:
  VBAT: {voltage: 24 V, source: J1}
  "+12V": {voltage: 12 V}
  "+5V": {voltage: 5 V}
loads:
  controller: {net: "+5V", draws: 0.15 A, heats: U3}
  heater: {net: "+24V", return: "/HEAT-", draws: 5 A}
  pump: {net: "+24V", return: "/PUMP-", draws: 2.5 A}
sinks:
  back: {fins: 9, height: 25 mm, length: 60 mm, thickness: 1.2 mm, spacing: 5 mm, base: 4 mm, width: 60 mm, emissivity: 0.85, faces: vertical}
copper:
  patches:
    tab: {area: 6 cm², thickness: 70 um, layers: 2, vias: {count: 9, drill: 0.3 mm, plating: 25 um}}
    small: {area: 3 cm², thickness: 35 um}
parts:
  F1: {device: fuse-10a}
  Q1: {device: nfet-60v, gate: 12 V, heat: {sink: back, interface: {thickness: 0.2 mm, conductivity: 2 W/(m K), area: 1 cm²}}}
  U1: {device: ldo, heat: {sink: back, interface: 0.5 K/W, copper: tab}}
  Q2: {device: nfet-60v, gate: 12 V, heat: {copper: tab}}
  U2: {device: ldo, heat: {copper: small}}
outside:
  - {parts: [U3], because: signal level}
"""
