"""What makes the peak neutral, and what holds it up."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

from balancer.electrical.phasors import PanelCurrents
from balancer.panel import Arrangement, Leg


class HeldBy(StrEnum):
    """What keeps the peak neutral from falling further."""

    NOTHING = "nothing"
    """There is next to no neutral current."""
    LEGS_IN_PHASE = "legs in phase"
    ONE_LOAD = "one load"
    """One load outweighs all the others that run then."""
    NO_CLOSER_SPLIT = "no closer split"
    OTHER_SCENARIO = "another scenario"
    """Moving what would help here raises another scenario."""
    CONSTRAINTS = "constraints"
    """A move would lower it, but landings, seats, reach or the legs' limits stand against it."""


@dataclass(frozen=True, kw_only=True)
class Contribution:
    """A circuit's line-to-neutral current [A] in the governing scenario.

    `along_neutral_a` is its part in the direction of the neutral's phasor: negative where it works against it.
    """

    circuit: str
    leg: Leg
    current_a: float
    along_neutral_a: float


@dataclass(frozen=True, kw_only=True)
class PeakExplanation:
    """The governing scenario of the peak neutral, the circuits that make it and what holds it up.

    `leg_a` and `leg_b` list the largest contributions that make nine tenths of each leg's line-to-neutral current, the
    rest is `rest_a_a` and `rest_b_a` [A] (sums of magnitudes) in `rest_count_a` and `rest_count_b` circuits.
    """

    scenario: int
    scenario_name: str
    neutral_a: float
    leg_a: tuple[Contribution, ...]
    leg_b: tuple[Contribution, ...]
    rest_a_a: float
    rest_b_a: float
    rest_count_a: int
    rest_count_b: int
    held_by: HeldBy
    sentence: str
    """What holds it up, in plain words."""


def explain_peak(currents: PanelCurrents, arrangement: Arrangement) -> PeakExplanation:
    """Explain the peak neutral of an arrangement."""
    raise NotImplementedError
