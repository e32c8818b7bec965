"""A hand-made result that has one of everything, and names that attack writers."""

import pytest

from drc_power.findings.identity import finding_id, named_subject, net_subject, part_subject
from drc_power.findings.model import (
    Coverage,
    Finding,
    InputFile,
    InputUsed,
    NetPoint,
    OperatingPoint,
    Outside,
    PartRow,
    Result,
    Sensitivity,
    Step,
)

HOSTILE = {
    "cells": "a|b||c",
    "escaped cells": r"a\|b\\|c\\",
    "backticks": "`` ` ```js",
    "html": "<script>alert(1)</script><img src=x onerror=alert(1)>",
    "closing tags": "</details></code></table><h1>",
    "entities": "&lt;b&gt; &#64;crew &copy;",
    "mention": "@octo-crew please",
    "mention in code": "`@octo-crew|",
    "address": "`user@example.org|",
    "issue": "#123 GH-123 !42 ~label %7 $5",
    "link": "[here](https://example.org) https://example.org/x www.example.org",
    "image": "![x](https://example.org/x.png)",
    "emphasis": "**bold** _it_ ~~no~~ __x__",
    "emoji": ":tada: :+1:",
    "formula": "$\\frac{1}{2}$",
    "block": "# title\n- item\n1. one\n> quote\n```\ncode\n---\n===",
    "minus": "- - -",
    "number": "1. 2) + =",
    "newlines": "one\ntwo\r\nthree\u2028four\x85five",
    "terminal": "\x1b[2J\x1b[31mred\x07\x9b1m\x00",
    "bidi": "safe\u202eevil\u2066\u200f\u061c",
    "invisible": "a\u200bb\ufeffc\u00add\U000e0041",
    "surrogate": "lone \ud800 one",
    "accents": "a" + "\u0301" * 300,
    "wide": "抵抗🙂" * 30,
    "spaces": "  in  side  ",
    "empty": "",
    "long": "N" * 5_000 + "middle" + "M" * 5_000,
    "long escapes": "|`" * 5_000,
}


def make_finding(**changes):
    row = {
        "rule": "junction.steady", "stress": "tj", "verdict": "met", "was": None, "ref": "Q3", "uuid": "/root/q3",
        "sheet": "/", "net": None, "mode": "run", "event": None, "corner": "ambient 55 °C, +24V 29 V",
        "quantity": "junction temperature", "value": 100.0, "allowed": 150.0, "rated": 175.0, "unit": "°C",
        "margin": 50.0 / 95.0, "text": "The junction stays below its limit.", "remedy": "",
    } | changes
    subjects = [part_subject(row["uuid"])] if row["uuid"] else [net_subject([], row["net"] or "")]
    subjects += [named_subject("event", row["event"])] if row["event"] else []
    about = finding_id(*subjects, rule=row["rule"], stress=row["stress"], mode=row["mode"])
    return Finding(**{"id": about} | row)


def make_result(*findings, **changes):
    fields = {
        "board_name": "Frost fan controller", "board_revision": "B", "netlist": "frost-fan.net", "n_parts": 61,
        "n_nets": 48, "inputs": (), "coverage": Coverage(1, 1, (), (), ()),
    } | changes
    return Result(findings=tuple(findings), **fields)


@pytest.fixture(name="make_finding")
def _make_finding():
    return make_finding


@pytest.fixture(name="make_result")
def _make_result():
    return make_result


@pytest.fixture(params=HOSTILE.values(), ids=HOSTILE.keys())
def hostile(request):
    return request.param


@pytest.fixture
def hostile_result(hostile):
    """A result in which every text of unknown origin is the hostile one."""
    names = {"ref": hostile, "sheet": hostile, "net": hostile, "mode": hostile, "event": hostile, "corner": hostile,
             "quantity": hostile, "text": hostile, "remedy": hostile, "unit": "W", "file": hostile, "uuid": "u"}
    extra = {
        "inputs_used": (InputUsed(hostile, hostile, hostile),),
        "sensitivity": (Sensitivity(hostile, hostile, 1.0, "W"),),
        "workings": (Step(hostile, hostile, hostile, 1.0, "W", hostile),),
    }
    outcomes = (("exceeded", None, -0.1), ("unproven", None, None), ("close", None, 0.05), ("waived", "exceeded", -0.1))
    findings = [make_finding(verdict=v, was=w, margin=m, stress=v, **names, **extra) for v, w, m in outcomes]
    return make_result(
        *findings, board_name=hostile, board_revision=hostile, netlist=hostile, notes=(hostile,),
        parts=(PartRow(hostile, "u", hostile, hostile, hostile, hostile),),
        rails=({"net": hostile},), loads=({"name": hostile, hostile: hostile},),
        coverage=Coverage(2, 1, (hostile,), (Outside(hostile, hostile),), (hostile,)),
        inputs=(InputFile("netlist", hostile, "00"),),
    )


@pytest.fixture
def example():
    """One of everything, in no particular order."""
    return make_result(
        make_finding(
            ref="R12", uuid="/root/r12", rule="derating.power", stress="power", quantity="power", unit="W",
            value=0.118, allowed=0.125, rated=0.25, margin=1 - 0.118 / 0.125, verdict="close",
            text="R12 takes 118 mW of the 125 mW that the house allows.", remedy="Use a part rated 500 mW.",
        ),
        make_finding(ref="D4", uuid="/root/d4"),
        make_finding(
            value=163.2, margin=-13.2 / 95.0, verdict="exceeded", file="frost-fan.power.yaml", line=31,
            text="3.2 W through 33.8 K/W lift the junction of Q3 108.2 K above ambient.",
            remedy="A path of at most 29.7 K/W to ambient, or at most 2.81 W.",
            inputs_used=(InputUsed("rth_ja", "33.8 K/W", "devices/nfet.yaml:14"),),
            sensitivity=(
                Sensitivity("rds", "6.4 mohm .. 8 mohm", 21.6, "K"),
                Sensitivity("ambient", "-30 °C .. 55 °C", 85.0, "K"),
            ),
            workings=(
                Step("T_J", "T_A + P · R_thJA", "55 °C + 3.2 W · 33.8 K/W", 163.16, "°C", "heat path of Q3"),
            ),
        ),
        make_finding(
            ref="Q2", uuid="/root/q2", verdict="unproven", value=None, margin=None,
            text="Nothing says how Q2 gets rid of its heat: its device has neither rth_ja nor rth_jc.",
            remedy="Add thermal: {rth_ja: ...} to the device nfet-40v.",
        ),
        make_finding(
            ref="Q1", uuid="/root/q1", event="plug-in", rule="envelope.event", stress="envelope", quantity="current",
            unit="A", value=12.5, allowed=10.0, rated=14.0, margin=-0.25, verdict="waived", was="exceeded",
            text="Waived by A. Smith until 2027-03-31: measured on three boards.",
        ),
        make_finding(
            ref=None, uuid=None, sheet=None, net="+5V", rule="network.voltage", stress="voltage", quantity="voltage",
            unit="V", value=4.92, allowed=4.75, rated=None, margin=4.92 / 4.75 - 1,
            text="The load gets 4.92 V and needs 4.75 V.",
        ),
        today="2027-01-15",
        inputs=(
            InputFile("netlist", "frost-fan.net", "9f" * 32),
            InputFile("annotations", "frost-fan.power.yaml", "31" * 32),
        ),
        coverage=Coverage(6, 4, ("Q2",), (Outside("TP3", "test point"), Outside("D1", "signal level")), ("R77",)),
        parts=(
            PartRow("R12", "/root/r12", "/", "10k", None, "resistor"),
            PartRow("Q3", "/root/q3", "/", "NF6008", "nfet-60v-8m", "mosfet"),
        ),
        rails=(
            {"net": "+24V", "voltage": [21.0, 24.0, 29.0], "source": ["J1"]},
            {"net": "+5V", "voltage": [4.9, 5.0, 5.1]},
        ),
        operating_points=(
            OperatingPoint("run", "+24V 29 V", "Q3", "mosfet", 0.16, 20.0, 20.0, 3.2, 163.16, float("nan")),
            OperatingPoint("run", "+24V 29 V", "D4", "diode", -0.0, 0.0, None, 0.0, 55.0, None),
        ),
        nets=(NetPoint("run", "+24V 29 V", "+5V", 1 / 3, 0.1 + 0.2),),
        notes=("frost-fan.power.yaml sets +5V, the schematic field says 5.1 V: the file wins.",),
    )
