"""The leg problem: which leg every unit is on, as plain arrays.

Neutral, imbalance and heavy leg depend on legs only. Every free unit has a reference pattern (the one as found, where
it is landed) and a *choice* for every other pattern of signs that one of its placements gives. A leg answer is a 0/1
vector over the choices with at most one choice a unit. In every row (a scenario in one combination of what is not
known) a quantity is the magnitude of ``offset + effects @ answer``.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from balancer.arrange.choices import Answer, Choice, Counter, cost_counter, patterns, seat_counters
from balancer.arrange.placements import Unit
from balancer.arrange.results import ObjectiveName
from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenarios import Scenarios
from balancer.panel import Installation, SupplySystem

FloatMatrix = NDArray[np.float64]
ComplexMatrix = NDArray[np.complex128]

_NO_CURRENT_A = 1e-9


@dataclass(frozen=True, eq=False)
class Rows:
    """One quantity in every row: magnitude of ``offset + effects @ answer`` [A].

    `offset` has shape (rows,), `effects` (rows, choices); both are complex, or real where the quantity is a projection.
    """

    name: ObjectiveName
    offset: ComplexMatrix
    effects: ComplexMatrix
    is_real: bool

    def values(self, answer: Answer) -> FloatMatrix:
        """Magnitude [A] in every row."""
        return np.asarray(np.abs(self.offset + self.effects @ answer.astype(float)))

    def peak(self, answer: Answer) -> float:
        """Highest magnitude [A] over all rows."""
        return float(self.values(answer).max(initial=0.0))

    @property
    def is_constant(self) -> bool:
        """Whether no choice changes it."""
        return not np.abs(self.effects).max(initial=0.0) > _NO_CURRENT_A


@dataclass(frozen=True, eq=False)
class LegProblem:
    """Units, choices and rows of one installation under one set of scenarios."""

    installation: Installation
    units: tuple[Unit, ...]
    choices: tuple[Choice, ...]
    cases: tuple[_CaseRows, ...]
    counters: tuple[Counter, ...]
    effort: Counter
    """Lower bound of a leg answer's effort, in thousandths of a landing; its cap means nothing."""
    landings: Counter
    """Lower bound of a leg answer's landings changed; its cap means nothing."""

    @cached_property
    def groups(self) -> tuple[tuple[int, ...], ...]:
        """Choices of every free unit, by index, in the units' order."""
        grouped: dict[int, list[int]] = {}
        for index, choice in enumerate(self.choices):
            grouped.setdefault(choice.unit, []).append(index)
        return tuple(tuple(group) for group in grouped.values())

    @cached_property
    def neutral(self) -> Rows:
        """The neutral current."""
        parts = [
            (
                case.neutral_sum * case.total + case.neutral_difference * case.difference,
                case.neutral_difference * case.effects,
            )
            for case in self.cases
        ]
        return _stacked(ObjectiveName.NEUTRAL, parts, is_real=False)

    @cached_property
    def heavy_leg(self) -> Rows:
        """Both legs, one below the other."""
        parts = [
            ((case.total + sign * case.difference) / 2.0, sign * case.effects / 2.0)
            for case in self.cases
            for sign in (1.0, -1.0)
        ]
        return _stacked(ObjectiveName.HEAVY_LEG, parts, is_real=False)

    @cached_property
    def imbalance(self) -> Rows:
        """The legs' difference, projected on the direction of their sum: an upper bound of the true difference."""
        parts = []
        for case in self.cases:
            magnitude = np.abs(case.total)
            # Where nothing runs there is no direction, and no imbalance.
            direction = np.conj(case.total / np.where(magnitude > _NO_CURRENT_A, magnitude, np.inf))
            offset = (case.difference * direction).real
            effects = (case.effects * direction[:, None]).real
            parts.append((offset.astype(complex), effects.astype(complex)))
        return _stacked(ObjectiveName.IMBALANCE, parts, is_real=True)

    @cached_property
    def does_imbalance_repeat_neutral(self) -> bool:
        """Whether equal power factors make the projected imbalance and the neutral the same number."""
        if self.installation.panel.supply.system is not SupplySystem.SPLIT:
            return False
        for case in self.cases:
            total = np.conj(case.total)
            across = np.abs((case.difference * total).imag).max(initial=0.0)
            across = max(across, np.abs((case.effects * total[:, None]).imag).max(initial=0.0))
            if across > _NO_CURRENT_A * max(1.0, float(np.abs(total).max(initial=0.0))):
                return False
            # Where export cancels the sum, the neutral has no direction to be projected on.
            most = np.abs(case.difference) + np.abs(case.effects).max(axis=1, initial=0.0)
            if np.any((np.abs(total) <= _NO_CURRENT_A) & (most > _NO_CURRENT_A)):
                return False
        return True

    def rows(self, name: ObjectiveName) -> Rows:
        """Give the rows of an amps objective by its name."""
        by_name = {
            ObjectiveName.NEUTRAL: self.neutral,
            ObjectiveName.HEAVY_LEG: self.heavy_leg,
            ObjectiveName.IMBALANCE: self.imbalance,
        }
        return by_name[name]

    def mean_neutral(self, answer: Answer) -> float:
        """Mean neutral [A] over the scenarios, each by its worst case, intervals weighted equally."""
        values = self.neutral.values(answer).reshape(len(self.cases), -1)
        return float(values.max(axis=0).mean())

    def signs(self, answer: Answer) -> tuple[tuple[int, ...], ...]:
        """Sign pattern of every unit under an answer."""
        chosen = {choice.unit: choice.signs for choice, taken in zip(self.choices, answer, strict=True) if taken}
        return tuple(chosen.get(index, patterns(unit)[0]) for index, unit in enumerate(self.units))

    def answer_of(self, signs: Sequence[tuple[int, ...]]) -> Answer:
        """Answer that gives every unit a pattern of signs."""
        return np.array([signs[choice.unit] == choice.signs for choice in self.choices], dtype=np.int8)


@dataclass(frozen=True, eq=False)
class _CaseRows:
    neutral_sum: complex
    neutral_difference: complex
    total: ComplexMatrix
    difference: ComplexMatrix
    effects: ComplexMatrix


def _stacked(name: ObjectiveName, parts: list[tuple[ComplexMatrix, ComplexMatrix]], *, is_real: bool) -> Rows:
    offset = np.concatenate([part[0] for part in parts])
    effects = np.concatenate([part[1] for part in parts])
    return Rows(name, offset, effects, is_real)


def build_leg_problem(installation: Installation, scenarios: Scenarios, units: tuple[Unit, ...]) -> LegProblem:
    """Set up the leg problem of units that each have at least one placement."""
    currents = PanelCurrents(installation, scenarios)
    columns = {circuit.label: index for index, circuit in enumerate(installation.circuits)}
    phasors = currents.neutral_phasors()
    choices = tuple(Choice(index, signs) for index, unit in enumerate(units) for signs in patterns(unit)[1:])
    effects = np.zeros((len(scenarios), len(choices)), dtype=complex)
    for position, choice in enumerate(choices):
        unit = units[choice.unit]
        reference = patterns(unit)[0]
        for circuit, new, old in zip(unit.circuits, choice.signs, reference, strict=True):
            effects[:, position] += (new - old) * phasors[:, columns[circuit.label]]
    reference_arrangement = {label: landing for unit in units for label, landing in unit.placements[0].landings}
    cases = tuple(
        _CaseRows(
            case.factors.neutral_sum,
            case.factors.neutral_difference,
            np.asarray(case.sum_phasor_a, dtype=complex),
            np.asarray(case.difference_phasor_a, dtype=complex),
            effects,
        )
        for case in currents.cases(reference_arrangement)
    )
    return LegProblem(
        installation,
        units,
        choices,
        cases,
        seat_counters(installation.panel, units, choices),
        cost_counter(units, choices, "effort"),
        cost_counter(units, choices, "landings_changed"),
    )


def mirror_choice(problem: LegProblem, rows: Sequence[Rows], counters: Sequence[Counter]) -> int | None:
    """Choice that may be pinned because exchanging the legs changes no row and no counter; None where something does.

    Exchanging the legs turns every answer into its complement. That leaves a row's magnitude alone where the row's
    middle (all units half on each leg) is zero, and the counters where each has its mirror image among them.
    """
    if not problem.choices or any(len(group) > 1 for group in problem.groups):
        return None
    for each in rows:
        middle = each.offset + each.effects.sum(axis=1) / 2.0
        if each.name is not ObjectiveName.HEAVY_LEG and np.abs(middle).max(initial=0.0) > _NO_CURRENT_A:
            return None
    if any(
        np.abs(case.difference + case.effects.sum(axis=1) / 2.0).max(initial=0.0) > _NO_CURRENT_A
        for case in problem.cases
    ):
        return None
    known = {(counter.base, counter.cap, tuple(counter.costs.tolist())) for counter in counters}
    mirrored = {(base + sum(costs), cap, tuple(-cost for cost in costs)) for base, cap, costs in known}
    if known != mirrored:
        return None
    weight = np.sum([np.abs(each.effects).sum(axis=0) for each in rows], axis=0)
    return int(np.argmax(weight))
