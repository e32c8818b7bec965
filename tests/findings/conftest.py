"""Hand-made findings for the tests of this room."""

import pytest

from drc_power.findings.identity import finding_id, part_subject
from drc_power.findings.model import Coverage, Finding, Result


def _finding(**changes):
    row = {
        "rule": "junction.steady", "stress": "tj", "verdict": "met", "was": None, "ref": "Q3", "uuid": "/a/q3",
        "sheet": "/", "net": None, "mode": "run", "event": None, "corner": "hot", "quantity": "junction temperature",
        "value": 100.0, "allowed": 150.0, "rated": 175.0, "unit": "°C", "margin": 0.5, "text": "", "remedy": "",
    } | changes
    about = finding_id(part_subject(row["uuid"]), rule=row["rule"], stress=row["stress"], mode=row["mode"])
    return Finding(**{"id": about} | row)


@pytest.fixture
def make_finding():
    return _finding


@pytest.fixture
def make_result():
    def build(*findings, **changes):
        fields = {"board_name": "Board", "board_revision": "A", "netlist": "board.net", "n_parts": 1, "n_nets": 1,
                  "inputs": (), "coverage": Coverage(1, 1, (), (), ())} | changes
        return Result(findings=tuple(findings), **fields)

    return build
