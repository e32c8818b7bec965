"""Three low-side FETs in parallel of unequal on-resistance on one sink, shunt and split ground; every value exact."""

PARTS = {
    "J1": ("Conn_01x02", "BATTERY", "VBAT", "GND"),
    "F1": ("Fuse", "40A", "VBAT", "+24V"),
    "J2": ("Conn_01x02", "HEATER", "+24V", "/HEAT-"),
    "Q1": ("Q_NMOS_GDS", "NF6008", "/G", "/HEAT-", "/SHUNT"),
    "Q2": ("Q_NMOS_GDS", "NF6008", "/G", "/HEAT-", "/SHUNT"),
    "Q3": ("Q_NMOS_GDS", "NF6008", "/G", "/HEAT-", "/SHUNT"),
    "R1": ("R", "2mR", "/SHUNT", "GNDPWR"),
    "R2": ("R", "1mR", "GNDPWR", "GND"),
    "R3": ("R", "4R7", "+24V", "/FEED"),
    "U1": ("REG", "LD-12V", "/FEED", "GND", "+12V"),
    "U2": ("REG", "LD-05V", "+12V", "GND", "+5V"),
    "U3": ("MCU", "MC-01", "+5V", "GND", "/G", ""),
}

DEVICES = """
  fuse-40a: {kind: fuse, source: "invented, table 1", limits: {current: 40 A, voltage: 63 V}, conduction: {resistance: 1.9 mohm}}
  nfet-60v: {kind: mosfet, channel: n, source: "invented, table 2", limits: {vds: 60 V, vgs: 20 V, id: 50 A, tj: 175 °C, power: 110 W},
    conduction: {rds: 8 mohm, rds_scale: [[25 °C, 1.0], [100 °C, 1.45], [150 °C, 1.85]], at_gate: 10 V},
    body: {knee: 0.7 V, slope: 4 mohm}, thermal: {rth_jc: 1.36 K/W, rth_ja: 62 K/W}}
  nfet-60v-low: {kind: mosfet, channel: n, source: "invented, table 3", limits: {vds: 60 V, vgs: 20 V, id: 50 A, tj: 175 °C, power: 110 W},
    conduction: {rds: 6.2 mohm, rds_scale: [[25 °C, 1.0], [100 °C, 1.45], [150 °C, 1.85]], at_gate: 10 V},
    body: {knee: 0.7 V, slope: 4 mohm}, thermal: {rth_jc: 1.2 K/W, rth_ja: 62 K/W}}
  shunt-2m: {kind: resistor, source: "invented, table 4", limits: {power: 5 W, voltage: 100 V}}
  ldo-12v: {kind: linear-regulator, source: "invented, table 5", limits: {vin: 40 V, differential: 38 V, current: 0.8 A, power: 20 W, tj: 125 °C},
    conduction: {dropout: 1.5 V, quiescent: 5 mA}, thermal: {rth_jc: 3 K/W, rth_ja: 60 K/W}}
  ldo-5v: {kind: linear-regulator, source: "invented, table 6", limits: {vin: 20 V, differential: 18 V, current: 0.8 A, power: 3 W, tj: 125 °C},
    conduction: {dropout: 1.1 V, quiescent: 2 mA}, thermal: {rth_jc: 6 K/W, rth_ja: 45 K/W}}
"""

ANNOTATIONS = """
surroundings: {ambient: 35 °C}
grounds: [GND, GNDPWR]
rails:
  VBAT: {voltage: 26 V, source: J1, resistance: 11 mohm}
  "+12V": {voltage: 12 V}
  "+5V": {voltage: 5 V}
loads:
  heater: {net: "+24V", return: "/HEAT-", resistance: 0.7 ohm}
  controller: {net: "+5V", draws: 0.11 A, heats: U3}
  relays: {net: "+12V", resistance: 150 ohm}
sinks:
  plate: {resistance: 4.5 K/W}
parts:
  F1: {device: fuse-40a}
  Q1: {device: nfet-60v, gate: 12 V, heat: {sink: plate, interface: 0.6 K/W}}
  Q2: {device: nfet-60v-low, gate: 12 V, heat: {sink: plate, interface: 0.5 K/W}}
  Q3: {device: nfet-60v, gate: 12 V, resistance: 7 mohm, heat: {sink: plate, interface: 0.9 K/W}}
  "R[12]": {device: shunt-2m}
  R3: {device: shunt-2m}
  U1: {device: ldo-12v, heat: {sink: plate, interface: 1.0 K/W}}
  U2: {device: ldo-5v}
outside:
  - {parts: [U3], because: signal level}
"""
