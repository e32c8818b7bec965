"""Tables of data sheets: breakpoints from both sides, ends, families, against numpy and scipy."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.interpolate import RegularGridInterpolator

from drc_power.physics import OutsideRange
from drc_power.physics.tables import interpolate_bilinear, interpolate_linear, interpolate_linear_slope

TEMPS_C = [25.0, 100.0, 150.0]
SCALES = [1.0, 1.45, 1.85]


@pytest.mark.parametrize(
    ("x", "expected"),
    [
        (-40.0, 1.0),
        (np.nextafter(25.0, 0), 1.0),
        (25.0, 1.0),
        (62.5, 1.225),
        (100.0, 1.45),
        (125.0, 1.65),
        (150.0, 1.85),
        (200.0, 2.25),
    ],
)
def test_holds_below_and_runs_on_above(x, expected):
    """By hand from the contract: straight lines, first value held, last slope carried on."""
    assert interpolate_linear(x, TEMPS_C, SCALES) == pytest.approx(expected, rel=1e-14)


@pytest.mark.parametrize("breakpoint_c", TEMPS_C)
def test_a_breakpoint_gives_its_own_value_exactly_and_no_step(breakpoint_c):
    at = interpolate_linear(breakpoint_c, TEMPS_C, SCALES)
    assert at == SCALES[TEMPS_C.index(breakpoint_c)]
    for aside in (np.nextafter(breakpoint_c, -np.inf), np.nextafter(breakpoint_c, np.inf)):
        assert interpolate_linear(aside, TEMPS_C, SCALES) == pytest.approx(at, rel=1e-13)


@pytest.mark.parametrize(
    ("beyond", "low", "high", "slope_low", "slope_high"),
    [
        ("hold", 1.0, 1.85, 0.0, 0.0),
        ("extend", 0.97, 1.93, 0.006, 0.008),
        ("nan", np.nan, np.nan, np.nan, np.nan),
    ],
)
def test_each_way_beyond_the_ends(beyond, low, high, slope_low, slope_high):
    value, slope = interpolate_linear_slope([20.0, 160.0], TEMPS_C, SCALES, below=beyond, above=beyond)
    np.testing.assert_allclose(value, [low, high], rtol=1e-12)
    np.testing.assert_allclose(slope, [slope_low, slope_high], rtol=1e-12)


def test_the_slope_at_a_breakpoint_is_that_to_its_right():
    _, slope = interpolate_linear_slope(TEMPS_C, TEMPS_C, SCALES, above="hold")
    np.testing.assert_allclose(slope, [0.006, 0.008, 0.0], rtol=1e-12)
    _, slope = interpolate_linear_slope(TEMPS_C, TEMPS_C, SCALES, above="nan")
    np.testing.assert_allclose(slope, [0.006, 0.008, 0.008], rtol=1e-12)


def test_one_point_is_level_everywhere():
    np.testing.assert_array_equal(interpolate_linear([-1.0, 5.0, 99.0], [5.0], [0.8]), [0.8, 0.8, 0.8])
    assert np.isnan(interpolate_linear(6.0, [5.0], [0.8], above="nan"))


def test_shapes_pass_through_and_infinity_and_nan_stay_honest():
    assert interpolate_linear(np.zeros((2, 3)), TEMPS_C, SCALES).shape == (2, 3)
    assert np.ndim(interpolate_linear(30.0, TEMPS_C, SCALES)) == 0
    assert np.isnan(interpolate_linear(np.nan, TEMPS_C, SCALES))
    assert interpolate_linear(np.inf, TEMPS_C, SCALES) == np.inf
    assert interpolate_linear(np.inf, TEMPS_C, SCALES, above="hold") == 1.85
    assert interpolate_linear(-np.inf, TEMPS_C, SCALES) == 1.0


@pytest.mark.parametrize(
    ("xs", "ys"),
    [([1.0, 1.0], [1, 2]), ([2.0, 1.0], [1, 2]), ([1.0], [1, 2]), ([], []), ([1.0, np.nan], [1, 2]), ([1.0], [np.nan])],
)
def test_a_table_that_is_no_table_is_refused(xs, ys):
    with pytest.raises(OutsideRange):
        interpolate_linear(1.0, xs, ys)


def test_an_unknown_way_beyond_the_ends_is_refused():
    with pytest.raises(OutsideRange, match="clamp"):
        interpolate_linear(1.0, [0.0, 1.0], [0.0, 1.0], below="clamp")


@given(
    st.lists(st.floats(-1e3, 1e3), min_size=2, max_size=8, unique=True),
    st.lists(st.floats(-1e3, 1e3), min_size=8, max_size=8),
    st.floats(-2e3, 2e3),
)
def test_between_the_ends_it_is_numpy_interp(xs, ys, x):
    xs = np.unique(np.round(xs, 3))
    ys = np.array(ys[: xs.size])
    ours = interpolate_linear(x, xs, ys, above="hold")
    np.testing.assert_allclose(ours, np.interp(x, xs, ys), rtol=1e-9, atol=1e-9)


EFFICIENCY = [(24.0, ([0.1, 0.5, 1.0], [0.80, 0.88, 0.90])), (48.0, ([0.1, 1.0], [0.70, 0.86]))]


def test_a_family_on_one_grid_is_scipys_bilinear_interpolation():
    vins, loads = np.array([12.0, 24.0, 48.0]), np.array([0.1, 1.0, 3.0])
    values = np.array([[0.85, 0.9, 0.87], [0.8, 0.9, 0.88], [0.7, 0.86, 0.85]])
    rows = [(vin, (loads, row)) for vin, row in zip(vins, values, strict=True)]
    rng = np.random.default_rng(7)
    at = np.column_stack([rng.uniform(12, 48, 200), rng.uniform(0.1, 3, 200)])
    expected = RegularGridInterpolator((vins, loads), values)(at)
    np.testing.assert_allclose(interpolate_bilinear(at[:, 0], at[:, 1], rows), expected, rtol=1e-12)


@pytest.mark.parametrize(
    ("vin", "load", "expected"),
    [(24.0, 0.5, 0.88), (48.0, 1.0, 0.86), (36.0, 1.0, 0.88), (10.0, 1.0, 0.90), (60.0, 1.0, 0.86), (36.0, 9.0, 0.88)],
)
def test_a_family_with_rows_of_its_own(vin, load, expected):
    assert interpolate_bilinear(vin, load, EFFICIENCY) == pytest.approx(expected, rel=1e-12)


def test_a_family_outside_its_rows_is_nan_when_asked():
    inside_and_out = interpolate_bilinear([20.0, 24.0, 48.0, 50.0], 1.0, EFFICIENCY, x_outside="nan")
    np.testing.assert_allclose(inside_and_out, [np.nan, 0.90, 0.86, np.nan])


def test_a_neighbour_that_does_not_reach_so_far_spoils_only_what_lies_between():
    rows = [(24.0, ([0.1, 1.0], [0.8, 0.9])), (48.0, ([0.1, 5.0], [0.7, 0.86]))]
    at_and_between = interpolate_bilinear([48.0, 36.0], 5.0, rows, y_above="nan")
    np.testing.assert_allclose(at_and_between, [0.86, np.nan])


def test_one_row_serves_every_input_voltage():
    np.testing.assert_allclose(interpolate_bilinear([1.0, 99.0], [0.1, 1.0], EFFICIENCY[:1]), [0.8, 0.9])
