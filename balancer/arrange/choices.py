"""What a leg answer chooses for every free unit, and the whole numbers that are counted over the choices."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balancer.arrange.placements import Placement, Unit
from balancer.panel import Leg, Panel

Answer = NDArray[np.int8]
"""Shape (choices,): 1 where the unit takes that choice instead of its reference pattern."""


@dataclass(frozen=True)
class Choice:
    """A free unit and the pattern that it takes instead of its reference pattern."""

    unit: int
    signs: tuple[int, ...]


def patterns(unit: Unit) -> tuple[tuple[int, ...], ...]:
    """Give the sign patterns of a unit's placements, the reference (first placement's) first."""
    return tuple(dict.fromkeys(placement.signs for placement in unit.placements))


@dataclass(frozen=True, eq=False)
class Counter:
    """A whole-number constraint ``base + costs @ answer <= cap`` that every seatable leg answer keeps."""

    base: int
    costs: NDArray[np.int64]
    cap: int
    name: str

    def value(self, answer: Answer) -> int:
        """Left-hand side for an answer."""
        return self.base + int(self.costs @ answer.astype(np.int64))


def _with_pattern(unit: Unit, signs: tuple[int, ...]) -> list[Placement]:
    return [placement for placement in unit.placements if placement.signs == signs]


def cost_counter(units: Sequence[Unit], choices: Sequence[Choice], attribute: str) -> Counter:
    """Count what each choice costs at least, by the name of a placement's whole-number cost."""

    def least(unit: Unit, signs: tuple[int, ...]) -> int:
        return int(min(getattr(placement, attribute) for placement in _with_pattern(unit, signs)))

    # A spare costs next to nothing to move: its own small costs are the seat assignment's business.
    references = [0 if unit.is_optional else least(unit, patterns(unit)[0]) for unit in units]
    costs = [least(units[c.unit], c.signs) - references[c.unit] for c in choices]
    total = sum(references)
    return Counter(total, np.array(costs, dtype=np.int64), np.iinfo(np.int64).max, attribute)


def seat_counters(panel: Panel, units: Sequence[Unit], choices: Sequence[Choice]) -> tuple[Counter, ...]:
    """Count spaces per leg: what the units confined to a set of spaces fill there must not exceed what it has.

    Only conditions that every seatable answer keeps; the exact seat assignment has the last word.
    """
    needed = [index for index, unit in enumerate(units) if not unit.is_optional]
    homes = {index: frozenset(s for p in units[index].placements for s in p.spaces) for index in needed}
    counters = []
    for spaces in dict.fromkeys(homes.values()):
        members = [index for index in needed if homes[index] <= spaces]
        for leg in Leg:
            cap = sum(panel.leg(space) is leg for space in spaces)
            counter = _seat_counter(panel, units, choices, members, (leg, cap))
            # One that no answer can break is left out.
            if counter.base + int(np.maximum(counter.costs, 0).sum()) > cap:
                counters.append(counter)
    return tuple(counters)


def _seat_counter(
    panel: Panel,
    units: Sequence[Unit],
    choices: Sequence[Choice],
    members: Sequence[int],
    limit: tuple[Leg, int],
) -> Counter:
    leg, cap = limit

    def least(unit: Unit, signs: tuple[int, ...]) -> int:
        return min(sum(panel.leg(s) is leg for s in p.spaces) for p in _with_pattern(unit, signs))

    inside = frozenset(members)
    references = {index: least(units[index], patterns(units[index])[0]) for index in members}
    costs = [
        least(units[choice.unit], choice.signs) - references[choice.unit] if choice.unit in inside else 0
        for choice in choices
    ]
    return Counter(sum(references.values()), np.array(costs, dtype=np.int64), cap, f"spaces on leg {leg}")
