"""How much of a safe area a path uses: rectangles exactly, shapes against Duhamel's integral, and what must never happen.

Exact shares under Z ~ √t are derived by quadrature here, and by hand in the table of pulse shapes.
"""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from drc_power.physics.area_use import equivalent_length_s, window_use

SHAPES = {"falling": lambda x: 1.0 - x, "rising": lambda x: x, "triangle": lambda x: 1.0 - abs(2.0 * x - 1.0),
          "half-sine": lambda x: np.sin(np.pi * x)}
DENSE_S = np.geomspace(1e-9, 100.0, 100)


def used(shape, lengths_s, lines_a, lasts_s=1.0, beyond_a=None, n=96):
    """The share at every slice's end of a current shape at a constant voltage."""
    edges = np.linspace(0.0, 1.0, n + 1)
    current = np.array([shape(x) for x in edges], dtype=float)
    middle = np.array([shape(x) for x in (edges[1:] + edges[:-1]) / 2.0])
    peak = np.maximum(current[1:], current[:-1]) / lines_a[0]
    beyond = None if beyond_a is None else [middle / beyond_a]
    return window_use([lasts_s * edges], [middle[:, None] / np.asarray(lines_a)], [peak], lengths_s, beyond)[0]


def duhamel(shape, lasts_s=1.0):
    """Highest of ∫ i(s) dZ(τ − s) for Z = √t, by quadrature; Z' is integrated over the square root of the age."""
    at = np.linspace(0.02, 1.0, 99) * lasts_s
    return max(quad(lambda root, end=end: shape((end - root**2) / lasts_s), 0.0, np.sqrt(end), limit=200)[0] for end in at)


@pytest.mark.parametrize("shape", SHAPES.values(), ids=SHAPES)
def test_a_dense_area_that_heat_limits_gives_duhamels_integral(shape):
    share = used(shape, DENSE_S, 1.0 / np.sqrt(DENSE_S)).max()
    assert share == pytest.approx(duhamel(shape), rel=2e-3)


@pytest.mark.parametrize(("name", "exact", "equal_energy"), [
    ("falling", 0.4714, 0.7071), ("rising", 0.6667, 0.7071), ("triangle", 0.5443, 0.7071), ("half-sine", 0.6711, 0.7979)])
@pytest.mark.parametrize("first_s", [1e-6, 0.01, 0.05, 0.1, 0.2])
def test_between_few_lines_it_is_conservative_and_below_the_pulse_of_equal_energy(name, exact, equal_energy, first_s):
    lengths_s = np.array([first_s, 10.0])
    share = used(SHAPES[name], lengths_s, 1.0 / np.sqrt(lengths_s)).max()
    assert exact * (1.0 - 1e-3) <= share <= equal_energy * 1.02


@settings(max_examples=60, deadline=None)
@given(st.floats(1e-5, 50.0), st.lists(st.floats(0.05, 0.9), min_size=1, max_size=4))
def test_a_rectangle_is_its_own_line_at_every_length(lasts_s, falls):
    """Also just below, at and above each line's length, where it is the line itself."""
    lengths_s, lines_a = 10.0 ** np.arange(-3, -3 + len(falls)), 100.0 * np.cumprod(falls)
    for t_s in (lasts_s, *(x * f for x in lengths_s for f in (1.0 - 1e-9, 1.0, 1.0 + 1e-9))):
        share = used(lambda x: 1.0, lengths_s, lines_a, t_s, beyond_a=lines_a[-1] / 2.0, n=1)[-1]
        log_log = np.exp(np.interp(np.log(t_s), np.log(lengths_s), np.log(lines_a)))
        assert share == pytest.approx(1.0 / (log_log if t_s <= lengths_s[-1] * (1.0 + 1e-12) else lines_a[-1] / 2.0), rel=1e-6)


def share_of(i_a, t_s):
    """The highest share of currents that hold from edge to edge, on an area of three lines and one for any length."""
    lengths_s, lines_a = np.array([1e-3, 1e-2, 1e-1]), np.array([30.0, 8.0, 2.0])
    use = np.asarray(i_a)[:, None] / lines_a
    return window_use([t_s], [use], [use[:, 0]], lengths_s, [np.asarray(i_a) / 1.0]).max()


CURRENTS = st.lists(st.floats(0.0, 10.0), min_size=2, max_size=12)


@settings(max_examples=100, deadline=None)
@given(CURRENTS, st.integers(0, 11), st.floats(0.0, 5.0), st.floats(0.01, 1.0))
def test_more_current_never_uses_less(currents, at, more, lasts_s):
    edges, harder = np.linspace(0.0, lasts_s, len(currents) + 1), np.array(currents)
    harder[at % len(currents)] += more
    assert share_of(harder, edges) >= share_of(currents, edges) * (1.0 - 1e-12)


@settings(max_examples=100, deadline=None)
@given(CURRENTS, st.floats(0.0, 10.0), st.floats(0.001, 0.5), st.floats(0.01, 1.0))
def test_going_on_never_uses_less(currents, more, on_s, lasts_s):
    edges = np.linspace(0.0, lasts_s, len(currents) + 1)
    longer = share_of([*currents, more], np.append(edges, lasts_s + on_s))
    assert longer >= share_of(currents, edges) * (1.0 - 1e-12)


@pytest.mark.parametrize("shape", [lambda x: 1.0, *SHAPES.values()], ids=["rectangle", *SHAPES])
@pytest.mark.parametrize("beyond_a", [2.0, 0.5])
def test_a_pulse_that_is_drawn_out_never_uses_less(shape, beyond_a):
    """Over four decades of length, in steps of half a percent around every line."""
    lengths_s, lines_a = np.array([1e-3, 1e-2, 1e-1]), np.array([30.0, 8.0, 2.0])
    steps = np.concatenate([np.geomspace(1e-4, 1.0, 60), *(x * np.linspace(0.9, 1.1, 41) for x in lengths_s)])
    shares = [used(shape, lengths_s, lines_a, t_s, beyond_a).max() for t_s in np.sort(steps)]
    assert (np.diff(shares) >= -1e-9 * np.array(shares[1:])).all()


@settings(max_examples=40, deadline=None)
@given(st.floats(1e-4, 0.5), st.floats(0.1, 5.0))
def test_it_never_lies_below_a_rectangle_inside_the_path(lasts_s, height):
    lengths_s, lines_a = np.array([1e-3, 1e-2, 1e-1]), np.array([30.0, 8.0, 2.0])
    inside = used(lambda x: height, lengths_s, lines_a, lasts_s, beyond_a=1.0, n=1)[-1]
    around = used(lambda x: height * (1.0 if x < 0.5 else 2.0 - x), lengths_s, lines_a, 2.0 * lasts_s, beyond_a=1.0).max()
    assert around >= inside * (1.0 - 1e-9)


def test_past_the_end_of_a_line_nothing_is_allowed_from_that_age_on():
    use = np.array([[[0.1, np.inf]]])
    assert window_use([[0.0, 0.9e-3]], use, use[..., 0], [1e-3, 1e-2]).tolist() == [[0.1]]
    assert window_use([[0.0, 1.1e-3]], use, use[..., 0], [1e-3, 1e-2]).tolist() == [[np.inf]]


def test_longer_than_the_last_line_is_unknown_without_one_for_any_length():
    use = np.array([[[0.1, 0.2]]])
    assert np.isnan(window_use([[0.0, 0.011]], use, use[..., 0], [1e-3, 1e-2])).all()
    assert window_use([[0.0, 0.011]], use, use[..., 0], [1e-3, 1e-2], [[0.5]]).tolist() == [[0.5]]


def test_the_equivalent_rectangle_uses_as_much():
    lengths_s, point = np.array([1e-3, 1e-2, 1e-1]), np.array([[0.1, 0.3, 0.5]])
    for wanted in (0.1, 0.2, 0.3, 0.4, 0.5):
        length_s = equivalent_length_s([wanted], point, lengths_s)[0]
        assert np.exp(np.interp(np.log(length_s), np.log(lengths_s), np.log(point[0]))) == pytest.approx(wanted)


def test_a_short_pulse_is_not_made_a_long_one_by_the_rest_after_it():
    """What it uses once it is over is its share of a window of the last line, not the line for any length."""
    lengths_s, lines_a = np.array([1e-3, 1e-2]), np.array([30.0, 8.0])
    edges = np.array([0.0, 1e-3, 0.05])
    use = np.array([[3.0], [0.0]]) / lines_a
    share = window_use([edges], [use], [use[:, 0]], lengths_s, [[3.0, 0.0]])[0]
    assert share[0] == pytest.approx(0.1)
    assert share[1] == pytest.approx(0.1 * (3.0 - 3.0 / 8.0))


def test_a_train_is_sustained_by_its_mean():
    lengths_s, lines_a = np.array([1e-3, 1e-2]), np.array([30.0, 8.0])
    edges = np.linspace(0.0, 0.1, 201)
    on = (np.arange(200) % 2 == 0).astype(float)
    use = 2.0 * on[:, None] / lines_a
    share = window_use([edges], [use], [use[:, 0]], lengths_s, [2.0 * on / 1.0])[0].max()
    steady = used(lambda x: 1.0, lengths_s, lines_a, 0.1, beyond_a=1.0, n=1)[-1]
    assert steady == pytest.approx(1.0)
    assert steady < share < 1.05 * steady
