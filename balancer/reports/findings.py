"""Findings on the screen: gravest first, each with its circuits and its article."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from rich.console import Group, RenderableType
from rich.text import Text

from balancer.reports.text import count_of, indented, list_of, paragraph
from balancer.rules import Finding, Severity

_STYLES = {Severity.ERROR: "bold red", Severity.WARNING: "bold", Severity.NOTICE: ""}


def findings_list(findings: Sequence[Finding]) -> Group:
    """Show every finding in full."""
    return Group(*_blocks(findings))


def findings_count(findings: Sequence[Finding]) -> str:
    """Count findings by severity: ``1 error, 2 warnings, 4 notices``."""
    counts = [(severity, sum(f.severity is severity for f in findings)) for severity in Severity]
    return ", ".join(count_of(number, str(severity)) for severity, number in counts if number) or "no findings"


def _blocks(findings: Sequence[Finding]) -> Iterator[RenderableType]:
    for finding in findings:
        head = Text(str(finding.severity).upper(), style=_STYLES[finding.severity])
        circuits = f" ({list_of(finding.circuits)})" if finding.circuits else ""
        yield Text.assemble(head, f"  {finding.rule}{circuits}", overflow="fold")
        yield indented(paragraph(finding.message))
        if finding.citation:
            yield indented(paragraph(finding.citation))
