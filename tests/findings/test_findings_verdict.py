"""Margins by the definitions of the findings format, worked by hand; NaN is never met."""

import math

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from drc_power.findings.verdict import (
    exit_status,
    gravest,
    margin,
    margin_between,
    overall_verdict,
    tally,
    verdict_of,
    worst_corner,
)

NAN, INF = math.nan, math.inf
anything = st.one_of(st.none(), st.floats(), st.sampled_from([NAN, INF, -INF, 0.0]))
positive = st.floats(1e-9, 1e9)


@pytest.mark.parametrize(
    ("value", "allowed", "options", "expected"),
    [
        # maximum: 1 - value/allowed
        (45.0, 60.0, {"unit": "V"}, 0.25),
        (60.0, 60.0, {"unit": "V"}, 0.0),
        (66.0, 60.0, {"unit": "V"}, -0.1),
        (0.0, 60.0, {"unit": "V"}, 1.0),
        (1.3, 1.0, {}, -0.3),  # a loop gain against 1
        (30.0, 20.0, {"unit": "K"}, -0.5),  # a rise is no temperature
        # minimum: value/allowed - 1
        (3.3, 3.0, {"unit": "V", "at_least": True}, 0.1),
        (2.7, 3.0, {"unit": "V", "at_least": True}, -0.1),
        (3.0, 3.0, {"unit": "V", "at_least": True}, 0.0),
        # temperature: (allowed - value)/(allowed - ambient)
        (163.2, 150.0, {"unit": "°C", "ambient_c": 55.0}, -13.2 / 95.0),  # the format's own example, -0.139
        (102.5, 150.0, {"unit": "°C", "ambient_c": 55.0}, 0.5),
        (55.0, 150.0, {"unit": "°C", "ambient_c": 55.0}, 1.0),
        (150.0, 150.0, {"unit": "°C", "ambient_c": 55.0}, 0.0),
        (-20.0, 0.0, {"unit": "°C", "ambient_c": -40.0}, 0.5),  # a limit of 0 °C is a limit like another
        # temperature whose limit is not above ambient: no meaning
        (170.0, 150.0, {"unit": "°C", "ambient_c": 160.0}, -1.0),
        (155.0, 150.0, {"unit": "°C", "ambient_c": 150.0}, -1.0),
        (120.0, 150.0, {"unit": "°C", "ambient_c": 160.0}, -1.0),
        (150.0, 150.0, {"unit": "°C", "ambient_c": 150.0}, 0.0),  # but equal to the limit is met
        # minimum temperature, mirrored
        (-10.0, -40.0, {"unit": "°C", "ambient_c": 20.0, "at_least": True}, 0.5),
        # a limit of zero has no scale
        (0.0, 0.0, {"unit": "W"}, 0.0),
        (0.1, 0.0, {"unit": "W"}, -1.0),
        (0.1, 0.0, {"unit": "V", "at_least": True}, 1.0),
        (-0.1, 0.0, {"unit": "V", "at_least": True}, -1.0),
        # a negative limit keeps its sense
        (-1.0, -2.0, {"unit": "V"}, -0.5),
        (-3.0, -2.0, {"unit": "V"}, 0.5),
        # endless
        (INF, 60.0, {"unit": "V"}, -INF),
        (INF, 150.0, {"unit": "°C", "ambient_c": 55.0}, -INF),
    ],
)
def test_margin_by_hand(value, allowed, options, expected):
    assert margin(value, allowed, **options) == pytest.approx(expected, abs=1e-12)


@pytest.mark.parametrize(
    ("value", "low", "high", "expected"),
    [
        (3.3, 3.0, 3.6, 1.0),
        (3.1, 3.0, 3.6, 1 / 3),
        (3.5, 3.0, 3.6, 1 / 3),
        (3.0, 3.0, 3.6, 0.0),
        (3.6, 3.0, 3.6, 0.0),
        (2.85, 3.0, 3.6, -0.5),
        (3.9, 3.0, 3.6, -1.0),
        (5.0, 5.0, 5.0, 0.0),
        (5.1, 5.0, 5.0, -1.0),
        (3.3, 3.6, 3.0, -1.0),  # limits that contradict each other
    ],
)
def test_margin_between_by_hand(value, low, high, expected):
    assert margin_between(value, low, high) == pytest.approx(expected, abs=1e-12)


def test_margins_of_many_corners_at_once():
    found = margin(np.array([55.0, 102.5, 163.2, NAN]), 150.0, ambient_c=np.array([55.0, 55.0, 55.0, 55.0]), unit="°C")
    assert found == pytest.approx([1.0, 0.5, -13.2 / 95.0, NAN], nan_ok=True)
    assert margin_between([3.1, 3.3], [3.0, 3.0], 3.6) == pytest.approx([1 / 3, 1.0])
    assert margin([None, 45.0], 60.0) == pytest.approx([NAN, 0.25], nan_ok=True)


@given(st.floats(allow_nan=False, allow_infinity=False), st.floats(-60.0, 300.0), st.floats(-60.0, 300.0))
def test_a_scalar_and_an_array_of_one_agree(value, allowed, ambient):
    for options in ({}, {"at_least": True}, {"unit": "°C", "ambient_c": ambient}):
        one, many = margin(value, allowed, **options), margin([value], [allowed], **options)
        assert isinstance(one, float)
        assert many.shape == (1,)
        np.testing.assert_equal(one, many[0])


@given(st.floats(1e-3, 1e3), st.floats(0.0, 1e4))
def test_the_margin_is_exceeded_exactly_where_the_limit_is(allowed, value):
    assume(abs(value - allowed) > 1e-6 * allowed)
    assert (verdict_of(margin(value, allowed), 1.0) == "exceeded") == (value > allowed)
    assert (verdict_of(margin(value, allowed, at_least=True), 1.0) == "exceeded") == (value < allowed)


@pytest.mark.parametrize("allowed", [1e-9, 0.1, 0.3, 7.7, 1e6])
def test_the_noise_of_floating_point_around_the_limit_is_met_and_more_is_not(allowed):
    for factor in (1 - 1e-12, 1.0, 1 + 1e-12, 1 + 0.9e-9):
        assert verdict_of(margin(allowed * factor, allowed), 1.0) == "met"
    assert verdict_of(margin(allowed * (1 + 1.1e-9), allowed), 1.0) == "exceeded"
    assert margin(allowed * (1 + 1e-12), allowed) == 0.0


@pytest.mark.parametrize(
    ("margin_left", "close_at", "proven", "verdict"),
    [
        (0.5, 0.9, True, "met"),
        (0.1, 0.9, True, "met"),
        (1 - 0.9, 0.9, True, "met"),  # 0.09999999999999998
        (0.0999999, 0.9, True, "close"),
        (0.0, 0.9, True, "close"),
        (0.0, 1.0, True, "met"),
        (-1e-12, 1.0, True, "met"),
        (-1e-6, 1.0, True, "exceeded"),
        (-INF, 0.9, True, "exceeded"),
        (0.5, 0.9, False, "unproven"),
        (-0.5, 0.9, False, "unproven"),
        (NAN, 0.9, True, "unproven"),
        (None, 0.9, True, "unproven"),
        (INF, 0.9, True, "unproven"),
        (np.float64(0.5), 0.9, np.bool_(True), "met"),
    ],
)
def test_verdicts(margin_left, close_at, proven, verdict):
    assert verdict_of(margin_left, close_at, proven) == verdict


@pytest.mark.parametrize("close_at", [NAN, -0.1, 1.1, INF])
def test_a_share_that_is_none_is_refused(close_at):
    with pytest.raises(ValueError, match="close_at"):
        verdict_of(0.5, close_at)


@given(anything, anything, anything, st.booleans(), st.sampled_from(["", "V", "K", "°C"]), st.floats(0.0, 1.0))
def test_no_missing_or_endless_datum_ever_makes_a_finding_met(value, allowed, ambient, at_least, unit, close_at):
    verdict = verdict_of(margin(value, allowed, at_least=at_least, ambient_c=ambient, unit=unit), close_at)
    needed = [value, allowed, *([ambient] if unit == "°C" else [])]
    if any(number is None or not math.isfinite(number) for number in needed):
        assert verdict in {"unproven", "exceeded"}
    if any(number is None or math.isnan(number) for number in needed):
        assert verdict == "unproven"


@given(anything, anything, anything, st.floats(0.0, 1.0))
def test_between_limits_no_missing_datum_ever_makes_a_finding_met(value, low, high, close_at):
    verdict = verdict_of(margin_between(value, low, high), close_at)
    if any(number is None or not math.isfinite(number) for number in (value, low, high)):
        assert verdict in {"unproven", "exceeded"}


@given(positive, positive, st.floats(0.0, 1.0), st.floats(0.0, 1.0))
def test_a_stricter_house_never_makes_a_verdict_milder(value, allowed, close_at, share):
    order = ["met", "close", "exceeded"]
    loose, tight = (order.index(verdict_of(margin(value, limit), close_at)) for limit in (allowed, share * allowed))
    assert tight >= loose


@pytest.mark.parametrize(
    ("margins", "proven", "index"),
    [
        ([0.3, 0.1, 0.2], True, 1),
        ([0.3, NAN, 0.1], True, 1),
        ([0.3, NAN, -0.1], True, 2),
        ([0.3, 0.1, -0.2], [True, False, True], 2),
        ([0.3, 0.5, 0.2], [True, False, True], 1),
        ([0.2, 0.1, 0.1], True, 1),
        ([-0.3, -INF], True, 1),
        ([0.3, INF], True, 1),
    ],
)
def test_the_worst_corner(margins, proven, index):
    assert worst_corner(margins, proven) == index


@given(st.lists(anything, min_size=1, max_size=6))
def test_the_worst_corner_has_the_gravest_verdict(margins):
    verdicts = [verdict_of(m, 0.9) for m in margins]
    worst = verdicts[worst_corner(margins)]
    assert worst == gravest(verdicts)


def test_the_gravest_of_nothing_is_unproven(make_result):
    assert gravest([]) == "unproven"
    assert overall_verdict(make_result()) == "unproven"
    assert exit_status(make_result()) == 1


def test_tally_counts_every_verdict_in_the_order_of_the_format(make_finding):
    verdicts = ["met", "met", "close", "exceeded", "waived", "met"]
    counts = tally(make_finding(verdict=verdict) for verdict in verdicts)
    assert list(counts.items()) == [("exceeded", 1), ("unproven", 0), ("close", 1), ("waived", 1), ("met", 3)]


@pytest.mark.parametrize(
    ("verdict", "fails_at_close", "fails_at_unproven", "fails_at_exceeded"),
    [("met", 0, 0, 0), ("waived", 0, 0, 0), ("close", 1, 0, 0), ("unproven", 1, 1, 0), ("exceeded", 1, 1, 1)],
)
def test_exit_status(make_finding, make_result, verdict, fails_at_close, fails_at_unproven, fails_at_exceeded):
    result = make_result(make_finding(), make_finding(verdict=verdict))
    assert exit_status(result, "close") == fails_at_close
    assert exit_status(result, "unproven") == fails_at_unproven == exit_status(result)
    assert exit_status(result, "exceeded") == fails_at_exceeded
    assert exit_status(make_result(make_finding(verdict=verdict), fails_from="close")) == fails_at_close


def test_an_unknown_fails_from_is_refused(make_finding, make_result):
    with pytest.raises(ValueError, match="fails_from"):
        exit_status(make_result(make_finding()), "met")
