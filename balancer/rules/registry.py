"""Every rule in the order of the report, and the check that runs them."""

from __future__ import annotations

from collections.abc import Mapping

from balancer.panel import Installation, Landing
from balancer.rules import (
    circuit_directory,
    conductors,
    handles,
    in_phase,
    loading,
    panelboard,
    shared_neutrals,
)
from balancer.rules.findings import Finding, Severity
from balancer.rules.landed import LandedPanel
from balancer.rules.rule import Rule

RULES: tuple[Rule, ...] = (
    *shared_neutrals.RULES,
    *in_phase.RULES,
    *handles.RULES,
    *conductors.RULES,
    *loading.RULES,
    *panelboard.RULES,
    *circuit_directory.RULES,
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
