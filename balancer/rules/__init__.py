"""What is wrong or dangerous in a panel, by article and edition."""

from balancer.rules.ampacity import conductor_limit_a
from balancer.rules.findings import CODE_NOTE, Finding, Severity, errors_of, new_errors
from balancer.rules.registry import RULES, check_installation

__all__ = [
    "CODE_NOTE",
    "RULES",
    "Finding",
    "Severity",
    "check_installation",
    "conductor_limit_a",
    "errors_of",
    "new_errors",
]
