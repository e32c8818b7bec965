"""Polynomial surfaces against the laws they stand for, their slopes, and what lies beyond their range."""

from __future__ import annotations

import numpy as np
import pytest

from drc_power.physics import fins, rings
from drc_power.solve.cooling import AirAround, board_face_w_per_m2_k
from drc_power.solve.surfaces import COLDEST_C, FIT_WITHIN, HOTTEST_C, MOST_RISE_K, Surface, Surfaces


def sink(emissivity, faces, speed):
    made = fins.PlateFins(9, 25e-3, 60e-3, 1.2e-3, 5e-3, 200.0, emissivity)
    return lambda rise, air: fins.sink_heat_w(made, air + rise, air, faces, speed) / rise


def patch(speed):
    made = rings.RingPatch(3e-3, 11e-3, 21e-3, 35e-6, 35e-6, 0.02)

    def law(rise, air):
        h = board_face_w_per_m2_k(rise / 2, air, AirAround(speed))
        return 1 / rings.ring_patch_rth_k_per_w(made, h, h)

    return law


LAWS = {"sink": sink(0.85, "vertical", 0.0), "bare sink": sink(0.0, "vertical", 0.0), "flat": sink(0.85, "down", 0.0),
        "blown": sink(0.0, "vertical", 2.0), "hardly blown": sink(0.0, "vertical", 0.2), "patch": patch(0.0), "blown patch": patch(2.0)}


def samples(n=2000):
    rng = np.random.default_rng(1)
    return np.exp(rng.uniform(np.log(3.0), np.log(MOST_RISE_K), n)), rng.uniform(COLDEST_C, HOTTEST_C, n)


@pytest.mark.parametrize("name", LAWS)
def test_a_polynomial_misses_its_law_by_less_than_it_may(name):
    rise, air = samples()
    heat = Surfaces([Surface(LAWS[name], "", "")]).heat((air + rise)[None], air[None])[0][0]
    assert np.abs(heat / (LAWS[name](rise, air) * rise) - 1).max() < FIT_WITHIN


@pytest.mark.parametrize("name", ["sink", "patch", "blown"])
def test_slopes_are_those_of_the_heat(name):
    rise, air = samples(200)
    surface, c, e = Surfaces([Surface(LAWS[name], "", "")]), (air + rise)[None], 1e-4
    _, per_own, per_air = surface.heat(c, air[None])
    assert (surface.heat(c + e, air[None])[0] - surface.heat(c - e, air[None])[0]) / (2 * e) == pytest.approx(per_own, rel=1e-6)
    moved = (surface.heat(c, air[None] + e)[0] - surface.heat(c, air[None] - e)[0]) / (2 * e)
    assert moved == pytest.approx(per_air, rel=1e-5)


def test_cold_hot_and_reversed_surfaces_stay_finite_and_rise():
    surface = Surfaces([Surface(LAWS["sink"], "", "")])
    c = np.linspace(-400.0, 5000.0, 5001)[None]
    heat, per_own, _ = surface.heat(c, np.full_like(c, 25.0))
    assert np.isfinite(heat).all() and (np.diff(heat) > 0).all() and (per_own > 0).all()
    assert heat[0, 0] < 0.0


def test_beyond_is_said():
    surface = Surfaces([Surface(LAWS["sink"], "", ""), Surface(LAWS["patch"], "", "", most_rise_k=60.0)])
    beyond = surface.beyond(np.array([[100.0, 226.0, 150.0], [80.0, 86.0, 150.0]]), np.array([[25.0, 25.0, 130.0]] * 2))
    assert beyond.tolist() == [[False, True, True], [False, True, True]]
