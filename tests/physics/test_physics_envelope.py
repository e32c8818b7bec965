"""The safe area at, just below and just above every breakpoint; monotone in current, time and temperature."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from drc_power.physics import OutsideRange
from drc_power.physics.envelope import (
    bjt_safe_current_a,
    case_factor,
    curve_current_a,
    instability_gain,
    power_line_a,
    pulse_current_a,
    safe_current_a,
    second_breakdown_factor,
)

DC = [0.4, 2.2, 10.0, 60.0], [50.0, 50.0, 8.0, 0.6]
PULSES = [
    (100e-6, ([1.6, 5.0, 60.0], [200.0, 200.0, 12.0])),
    (10e-3, ([0.4, 6.0, 60.0], [50.0, 50.0, 1.6])),
]
UP, DOWN = np.inf, -np.inf


def loglog(x, x_0, y_0, x_1, y_1):
    """Independent of the code under test: numpy's straight line through logarithms."""
    return float(np.exp(np.interp(np.log(x), np.log([x_0, x_1]), np.log([y_0, y_1]))))


@pytest.mark.parametrize(
    ("v_v", "expected_a"),
    [
        (0.0, 50.0),
        (0.4, 50.0),
        (1.0, 50.0),
        (2.2, 50.0),
        (5.0, loglog(5, 2.2, 50, 10, 8)),
        (10.0, 8.0),
        (24.0, loglog(24, 10, 8, 60, 0.6)),
        (60.0, 0.6),
        (np.nextafter(60.0, UP), 0.0),
        (100.0, 0.0),
    ],
)
def test_one_curve(v_v, expected_a):
    assert curve_current_a(v_v, *DC) == pytest.approx(expected_a, rel=1e-12)


@pytest.mark.parametrize(("v_v", "i_a"), list(zip(*DC, strict=True)))
def test_a_point_of_the_curve_is_exact_and_has_no_step_but_the_last(v_v, i_a):
    assert curve_current_a(v_v, *DC) == i_a
    assert curve_current_a(np.nextafter(v_v, DOWN), *DC) == pytest.approx(i_a, rel=1e-12)
    above = 0.0 if v_v == 60.0 else i_a
    assert curve_current_a(np.nextafter(v_v, UP), *DC) == pytest.approx(above, rel=1e-12)


def test_a_vertical_line_gives_its_later_point():
    curve = [1.0, 10.0, 10.0, 40.0], [20.0, 20.0, 5.0, 1.0]
    np.testing.assert_allclose(
        curve_current_a([np.nextafter(10.0, 0), 10.0, 40.0], *curve), [20.0, 5.0, 1.0], rtol=1e-12
    )
    breakdown = [1.0, 60.0, 60.0], [10.0, 2.0, 0.1]
    np.testing.assert_allclose(curve_current_a([60.0, 60.001], *breakdown), [0.1, 0.0])


@pytest.mark.parametrize(
    "curve",
    [([1.0, 0.5], [1.0, 1.0]), ([0.0, 1.0], [1.0, 1.0]), ([1.0, 2.0], [1.0, 0.0]), ([1.0], [1.0, 2.0]), ([], [])],
)
def test_a_curve_that_cannot_be_drawn_is_refused(curve):
    with pytest.raises(OutsideRange):
        curve_current_a(1.0, *curve)


@pytest.mark.parametrize(
    ("t_s", "expected_a"),
    [
        (0.0, 12.0),
        (1e-6, 12.0),
        (np.nextafter(100e-6, DOWN), 12.0),
        (100e-6, 12.0),
        (np.nextafter(100e-6, UP), 12.0),
        (1e-3, loglog(1e-3, 100e-6, 12.0, 10e-3, 1.6)),
        (np.nextafter(10e-3, DOWN), 1.6),
        (10e-3, 1.6),
        (np.nextafter(10e-3, UP), 0.6),
        (1.0, 0.6),
        (np.inf, 0.6),
    ],
)
def test_between_and_beyond_pulse_lengths(t_s, expected_a):
    assert pulse_current_a(60.0, t_s, PULSES, DC) == pytest.approx(expected_a, rel=1e-12)


def test_longer_than_every_curve_is_unanswered_without_dc():
    answers = pulse_current_a(60.0, [10e-3, np.nextafter(10e-3, UP), np.inf], PULSES)
    np.testing.assert_array_equal(answers, [1.6, np.nan, np.nan])


def test_dc_alone_answers_every_length_and_one_pulse_answers_shorter_ones():
    np.testing.assert_allclose(pulse_current_a(10.0, [0.0, 1e-6, np.inf], [], DC), 8.0)
    np.testing.assert_array_equal(pulse_current_a(60.0, [1e-9, 1e-4, 2e-4], PULSES[:1]), [12.0, 12.0, np.nan])


def test_where_one_of_two_curves_has_ended_only_its_neighbour_itself_allows_anything():
    pulses = [(1e-3, ([1.0, 60.0], [50.0, 10.0])), (10e-3, ([1.0, 40.0], [50.0, 5.0]))]
    allowed_a = pulse_current_a(50.0, [1e-3, np.nextafter(1e-3, UP), 5e-3, 10e-3], pulses)
    assert allowed_a[0] == pytest.approx(loglog(50, 1, 50, 60, 10))
    np.testing.assert_array_equal(allowed_a[1:], 0.0)


def test_questions_that_are_no_numbers_get_none():
    np.testing.assert_array_equal(
        np.isnan(pulse_current_a([np.nan, 10.0, 10.0], [1e-3, np.nan, -1.0], PULSES, DC)), True
    )
    assert np.isnan(safe_current_a(10.0, 1e-3, np.nan, 175.0, PULSES, DC))
    assert np.isnan(safe_current_a(10.0, 1e-3, np.nan, 175.0, PULSES, DC, scaling="power"))


@pytest.mark.parametrize(
    ("pulses", "dc"), [([], None), ([PULSES[1], PULSES[0]], None), ([(0.0, DC)], None), ([PULSES[0], PULSES[0]], DC)]
)
def test_curves_without_order_are_refused(pulses, dc):
    with pytest.raises(OutsideRange):
        pulse_current_a(10.0, 1e-3, pulses, dc)


def test_arrays_broadcast_like_numpy():
    v_v, t_s = np.geomspace(0.1, 80, 7)[:, None], np.geomspace(1e-6, 1, 5)
    table = pulse_current_a(v_v, t_s, PULSES, DC)
    assert table.shape == (7, 5)
    one_by_one = [[float(pulse_current_a(float(v), float(t), PULSES, DC)) for t in t_s] for v in v_v[:, 0]]
    np.testing.assert_allclose(table, one_by_one, rtol=1e-14)
    for scaling in ("current", "power"):
        hot = safe_current_a(v_v, t_s, np.full((3, 1, 1), 90.0), 175.0, PULSES, DC, scaling=scaling)
        assert hot.shape == (3, 7, 5)


@pytest.mark.parametrize(
    ("t_case_c", "expected"),
    [(25.0, 1.0), (100.0, 0.5), (175.0, 0.0), (np.nextafter(175.0, UP), 0.0), (300.0, 0.0), (-5.0, 1.2)],
)
def test_case_factor(t_case_c, expected):
    assert case_factor(t_case_c, 175.0) == pytest.approx(expected, abs=1e-12)


def test_case_factor_can_be_kept_at_one_and_needs_a_rating_above_25():
    assert case_factor(-5.0, 175.0, at_most=1.0) == 1.0
    with pytest.raises(OutsideRange):
        case_factor(20.0, 25.0)


def test_power_scaling_by_hand():
    """At half power the level of 50 A, whose end is at 2.2 V, goes on to 1.1 V; beyond 2.2 V half the curve."""
    hot = safe_current_a([0.5, 1.1, 1.5, 2.2, 10.0, 60.0, 61.0], np.inf, 100.0, 175.0, [], DC, scaling="power")
    np.testing.assert_allclose(hot, [50.0, 50.0, 0.5 * 110.0 / 1.5, 25.0, 4.0, 0.3, 0.0], rtol=1e-12)


def test_power_scaling_of_a_cold_case_stays_under_the_package_limit():
    cold = safe_current_a([2.2, 3.0], np.inf, -125.0, 175.0, [], DC, scaling="power")
    np.testing.assert_allclose(cold, [50.0, 50.0])


@given(st.floats(0.01, 70), st.floats(1e-6, 10), st.floats(25, 200))
def test_power_scaling_never_allows_less_than_current_scaling_and_both_meet_at_25(v_v, t_s, t_case_c):
    by_current, by_power = (
        safe_current_a(v_v, t_s, t_case_c, 175.0, PULSES, DC, scaling=rule) for rule in ("current", "power")
    )
    assert by_power >= by_current * (1 - 1e-12)
    drawn_a = pulse_current_a(v_v, t_s, PULSES, DC)
    assert safe_current_a(v_v, t_s, 25.0, 175.0, PULSES, DC, scaling="power") == pytest.approx(drawn_a, rel=1e-12)


def test_an_unknown_scaling_is_refused():
    with pytest.raises(OutsideRange, match="voltage"):
        safe_current_a(1.0, 1.0, 25.0, 175.0, PULSES, DC, scaling="voltage")


@given(
    st.tuples(st.floats(0.01, 70), st.floats(0.01, 70)),
    st.tuples(st.floats(1e-6, 10), st.floats(1e-6, 10)),
    st.tuples(st.floats(-50, 200), st.floats(-50, 200)),
    st.sampled_from(["current", "power"]),
)
def test_more_voltage_more_time_or_a_hotter_case_never_allows_more(voltages, times, cases, scaling):
    v_v, t_s, case_c = np.sort(voltages), np.sort(times), np.sort(cases)
    for easy, hard in [
        ((v_v[0], t_s[0], case_c[0]), (v_v[1], t_s[0], case_c[0])),
        ((v_v[0], t_s[0], case_c[0]), (v_v[0], t_s[1], case_c[0])),
        ((v_v[0], t_s[0], case_c[0]), (v_v[0], t_s[0], case_c[1])),
    ]:
        less = safe_current_a(*hard, 175.0, PULSES, DC, scaling=scaling)
        assert less <= safe_current_a(*easy, 175.0, PULSES, DC, scaling=scaling) * (1 + 1e-12)


def test_power_line_ends():
    np.testing.assert_allclose(power_line_a([0.0, 10.0, 10.0], 0.5, [25.0, 25.0, 175.0], 175.0), [np.inf, 30.0, 0.0])
    assert power_line_a(0.0, 0.5, 180.0, 175.0) == 0.0
    assert np.isnan(power_line_a(10.0, np.nan, 25.0, 175.0))


def test_instability_is_past_one_and_never_at_a_negative_tempco():
    np.testing.assert_allclose(instability_gain(np.array([40.0, 50.0, 60.0]), 1.0, 0.02), [0.8, 1.0, 1.2])
    assert instability_gain(60.0, 1.0, -0.01) < 0


@pytest.mark.parametrize(
    ("t_case_c", "expected"), [(-40.0, 1.0), (25.0, 1.0), (200.0, 0.4), (np.nextafter(200.0, UP), 0.0)]
)
def test_second_breakdown_by_the_case(t_case_c, expected):
    assert second_breakdown_factor(t_case_c, 200.0, 0.4) == pytest.approx(expected, abs=1e-12)


def test_second_breakdown_of_a_sheet_drawn_for_the_junction_falls_to_heat_alone():
    case_c = np.array([25.0, 100.0, 180.0])
    thermal_a = power_line_a(40.0, 1.52, case_c, 200.0)
    allowed_a = bjt_safe_current_a(1.5, second_breakdown_factor(case_c, 200.0, 1.0), thermal_a)
    np.testing.assert_allclose(allowed_a, [1.5, 1.5, 20 / 1.52 / 40])
