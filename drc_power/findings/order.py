"""The one order of findings and rows wherever they are listed, whatever order they were found in."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

from drc_power.findings.model import VERDICTS, Finding, NetPoint, OperatingPoint
from drc_power.text import natural_key


def finding_key(finding: Finding) -> tuple[Any, ...]:
    """By reference in natural order (findings on no part last), net, rule, stress, mode, event, id."""
    names = finding.rule, finding.stress, finding.mode, finding.event, finding.id
    return *_last_if_none(finding.ref), *_last_if_none(finding.net), *(name or "" for name in names)


def gravest_first(findings: Iterable[Finding]) -> list[Finding]:
    """From the gravest to the mildest verdict, then by margin with the unknown ones first, then by reference."""
    return sorted(findings, key=gravity_key)


def gravity_key(finding: Finding) -> tuple[Any, ...]:
    """Sort key of `gravest_first`."""
    known = finding.margin is not None and finding.margin == finding.margin
    return -VERDICTS.index(finding.verdict), known, finding.margin if known else 0.0, finding_key(finding)


def point_key(point: OperatingPoint) -> tuple[Any, ...]:
    """By mode, reference in natural order, corner."""
    return point.mode, natural_key(point.ref), point.corner, point.role


def net_point_key(point: NetPoint) -> tuple[Any, ...]:
    """By mode, net in natural order, corner."""
    return point.mode, natural_key(point.net), point.corner


def _last_if_none(name: str | None) -> tuple[bool, Any]:
    return name is None, natural_key(name or "")
