"""The findings as JSON, the same bytes for the same inputs, and back again for `compare`.

One row stands on one line, so that a version control system shows a changed finding as one changed line. Floats keep
twelve significant digits: the last digits of a double differ between processors and mathematics libraries, twelve are
far more than any datum has, and the shortest form that reads back to the rounded number is the same everywhere.
"""

from __future__ import annotations

import json
import math
from collections.abc import Iterable, Mapping
from typing import Any

from drc_power import __version__
from drc_power.findings.model import Coverage, Finding, NetPoint, OperatingPoint, PartRow, Result
from drc_power.findings.order import finding_key, net_point_key, point_key
from drc_power.findings.verdict import overall_verdict, tally
from drc_power.text import UNSEEN_BEYOND_ASCII, natural_key

FORMAT = 1
SIGNIFICANT_DIGITS = 12


def to_json(result: Result) -> str:
    """The result in the findings format, keys in the format's order, lists sorted, a newline at the end.

    NaN and infinite numbers become null. Controls and invisible characters are written as escapes. After the format's
    own keys come `notes`, where there are any, and what `result.extra` holds.
    """
    document = _document(result)
    clash = document.keys() & result.extra.keys()
    if clash:
        raise ValueError(f"extra keys would hide the format's own: {', '.join(sorted(clash))}")
    lines = ",\n ".join(f"{_dumps(key)}: {_laid_out(value)}" for key, value in (document | result.extra).items())
    return UNSEEN_BEYOND_ASCII.sub(_json_escape, f"{{{lines}}}\n")


def _document(result: Result) -> dict[str, Any]:
    return {
        "format": FORMAT,
        "tool": {"name": "drc-power", "version": __version__},
        "today": result.today,
        "board": {"name": result.board_name, "revision": result.board_revision, "netlist": result.netlist,
                  "parts": result.n_parts, "nets": result.n_nets},
        "inputs": [{"role": i.role, "path": i.path, "sha256": i.sha256}
                   for i in sorted(result.inputs, key=lambda i: (i.role, natural_key(i.path), i.sha256))],
        "verdict": overall_verdict(result),
        "tally": tally(result.findings),
        "coverage": _coverage(result.coverage),
        "parts": [_part(p) for p in sorted(result.parts, key=lambda p: (natural_key(p.ref), p.uuid))],
        "rails": _sorted_rows(result.rails),
        "loads": _sorted_rows(result.loads),
        "rules": _sorted_rows(result.rules),
        "operating_points": [_point(p) for p in sorted(result.operating_points, key=point_key)],
        "nets": [_net_point(p) for p in sorted(result.nets, key=net_point_key)],
        "findings": [_finding(f) for f in sorted(result.findings, key=finding_key)],
        **({"notes": list(result.notes)} if result.notes else {}),
    }


def _coverage(coverage: Coverage) -> dict[str, Any]:
    outside = sorted(coverage.outside, key=lambda o: natural_key(o.ref))
    return {
        "elements": coverage.elements,
        "judged": coverage.judged,
        "unproven": sorted(coverage.unproven, key=natural_key),
        "outside": [o.ref for o in outside],
        "outside_because": {o.ref: o.because for o in outside},
        "not_fitted": sorted(coverage.not_fitted, key=natural_key),
    }


def _part(part: PartRow) -> dict[str, Any]:
    return {"ref": part.ref, "uuid": part.uuid, "sheet": part.sheet, "value": part.value, "device": part.device,
            "role": part.role}


def _point(point: OperatingPoint) -> dict[str, Any]:
    return {"mode": point.mode, "corner": point.corner, "ref": point.ref, "role": point.role,
            "voltage": point.voltage_v, "current": point.current_a, "rms": point.rms_a, "power": point.power_w,
            "tj": point.tj_c, "case": point.case_c}


def _net_point(point: NetPoint) -> dict[str, Any]:
    return {"mode": point.mode, "corner": point.corner, "net": point.net, "voltage": point.voltage_v,
            "current": point.current_a}


def _finding(finding: Finding) -> dict[str, Any]:
    return {
        "id": finding.id, "rule": finding.rule, "stress": finding.stress, "verdict": finding.verdict,
        "was": finding.was, "ref": finding.ref, "uuid": finding.uuid, "sheet": finding.sheet, "net": finding.net,
        "mode": finding.mode, "event": finding.event, "corner": finding.corner, "quantity": finding.quantity,
        "value": finding.value, "allowed": finding.allowed, "rated": finding.rated, "unit": finding.unit,
        "margin": finding.margin, "text": finding.text, "remedy": finding.remedy,
        "inputs_used": [{"name": i.name, "value": i.value, "source": i.source} for i in finding.inputs_used],
        "sensitivity": [{"name": s.name, "span": s.span, "moves_by": s.moves_by, "unit": s.unit}
                        for s in finding.sensitivity],
        "samples": finding.samples,
        "workings": [{"symbol": w.symbol, "formula": w.formula, "numbers": w.numbers, "value": w.value,
                      "unit": w.unit, "source": w.source} for w in finding.workings],
        "where": {"file": finding.file, "line": finding.line},
    }


def _sorted_rows(rows: Iterable[Mapping[str, Any]]) -> list[Mapping[str, Any]]:
    """Rows whose keys another room chose, by the first name they have, then by all they say."""
    return sorted(rows, key=lambda row: (natural_key(str(next(iter(row.values()), ""))), _dumps(row)))


def _laid_out(value: Any) -> str:
    """One line per row for a list of rows, one line for anything else."""
    if isinstance(value, (list, tuple)) and any(isinstance(row, Mapping) for row in value):
        return "[\n  " + ",\n  ".join(map(_dumps, value)) + "]"
    return _dumps(value)


def _dumps(value: Any) -> str:
    return json.dumps(_plain(value), ensure_ascii=False, allow_nan=False)


def _plain(value: Any) -> Any:
    """The value made of what JSON has: arrays become lists, sets sorted lists, floats rounded, NaN null."""
    if isinstance(value, float):
        return _rounded(value)
    if value is None or isinstance(value, (str, int)):
        return value
    if isinstance(value, Mapping):
        return {str(key): _plain(item) for key, item in value.items()}
    if isinstance(value, (set, frozenset)):
        return sorted((_plain(item) for item in value), key=str)
    if hasattr(value, "tolist"):
        return _plain(value.tolist())
    return [_plain(item) for item in value]


def _rounded(value: float) -> float | None:
    if not math.isfinite(value):
        return None
    return float(f"{value:.{SIGNIFICANT_DIGITS}g}") + 0.0


def _json_escape(match: Any) -> str:
    return json.dumps(match[0], ensure_ascii=True)[1:-1]
