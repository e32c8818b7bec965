"""The house's methods for safe areas, second breakdown, and what must always hold of events, on whole runs."""

from __future__ import annotations

import numpy as np
import pytest
from draw import write_board
from event_board import DEVICES, PARTS, with_events
from test_event_board import Q1_FOSTER, case_of_q1, found, run, steady

from drc_power.run import check

HIT = "hit: {kind: pulse, part: Q1, voltage: 20 V, current: 3 A, lasts: 4 ms}"


def with_method(tmp_path, method, *events, devices=DEVICES):
    rules = f"based_on: [shipped/common-practice]\nmethods: {{{method}}}\n"
    return check(write_board(tmp_path, PARTS, with_events(*events), devices, rules))


def test_scaling_by_power_keeps_the_level_and_lowers_the_rest(tmp_path):
    """At 20 V both lines are limited by power, where the two rules agree; at 4 V the level stretch stays."""
    (tmp_path / "a").mkdir()
    (tmp_path / "b").mkdir()
    at_4 = "low: {kind: pulse, part: Q1, voltage: 2.2 V, current: 3 A, lasts: 10 ms}"
    by_power = with_method(tmp_path / "a", "envelope_scaling: power", HIT, at_4)
    by_current = with_method(tmp_path / "b", "envelope_scaling: current", HIT, at_4)
    assert found(by_power, "Q1", "envelope.event", "hit").rated == pytest.approx(found(by_current, "Q1", "envelope.event", "hit").rated, rel=1e-6)
    assert found(by_power, "Q1", "envelope.event", "low").rated == pytest.approx(30.0, rel=1e-6)
    assert found(by_current, "Q1", "envelope.event", "low").rated < 30.0


def test_scaling_by_power_along_a_path_never_allows_less(tmp_path):
    (tmp_path / "a").mkdir()
    (tmp_path / "b").mkdir()
    plug = "plug: {kind: inrush, part: Q1, capacitance: 200 uF, slew: 7 V/ms}"
    rated = [found(with_method(tmp_path / name, f"envelope_scaling: {how}", plug), "Q1", "envelope.event", "plug").rated
             for name, how in (("a", "power"), ("b", "current"))]
    assert rated[0] >= rated[1] * (1.0 - 1e-4)


WITHOUT_CURVES = DEVICES.replace("envelope: {dc: [[0.1 V, 30 A], [2 V, 30 A], [40 V, 0.5 A]], 10 ms: [[0.1 V, 30 A], [5 V, 30 A], [40 V, 2 A]], "
                                 "1 ms: [[0.4 V, 120 A], [5 V, 120 A], [40 V, 8 A]]}", "gate: {charge: 20 nC}")


def test_an_area_is_made_up_from_heat_only_where_the_house_accepts_it(tmp_path):
    (tmp_path / "a").mkdir()
    (tmp_path / "b").mkdir()
    refused = with_method(tmp_path / "a", "derived_envelope: unproven", HIT, devices=WITHOUT_CURVES)
    assert found(refused, "Q1", "envelope.event", "hit").verdict == "unproven"
    accepted = with_method(tmp_path / "b", "derived_envelope: accepted", HIT, devices=WITHOUT_CURVES)
    zth = sum(r * -np.expm1(-4e-3 / tau) for r, tau in Q1_FOSTER)
    safe = (150.0 - case_of_q1(steady())) / (20.0 * zth)
    assert found(accepted, "Q1", "envelope.event", "hit").rated == pytest.approx(safe, rel=2e-3)


def margins(tmp_path, name, event):
    (tmp_path / name).mkdir()
    result = run(tmp_path / name, event)
    return {f.rule: f.margin for f in result.findings if f.event and f.margin is not None and f.rule in ("junction.event", "envelope.event")}


HARDER = [
    ("hit: {kind: pulse, part: Q1, voltage: 20 V, current: 3 A, lasts: 4 ms}", "current: 3 A", "current: 3.3 A"),
    ("hit: {kind: pulse, part: Q1, voltage: 20 V, current: 3 A, lasts: 4 ms}", "lasts: 4 ms", "lasts: 5 ms"),
    ("hit: {kind: pulse, part: Q1, voltage: 20 V, current: 0.2 A, lasts: 10 ms}", "lasts: 10 ms", "lasts: 10.001 ms"),
    ("hit: {kind: pulse, part: Q1, voltage: 20 V, current: 3 A, lasts: 4 ms, shape: half-sine}", "lasts: 4 ms", "lasts: 12 ms"),
    ("hit: {kind: inrush, part: Q1, capacitance: 200 uF, slew: 7 V/ms}", "200 uF", "260 uF"),
    ("hit: {kind: inrush, part: Q1, capacitance: 200 uF, limit: 1 A}", "200 uF", "2000 uF"),
    ("hit: {kind: short, part: Q1, net: \"+24V\", limit: 1 A, lasts: 2 ms, every: 1 s}", "every: 1 s", "every: 100 ms"),
]


@pytest.mark.parametrize(("event", "was", "harder"), HARDER, ids=[h[2] for h in HARDER])
def test_more_longer_or_more_often_never_leaves_more(tmp_path, event, was, harder):
    before, after = margins(tmp_path, "a", event), margins(tmp_path, "b", event.replace(was, harder))
    assert before.keys() == after.keys()
    assert before
    for rule, margin in after.items():
        assert margin <= before[rule] + 1e-9


BIPOLAR = """
  npn-60v: {kind: bjt, channel: npn, matches: [{value: PF4012}], source: "invented, table 8", limits: {vce: 60 V, ic: 10 A, tj: 150 °C, power: 60 W,
    second_breakdown: RATING}, conduction: {saturation: 0.3 V, slope: 20 mohm, gain: 60 .. 200}, thermal: {rth_jc: 2 K/W, rth_ja: 50 K/W,
    foster: [[0.3 K/W, 1 ms], [1.7 K/W, 60 ms]]}, envelope: {dc: [[1 V, 10 A], [6 V, 10 A], [60 V, 0.3 A]]}}
"""


@pytest.mark.parametrize(("rating", "unit"), [("[[10 V, 6 A], [40 V, 1 A]]", "A"), ("4 A", "A"), ("300 mJ", "J")])
def test_second_breakdown_of_a_bipolar_transistor(tmp_path, rating, unit):
    parts = {**PARTS, "Q3": ("Q_NMOS_GDS", "SW", "/SENS", "+24V", "GND")}
    annotations = with_events("hit: {kind: pulse, part: Q3, voltage: 20 V, current: 2 A, lasts: 4 ms}")
    annotations = annotations.replace("  R3: {device: shunt-2512}", "  R3: {device: shunt-2512}\n"
                                      "  Q3: {device: npn-60v, state: blocked, pins: {collector: 2, emitter: 3}}")
    result = check(write_board(tmp_path, parts, annotations, DEVICES + BIPOLAR.replace("RATING", rating)))
    finding = found(result, "Q3", "derating.second_breakdown", "hit")
    factor = (150.0 - 50.0) / 125.0
    wanted = {"[": 6.0 * (20.0 / 10.0) ** (np.log(1.0 / 6.0) / np.log(4.0)) * factor, "4": 4.0, "3": 0.3}[rating[0]]
    assert finding.unit == unit
    assert finding.value == pytest.approx({"A": 2.0, "J": 0.16}[unit])
    assert finding.rated == pytest.approx(wanted, rel=1e-6)
