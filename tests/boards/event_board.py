"""The battery board with what happens to it: devices with transient heat and safe areas, and events of every kind."""

from __future__ import annotations

from battery_board import ANNOTATIONS as STEADY
from battery_board import DEVICES as STEADY_DEVICES
from battery_board import PARTS as STEADY_PARTS

PARTS = {**STEADY_PARTS, "D1": ("D", "TV30", "+24V", "GND"), "D2": ("D", "SF100", "+24V", "/HEAT-")}

DEVICES = (
    STEADY_DEVICES
    .replace("thermal: {rth_jc: 2 K/W, rth_ja: 50 K/W}",
             "thermal: {rth_jc: 2 K/W, rth_ja: 50 K/W, foster: [[0.3 K/W, 1 ms], [0.9 K/W, 12 ms], [0.8 K/W, 150 ms]]}")
    .replace("envelope: {dc: [[0.1 V, 30 A], [2 V, 30 A], [40 V, 0.5 A]]}",
             "envelope: {dc: [[0.1 V, 30 A], [2 V, 30 A], [40 V, 0.5 A]], 10 ms: [[0.1 V, 30 A], [5 V, 30 A], [40 V, 2 A]], "
             "1 ms: [[0.4 V, 120 A], [5 V, 120 A], [40 V, 8 A]]}")
    .replace("thermal: {rth_jc: 1.36 K/W, rth_ja: 62 K/W}",
             "thermal: {rth_jc: 1.36 K/W, rth_ja: 62 K/W, zth_jc: [[10 us, 0.012 K/W], [100 us, 0.04 K/W], [1 ms, 0.13 K/W], "
             "[10 ms, 0.5 K/W], [100 ms, 1.2 K/W]]}")
    .replace("tj: 175 °C, power: 110 W}", "tj: 175 °C, power: 110 W, breakdown: 60 V, avalanche_energy: 120 mJ, "
             "avalanche_energy_repetitive: 9 mJ, avalanche_current: 30 A, id_pulsed: 200 A}")
    .replace("thermal: {rth_jc: 3 K/W, rth_ja: 60 K/W}",
             "thermal: {rth_jc: 3 K/W, rth_ja: 60 K/W, cauer: [[0.4 K/W, 2 mJ/K], [1.1 K/W, 15 mJ/K], [1.5 K/W, 0.4 J/K]]}")
    + """
  tvs-30v: {kind: tvs, matches: [{value: TV30}], source: "invented, table 6", limits: {power: 5 W, current: 40 A, tj: 150 °C,
    pulse_power: [[100 us, 2 kW], [1 ms, 600 W], [10 ms, 190 W]]},
    conduction: {clamp: [[1 mA, 33 V], [10 A, 38 V], [40 A, 46 V]], standoff: 30 V}, thermal: {rth_jc: 20 K/W, rth_ja: 90 K/W}}
  fast-100v: {kind: diode, matches: [{value: SF100}], source: "invented, table 7", limits: {vr: 100 V, if: 3 A, surge: 60 A, tj: 150 °C, power: 5 W},
    conduction: {knee: 0.8 V, slope: 20 mohm}, thermal: {rth_jc: 12 K/W, rth_ja: 70 K/W, foster: [[3 K/W, 2 ms], [9 K/W, 60 ms]]}}
"""
)

ANNOTATIONS = STEADY.replace("plate: {resistance: 8 K/W}", "plate: {resistance: 8 K/W, capacity: 40 J/K}")
"""The steady board, its plate with a heat capacity; a test adds its events."""


def with_events(*rows: str) -> str:
    """The annotations with some events."""
    return ANNOTATIONS + "events:\n" + "".join(f"  {row}\n" for row in rows)
