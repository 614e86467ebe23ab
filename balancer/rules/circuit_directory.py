"""The panel's circuit directory."""

from __future__ import annotations

from collections.abc import Iterator

from balancer.panel import Role
from balancer.rules.findings import Severity
from balancer.rules.landed import LandedPanel
from balancer.rules.rule import Observation, Rule


def _no_wording(landed: LandedPanel) -> Iterator[Observation]:
    blank = tuple(c for c in landed.circuits if not c.description.strip() and c.role is not Role.SPARE)
    if blank:
        message = (
            f"no directory wording (description) for {landed.names(blank)}. The directory names every circuit by "
            "what it feeds: fill it in before it is posted."
        )
        yield Observation(blank, message)


DIRECTORY_RULES = (Rule("directory-wording-missing", Severity.NOTICE, "NEC 2023, 408.4(A)", _no_wording),)
