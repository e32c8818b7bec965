"""What a revision changed, on documents small enough to compare by eye."""

import copy

import pytest

from drc_power.findings.compare import compare, match_parts


def _part(ref, uuid, value="NF6008", device="nfet", sheet="/"):
    return {"ref": ref, "uuid": uuid, "sheet": sheet, "value": value, "device": device, "role": "mosfet"}


def _finding(about, ref, uuid, verdict="met", margin=0.5, **more):
    return {"id": about, "rule": "junction.steady", "stress": "tj", "verdict": verdict, "was": None, "ref": ref,
            "uuid": uuid, "net": None, "mode": "run", "event": None, "corner": "hot",
            "quantity": "junction temperature", "value": 100.0,
            "allowed": 150.0, "unit": "°C", "margin": margin, "text": ""} | more


@pytest.fixture
def base():
    return {
        "board": {"name": "Board", "revision": "A", "netlist": "a.net"},
        "coverage": {"elements": 3, "judged": 3, "unproven": [], "outside": [], "not_fitted": []},
        "parts": [_part("Q1", "/s1/u1"), _part("Q2", "/s1/u2"), _part("Q3", "/s2/u3")],
        "rails": [{"net": "+5V", "voltage": [4.9, 5.0, 5.1], "line": 7}, {"net": "+24V", "voltage": [21, 24, 29]}],
        "loads": [{"name": "motor", "draws": 9.0}],
        "rules": [{"limit": "junction", "below_rating_by": 25.0}],
        "findings": [_finding("f1", "Q1", "/s1/u1"), _finding("f2", "Q2", "/s1/u2", "exceeded", -0.2),
                     _finding("f3", "Q3", "/s2/u3", "close", 0.05),
                     _finding("n1", None, None, net="+5V", rule="network.voltage")],
    }


@pytest.fixture
def head(base):
    document = copy.deepcopy(base)
    document["board"]["revision"] = "B"
    return document


def _ids(rows):
    return [row["id"] for row in rows]


def test_a_document_compared_with_itself_shows_nothing(base, head):
    found = compare(base, head)
    lists = ("new", "gone", "worse", "better", "newly_waived", "no_longer_waived", "reannotated", "moved",
             "sheets_renamed", "revalued", "parts_added", "parts_removed", "coverage_gained", "coverage_lost",
             "coverage_other")
    assert {name: getattr(found, name) for name in lists} == dict.fromkeys(lists, ())
    assert not (found.rails or found.loads or found.rules)


@pytest.mark.parametrize(
    ("change", "worse", "better"),
    [
        ({"margin": 0.495}, 0, 0),  # half a percent is no change
        ({"margin": 0.48}, 1, 0),
        ({"margin": 0.52}, 0, 1),
        ({"verdict": "exceeded", "margin": -0.01}, 1, 0),
        ({"verdict": "unproven", "margin": None}, 1, 0),
        ({"verdict": "close", "margin": 0.499}, 1, 0),  # a graver verdict counts whatever the margin
        ({"margin": None}, 0, 0),
        ({"verdict": "waived", "was": "exceeded", "margin": -0.1}, 1, 0),  # a waiver does not make it better
    ],
)
def test_worse_and_better(base, head, change, worse, better):
    head["findings"][0] |= change
    found = compare(base, head)
    assert (len(found.worse), len(found.better)) == (worse, better)
    assert not found.new and not found.gone


def test_the_threshold_is_the_users(base, head):
    head["findings"][0]["margin"] = 0.45
    assert compare(base, head, threshold=0.1).worse == ()


def test_from_unproven_to_met_is_better(base, head):
    base["findings"][0] |= {"verdict": "unproven", "margin": None}
    assert _ids(p.head for p in compare(base, head).better) == ["f1"]


def test_waivers_that_came_and_went(base, head):
    head["findings"][1] |= {"verdict": "waived", "was": "exceeded"}
    assert _ids(p.head for p in compare(base, head).newly_waived) == ["f2"]
    assert _ids(p.head for p in compare(head, base).no_longer_waived) == ["f2"]
    assert compare(base, head).better == ()


def test_new_and_gone_findings(base, head):
    head["findings"][0] = _finding("f9", "Q1", "/s1/u1", rule="derating.power")
    found = compare(base, head)
    assert (_ids(found.new), _ids(found.gone)) == (["f9"], ["f1"])


def test_re_annotation_changes_references_and_nothing_else(base, head):
    for rows in (head["parts"], head["findings"]):
        for row in rows:
            row["ref"] = row["ref"] and {"Q1": "Q11", "Q2": "Q1", "Q3": "Q3"}[row["ref"]]
    found = compare(base, head)
    assert [(p.base["ref"], p.head["ref"]) for p in found.reannotated] == [("Q1", "Q11"), ("Q2", "Q1")]
    assert not (found.new or found.gone or found.worse or found.better or found.coverage_lost)


def test_a_part_on_another_sheet_is_moved_and_keeps_its_findings(base, head):
    head["parts"][2] |= {"uuid": "/s9/u3", "sheet": "/motor/"}
    head["findings"][2] |= {"uuid": "/s9/u3", "id": "f3-moved", "verdict": "exceeded", "margin": -0.1}
    found = compare(base, head)
    assert [p.head["ref"] for p in found.moved] == ["Q3"]
    assert _ids(p.head for p in found.worse) == ["f3-moved"]
    assert not (found.new or found.gone or found.parts_added or found.parts_removed)


def test_a_renamed_sheet_moves_no_part(base, head):
    for part in head["parts"][:2]:
        part["sheet"] = "/power/"
    found = compare(base, head)
    assert found.sheets_renamed == (("/", "/power/"),)
    assert found.moved == ()


def test_copies_of_one_sheet_are_not_mistaken_for_each_other():
    base = [_part("Q1", "/a/u"), _part("Q2", "/b/u")]
    head = [_part("Q1", "/c/u"), _part("Q2", "/d/u")]
    pairs = match_parts(base, head)
    assert all(None in pair for pair in pairs)
    assert [(b["ref"], h["ref"]) for b, h in match_parts(base, base[::-1])] == [("Q1", "Q1"), ("Q2", "Q2")]


def test_parts_without_uuid_are_matched_by_reference():
    (pair,) = match_parts([_part("Q1", "")], [_part("Q1", "", value="NF4010")])
    assert pair[0]["ref"] == pair[1]["ref"] == "Q1"


def test_a_net_that_gained_a_pin_keeps_its_findings(base, head):
    head["findings"][3] |= {"id": "n1-other-pins", "verdict": "close", "margin": 0.02}
    found = compare(base, head)
    assert _ids(p.head for p in found.worse) == ["n1-other-pins"]
    assert not (found.new or found.gone)


def test_parts_added_removed_and_given_another_value(base, head):
    head["parts"] = [_part("Q1", "/s1/u1", value="NF6010"), _part("Q2", "/s1/u2", device=None), _part("Q7", "/s1/u7")]
    found = compare(base, head)
    assert [p.head["ref"] for p in found.revalued] == ["Q1", "Q2"]
    assert [p["ref"] for p in found.parts_added] == ["Q7"]
    assert [p["ref"] for p in found.parts_removed] == ["Q3"]


def test_rails_loads_and_rules(base, head):
    head["rails"] = [{"net": "+5V", "voltage": [4.8, 5.0, 5.2], "line": 99}, {"net": "+3V3", "voltage": [3.3]}]
    head["loads"] = []
    head["rules"] = [{"limit": "junction", "below_rating_by": 10.0, "file": "elsewhere.yaml"}]
    found = compare(base, head)
    assert (found.rails.added, found.rails.removed) == (("+3V3",), ("+24V",))
    assert found.rails.changed == (("+5V", "voltage [4.9, 5.0, 5.1] → [4.8, 5.0, 5.2]"),)
    assert found.loads.removed == ("motor",)
    assert found.rules.changed == (("junction", "below_rating_by 25.0 → 10.0"),)


def test_where_a_row_is_written_is_no_change(base, head):
    head["rails"][0]["line"] = 99
    assert not compare(base, head).rails


def test_coverage_lost_and_gained(base, head):
    base["coverage"]["unproven"] = ["Q2"]
    head["coverage"] |= {"outside": ["Q1"], "not_fitted": []}
    head["findings"] = [f for f in head["findings"] if f["ref"] != "Q3"]
    found = compare(base, head)
    assert [(s.ref, s.base, s.head) for s in found.coverage_gained] == [("Q2", "unproven", "judged")]
    assert [(s.ref, s.base, s.head) for s in found.coverage_lost] == [
        ("Q1", "judged", "outside"), ("Q3", "judged", "not judged")]


def test_two_findings_that_share_an_id_are_not_hidden(base, head):
    head["findings"].append(dict(head["findings"][0], verdict="exceeded", margin=-0.9, mode="gale"))
    assert "exceeded" in {f["verdict"] for f in compare(base, head).new}
