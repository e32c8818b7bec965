"""The survey against labels made by hand: recall and precision of what passes and switches power."""

from __future__ import annotations

import random
from collections.abc import Iterable
from pathlib import Path

import pytest

from drc_power.netlist.reader import read_netlist
from drc_power.survey import survey_netlist

SHARED = Path(__file__).parents[2] / ".." / "shared" / "netlists"
SHARED_TRUTH = {
    "buck_conv.net": "L101 Q1 D101",
    "power_supply.net": "T1 D1 U1 Rmeas1",
    "StickHub.net": "JP1 U2",
    "kit-dev-coldfire-xilinx_5213.net": "SW_ONOFF201 F201 VR201 L101 L102 FB101 VDDA101 VX_EN201 R302",
}
"""Labels of the demo projects' boards, made from their schematics before the survey was tuned on anything."""


def _cases(drawn_boards):
    cases = [(board.name, board.netlist, board.wanted) for board in drawn_boards]
    for name, wanted in SHARED_TRUTH.items():
        if (SHARED / name).exists():
            cases.append((name, read_netlist(SHARED / name), frozenset(wanted.split())))
    return cases


def _found(netlist) -> frozenset[str]:
    return frozenset(e.ref for e in survey_netlist(netlist).elements if e.group in ("pass", "switch"))


def _scores(pairs: Iterable[tuple[str, frozenset[str], frozenset[str]]]) -> tuple[float, float, str]:
    hits = wanted_count = found_count = 0
    lines = []
    for name, wanted, found in pairs:
        hits += len(wanted & found)
        wanted_count += len(wanted)
        found_count += len(found)
        if wanted != found:
            lines.append(f"  {name}: missed {sorted(wanted - found)}, too many {sorted(found - wanted)}")
    return hits / wanted_count, hits / found_count, "\n".join(lines)


def test_recall_and_precision_on_hand_labels(drawn_boards, capsys):
    recall, precision, lines = _scores((name, wanted, _found(netlist)) for name, netlist, wanted in _cases(drawn_boards))
    with capsys.disabled():
        print(f"\nsurvey on hand labels: recall {recall:.3f}, precision {precision:.3f}\n{lines}")
    assert recall >= 0.95
    assert precision >= 0.90


def _scrambled(netlist, renamed, seed: int):
    """Every reference and net under a random name; returns the netlist and the map of references."""
    dice = random.Random(seed)
    refs = [f"P{n}" for n in range(len(netlist.parts))]
    nets = [f"n{n}" for n in range(len(netlist.nets))]
    dice.shuffle(refs)
    dice.shuffle(nets)
    new_refs = dict(zip(netlist.parts, refs, strict=True))
    new_nets = {old: old if old.startswith("unconnected-") else new for old, new in zip(netlist.nets, nets, strict=True)}
    return renamed(netlist, new_refs, new_nets), new_refs


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_recall_survives_renaming_of_everything(drawn_boards, renamed, capsys, seed):
    pairs = []
    for name, netlist, wanted in _cases(drawn_boards):
        scrambled, new_refs = _scrambled(netlist, renamed, seed)
        back = {new: old for old, new in new_refs.items()}
        pairs.append((name, wanted, frozenset(back[ref] for ref in _found(scrambled))))
    recall, precision, lines = _scores(pairs)
    with capsys.disabled():
        print(f"\nsurvey with all names scrambled: recall {recall:.3f}, precision {precision:.3f}\n{lines}")
    assert recall >= 0.85


def test_labelled_groups_stages_and_sources(drawn_boards):
    faults = []
    for board in drawn_boards:
        survey = survey_netlist(board.netlist)
        for group in ("pass", "switch", "clamp", "source"):
            found = {e.ref for e in survey.elements if e.group == group}
            missing = board.truth.get(group, frozenset()) - found
            if missing:
                faults.append(f"{board.name}: not {group}: {sorted(missing)}")
        for label, refs in board.truth.items():
            if label.startswith("stage "):
                inside = {ref for stage in survey.stages if stage.kind == label.removeprefix("stage ") for group in stage.parts.values() for ref in group}
                if refs - inside:
                    faults.append(f"{board.name}: {label} lacks {sorted(refs - inside)}")
    assert not faults, "\n".join(faults)
