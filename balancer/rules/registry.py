"""Every rule in the order of the report, and the check that runs them."""

from __future__ import annotations

from collections.abc import Mapping

from balancer.panel import Installation, Landing
from balancer.rules.circuit_directory import DIRECTORY_RULES
from balancer.rules.conductors import CONDUCTOR_RULES
from balancer.rules.findings import Finding, Severity
from balancer.rules.handles import HANDLE_RULES
from balancer.rules.in_phase import IN_PHASE_RULES
from balancer.rules.landed import LandedPanel
from balancer.rules.loading import LOADING_RULES
from balancer.rules.panelboard import PANELBOARD_RULES
from balancer.rules.rule import Rule
from balancer.rules.shared_neutrals import SHARED_NEUTRAL_RULES

RULES: tuple[Rule, ...] = (
    *SHARED_NEUTRAL_RULES,
    *IN_PHASE_RULES,
    *HANDLE_RULES,
    *CONDUCTOR_RULES,
    *LOADING_RULES,
    *PANELBOARD_RULES,
    *DIRECTORY_RULES,
)

_GRAVEST_FIRST = (Severity.ERROR, Severity.WARNING, Severity.NOTICE)


def check_installation(
    installation: Installation, arrangement: Mapping[str, Landing] | None = None
) -> tuple[Finding, ...]:
    """Look for all that is wrong or worth knowing.

    Parameters
    ----------
    installation
        The panel and its circuits.
    arrangement
        Landings to judge; None is the panel as found.

    Returns
    -------
    tuple of Finding
        Errors first, then warnings, then notices; inside a severity by rule, then by space. The order of the
        inventory's rows does not matter.
    """
    landed = LandedPanel(installation, installation.as_found if arrangement is None else arrangement)
    findings = [finding for rule in RULES for finding in rule.findings(landed)]
    return tuple(sorted(findings, key=lambda finding: _GRAVEST_FIRST.index(finding.severity)))
