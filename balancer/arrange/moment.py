"""One scenario's line-to-neutral currents, circuit by circuit."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from balancer.electrical.phasors import PanelCurrents, neutral_leg
from balancer.electrical.supply import SupplyFactors, supply_factors
from balancer.panel import Arrangement, Circuit, Leg


@dataclass(frozen=True, kw_only=True)
class Contribution:
    """A circuit's line-to-neutral current [A] in the governing scenario.

    `along_neutral_a` is its part in the direction of the neutral's phasor: negative where it works against it.
    """

    circuit: str
    leg: Leg
    current_a: float
    along_neutral_a: float


class Moment:
    """The line-to-neutral currents of one scenario, with what is not known taken as it makes the neutral largest."""

    def __init__(self, currents: PanelCurrents, arrangement: Arrangement, scenario: int) -> None:
        self.currents, self.arrangement, self.scenario = currents, arrangement, scenario
        self.panel = currents.installation.panel
        units = np.array([c.load.neutral_pf.unit_phasor for c in currents.installation.circuits])
        phasors = currents.scenarios.neutral_a[scenario] * units
        self.running: list[tuple[Circuit, complex]] = [
            (circuit, complex(phasor))
            for circuit, phasor in zip(currents.installation.circuits, phasors, strict=True)
            if arrangement.get(circuit.label) and phasor != 0
        ]
        self.factors, self.unknown_leg, self.neutral = self._worst()

    def _worst(self) -> tuple[SupplyFactors, Leg, complex]:
        choices = [
            (
                factors,
                leg,
                sum(neutral_of_leg(factors, self._leg(circuit, leg)) * phasor for circuit, phasor in self.running),
            )
            for factors in supply_factors(self.panel.supply)
            for leg in Leg
        ]
        return max(choices, key=lambda choice: abs(choice[2]))

    def _leg(self, circuit: Circuit, unknown: Leg) -> Leg:
        return neutral_leg(self.panel, circuit, self.arrangement[circuit.label]) or unknown

    @property
    def contributions(self) -> tuple[Contribution, ...]:
        """Every running circuit's part of the neutral."""
        direction = self.neutral.conjugate() / abs(self.neutral) if self.neutral else 0j
        return tuple(
            Contribution(
                circuit=circuit.label,
                leg=(leg := self._leg(circuit, self.unknown_leg)),
                current_a=abs(phasor),
                along_neutral_a=(neutral_of_leg(self.factors, leg) * phasor * direction).real,
            )
            for circuit, phasor in self.running
        )


def neutral_of_leg(factors: SupplyFactors, leg: Leg) -> complex:
    """Give the neutral phasor that 1 A on a leg leaves."""
    return factors.neutral_sum + (factors.neutral_difference if leg is Leg.A else -factors.neutral_difference)
