"""The examples of the file formats, read as they stand: what is not built yet is refused by name, the rest is understood."""

import pytest

from drc_power.intake import not_built, read_annotations, read_devices, read_rules, read_waivers

ANNOTATIONS = """\
format: 1
netlist: frost-fan.net
board: {name: Frost fan controller, revision: C}
rules: [frost-fan.rules.yaml]
devices: [devices]
waivers: frost-fan.waivers.yaml
surroundings: {ambient: -30 °C .. 55 °C, altitude: 800 m, air: still}
grounds: [GND, GNDPWR]
rails:
  "+24V": {voltage: 21 V .. 24 V .. 29 V, source: J1, limit: 20 A}      # fed from outside
  "+5V":  {voltage: 5 V ± 2 %}                                          # held by the regulator that drives it
loads:
  controller: {net: "+3V3", draws: 90 mA .. 180 mA, needs: 3.0 V .. 3.6 V, heats: U4}
  sensor-bus: {net: "/SENS", power: 0.4 W}
  heater:     {net: "/HEAT+", return: "/HEAT-", resistance: 12 ohm ± 5 %}
  fan-motor:  {net: "/FAN+", return: "/FAN-", kind: motor, draws: 3 A .. 9 A, resistance: 0.35 ohm}
modes:
  run:     {}
  standby: {loads: {heater: 0 A, fan-motor: 0 A}, parts: {Q3: {state: blocked}}}
  gale:    {like: run, loads: {fan-motor: 9 A}, surroundings: {ambient: 10 °C}}
parts:
  Q3: {device: nfet-60v-8m, heat: {sink: rail-sink, interface: 0.6 K/W}, overshoot: 8 V}
  U2: {device: reg-ldo-800ma, heat: {copper: u2-tab}}
  "R1?": {device: chip-1206}
stages:
  fan:   {kind: half-bridge, high: Q3, low: D4, load: fan-motor, frequency: 20 kHz, duty: 20 % .. 95 %}
  siren: {kind: push-pull, pair: [Q7, Q8], load: 8 ohm, phase: 0 deg .. 45 deg}
events:
  plug-in: {kind: inrush, part: Q1, capacitance: 2200 uF, slew: 2 V/ms, with: 0.2 A, from: standby}
  jammed:  {kind: stall, load: fan-motor, limit: 22 A, lasts: 1.5 s, from: run}
  short-5: {kind: short, net: "+5V", part: U1, limit: 2.2 A, lasts: 20 ms, every: 1 s}
sinks:
  rail-sink: {resistance: 3.2 K/W, capacity: 60 J/K}
  back-fin:  {fins: 9, height: 25 mm, length: 60 mm, thickness: 1.2 mm, spacing: 5 mm, base: 4 mm, width: 60 mm, material: aluminium, emissivity: 0.85, faces: vertical}
copper:
  patches: {u2-tab: {area: 4 cm², thickness: 35 um, layers: 2, vias: {count: 9, drill: 0.3 mm, plating: 25 um}}}
  tracks:  {"+24V": {width: 4 mm, thickness: 70 um, layer: outer, length: 60 mm}}
outside:
  - {parts: [D1, "TP*"], because: signal level}
"""

DEVICES = """\
format: 1
devices:
  nfet-60v-8m:
    kind: mosfet
    channel: n
    matches: [{value: "NF6008*"}, {MPN: "NF6008*"}]
    source: "data sheet rev 1.2, tables 2 to 5, figure 8"
    limits:     {vds: 60 V, vgs: 20 V, id: 50 A, id_pulsed: 200 A, tj: 175 °C, power: 110 W, avalanche_energy: 120 mJ, avalanche_current: 30 A, breakdown: 60 V}
    conduction: {rds: {typ: 6.4 mohm, max: 8 mohm}, rds_scale: [[25 °C, 1.0], [100 °C, 1.45], [150 °C, 1.85]], at_gate: 10 V}
    gate:       {charge: 62 nC, threshold: 1.8 V .. 3 V, rise: 18 ns, fall: 15 ns}
    charge:     {output: 40 nC, recovery: 55 nC, at: 30 V}
    body:       {knee: 0.7 V, slope: 4 mohm}
    transfer:   {alpha: [[1 A, 20 mA/K], [10 A, 45 mA/K], [40 A, -10 mA/K]]}
    thermal:    {rth_jc: 1.36 K/W, rth_ja: 62 K/W, zth_jc: [[10 us, 0.012 K/W], [100 us, 0.04 K/W], [1 ms, 0.13 K/W], [10 ms, 0.5 K/W], [100 ms, 1.2 K/W]]}
    envelope:
      dc:     [[0.4 V, 50 A], [2.2 V, 50 A], [10 V, 8 A], [60 V, 0.6 A]]
      10 ms:  [[0.4 V, 50 A], [6 V, 50 A], [60 V, 1.6 A]]
      100 us: [[1.6 V, 200 A], [5 V, 200 A], [60 V, 12 A]]
"""

RULES = """\
format: 1
name: Orchard works power rules
based_on: [shipped/common-practice]
limits:
  mosfet-voltage: {applies_to: {kind: mosfet}, stress: vds, at_most: 80 %, locked: true, source: common practice}
  junction:       {applies_to: {kind: [mosfet, bjt, diode, linear-regulator]}, stress: tj, below_rating_by: 25 K}
  chip-power:     {applies_to: {kind: resistor}, stress: power, at_most: 50 %, against: ambient, full_until: 70 °C, zero_at: 155 °C}
  tantalum:       {applies_to: {kind: capacitor, device: "tant-*"}, stress: voltage, at_most: [[70 °C, 50 %], [110 °C, 30 %]]}
  envelope:       {applies_to: {kind: [mosfet, bjt]}, stress: envelope, at_most: 70 %}
  rise:           {applies_to: {kind: track}, stress: rise, at_most: 20 K}
methods: {track: ipc-2221, envelope_scaling: current, derived_envelope: unproven}
fields:  {voltage: [Voltage, V rating], power: [Power], not_fitted: {POPULATE: "0"}}
close_at: 90 %
fails_from: unproven
"""

WAIVERS = "- {finding: ID, because: TEXT, by: NAME, until: 2027-03-31, value: 151 °C}\n"


@pytest.fixture
def all_built(monkeypatch):
    """Every key as if it were built."""
    monkeypatch.setattr(not_built, "NOT_BUILT", {kind: {} for kind in not_built.NOT_BUILT})


def test_annotations(project, all_built):
    notes = read_annotations(project.write("frost-fan.power.yaml", ANNOTATIONS))
    assert (notes.board_name, notes.board_revision, notes.netlist) == ("Frost fan controller", "C", "frost-fan.net")
    assert notes.surroundings.ambient.span.min == -30 and notes.surroundings.altitude.typ == 800 and notes.surroundings.air == "still"
    assert notes.grounds == ("GND", "GNDPWR") and notes.rules == ("frost-fan.rules.yaml",) and notes.devices == ("devices",)
    assert notes.rails["+24V"].source == ("J1",) and notes.rails["+24V"].limit.typ == 20 and notes.rails["+5V"].source == ()
    assert notes.loads["heater"].return_ == "/HEAT-" and notes.loads["heater"].resistance.max == pytest.approx(12.6)
    assert notes.loads["fan-motor"].is_motor and notes.loads["fan-motor"].demands == ("draws",)
    assert notes.mode_names == ("run", "standby", "gale")
    assert notes.parts["Q3"].heat.sink == "rail-sink" and notes.parts["Q3"].heat.interface.typ == 0.6
    assert notes.stages["fan"].high == ("Q3",) and notes.stages["siren"].load.typ == 8.0
    assert notes.stages["siren"].phase.max == pytest.approx(0.7853981633974483)
    assert notes.events["plug-in"].with_.typ == 0.2 and notes.events["plug-in"].from_ == ("standby",)
    assert notes.sinks["back-fin"].fins.typ == 9 and notes.sinks["rail-sink"].capacity.typ == 60
    assert notes.copper.patches["u2-tab"].vias.drill.typ == pytest.approx(0.3e-3) and notes.copper.tracks["+24V"][0].layer == "outer"
    assert notes.outside[0].parts == ("D1", "TP*") and notes.outside[0].because == "signal level"
    assert len(notes.sha256) == 64 and notes.source_file.path == "frost-fan.power.yaml" and notes.folder == str(project.folder)


def test_what_is_not_built_is_named_and_nothing_else(project):
    read_annotations(project.write("a.power.yaml", ANNOTATIONS))
    with_more = ANNOTATIONS.replace("copper:\n", "copper:\n  board: frost-fan.kicad_pcb\n")
    faults = project.faults(lambda: read_annotations(project.write("b.power.yaml", with_more)))
    assert faults == ["b.power.yaml:36:3: 'board' is not supported yet; leave it out"]


def test_devices(project):
    device = read_devices([project.write("d.yaml", DEVICES)], str(project.folder)).devices["nfet-60v-8m"]
    assert (device.kind, device.channel, device.name) == ("mosfet", "n", "nfet-60v-8m")
    assert device.limits["avalanche_energy"].typ == pytest.approx(0.12) and device.limits["tj"].typ == 175
    assert device.conduction.rds[None].max == pytest.approx(8e-3) and device.conduction.at_gate.typ == 10
    assert device.conduction.rds_scale.points == ((25.0, 1.0), (100.0, 1.45), (150.0, 1.85))
    assert device.gate.charge.typ == 62e-9 and device.charge.recovery.typ == 55e-9 and device.body.slope.typ == 4e-3
    assert device.transfer.alpha.points[-1] == (40.0, -0.01)
    assert device.thermal.zth_jc.column(0) == (1e-5, 1e-4, 1e-3, 1e-2, 1e-1)
    assert [length_s for length_s, _ in device.envelope.pulses] == [1e-4, 1e-2] and device.envelope.dc.points[0] == (0.4, 50.0)
    assert device.matches_part("NF6008-T", {}) and device.matches_part("x", {"MPN": "NF6008"}) and not device.matches_part("x", {})


def test_rules(project):
    rules = read_rules([project.write("o.rules.yaml", RULES)], str(project.folder))
    assert rules.packs[-1] == "Orchard works power rules" and len(rules.packs) == 2
    assert rules.limits["chip-power"].zero_at.typ == 155 and rules.limits["junction"].below_rating_by.typ == 25
    assert rules.limits["tantalum"].at_most.points == ((70.0, 0.5), (110.0, 0.3))
    assert rules.limits["tantalum"].applies_to == {"kind": ("capacitor",), "device": ("tant-*",)}
    assert rules.limits["mosfet-voltage"].locked and rules.limits["mosfet-voltage"].pack == "Orchard works power rules"
    assert rules.methods["track"] == "ipc-2221" and rules.fields.voltage == ("Voltage", "V rating")
    assert rules.fields.not_fitted == {"POPULATE": "0"} and (rules.close_at, rules.fails_from) == (0.9, "unproven")


def test_waivers(project):
    (waiver,) = read_waivers(project.write("w.yaml", WAIVERS), str(project.folder)).waivers
    assert (waiver.finding, waiver.because, waiver.by) == ("ID", "TEXT", "NAME")
    assert waiver.until.isoformat() == "2027-03-31" and (waiver.value.typ, waiver.value.dimension) == (151.0, "temperature")


KINDS = """\
format: 1
devices:
  q: {kind: bjt, channel: npn, limits: {vce: 60 V, vbe: 5 V, ic: 5 A, ic_pulsed: 10 A, power: 20 W, tj: 150 °C, second_breakdown: 2 A}, conduction: {saturation: 0.2 V, slope: 80 mohm, gain: 60 .. 200}, switching: {rise: 200 ns, fall: 300 ns}}
  i: {kind: igbt, limits: {vce: 600 V, second_breakdown: [[10 V, 2 A], [60 V, 0.2 A]]}}
  d: {kind: diode, limits: {vr: 60 V, if: 20 A, surge: 180 A}, conduction: {knee: 0.4 V, slope: 10 mohm, knee_tempco: -1 mV/K}, charge: {recovery: 40 nC}, leakage: [[25 °C, 1 uA], [100 °C, 5 mA]]}
  b: {kind: bridge, conduction: {forward: {125 °C: [[1 A, 0.33 V]], 25 °C: [[1 A, 0.42 V], [3 A, 0.5 V]]}}}
  t: {kind: tvs, limits: {power: 5 W, pulse_power: [[10 us, 6 kW], [1 ms, 600 W]]}, conduction: {clamp: [[1 A, 33 V], [100 A, 45 V]], standoff: 28 V}}
  l: {kind: linear-regulator, limits: {vin: 35 V, differential: 30 V, current: 1 A}, conduction: {dropout: 1 V, quiescent: 5 mA, reference: 5 V ± 2 %, minimum_load: 1 mA, current_limit: 0.8 A .. 1.3 A}}
  s1: {kind: switching-regulator, conduction: {efficiency: 85 %, quiescent: 1 mA}}
  s2: {kind: switching-regulator, conduction: {efficiency: [[0.1 A, 82 %], [1 A, 90 %]]}}
  s3: {kind: switching-regulator, conduction: {efficiency: [{vin: 48 V, at: [[1 A, 82 %]]}, {vin: 12 V, at: 90 %}]}}
  f: {kind: fuse, limits: {current: 20 A, voltage: 58 V, i2t: 1400 A²s, melts: [[2 s, 40 A], [10 s, 33 A]]}, conduction: {resistance: {typ: 2.6 mohm, max: 3.2 mohm}}}
  r: {kind: resistor, limits: {power: 0.5 W, voltage: 200 V, temperature: 155 °C, pulse_energy: 20 mJ}, conduction: {resistance: 1 kohm, tempco: 100 ppm/K}}
  x: {kind: transformer, limits: {current: 1 A, saturation: 2 A}, conduction: {primary: 1 ohm, secondary: 50 mohm, ratio: 12}}
  n: {kind: inductor, limits: {saturation: 4 A}, conduction: {winding: 35 mohm}}
  c: {kind: capacitor, limits: {voltage: 50 V, ripple: 1.2 A, temperature: 105 °C}, conduction: {esr: 60 mohm}}
  u: {kind: gate-driver, limits: {vin: 20 V}, conduction: {quiescent: 2 mA}, thermal: {foster: [[0.2 K/W, 1 ms], [0.1 K/W, 1 s]]}}
  v: {kind: ic, thermal: {rth_jc: 2 K/W, rth_jc_top: 4 K/W, rth_jb: 9 K/W, rth_ja: 40 K/W, capacity: 0.3 J/K, cauer: [[0.2 K/W, 5 mJ/K]]}}
  m: {kind: mosfet, conduction: {rds: {10 V: 6 mohm, 4.5 V: {typ: 8 mohm, max: 11 mohm}}}}
"""


def test_every_kind_of_device(project):
    devices = read_devices([project.write("k.yaml", KINDS)], str(project.folder)).devices
    assert devices["b"].conduction.forward[25.0].points == ((1.0, 0.42), (3.0, 0.5)) and list(devices["b"].conduction.forward) == [25.0, 125.0]
    assert devices["d"].leakage.points[1] == (100.0, 5e-3) and devices["d"].conduction.knee_tempco.typ == -1e-3
    assert devices["s1"].conduction.efficiency[0][1].typ == 0.85
    assert devices["s2"].conduction.efficiency[0][1].points == ((0.1, 0.82), (1.0, 0.9))
    assert [vin_v for vin_v, _ in devices["s3"].conduction.efficiency] == [12.0, 48.0]
    assert list(devices["m"].conduction.rds) == [4.5, 10.0] and devices["m"].conduction.rds[4.5].max == 11e-3
    assert devices["i"].limits["second_breakdown"].points[1] == (60.0, 0.2)
    assert devices["u"].thermal.foster.points == ((0.2, 1e-3), (0.1, 1.0))
