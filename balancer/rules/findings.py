"""Findings: what is wrong or worth knowing in a panel, each with its rule, article and edition."""

from __future__ import annotations

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
