"""Boards to draft for, and the round from a survey to files on the disk."""

from __future__ import annotations

from pathlib import Path

import pytest

from drc_power.draft import Draft, make_draft
from drc_power.intake.tree import tree_of
from drc_power.netlist import Netlist, read_netlist
from drc_power.report.write import write_files
from drc_power.survey import survey_netlist
from drc_power.survey.model import Element, Identity, Rail, Stage, Survey

DEMO = Path(__file__).parents[2] / "fixtures" / "frost-fan" / "rev-c.net"


class Desk:
    """A project folder, and one netlist that is drafted for again and again."""

    def __init__(self, folder: Path, netlist: Netlist, survey: Survey) -> None:
        self.folder, self.netlist, self.survey = folder, netlist, survey

    @property
    def path(self) -> Path:
        return self.folder / "board.power.yaml"

    @property
    def devices(self) -> Path:
        return self.folder / "devices" / "board.yaml"

    def draft(self, write: bool = True) -> Draft:
        draft = make_draft(self.survey, self.netlist, str(self.path))
        if write:
            for path in draft.files:
                Path(path).parent.mkdir(exist_ok=True)
            write_files(draft.files)
        return draft

    def write(self, text: str) -> None:
        self.path.write_bytes(text.encode())

    def tree(self) -> dict:
        return read_tree(self.path)


def read_tree(path: Path) -> dict:
    root, faults = tree_of(path.read_bytes(), str(path))
    assert not faults
    return root


@pytest.fixture
def desk(tmp_path):
    """A desk for the demo board, which stands in the folder as board.net."""
    (tmp_path / "board.net").write_bytes(DEMO.read_bytes())
    netlist = read_netlist(tmp_path / "board.net")
    return Desk(tmp_path, netlist, survey_netlist(netlist))


@pytest.fixture
def demo_folder():
    return DEMO.parent


@pytest.fixture
def desk_for(tmp_path):
    """A desk for a survey and a netlist made by hand."""
    return lambda survey, netlist: Desk(tmp_path, netlist, survey)


@pytest.fixture(name="element")
def _element():
    return element


def element(ref: str, group: str, role: str, from_net: str, to_net: str, control: str | None = None) -> Element:
    return Element(ref, group, role, from_net, to_net, control, 0.8, (f"{role} by hand",))


@pytest.fixture(name="survey_of")
def _survey_of():
    return survey_of


def survey_of(netlist: Netlist, *elements: Element, rails: tuple[Rail, ...] = (), stages: tuple[Stage, ...] = ()) -> Survey:
    roles = {e.ref: e.role for e in elements}
    parts = {ref: Identity(ref, roles.get(ref, "unknown"), 0.8, ()) for ref in netlist.parts}
    return Survey(netlist.path, ("GND",), rails, parts, elements, stages, (), (), ())
