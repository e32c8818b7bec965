"""The calculation behind every finding on one part, as text that can be followed by hand."""

from __future__ import annotations

from drc_power.findings.model import Finding, Result, Step
from drc_power.text import printable, si


def workings_text(result: Result, ref: str) -> str:
    """Every finding on the part, with its steps, its inputs and where each came from."""
    blocks = [_finding(finding) for finding in result.findings if finding.ref == ref]
    title = f"Workings for {printable(ref)} on {printable(result.board_name)} {printable(result.board_revision)}"
    return "\n\n".join([title, *blocks]) + "\n"


def _finding(finding: Finding) -> str:
    where = f"mode {finding.mode}" if finding.mode else f"event {finding.event}" if finding.event else "board"
    lines = [f"{finding.rule} - {finding.verdict} ({printable(where)}; {printable(finding.corner or 'any corner')})"]
    lines += [f"  {_step(step)}" for step in finding.workings]
    lines.append(f"  value {si(finding.value, finding.unit)}, allowed {si(finding.allowed, finding.unit)}, "
                 f"rated {si(finding.rated, finding.unit)}, margin {si(finding.margin, '')}")
    lines += [f"  from {printable(i.name)} = {printable(i.value)}: {printable(i.source)}" for i in finding.inputs_used]
    lines.append(f"  {printable(finding.text)}")
    return "\n".join(lines)


def _step(step: Step) -> str:
    numbers = f" = {step.numbers}" if step.numbers else ""
    return printable(f"{step.symbol} = {step.formula}{numbers} = {si(step.value, step.unit, 6)}   [{step.source}]")
