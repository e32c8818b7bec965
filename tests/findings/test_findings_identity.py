"""An id follows what a finding is about, and nothing else."""

import itertools
import os
import subprocess
import sys

import pytest
from hypothesis import given
from hypothesis import strategies as st

from drc_power.findings.identity import finding_id, named_subject, net_subject, part_subject

PART = part_subject("/6f2a/11d0")
NET = net_subject([("/6f2a/11d0", "2"), ("/6f2a/22e1", "1")])
EVENT = named_subject("event", "plug-in")


def test_an_id_is_sixteen_hexadecimal_digits():
    about = finding_id(PART, rule="junction.steady", stress="tj", mode="run")
    assert len(about) == 16
    assert set(about) <= set("0123456789abcdef")


def test_every_thing_that_a_finding_is_about_makes_another_id():
    subjects = [[PART], [part_subject("/6f2a/11d1")], [part_subject("", "Q3")], [NET], [net_subject([], "+5V")],
                [named_subject("sink", "fin")], [named_subject("load", "fin")], [PART, EVENT], [NET, EVENT]]
    rules = ["junction.steady", "derating.power"]
    stresses = [None, "", "tj", "power"]
    modes = [None, "run", "tj"]
    every = itertools.product(subjects, rules, stresses, modes)
    ids = [finding_id(*about, rule=rule, stress=stress, mode=mode) for about, rule, stress, mode in every]
    assert len(set(ids)) == len(ids)


def test_the_order_of_pins_and_of_subjects_does_not_matter():
    pins = [("b", "1"), ("a", "10"), ("a", "9")]
    assert len({net_subject(p) for p in itertools.permutations(pins)}) == 1
    assert finding_id(PART, EVENT, rule="r") == finding_id(EVENT, PART, rule="r")


@given(st.lists(st.text(), min_size=2, max_size=4), st.lists(st.text(), min_size=2, max_size=4))
def test_no_name_can_imitate_another_division_into_names(one, other):
    """"a" + "bc" must not meet "ab" + "c", whatever separators the names hold."""
    ids = {tuple(names): finding_id(("net", *names), rule="r") for names in (one, other)}
    assert len(set(ids.values())) == len(ids)


@given(st.sets(st.tuples(st.text(max_size=3), st.text(max_size=3)), min_size=1), st.text())
def test_a_net_is_its_pins_whatever_its_name(pins, name):
    assert net_subject(pins, name) == net_subject(sorted(pins, reverse=True), "")


def test_a_part_without_uuid_is_not_every_part_without_uuid():
    assert part_subject("", "Q1") != part_subject("", "Q2")


def test_a_finding_about_nothing_is_refused():
    with pytest.raises(ValueError, match="subject"):
        finding_id(rule="junction.steady")
    with pytest.raises(ValueError, match="by name"):
        named_subject("part", "Q3")


def test_an_id_is_the_same_in_every_process():
    """A waiver written today must find its finding for years: this value may never change."""
    program = (
        "from drc_power.findings.identity import finding_id, net_subject\n"
        "print(finding_id(net_subject({('a', '1'), ('b', '2'), ('c', '3')}), rule='network.voltage', mode='run'))"
    )
    printed = {
        subprocess.run([sys.executable, "-c", program], env=os.environ | {"PYTHONHASHSEED": seed}, text=True,
                       capture_output=True, check=True).stdout.strip()
        for seed in ("0", "1", "2024")
    }
    assert printed == {"b1cc68cdad316ca8"}


def test_the_id_is_the_digest_that_another_tool_computes():
    """Against coreutils' sha256sum of the same bytes, by hand: printf '[[["part","u"]],"r",null,"run"]' | sha256sum."""
    assert finding_id(part_subject("u"), rule="r", mode="run") == "20f08e4dce870b28"
