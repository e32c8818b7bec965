"""The one place that picks the worst corner of a judgement, gives its verdict and makes the finding."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from ..board import Board
from ..findings.identity import finding_id, named_subject
from ..findings.model import Finding, InputUsed
from ..findings.verdict import verdict_of
from ..text import si, si_apart
from .house import describe
from .judgement import Judgement

UNKNOWN_MARGIN = -1e-12
"""In the search for the worst corner a missing margin goes before every margin that holds, after every one that does not."""

TIE_BREAK = 1e-7
"""Of two corners of equal margin the one with the worse value is shown, as for a part that is as warm as the air."""


def objective_of(judgement: Judgement) -> np.ndarray:
    """What the search for the worst corner makes as small as it can, shape (sample,)."""
    if judgement.lacking:
        value = finite_or_zero(judgement.value)
        return value if judgement.sense == "at_least" else -value
    margins = judgement.margins()
    known = np.where(np.isnan(margins), UNKNOWN_MARGIN, np.maximum(margins, -1e6))
    return known + TIE_BREAK * _room(judgement)


def _room(judgement: Judgement) -> np.ndarray:
    """How far the value is from its limit, on a scale of its own, shape (sample,): decides between equal margins."""
    sign = -1.0 if judgement.sense == "at_least" else 1.0
    size = np.abs(judgement.allowed) + np.abs(judgement.value)
    with np.errstate(divide="ignore", invalid="ignore"):
        room = sign * (judgement.allowed - judgement.value) / size
    return finite_or_zero(room)


def finite_or_zero(values: np.ndarray) -> np.ndarray:
    """The values, 0 where they are not finite."""
    return np.where(np.isfinite(values), values, 0.0)


def make_finding(board: Board, judgement: Judgement, sample: int, corner: str, gaps: Sequence[str]) -> Finding | None:
    """The finding at the sample that the search found worst; None for a check that has nothing to say."""
    margin = float(judgement.margins()[sample])
    known = np.isfinite(margin)
    verdict = verdict_of(margin if known else None, board.rules.close_at, proven=not (judgement.lacking or gaps))
    if judgement.only_if_exceeded and verdict in ("met", "close"):
        return None
    value, rated, allowed = (_number(a[sample]) for a in (judgement.value, judgement.rated, judgement.allowed))
    part = board.netlist.parts.get(judgement.ref or "")
    limits = sorted({str(judgement.limit.name)}) if judgement.limit is not None else []
    inputs = [InputUsed(*row) for row in judgement.inputs()]
    if judgement.limit is not None:
        source = board.place(judgement.limit.mark) + (f" ({judgement.limit.source})" if judgement.limit.source else "")
        inputs.append(InputUsed(f"house rule {limits[0]}", describe(judgement.limit), source))
    return Finding(
        id=finding_id(*_subjects(judgement), rule=judgement.rule, stress=judgement.stress, mode=judgement.mode),
        rule=judgement.rule, stress=judgement.stress, verdict=verdict, was=None, ref=judgement.ref,
        uuid=part.uuid if part else None, sheet=part.sheet if part else None, net=judgement.net, mode=judgement.mode,
        event=judgement.event, corner=corner, quantity=judgement.quantity, value=value, allowed=allowed, rated=rated,
        unit=judgement.unit, margin=margin if known and not judgement.lacking else None,
        text=_sentence(judgement, verdict, value, allowed, rated, gaps),
        remedy=_remedy(judgement, verdict, gaps), inputs_used=tuple(inputs),
        workings=judgement.steps(sample), file=board.shown(judgement.mark.file), line=judgement.mark.line)


def _subjects(judgement: Judgement):
    event = (named_subject("event", judgement.event),) if judgement.event else ()
    return judgement.subject, *event


def _number(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None


def _sentence(judgement: Judgement, verdict: str, value, allowed, rated, gaps: Sequence[str]) -> str:
    """What was found, in one or two sentences that stand alone."""
    what = judgement.quantity + (f" of {judgement.ref}" if judgement.ref else "")
    what += f" during {judgement.event}" if judgement.event else ""
    if judgement.why and (judgement.lacking or verdict == "unproven"):
        return f"{judgement.why[0].upper()}{judgement.why[1:]}."
    if verdict == "unproven":
        reasons = list(dict.fromkeys((*judgement.lacking, *gaps)))
        seen = f"; without it, {si(value, judgement.unit)}" if value is not None and len(reasons) == 1 else ""
        because = f"not given: {'; '.join(reasons)}{seen}" if reasons else "there is no operating point at this corner"
        return f"The {what} cannot be shown to hold: {because}."
    shown, limit = si_apart(value, allowed, judgement.unit)
    if judgement.sense == "between":
        return f"The {what} is {shown}; it must stay within its window, of which this corner leaves least."
    bound = "at least" if judgement.sense == "at_least" else "at most"
    why = f" ({describe(judgement.limit)}, {si(rated, judgement.unit)})" if rated is not None and judgement.limit else ""
    return f"The {what} is {shown}; {bound} {limit} is allowed{why}."


def _remedy(judgement: Judgement, verdict: str, gaps: Sequence[str]) -> str:
    if verdict in ("met", "waived"):
        return ""
    lacking = [*judgement.lacking, *gaps]
    if verdict == "unproven" and lacking and not judgement.why:
        return judgement.remedy if judgement.rule.startswith("coverage") else f"give {'; '.join(dict.fromkeys(lacking))}"
    return judgement.remedy
