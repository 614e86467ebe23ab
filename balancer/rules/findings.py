"""Findings: what is wrong or worth knowing in a panel, each with its rule, article and edition."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from enum import StrEnum


class Severity(StrEnum):
    """How grave a finding is; a plan never creates an error."""

    ERROR = "error"
    WARNING = "warning"
    NOTICE = "notice"


@dataclass(frozen=True, kw_only=True)
class Finding:
    """One thing found, in the electrician's words.

    `citation` names article and edition and says where it is from memory.
    """

    rule: str
    severity: Severity
    circuits: tuple[str, ...]
    message: str
    citation: str = ""


CODE_NOTE = (
    "Articles are those of the NEC (NFPA 70). Editions differ, and what is marked as from memory was not read in "
    "print: the code in force where you work, the authority having jurisdiction and a licensed electrician decide."
)
"""What a report of findings says once, below them."""


def errors_of(findings: Iterable[Finding]) -> tuple[Finding, ...]:
    """Pick the error-level findings, in their order."""
    return tuple(finding for finding in findings if finding.severity is Severity.ERROR)


def new_errors(before: Iterable[Finding], after: Iterable[Finding]) -> tuple[Finding, ...]:
    """Pick the errors of `after` whose rule did not strike the same circuits in `before`."""
    known = {_identity(finding) for finding in errors_of(before)}
    return tuple(finding for finding in errors_of(after) if _identity(finding) not in known)


def _identity(finding: Finding) -> tuple[str, frozenset[str]]:
    # A pair turned over is still the same pair, so the order of the circuits says nothing.
    return finding.rule, frozenset(finding.circuits)
