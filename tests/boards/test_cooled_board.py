"""Computed sinks and patches in a whole run, against the same equations written out here and solved by scipy.

The surfaces are the laws of `physics/` (held against the literature in tests/published/); what is independent here is the
network around them: shared sinks, parallel ways, loss that follows temperature, air that all of it warms.
"""

from __future__ import annotations

from math import pi, sqrt, tanh

import numpy as np
import pytest
from cooled_board import ANNOTATIONS, DEVICES, PARTS
from draw import write_board
from scipy.optimize import root

from drc_power.physics import convection, copper, enclosure, fins, rings
from drc_power.run import Run, check, read_board
from drc_power.solve.build import build_circuit
from drc_power.solve.solution import Engine

TOLERANCE = 2e-3
"""Share of a rise: the surfaces are polynomials through their laws, good to 1e-3 of the conductance."""

BACK = fins.PlateFins(9, 25e-3, 60e-3, 1.2e-3, 5e-3, 200.0, 0.85)
PAD_M2 = 1e-6
"""The drawn parts have no footprints: the tool takes a square millimetre of leads."""


def spreading(source_m2):
    """Lee, Song, Au and Moran: 60 x 60 x 4 mm of aluminium, for an outside that gives off little."""
    a_p, a_s = sqrt(0.06 * 0.06), sqrt(source_m2)
    return (a_p - a_s) / (200 * sqrt(pi) * a_p * a_s) / tanh((pi**1.5 / a_p + 1 / a_s) * 4e-3)


def face(rise, air, speed=0.0, altitude=0.0):
    still = convection.natural_h_w_per_m2_k(0.1, air + rise / 2, air, "vertical", altitude)
    moving = convection.forced_h_w_per_m2_k(0.1, speed, air + rise / 2, air, altitude)
    return (still**3 + moving**3) ** (1 / 3) + convection.radiation_h_w_per_m2_k(0.45, air + rise / 2, air)


def patch(area_m2, foil_m, layers, vias, speed=0.0, altitude=0.0):
    via = 9 / copper.via_rth_k_per_w(0.3e-3, 25e-6, 1.6e-3, 1) if vias else 0.0
    r = sqrt(area_m2 / pi)
    disc = rings.RingPatch(sqrt(PAD_M2 / pi), r, r + 0.01, foil_m, (layers - 1) * foil_m, via)
    return lambda rise, air: rise / rings.ring_patch_rth_k_per_w(disc, *[face(rise, air, speed, altitude)] * 2)


def reference(air=lambda p, t: 40.0, speed=0.0, altitude=0.0):
    """Temperatures of Q1, Q2, U1, U2, sink, both patches and the air, and the heat of U1's first way."""
    tab, small = patch(6e-4, 70e-6, 2, True, speed, altitude), patch(3e-4, 35e-6, 1, False, speed, altitude)
    gap = 0.5 * speed * (5 + 1.2) / 5

    def equations(u):
        q1, q2, sink, t_tab, t_small, ambient, first = u
        p_q1, p_q2 = (i**2 * 0.08 * (1 + 0.005 * (t - 25)) for i, t in ((5.0, q1), (2.5, q2)))
        v24 = 24 - 0.009 * (5 + 2.5 + 0.16)
        p_u1, p_u2 = (v24 - 12) * 0.155 + v24 * 0.005, (12 - 5) * 0.15 + 12 * 0.005
        total = p_q1 + p_q2 + p_u1 + p_u2 + (5 + 2.5 + 0.16) ** 2 * 0.009 + 5 * 0.15
        heat = lambda t: float(fins.sink_heat_w(BACK, t, ambient, "vertical", gap, altitude))  # noqa: E731
        return [q1 - sink - (1.4 + 0.2e-3 / (2 * 1e-4) + spreading(1e-4)) * p_q1,
                q2 - t_tab - 3 * p_q2,
                heat(sink) - p_q1 - first, float(tab(t_tab - ambient, ambient)) - p_q2 - (p_u1 - first),
                float(small(t_small - ambient, ambient)) - p_u2,
                ambient - air(total, ambient),
                sink + (3 + 0.5 + spreading(25e-6)) * first - t_tab - 3 * (p_u1 - first)]

    solved = root(equations, [120, 110, 90, 90, 80, 45, 1.0], tol=1e-12)
    assert solved.success
    q1, q2, sink, t_tab, t_small, ambient, first = solved.x
    u1 = sink + (3.5 + spreading(25e-6)) * first
    return {"Q1": q1, "Q2": q2, "U1": u1, "U2": t_small + 3 * ((12 - 5) * 0.15 + 0.06), "back": sink, "copper tab": t_tab,
            "copper small": t_small, "air": ambient}


def solution_of(tmp_path, annotations=ANNOTATIONS):
    board, _, _ = read_board(write_board(tmp_path, PARTS, annotations, DEVICES), Run())
    circuit = build_circuit(board.modes[0])
    return Engine(circuit).solve(circuit.box.typical()[None], polish=True)


def assert_same(solution, expected):
    found = {name: t[0] for name, t in (*solution.temperatures.junction_c.items(), *solution.temperatures.sink_c.items())}
    rises = {name: found[name] - expected["air"] for name in expected if name in found}
    assert rises == {name: pytest.approx(expected[name] - expected["air"], rel=TOLERANCE) for name in rises}
    assert len(rises) == 7


def test_shared_sink_patch_and_parallel_ways(tmp_path):
    assert_same(solution_of(tmp_path), reference())


def test_heat_in_is_heat_out_at_every_surface(tmp_path):
    solution = solution_of(tmp_path)
    worst = dict(solution.system.thermal.imbalance(solution.x, solution.prepared.heat))
    assert worst.keys() == {"back", "copper tab", "copper small"}
    assert max(float(share.max()) for share in worst.values()) < 1e-9
    given = sum(float(solution.temperatures.sink_w[name][0]) for name in worst)
    assert given == pytest.approx(sum(float(solution.powers_w[ref][0]) for ref in ("Q1", "Q2", "U1", "U2")), rel=1e-12)


def test_moving_air_and_altitude(tmp_path):
    annotations = ANNOTATIONS.replace("ambient: 40 °C", "ambient: 40 °C, air: 1.5 m/s, altitude: 2000 m")
    expected = reference(speed=1.5, altitude=2000.0)
    assert_same(solution_of(tmp_path, annotations), expected)
    assert expected["back"] < reference()["back"]


def test_a_given_rise_adds_to_the_air(tmp_path):
    annotations = ANNOTATIONS.replace("ambient: 40 °C", "ambient: 40 °C, enclosure: {rise: 12 K}")
    solution = solution_of(tmp_path, annotations)
    assert solution.ambient_c[0] == pytest.approx(52.0)
    assert_same(solution, reference(air=lambda p, t: 52.0))


@pytest.mark.parametrize(("text", "conductance"), [
    ("sealed: true, faces: 900 cm²", lambda rise: enclosure.wall_conductance_w_per_k(0.09, rise, 40.0)),
    ("vents: 20 cm²", lambda rise: enclosure.vent_conductance_w_per_k(10e-4, rise, 40.0, 0.05)),
    ("faces: 900 cm², vents: 20 cm²", lambda rise: enclosure.wall_conductance_w_per_k(0.09, rise, 40.0)
     + enclosure.vent_conductance_w_per_k(10e-4, rise, 40.0, 0.05))], ids=["sealed", "vents", "both"])
def test_an_enclosure_warms_by_all_that_its_parts_dissipate(tmp_path, text, conductance):
    """The fuse, which has no way of heat of its own, and the controller's heat are in the box too; heater and pump are not."""
    solution = solution_of(tmp_path, ANNOTATIONS.replace("ambient: 40 °C", f"ambient: 40 °C, enclosure: {{{text}}}"))
    expected = reference(air=lambda total, t: 40.0 + total / float(conductance(max(t - 40.0, 1e-3))))
    assert solution.ambient_c[0] - 40.0 == pytest.approx(expected["air"] - 40.0, rel=TOLERANCE)
    assert_same(solution, expected)


@pytest.fixture(scope="module")
def result(tmp_path_factory):
    rules = """limits:
  touch: {applies_to: {kind: sink}, stress: temperature, at_most: 70 °C, source: test}
  laminate: {applies_to: {kind: patch}, stress: temperature, at_most: 105 °C, source: test}
"""
    return check(write_board(tmp_path_factory.mktemp("cooled"), PARTS, ANNOTATIONS, DEVICES, rules))


def test_sinks_and_patches_are_judged_by_house_limits(result):
    found = {f.rule + " " + f.quantity.split()[-1]: f for f in result.findings if f.rule in ("sink.steady", "copper.patch")}
    expected = reference()
    assert {name: f.verdict for name, f in found.items()} == {
        "sink.steady back": "exceeded" if expected["back"] > 70 else "met",
        "copper.patch tab": "exceeded" if expected["copper tab"] > 105 else "met",
        "copper.patch small": "exceeded" if expected["copper small"] > 105 else "met"}
    assert found["sink.steady back"].value == pytest.approx(expected["back"], abs=0.2)
    assert all(f.workings for f in found.values())


def test_the_workings_say_what_was_assumed(result):
    steps = next(f for f in result.findings if f.ref == "U1" and f.rule == "junction.steady").workings
    said = " ".join(f"{step.formula} {step.source}" for step in steps)
    for words in ("Elenbaas", "parallel ways", "pad of 1 mm²", "emissivity 0.45", "Lee, Song, Au and Moran", "still air"):
        assert words in said


def test_without_a_limit_of_the_house_nothing_is_said_of_them(tmp_path):
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS, DEVICES))
    assert not [f for f in result.findings if f.rule in ("sink.steady", "copper.patch")]


@pytest.mark.parametrize(("datum", "ref", "says"), [
    ("fins: 9, ", "Q1", "sinks.back.fins"), ("height: 25 mm, ", "Q1", "sinks.back.height"), (", faces: vertical", "Q1", "sinks.back.faces"),
    ("base: 4 mm, ", "U1", "sinks.back.base"), ("area: 3 cm², ", "U2", "copper.patches.small.area"),
    (", drill: 0.3 mm", "Q2", "copper.patches.tab.vias.drill"), ("count: 9, ", "Q2", "copper.patches.tab.vias.count")])
def test_a_deleted_dimension_is_unproven_never_met(tmp_path, datum, ref, says):
    annotations = ANNOTATIONS.replace(datum, "")
    assert annotations != ANNOTATIONS
    result = check(write_board(tmp_path, PARTS, annotations, DEVICES))
    found = next(f for f in result.findings if (f.ref, f.rule) == (ref, "junction.steady"))
    assert found.verdict == "unproven" and says in found.remedy


def test_past_the_range_of_the_laws_is_unproven(tmp_path):
    """5.5 W on 3 cm² would warm it by far more than 200 K."""
    result = check(write_board(tmp_path, PARTS, ANNOTATIONS.replace("draws: 0.15 A", "draws: 0.79 A"), DEVICES))
    found = next(f for f in result.findings if (f.ref, f.rule) == ("U2", "junction.steady"))
    assert found.verdict == "unproven" and "opper small is hotter" in found.text


@pytest.mark.parametrize(("datum", "more"), [
    ("area: 6 cm²", "area: 8 cm²"), ("thickness: 70 um", "thickness: 105 um"), ("count: 9", "count: 20"), ("40 °C", "40 °C, air: 0.3 m/s"),
    ("emissivity: 0.85", "emissivity: 0.95"), ("height: 25 mm", "height: 32 mm"), ("base: 4 mm", "base: 6 mm")])
def test_more_copper_sink_or_air_is_never_hotter(tmp_path, datum, more):
    folder = tmp_path / "more"
    folder.mkdir()
    before, after = solution_of(tmp_path), solution_of(folder, ANNOTATIONS.replace(datum, more))
    for ref, t in after.temperatures.junction_c.items():
        assert t[0] <= before.temperatures.junction_c[ref][0] + 1e-6


def test_still_and_moving_air_meet_without_a_step(tmp_path):
    """From still air to 2 m/s in small steps: no junction falls by more than its neighbours in speed do."""
    from drc_power.solve import cooling

    note = read_board(write_board(tmp_path, PARTS, ANNOTATIONS, DEVICES), Run())[0].annotations.sinks["back"]
    speeds = np.geomspace(1e-4, 2.0, 60)
    g = np.array([0.0, *speeds])
    found = [float(cooling.sink_surface(note, cooling.AirAround(v)).conductance_w_per_k(np.array(30.0), np.array(40.0))) for v in g]
    steps = np.diff(np.log(found))
    assert (steps >= -1e-9).all() and steps[0] < 1e-6 and steps.max() < 0.15
