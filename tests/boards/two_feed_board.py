"""Two supplies OR-ed by Schottky diodes → coil → buck converter → resettable fuse → linear regulator; every value exact."""

PARTS = {
    "J1": ("Conn_01x02", "MAINS SUPPLY", "/IN1", "GND"),
    "J2": ("Conn_01x02", "SPARE SUPPLY", "/IN2", "GND"),
    "D1": ("D_Schottky", "SK4010", "+24V", "/IN1"),
    "D2": ("D_Schottky", "SK4010", "+24V", "/IN2"),
    "L1": ("L", "4.7uH", "+24V", "/BUCKIN"),
    "U1": ("REG", "BK-12V", "/BUCKIN", "GND", "+12V"),
    "F1": ("Fuse", "1A1", "+12V", "/LOGIC"),
    "U2": ("REG", "LD-05V", "/LOGIC", "GND", "+5V"),
    "U3": ("MCU", "MC-01", "+5V", "GND", "", ""),
    "J3": ("Conn_01x02", "RADIO", "+12V", "GND"),
    "J4": ("Conn_01x02", "LAMP", "+24V", "GND"),
}

DEVICES = """
  schottky-40v: {kind: diode, source: "invented, table 1", matches: [{value: SK4010}], limits: {vr: 40 V, if: 10 A, tj: 150 °C, power: 20 W},
    conduction: {knee: 0.38 V, slope: 21 mohm, knee_tempco: -1.1 mV/K}, thermal: {rth_jc: 2.2 K/W, rth_ja: 60 K/W}}
  coil-4u7: {kind: inductor, source: "invented, table 2", limits: {current: 8 A, saturation: 12 A}, conduction: {winding: 14 mohm}}
  buck-12v: {kind: switching-regulator, source: "invented, figure 3", limits: {vin: 40 V, current: 5 A, tj: 125 °C, power: 6 W},
    conduction: {efficiency: [{vin: 18 V, at: [[0.1 A, 80 %], [1 A, 93 %], [3 A, 95 %], [5 A, 92 %]]}, {vin: 36 V, at: [[0.1 A, 70 %], [1 A, 88 %], [3 A, 91 %], [5 A, 89 %]]}],
      quiescent: 0.1 mA}, thermal: {rth_jc: 4 K/W, rth_ja: 28 K/W}}
  polyfuse: {kind: fuse, source: "invented, table 4", limits: {current: 1.1 A, voltage: 30 V}, conduction: {resistance: 210 mohm}}
  ldo-5v: {kind: linear-regulator, source: "invented, table 5", limits: {vin: 20 V, differential: 18 V, current: 0.8 A, power: 3 W, tj: 125 °C},
    conduction: {dropout: 1.1 V, quiescent: 6 mA}, thermal: {rth_jc: 6 K/W, rth_ja: 45 K/W}}
"""

ANNOTATIONS = """
surroundings: {ambient: 40 °C}
grounds: [GND]
rails:
  /IN1: {voltage: 24.0 V, source: J1, resistance: 60 mohm}
  /IN2: {voltage: 23.9 V, source: J2, resistance: 25 mohm}
  "+12V": {voltage: 12 V}
  "+5V": {voltage: 5 V}
loads:
  controller: {net: "+5V", draws: 0.32 A, heats: U3}
  radio: {net: "+12V", power: 38 W}
  lamp: {net: "+24V", resistance: 11 ohm}
parts:
  D1: {device: schottky-40v, heat: {to_ambient: 24 K/W}}
  D2: {device: schottky-40v, heat: {to_ambient: 24 K/W}}
  L1: {device: coil-4u7}
  U1: {device: buck-12v}
  F1: {device: polyfuse}
  U2: {device: ldo-5v}
outside:
  - {parts: [U3], because: signal level}
"""
