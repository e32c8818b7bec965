"""Converters with their switches outside the chip, annotated by the contract alone."""

BUCK_PARTS = {
    "J1": ("Conn_01x02", "SUPPLY", "VIN", "GND"),
    "C1": ("C", "100u", "VIN", "GND"),
    "C2": ("C", "22u", "VIN", "GND"),
    "U1": ("PWM", "PW-100", "VIN", "GND", "/GH", "/GL", "/FB"),
    "Q1": ("Q_NMOS_GDS", "NF6008", "/GH", "VIN", "/SW"),
    "Q2": ("Q_NMOS_GDS", "NF6004", "/GL", "/SW", "GND"),
    "L1": ("L", "10u", "/SW", "+5V"),
    "C3": ("C", "220u", "+5V", "GND"),
    "R1": ("R", "31k6", "+5V", "/FB"),
    "R2": ("R", "10k", "/FB", "GND"),
    "J2": ("Conn_01x02", "LOAD", "+5V", "GND"),
}

BUCK_DEVICES = """
  nfet-60v-8m: {kind: mosfet, channel: n, source: "invented, table 1", limits: {vds: 60 V, vgs: 20 V, id: 50 A, tj: 175 °C, power: 60 W},
    conduction: {rds: 8 mohm, rds_scale: [[25 °C, 1.0], [150 °C, 1.8]], at_gate: 10 V},
    gate: {charge: 62 nC, rise: 18 ns, fall: 15 ns}, charge: {output: 40 nC, recovery: 55 nC, at: 30 V},
    body: {knee: 0.7 V, slope: 4 mohm}, thermal: {rth_jc: 1.36 K/W, rth_ja: 50 K/W},
    envelope: {dc: [[0.4 V, 50 A], [2.2 V, 50 A], [60 V, 1 A]], 100 us: [[0.4 V, 200 A], [60 V, 40 A]]}}
  nfet-60v-4m: {kind: mosfet, channel: n, source: "invented, table 2", limits: {vds: 60 V, vgs: 20 V, id: 80 A, tj: 175 °C, power: 80 W},
    conduction: {rds: 4 mohm, rds_scale: [[25 °C, 1.0], [150 °C, 1.8]], at_gate: 10 V},
    gate: {charge: 90 nC, rise: 20 ns, fall: 18 ns}, charge: {output: 40 nC, recovery: 70 nC, at: 30 V},
    body: {knee: 0.65 V, slope: 3 mohm}, thermal: {rth_jc: 1.0 K/W, rth_ja: 50 K/W},
    envelope: {dc: [[0.4 V, 80 A], [2.2 V, 80 A], [60 V, 1 A]], 100 us: [[0.4 V, 200 A], [60 V, 40 A]]}}
  coil-10u: {kind: inductor, source: "invented, table 3", limits: {current: 12 A, saturation: 16 A}, conduction: {winding: 6 mohm}}
  controller: {kind: ic, source: "invented, table 4", limits: {vin: 60 V, power: 1 W, tj: 125 °C}, conduction: {quiescent: 3 mA}, thermal: {rth_ja: 80 K/W}}
  alu: {kind: capacitor, source: "invented, table 5", limits: {voltage: 63 V, ripple: 5 A}}
  diode-60v: {kind: diode, source: "invented, table 6", limits: {vr: 60 V, if: 20 A, tj: 150 °C, power: 20 W},
    conduction: {knee: 0.4 V, slope: 8 mohm, knee_tempco: -1 mV/K}, charge: {recovery: 20 nC}, thermal: {rth_jc: 2 K/W, rth_ja: 45 K/W}}
"""

BUCK_ANNOTATIONS = """
surroundings: {ambient: 0 °C .. 40 °C}
grounds: [GND]
rails:
  VIN: {voltage: 24 V, source: J1}
  "+5V": {voltage: 5 V}
loads:
  load: {net: "+5V", draws: 8 A}
stages:
  main: {kind: buck, chip: U1, high: Q1, low: Q2, inductor: L1, frequency: 200 kHz, dead_time: 60 ns}
parts:
  U1: {device: controller}
  Q1: {device: nfet-60v-8m, gate: 10 V, overshoot: 6 V}
  Q2: {device: nfet-60v-4m, gate: 10 V, overshoot: 6 V}
  L1: {device: coil-10u}
  "C1 C2 C3": {device: alu}
"""

BOOST_PARTS = {
    "J1": ("Conn_01x02", "SUPPLY", "VIN", "GND"),
    "C1": ("C", "100u", "VIN", "GND"),
    "U1": ("PWM", "PW-100", "VIN", "GND", "", "/GL", "/FB"),
    "L1": ("L", "10u", "VIN", "/SW"),
    "Q1": ("Q_NMOS_GDS", "NF6008", "/GL", "/SW", "GND"),
    "D1": ("D_Schottky", "SD6020", "+24V", "/SW"),
    "C2": ("C", "220u", "+24V", "GND"),
    "C3": ("C", "47u", "+24V", "GND"),
    "R1": ("R", "100k", "+24V", "/FB"),
    "R2": ("R", "10k", "/FB", "GND"),
    "J2": ("Conn_01x02", "LOAD", "+24V", "GND"),
}

BOOST_ANNOTATIONS = """
surroundings: {ambient: 0 °C .. 40 °C}
grounds: [GND]
rails:
  VIN: {voltage: 12 V, source: J1}
  "+24V": {voltage: 24 V}
loads:
  load: {net: "+24V", draws: 3 A}
stages:
  up: {kind: boost, chip: U1, low: Q1, high: D1, inductor: L1, frequency: 200 kHz}
parts:
  U1: {device: controller}
  Q1: {device: nfet-60v-8m, gate: 10 V, overshoot: 6 V}
  D1: {device: diode-60v, overshoot: 5 V}
  L1: {device: coil-10u}
  "C1 C2 C3": {device: alu}
"""
