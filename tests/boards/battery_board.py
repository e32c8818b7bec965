"""Battery → fuse → p-channel FET → linear regulator, and a heater on a low-side FET: annotated by the contract alone."""

PARTS = {
    "J1": ("Conn_01x02", "BATTERY", "VBAT", "GND"),
    "F1": ("Fuse", "10A", "VBAT", "VF"),
    "Q1": ("Q_PMOS_GDS", "PF4012", "QG", "VF", "+24V"),
    "R1": ("R", "100k", "QG", "GND"),
    "C1": ("C", "10u", "+24V", "GND"),
    "U1": ("REG", "REG-5V0", "+24V", "GND", "+5V"),
    "C2": ("C", "10u", "+5V", "GND"),
    "U2": ("MCU", "MC-01", "+5V", "GND", "/HEAT_EN", ""),
    "J2": ("Conn_01x02", "HEATER", "+24V", "/HEAT-"),
    "Q2": ("Q_NMOS_GDS", "NF6008", "/GATE", "/HEAT-", "/SHUNT"),
    "R2": ("R", "100", "/HEAT_EN", "/GATE"),
    "R3": ("R", "10mR", "/SHUNT", "GND"),
}

DEVICES = """
  fuse-10a: {kind: fuse, source: "invented, table 1", limits: {current: 10 A, voltage: 63 V}, conduction: {resistance: 9 mohm}}
  pfet-40v: {kind: mosfet, channel: p, source: "invented, table 2", limits: {vds: 40 V, vgs: 30 V, id: 30 A, tj: 150 °C, power: 60 W},
    conduction: {rds: 12 mohm, rds_scale: [[25 °C, 1.0], [100 °C, 1.4], [150 °C, 1.8]], at_gate: 10 V},
    body: {knee: 0.7 V, slope: 10 mohm}, thermal: {rth_jc: 2 K/W, rth_ja: 50 K/W},
    envelope: {dc: [[0.1 V, 30 A], [2 V, 30 A], [40 V, 0.5 A]]}}
  nfet-60v: {kind: mosfet, channel: n, source: "invented, table 3", limits: {vds: 60 V, vgs: 20 V, id: 50 A, tj: 175 °C, power: 110 W},
    conduction: {rds: {typ: 6.4 mohm, max: 8 mohm}, rds_scale: [[25 °C, 1.0], [100 °C, 1.45], [150 °C, 1.85]], at_gate: 10 V},
    body: {knee: 0.7 V, slope: 4 mohm}, thermal: {rth_jc: 1.36 K/W, rth_ja: 62 K/W},
    envelope: {dc: [[0.4 V, 50 A], [2.2 V, 50 A], [10 V, 8 A], [60 V, 0.6 A]]}}
  ldo-5v: {kind: linear-regulator, source: "invented, table 4", limits: {vin: 40 V, differential: 38 V, current: 0.8 A, power: 20 W, tj: 125 °C},
    conduction: {dropout: 1.2 V, quiescent: 5 mA}, thermal: {rth_jc: 3 K/W, rth_ja: 60 K/W}}
  shunt-2512: {kind: resistor, source: "invented, table 5", limits: {power: 2 W, voltage: 100 V}}
"""

ANNOTATIONS = """
surroundings: {ambient: -20 °C .. 50 °C}
grounds: [GND]
rails:
  VBAT: {voltage: 20 V .. 24 V .. 28 V, source: J1, limit: 10 A}
  "+5V": {voltage: 5 V}
loads:
  controller: {net: "+5V", draws: 20 mA .. 60 mA, needs: 4.5 V .. 5.5 V, heats: U2}
  heater: {net: "+24V", return: "/HEAT-", resistance: 12 ohm ± 5 %}
sinks:
  plate: {resistance: 8 K/W}
parts:
  F1: {device: fuse-10a}
  Q1: {device: pfet-40v, gate: 20 V .. 28 V}
  Q2: {device: nfet-60v, gate: 10 V, heat: {sink: plate, interface: 0.6 K/W}}
  U1: {device: ldo-5v, heat: {sink: plate, interface: 1.0 K/W}}
  R3: {device: shunt-2512}
outside:
  - {parts: [U2], because: signal level}
"""
