"""`size` on the battery board, against the closed equations of the part it is asked about."""

from __future__ import annotations

import functools
import re

import pytest
from battery_board import ANNOTATIONS, DEVICES, PARTS
from draw import write_board
from scipy.optimize import brentq
from test_battery_board import reference

from drc_power.cli import main
from drc_power.run import Run, check, read_board
from drc_power.sizing import size_part

RULES = "limits:\n  junction: {applies_to: {kind: [mosfet, linear-regulator]}, stress: tj, below_rating_by: 25 K, source: house}\n"


@pytest.fixture(scope="module")
def path(tmp_path_factory):
    return write_board(tmp_path_factory.mktemp("sizing"), PARTS, ANNOTATIONS, DEVICES, RULES)


@functools.cache
def levers(path, ref):
    """Worked out once for all tests: each answer is many solutions of the whole board."""
    board, _, _ = read_board(path, Run())
    (found,) = size_part(board, ref)
    return {each.lever.name: each for each in found.boundaries}


def test_the_sink_that_just_holds_the_regulator(path):
    """The regulator at 125 − 25 °C, at the worse of the heater's ends."""
    def excess(r_sink):
        return max(reference(r_heater=r, r_sink=r_sink)["tu"] for r in (11.4, 12.6)) - 100.0

    assert levers(path, "U1")["sink plate"].value == pytest.approx(brentq(excess, 8.0, 100.0), rel=1e-4)


def test_the_ambient_that_just_holds_the_regulator(path):
    def excess(ambient):
        return max(reference(r_heater=r, ambient=ambient)["tu"] for r in (11.4, 12.6)) - 100.0

    assert levers(path, "U1")["ambient"].value == pytest.approx(brentq(excess, 50.0, 100.0), rel=1e-4)


def test_at_the_boundary_the_finding_is_just_met(path, tmp_path):
    value = levers(path, "U1")["sink plate"].value
    for factor, verdict in ((0.999, ("met", "close")), (1.01, ("exceeded",))):
        annotations = ANNOTATIONS.replace("resistance: 8 K/W", f"resistance: {value * factor:.6f} K/W")
        folder = tmp_path / f"{factor}"
        folder.mkdir()
        result = check(write_board(folder, PARTS, annotations, DEVICES, RULES))
        found = next(f for f in result.findings if f.ref == "U1" and f.rule == "junction.steady")
        assert found.verdict in verdict


def test_the_command_prints_it(path, capsys):
    assert main(["size", str(path), "U1"]) == 0
    out = capsys.readouterr().out
    assert re.search(r"holds with sink plate at most \d+\.\d+ K/W", out)


def test_a_part_that_is_not_judged_is_refused(path, capsys):
    assert main(["size", str(path), "U7"]) == 2
    assert "'U7'" in capsys.readouterr().err
