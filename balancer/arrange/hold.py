"""What holds the peak neutral up: one large load, another scenario, or what the panel allows."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from enum import StrEnum

import numpy as np

from balancer.arrange.grouping import shared_neutral_pairs
from balancer.arrange.moment import Moment, neutral_of_leg
from balancer.arrange.placements import Unit
from balancer.arrange.results import Options
from balancer.arrange.seats import build_units
from balancer.electrical.phasors import Case, ComplexArray, neutral_leg
from balancer.electrical.scenarios import FloatArray
from balancer.panel import Arrangement, Circuit, Leg, SupplySystem

_SHARE_OF_FLOOR = 0.9
"""One load explains the peak where it alone keeps this share of it up."""

_TELLING_A = 0.05
"""Differences below this are none."""

_SPLITS_TRIED = 1 << 18


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
    SEVERAL_MOVES = "several moves"
    """No single move helps; several would help here, and other scenarios or limits stand against them."""
    CONSTRAINTS = "constraints"
    """A move would lower it, but landings, seats or the legs' limits stand against it."""


def find_hold(moment: Moment, neutral_a: float, options: Options) -> tuple[HeldBy, str]:
    """Find what holds the peak neutral up at its governing scenario, and say it in a sentence."""
    return _Hold(moment, neutral_a, options).find()


@dataclass(frozen=True)
class _Move:
    """A unit on other legs: the neutral [A] left in the governing scenario, and the peak with its scenario."""

    words: str
    here_a: float
    peak_a: float
    peak_scenario: int


class _Hold:
    """Finds what holds the peak up."""

    def __init__(self, moment: Moment, neutral_a: float, options: Options) -> None:
        self.moment, self.neutral_a, self.options = moment, neutral_a, options
        self.installation = moment.currents.installation
        self.column = {circuit.label: index for index, circuit in enumerate(self.installation.circuits)}

    def find(self) -> tuple[HeldBy, str]:
        if self.neutral_a < _TELLING_A:
            return HeldBy.NOTHING, "The legs cancel: next to nothing is left in the neutral."
        if self.installation.panel.supply.system is SupplySystem.IN_PHASE:
            sentence = "The legs are in phase, so the neutral carries their sum wherever the circuits are landed."
            return HeldBy.LEGS_IN_PHASE, sentence
        return self._one_load() or self._one_move() or self._any_split()

    def _one_load(self) -> tuple[HeldBy, str] | None:
        """One load against all the others: they cannot cancel more than their own sum."""
        sizes = self._sizes()
        total_a = sum(high for _, _, high in sizes)
        name, low_a, high_a = max(sizes, key=lambda size: size[1])
        others_a = total_a - high_a
        floor_a = low_a - others_a
        if floor_a < max(_TELLING_A, _SHARE_OF_FLOOR * self.neutral_a):
            return None
        if others_a < _TELLING_A:
            sentence = f"{name} alone draws {low_a:.1f} A with nothing running on the other leg to set against it."
        else:
            sentence = (
                f"{name} draws {low_a:.1f} A and the other 120 V loads running then only {others_a:.1f} A together:"
                f" at least {floor_a:.1f} A is left wherever they are landed."
            )
        return HeldBy.ONE_LOAD, sentence

    def _sizes(self) -> list[tuple[str, float, float]]:
        """Name, least and largest neutral [A] of every load by itself; a pair counts as what it leaves."""
        phasor = {circuit.label: value for circuit, value in self.moment.running}
        a, b = (neutral_of_leg(self.moment.factors, leg) for leg in Leg)
        sizes = []
        for first, second in self._whole_pairs():
            one, other = phasor.pop(first.label, 0j), phasor.pop(second.label, 0j)
            both_ways = (abs(a * one + b * other), abs(a * other + b * one))
            sizes.append((f"{_name(first)} with {_name(second)}", min(both_ways), max(both_ways)))
        by_label = self.installation.by_label
        sizes += [(_name(by_label[label]), abs(value), abs(value)) for label, value in phasor.items()]
        return sizes

    def _whole_pairs(self) -> Iterator[tuple[Circuit, Circuit]]:
        for first, second in shared_neutral_pairs(self.installation):
            landings = [self.moment.arrangement.get(circuit.label) for circuit in (first, second)]
            legs = {self.installation.panel.leg(landing[0].space) for landing in landings if landing}
            if len(legs) == 2:
                yield first, second

    def _one_move(self) -> tuple[HeldBy, str] | None:
        """Name the best single move for the governing scenario, and the scenario that it raises."""
        helping = [move for move in self._moves() if move.here_a < self.neutral_a - _TELLING_A]
        if not helping:
            return None
        best = min(helping, key=lambda move: (move.peak_a, move.here_a))
        if best.peak_a < self.neutral_a - _TELLING_A:
            return HeldBy.CONSTRAINTS, (
                f"{best.words} would bring the peak to {best.peak_a:.1f} A, but the free places, the landings allowed"
                " or another limit stand against it."
            )
        return HeldBy.OTHER_SCENARIO, (
            f"{best.words} would bring it to {best.here_a:.1f} A here, but raise"
            f" {self.moment.currents.scenarios.names[best.peak_scenario]} to {best.peak_a:.1f} A."
        )

    def _moves(self) -> Iterator[_Move]:
        cases = list(self.moment.currents.cases(self.moment.arrangement))
        for unit in build_units(self.installation, self.options):
            for change in self._changes(unit):
                neutral_a = _worst_neutral(cases, self._phasors(unit) @ change)
                peak = int(np.argmax(neutral_a))
                here_a = float(neutral_a[self.moment.scenario])
                yield _Move(_words(unit, change), here_a, float(neutral_a[peak]), peak)

    def _phasors(self, unit: Unit, scenarios: slice = slice(None)) -> ComplexArray:
        """Line-to-neutral phasors [A] of a unit's circuits, (scenarios, circuits of the unit)."""
        columns = [self.column[circuit.label] for circuit in unit.circuits]
        turns = np.array([circuit.load.neutral_pf.unit_phasor for circuit in unit.circuits])
        return np.asarray(self.moment.currents.scenarios.neutral_a[scenarios, columns] * turns)

    def _changes(self, unit: Unit) -> list[FloatArray]:
        """How the signs of a unit's circuits (+1 on leg A) may change, the null change left out."""
        arrangement = self.moment.arrangement
        if not all(arrangement.get(circuit.label) for circuit in unit.circuits):
            return []
        now = self._signs(unit, arrangement)
        patterns = dict.fromkeys(self._signs(unit, dict(placement.landings)) for placement in unit.placements)
        return [np.subtract(pattern, now) for pattern in patterns if pattern != now]

    def _signs(self, unit: Unit, arrangement: Arrangement) -> tuple[float, ...]:
        legs = (neutral_leg(self.installation.panel, c, arrangement[c.label]) for c in unit.circuits)
        return tuple(0.0 if leg is None else 1.0 if leg is Leg.A else -1.0 for leg in legs)

    def _any_split(self) -> tuple[HeldBy, str]:
        count = len(self.moment.running)
        lowest_a = self._lowest_split_a()
        if lowest_a is None:
            return HeldBy.NO_CLOSER_SPLIT, f"No single move of the {count} loads running then comes closer."
        if lowest_a >= self.neutral_a - _TELLING_A:
            return HeldBy.NO_CLOSER_SPLIT, f"No split of the {count} loads running then comes closer."
        return HeldBy.SEVERAL_MOVES, (
            f"No single move lowers it. Another split of the {count} loads running then would leave {lowest_a:.1f} A"
            " here, but other scenarios, the free places or the landings allowed stand against it."
        )

    def _lowest_split_a(self) -> float | None:
        """Lowest neutral [A] in the governing scenario over all splits; None where they are too many to try."""
        row = slice(self.moment.scenario, self.moment.scenario + 1)
        sums = np.zeros(1, dtype=complex)
        for unit in build_units(self.installation, self.options):
            effects = [complex((self._phasors(unit, row) @ change)[0]) for change in self._changes(unit)]
            options = list(dict.fromkeys([0j, *effects]))
            if len(sums) * len(options) > _SPLITS_TRIED:
                return None
            sums = np.concatenate([sums + option for option in options])
        cases = list(self.moment.currents.cases(self.moment.arrangement))
        here = self.moment.scenario
        worst = np.zeros(len(sums))
        for case in cases:
            worst = np.maximum(worst, np.abs(case.neutral_phasor_a[here] + case.factors.neutral_difference * sums))
        return float(worst.min())


def _worst_neutral(cases: Sequence[Case], change: ComplexArray) -> FloatArray:
    """Neutral [A] in every scenario after D changed by some phasors, the worst of what is not known."""
    neutrals = [np.abs(case.neutral_phasor_a + case.factors.neutral_difference * change) for case in cases]
    return np.asarray(np.max(neutrals, axis=0))


def _name(circuit: Circuit) -> str:
    return f"{circuit.label} ({circuit.description})" if circuit.description else circuit.label


def _words(unit: Unit, change: FloatArray) -> str:
    names = " and ".join(_name(circuit) for circuit, turn in zip(unit.circuits, change, strict=True) if turn)
    if change.min() < 0 < change.max():
        return f"Turning {names} over"
    return f"Moving {names} to the other leg"
