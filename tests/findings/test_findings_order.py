"""One order, whatever order findings were made in."""

import random

from drc_power.findings.order import finding_key, gravest_first


def test_listed_by_reference_in_natural_order_then_net_rule_stress_mode_and_event(make_finding):
    in_order = [
        make_finding(ref="Q2"),
        make_finding(ref="Q10", rule="derating.power", stress="power"),
        make_finding(ref="Q10", mode="idle"),
        make_finding(ref="Q10", mode="run"),
        make_finding(ref="Q10", mode="run", event="plug-in"),
        make_finding(ref="R1"),
        make_finding(ref=None, uuid="", net="+5V"),
        make_finding(ref=None, uuid="", net="+24V"),
        make_finding(ref=None, uuid="", net=None, rule="rules.waiver"),
    ]
    mixed = random.Random(7).sample(in_order, len(in_order))
    assert sorted(mixed, key=finding_key) == in_order


def test_the_gravest_first_and_among_them_the_unknown_and_then_the_least_margin(make_finding):
    in_order = [
        make_finding(ref="Q9", verdict="exceeded", margin=-0.5),
        make_finding(ref="Q2", verdict="exceeded", margin=-0.1),
        make_finding(ref="Q3", verdict="unproven", margin=None),
        make_finding(ref="Q10", verdict="unproven", margin=float("nan")),
        make_finding(ref="Q1", verdict="unproven", margin=0.2),
        make_finding(ref="Q1", verdict="close", margin=0.05),
        make_finding(ref="Q1", verdict="waived", margin=-0.05),
        make_finding(ref="Q1", verdict="met", margin=0.6),
    ]
    assert gravest_first(random.Random(3).sample(in_order, len(in_order))) == in_order
