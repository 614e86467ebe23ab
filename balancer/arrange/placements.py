"""What moves as one, and one way to seat it: the words of the arrangement model."""

from __future__ import annotations

import math
from dataclasses import dataclass

from balancer.panel import Circuit, Landing, Panel, Role

EFFORT_SCALE = 1000
"""Effort is counted in whole thousandths of a landing."""

GFCI_AFCI_EFFORT = 0.5
"""Extra effort of moving a GFCI or AFCI breaker's neutral along."""

SPARE_MOVE_EFFORT = 1
SPARE_REMOVAL_EFFORT = 1_000 * EFFORT_SCALE
"""A spare breaker has no conductor: it moves for next to nothing, and comes out only where nothing else helps."""

Part = tuple[int, str]
"""Half a space, the smallest thing that a breaker fills: (space, "a" or "b")."""


@dataclass(frozen=True)
class Placement:
    """One way to seat a unit."""

    landings: tuple[tuple[str, Landing], ...]
    """Label and landing of every circuit of the unit."""
    parts: tuple[Part, ...]
    signs: tuple[int, ...]
    """For every circuit: +1 where its line-to-neutral part is on leg A, -1 on leg B, 0 for none or not known."""
    landings_changed: int
    effort: int
    """In thousandths of a landing, spares' own small costs included."""
    reach_in: float
    """Conductor length [in] that the re-landings take up together."""
    row_rating_a: tuple[tuple[int, float], ...]
    """Row and sum of the known handle ratings [A] that it puts there."""

    @property
    def spaces(self) -> tuple[int, ...]:
        """Spaces that it fills, wholly or by a half, in rising order."""
        return tuple(sorted({space for space, _ in self.parts}))


@dataclass(frozen=True)
class Unit:
    """What moves as one. `is_optional` units (spares) may be left out of the panel."""

    circuits: tuple[Circuit, ...]
    placements: tuple[Placement, ...]
    is_optional: bool = False

    @property
    def name(self) -> str:
        """Labels of its circuits, for messages."""
        return " + ".join(circuit.label for circuit in self.circuits)

    @property
    def as_found(self) -> Placement | None:
        """The placement that changes nothing, where there is one."""
        found = tuple((circuit.label, circuit.landing) for circuit in self.circuits)
        return self.placements[0] if self.placements and self.placements[0].landings == found else None


def conductors_moved(circuit: Circuit, landing: Landing) -> int:
    """Count the hot conductors whose terminal differs from the one as found; circuits not landed before cost none."""
    if not circuit.landing or circuit.hot_conductors == 0:
        return 0
    return sum(old != new for old, new in zip(circuit.landing, landing, strict=True))


def landing_effort(circuit: Circuit, landing: Landing) -> float:
    """Relative effort of landing a circuit there: its landings, weighted, and a GFCI or AFCI breaker's neutral."""
    moved = conductors_moved(circuit, landing)
    if not moved:
        return 0.0
    return moved * circuit.effort + (GFCI_AFCI_EFFORT if circuit.has_gfci_or_afci else 0.0)


def scaled_effort(circuit: Circuit, landing: Landing) -> int:
    """Effort in whole thousandths of a landing, with the small cost of moving a spare breaker."""
    if circuit.role is Role.SPARE:
        return SPARE_MOVE_EFFORT if circuit.landing and landing != circuit.landing else 0
    return round(landing_effort(circuit, landing) * EFFORT_SCALE)


def longest_reach_in(panel: Panel, old: Landing, new: Landing) -> float:
    """Longest conductor length [in] that one of a circuit's re-landings takes up."""
    reaches = (panel.reach_in(a.space, b.space) for a, b in zip(old, new, strict=True) if a != b)
    return max(reaches, default=0.0)


def total_reach_in(panel: Panel, old: Landing, new: Landing) -> float:
    """Conductor length [in] that a circuit's re-landings take up together; none for one not landed before."""
    if not old:
        return 0.0
    return math.fsum(panel.reach_in(a.space, b.space) for a, b in zip(old, new, strict=True) if a != b)
