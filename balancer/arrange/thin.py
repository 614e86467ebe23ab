"""Which of very many scenarios can matter: the others cannot set a peak, whatever the arrangement.

In a row the neutral stays within what is fixed plus what every free unit can add, and no leg can be lighter at its
heaviest than half the sum of both. A row whose highest possible value is at or below what the peak is going to be
cannot set it. Rows are looked at in blocks, so that a year of minutes needs no large arrays.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balancer.arrange.choices import Answer
from balancer.arrange.legs import FloatMatrix, LegProblem, Rows, build_leg_problem
from balancer.arrange.placements import Unit
from balancer.electrical.scenarios import Scenarios
from balancer.panel import Installation, SupplySystem

FEW = 500
"""Up to here every scenario is kept: leaving rows out would save nothing."""

_BLOCK = 65_536
_MEAN_WORK = 1e9
_FIRST = 2000
"""Rows of the highest reach, on which a first good arrangement is sought."""


@dataclass(frozen=True, eq=False)
class Reaches:
    """Highest possible value [A] of each quantity in every scenario, over all leg answers; arrays (scenarios,).

    `least_heavy_a` is what the heavy leg reaches at least, in any arrangement: half the sum of both legs.
    """

    neutral: FloatMatrix
    imbalance: FloatMatrix
    heavy_leg: FloatMatrix
    least_heavy_a: float

    def matter(self, above_a: float) -> NDArray[np.intp]:
        """Scenarios whose neutral or imbalance can be above a level, or that can set the heavy leg's peak."""
        is_above = (self.neutral > above_a) | (self.imbalance > above_a)
        return np.flatnonzero(is_above | (self.heavy_leg > self.least_heavy_a))

    def heaviest(self) -> NDArray[np.intp]:
        """Scenarios of the highest reach, in order of time."""
        count = min(_FIRST, len(self.neutral))
        return np.sort(np.argpartition(-self.neutral, count - 1)[:count])


def blocks(installation: Installation, scenarios: Scenarios, units: tuple[Unit, ...]) -> Iterator[LegProblem]:
    """Give the leg problem of block after block of scenarios."""
    for start in range(0, len(scenarios), _BLOCK):
        yield build_leg_problem(installation, scenarios.part(slice(start, start + _BLOCK)), units)


def reaches(installation: Installation, scenarios: Scenarios, units: tuple[Unit, ...]) -> Reaches:
    """Find the highest possible value of each quantity in every scenario."""
    # Half a turn apart the neutral carries the legs' difference, and no projection of that is larger.
    is_split = installation.panel.supply.system is SupplySystem.SPLIT
    neutral, imbalance, heavy, least = [], [], [], 0.0
    for problem in blocks(installation, scenarios, units):
        cases = len(problem.cases)
        neutral.append(_highest(problem, problem.neutral, cases))
        imbalance.append(neutral[-1] if is_split else _highest(problem, problem.imbalance, cases))
        heavy.append(_highest(problem, problem.heavy_leg, 2 * cases))
        least = max(least, max(float(np.abs(case.total).max(initial=0.0)) for case in problem.cases) / 2.0)
    return Reaches(np.concatenate(neutral), np.concatenate(imbalance), np.concatenate(heavy), least)


def _highest(problem: LegProblem, rows: Rows, copies: int) -> FloatMatrix:
    """Middle plus half of every unit's span, the worst of the copies that a scenario has among the rows."""
    middle = rows.offset.copy()
    span = np.zeros(len(middle))
    for group in problem.groups:
        # With one choice the middle is half of it; with more, half-way to their mean is near enough.
        centre = rows.effects[:, list(group)].mean(axis=1) / 2.0
        middle += centre
        reach = np.abs(rows.effects[:, list(group)] - centre[:, None]).max(axis=1)
        span += np.maximum(reach, np.abs(centre))
    return np.asarray((np.abs(middle) + span).reshape(copies, -1).max(axis=0))


@dataclass(eq=False)
class Thinned:
    """Very many scenarios, and those of them that are weighed: all whose neutral or imbalance can be above `cut_a`."""

    installation: Installation
    scenarios: Scenarios
    units: tuple[Unit, ...]
    cut_a: float = 0.0

    def __post_init__(self) -> None:
        self._reaches = reaches(self.installation, self.scenarios, self.units)

    def heaviest(self) -> Scenarios:
        """Scenarios of the highest reach, to find a first good arrangement on."""
        return self.scenarios.subset(self._reaches.heaviest().tolist())

    def weighed(self) -> Scenarios:
        """Scenarios that can matter while no objective falls below the cut."""
        return self.scenarios.subset(self._reaches.matter(self.cut_a).tolist())

    @property
    def most_means(self) -> int:
        """Answers whose mean neutral over all scenarios can be worked out in a second or two."""
        size = len(self.scenarios) * max(1, len(self.units))
        return max(1, int(_MEAN_WORK / size))

    def mean_neutrals(self, answers: Sequence[Answer]) -> list[float]:
        """Mean neutral [A] of several answers over all scenarios, each by its worst case."""
        taken = np.array(answers, dtype=float).T
        total = np.zeros(len(answers))
        for problem in blocks(self.installation, self.scenarios, self.units):
            rows = problem.neutral
            values = np.abs(rows.effects @ taken + rows.offset[:, None])
            total += values.reshape(len(problem.cases), -1, len(answers)).max(axis=0).sum(axis=0)
        return [float(mean) for mean in total / len(self.scenarios)]
