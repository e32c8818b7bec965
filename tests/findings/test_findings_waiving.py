"""A waiver counts for one number until one day, as a truth table; it never hides that something got worse."""

import pytest
import yaml
from hypothesis import given
from hypothesis import strategies as st

from drc_power.findings.identity import finding_id, named_subject
from drc_power.findings.model import Finding
from drc_power.findings.verdict import exit_status, margin, margin_between
from drc_power.findings.waiving import Waiver, apply_waivers, waiver_line, worse_by
from drc_power.quantity import DIMENSIONS, parse_any

TODAY = "2027-03-31"


def _waiver(finding, value=163.2, until=TODAY, **more):
    return Waiver(finding=finding.id, because="the fan is always on", by="A. Smith", until=until, value=value, **more)


@pytest.fixture
def hot(make_finding):
    """163.2 °C against 150 °C at an ambient of 55 °C: 2 % of the margin's scale are 1.9 K."""
    return make_finding(verdict="exceeded", value=163.2, allowed=150.0, margin=-13.2 / 95.0, text="Too hot.")


def test_a_waiver_that_counts(hot):
    (waived,) = apply_waivers([hot], [_waiver(hot)], TODAY)
    assert (waived.verdict, waived.was, waived.value, waived.margin) == ("waived", "exceeded", hot.value, hot.margin)
    assert waived.text == "Too hot. Waived by A. Smith until 2027-03-31: the fan is always on"


@pytest.mark.parametrize(
    ("value", "until", "today", "counts"),
    [
        (163.2, "2027-03-31", "2027-03-31", True),  # the last day
        (163.2, "2027-03-31", "2027-04-01", False),
        (163.2, "2027-03-31", None, True),  # a run without a date judges no date
        (170.0, "2028-01-01", TODAY, True),  # better than what was waived
        (161.31, "2028-01-01", TODAY, True),  # 1.89 K worse
        (161.30, "2028-01-01", TODAY, True),  # 1.90 K worse: not more than 2 %
        (161.29, "2028-01-01", TODAY, False),  # 1.91 K worse
        (151.0, "2028-01-01", TODAY, False),
        (float("nan"), "2028-01-01", TODAY, False),
    ],
)
def test_when_a_waiver_counts(hot, value, until, today, counts):
    first, *reports = apply_waivers([hot], [_waiver(hot, value, until)], today)
    assert first.verdict == ("waived" if counts else "exceeded")
    assert [r.rule for r in reports] == ([] if counts else ["rules.waiver"])


@pytest.mark.parametrize(
    ("change", "reason"),
    [
        ({"verdict": "met"}, "no longer needed: the finding is met"),
        ({"value": None, "verdict": "unproven", "margin": None}, "has none to hold against it"),
        ({"value": float("inf"), "margin": float("-inf")}, "has none to hold against it"),
        ({"value": 180.0, "margin": -30.0 / 95.0}, "was granted for 163.2 °C; the value is now 180.0 °C"),
    ],
)
def test_a_waiver_that_does_not_count_says_why_beside_its_finding(make_finding, change, reason):
    finding = make_finding(**{"verdict": "exceeded", "value": 163.2, "margin": -13.2 / 95.0} | change)
    same, report = apply_waivers([finding], [_waiver(finding, file="w.yaml", line=3)], TODAY)
    assert same == finding
    assert reason in report.text
    assert (report.rule, report.verdict, report.ref) == ("rules.waiver", "close", "Q3")
    assert (report.file, report.line) == ("w.yaml", 3)


def test_a_waiver_for_nothing_is_reported_and_fails_no_run_by_default(make_finding, make_result):
    gone = make_finding(uuid="/a/other")
    findings = apply_waivers([make_finding()], [_waiver(gone)], TODAY)
    assert "names no finding of this run" in findings[-1].text
    assert findings[-1].ref is None
    assert exit_status(make_result(*findings)) == 0
    assert exit_status(make_result(*findings), "close") == 1


def test_a_finding_whose_waiver_ended_fails_the_run_by_its_own_verdict(hot, make_result):
    findings = apply_waivers([hot], [_waiver(hot, until="2027-03-30")], TODAY)
    assert exit_status(make_result(*findings)) == 1
    assert exit_status(make_result(*apply_waivers([hot], [_waiver(hot)], TODAY))) == 0


def test_parts_that_share_a_uuid_cannot_be_waived_by_one_line(hot, make_finding):
    twin = make_finding(ref="Q4", verdict="exceeded", value=200.0, margin=-0.5)
    assert twin.id == hot.id
    *both, report = apply_waivers([hot, twin], [_waiver(hot)], TODAY)
    assert [finding.verdict for finding in both] == ["exceeded", "exceeded"]
    assert "names 2 findings at once" in report.text


def test_one_of_two_lines_on_a_finding_is_enough_and_the_other_is_reported_under_an_id_of_its_own(hot):
    ended = _waiver(hot, until="2020-01-01")
    waived, first, second = apply_waivers([hot], [ended, _waiver(hot), ended], TODAY)
    assert waived.verdict == "waived"
    assert len({waived.id, first.id, second.id}) == 3
    assert first.id == finding_id(named_subject("waiver", hot.id), rule="rules.waiver")


@pytest.mark.parametrize(
    ("value", "allowed", "left", "waived", "expected"),
    [
        # a maximum of 60 V: the scale is 60 V
        (66.0, 60.0, margin(66.0, 60.0), 63.0, 3.0 / 60.0),
        (66.0, 60.0, margin(66.0, 60.0), 69.0, -3.0 / 60.0),
        # a maximum that is kept (a waived `close`)
        (57.0, 60.0, margin(57.0, 60.0), 54.0, 3.0 / 60.0),
        # a minimum of 3 V: less is worse
        (2.7, 3.0, margin(2.7, 3.0, at_least=True), 2.85, 0.15 / 3.0),
        (2.7, 3.0, margin(2.7, 3.0, at_least=True), 2.55, -0.15 / 3.0),
        # between 3.0 V and 3.6 V, past the lower: the scale is half the width
        (2.85, 3.0, margin_between(2.85, 3.0, 3.6), 2.94, 0.09 / 0.3),
        (3.75, 3.6, margin_between(3.75, 3.0, 3.6), 3.66, 0.09 / 0.3),
        # no margin: every departure is worse, by the allowed or else the waived value
        (66.0, 60.0, None, 63.0, 3.0 / 60.0),
        (60.0, 60.0, 0.0, 63.0, 3.0 / 60.0),
        (66.0, None, None, 60.0, 6.0 / 60.0),
        (1.0, 0.0, None, 0.5, float("inf")),
        (0.0, 0.0, 0.0, 0.0, 0.0),
    ],
)
def test_worse_by_is_in_the_margins_own_scale(make_finding, value, allowed, left, waived, expected):
    finding = make_finding(verdict="exceeded", value=value, allowed=allowed, margin=left, unit="V")
    assert worse_by(finding, waived) == pytest.approx(expected)


@given(st.floats(1.0, 500.0), st.floats(1.0, 500.0), st.floats(1.0, 100.0), st.booleans())
def test_a_waiver_never_covers_a_margin_that_fell_by_more_than_two_percent(waived, now, allowed, at_least):
    before, after = (margin(v, allowed, at_least=at_least) for v in (waived, now))
    finding = Finding(id="1", rule="r", stress=None, verdict="exceeded", was=None, ref="Q1", uuid="u", sheet="/",
                      net=None, mode="run", event=None, corner=None, quantity="q", value=now, allowed=allowed,
                      rated=None, unit="V", margin=after, text="", remedy="")
    result = apply_waivers([finding], [_waiver(finding, waived)], None)[0]
    if before - after > 0.02 + 1e-6:
        assert result.verdict == "exceeded"
    if before - after < 0.02 - 1e-6 and after:
        assert result.verdict == "waived"


def test_a_waiver_in_another_unit_does_not_count(hot):
    same, report = apply_waivers([hot], [_waiver(hot, value=200.0, unit="V")], TODAY)
    assert same.verdict == "exceeded"
    assert "accepts a value in V, but the finding's is in °C" in report.text
    assert apply_waivers([hot], [_waiver(hot, value=200.0, unit="°C")], TODAY)[0].verdict == "waived"


@pytest.mark.parametrize("unit", ["°C", "K", "V", "A", "W", "J", "ohm", ""])
@pytest.mark.parametrize("value", [163.24999, 0.0123449, 9.9995, 1234.5])
def test_the_line_to_paste_covers_the_very_finding_that_it_was_printed_for(make_finding, unit, value):
    """The printed value, read by the reader of quantities, is within 2 % of the margin's scale of the real one."""
    allowed = 0.9 * value
    left = margin(value, allowed, ambient_c=0.5 * allowed, unit=unit)
    finding = make_finding(verdict="exceeded", value=value, allowed=allowed, margin=left, unit=unit)
    (line,) = yaml.load(waiver_line(finding), yaml.BaseLoader)
    _, span = parse_any(line["value"], tuple(DIMENSIONS))
    if unit != "°C" or value > 1.0:  # a tenth of a degree is coarse only against a hundredth of one
        assert apply_waivers([finding], [_waiver(finding, value=span.typ)], TODAY)[0].verdict == "waived"


def test_the_line_to_paste_is_a_waiver_in_the_files_form(hot, make_finding):
    (line,) = yaml.load(waiver_line(hot), yaml.BaseLoader)
    assert line == {"finding": hot.id, "because": "REASON", "by": "NAME", "until": "YYYY-MM-DD", "value": "163.2 °C"}
    assert waiver_line(make_finding(verdict="met")) == ""
    assert waiver_line(make_finding(verdict="unproven", value=None)) == ""
