"""A rule: what it is called, how grave it is, where it is written, and the function that looks for it."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from balancer.panel import Circuit
from balancer.rules.findings import Finding, Severity
from balancer.rules.landed import LandedPanel


@dataclass(frozen=True)
class Observation:
    """What a rule saw: the circuits concerned and the words for the electrician.

    `severity` is set where this case is less certain than the rule is as a rule.
    """

    circuits: tuple[Circuit, ...]
    message: str
    severity: Severity | None = None


@dataclass(frozen=True)
class Rule:
    """One rule. `severity` is an error only where what it finds is wrong or dangerous beyond doubt."""

    name: str
    severity: Severity
    citation: str
    look: Callable[[LandedPanel], Iterator[Observation]]

    def findings(self, landed: LandedPanel) -> Iterator[Finding]:
        """Turn what the rule sees into findings."""
        for seen in self.look(landed):
            yield Finding(
                rule=self.name,
                severity=seen.severity or self.severity,
                circuits=tuple(circuit.label for circuit in seen.circuits),
                message=seen.message,
                citation=self.citation,
            )
