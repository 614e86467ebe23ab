"""The objectives one after the other: each is closed as far as it can be, then held while the next is lowered."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from balancer.arrange.choices import Answer, Counter
from balancer.arrange.legs import LegProblem
from balancer.arrange.peaks import SEAT_CHECK_WORK, close_peak
from balancer.arrange.placements import EFFORT_SCALE
from balancer.arrange.results import ObjectiveName, ObjectiveResult
from balancer.arrange.search import Budget, Cap, Found, LegSearch
from balancer.arrange.seating import Seating
from balancer.arrange.solve import SolveStatus
from balancer.arrange.state import State
from balancer.arrange.thin import Thinned

SCENARIO_TOLERANCE_A = 0.05
READINGS_TOLERANCE_A = 0.01

_SEARCH_WORK = 4e10

_EFFORT_WORK_S = 30.0
_MOST_SURVIVORS = 20_000
_ROUNDING_A = 1e-9


@dataclass
class Stages(State):
    """Closes the objectives, each under what the earlier ones hold.

    `thinned` has the scenarios that a mean is over, where the problem holds only some of them.
    """

    thinned: Thinned | None = None

    def _mean_neutrals(self, answers: Sequence[Answer]) -> list[float]:
        if self.thinned is not None:
            return self.thinned.mean_neutrals(answers)
        return [self.problem.mean_neutral(answer) for answer in answers]

    @property
    def effort(self) -> int:
        """Effort of the best answer's seats, in thousandths of a landing."""
        return self._best_seating.effort

    @property
    def _best_seating(self) -> Seating:
        seating = self.seating(self.answer)
        assert seating is not None, "the best answer always has seats"
        return seating

    def close_peak(self, name: ObjectiveName) -> ObjectiveResult:
        """Lower the peak of a quantity as far as possible and prove how far that is."""
        return close_peak(self, name)

    def hold(self, name: ObjectiveName, limit_a: float) -> None:
        """Keep the peak of a quantity at or below a limit [A] from now on."""
        self.caps.append(Cap(self.problem.rows(name), limit_a))

    def close_effort(self) -> ObjectiveResult:
        """Lower the effort of re-landing as far as possible."""
        start = self.effort
        self.report(ObjectiveName.EFFORT, start / EFFORT_SCALE, 0.0)
        budget = self._budget()
        search = LegSearch(
            self.problem, self.caps, self.counters, budget, lambda answer: self._true_effort(answer, budget)
        )
        found = search.minimise_count(self.problem.effort, self.answer, start)
        self._take(found)
        is_exhaustive = self.is_exhaustive(found) and not self.seater.has_settled_for_more
        value, bound, proved_by = self.effort, self.effort if is_exhaustive else 0, "search"
        if not is_exhaustive and not self.clock.is_stopped:
            bound, proved_by = self._solve_effort(), "solver"
            value = self.effort
        is_proven = bound >= value
        self.counters.append(_capped(self.problem.effort, value))
        # What spares cost only decides among equals: it is no landing.
        spares = self._best_seating.spares_effort
        return ObjectiveResult(
            name=ObjectiveName.EFFORT,
            value=(value - spares) / EFFORT_SCALE,
            bound=max(0, min(value, bound) - spares) / EFFORT_SCALE,
            is_proven=is_proven,
            proved_by=proved_by if is_proven else "",
        )

    def _budget(self) -> Budget:
        return Budget(_SEARCH_WORK, lambda: self.clock.is_stopped)

    def _take(self, found: Found) -> None:
        if found.answer is not None:
            self.answer = found.answer

    def _true_effort(self, answer: Answer, budget: Budget) -> float | None:
        budget.work -= SEAT_CHECK_WORK
        seating = self.seating(answer)
        return None if seating is None else float(seating.effort)

    def _solve_effort(self) -> int:
        """Least effort by the solver, seats and legs in one model; gives the proven bound."""
        model = self.new_model()
        model.seat(self.seater.max_landings)
        model.cap_effort(self.effort)
        decision = model.minimise_effort(_EFFORT_WORK_S, self.answer)
        if decision.answer is not None and self.keeps_everything(decision.answer):
            seating = self.seating(decision.answer)
            if seating is not None and seating.effort <= self.effort:
                self.answer = decision.answer
        if decision.status is SolveStatus.INFEASIBLE:
            return self.effort
        return math.ceil(decision.bound - 1e-6) if math.isfinite(decision.bound) else 0

    def close_mean(self) -> ObjectiveResult:
        """Lowest mean neutral among what is left, then the canonical order among equals."""
        effort = self.effort
        search = LegSearch(self.problem, self.caps, self.counters, self._budget(), lambda answer: 0.0)
        most = _MOST_SURVIVORS if self.thinned is None else min(_MOST_SURVIVORS, self.thinned.most_means)
        survivors = search.survivors(most)
        if survivors is None:
            (value,) = self._mean_neutrals([self.answer])
            least = _least_mean(self.problem) if self.thinned is None else 0.0
            return _mean_result(value, min(value, least), is_proven=False)
        means = self._mean_neutrals(survivors)
        # Means that differ by less are one and the same: then the order of the choices decides.
        ranked = sorted(
            zip(means, survivors, strict=True), key=lambda pair: (round(pair[0], 7), tuple(pair[1].tolist()))
        )
        for _, answer in ranked:
            seating = self.seating(answer)
            if seating is not None and seating.effort <= effort:
                self.answer = answer
                break
        (value,) = self._mean_neutrals([self.answer])
        seater = self.seater
        is_proven = not (self.clock.is_stopped or seater.has_given_up or seater.has_settled_for_more)
        return _mean_result(value, value if is_proven else min(value, *means), is_proven=is_proven)


def _mean_result(value: float, bound: float, *, is_proven: bool) -> ObjectiveResult:
    proved_by = "search" if is_proven else ""
    return ObjectiveResult(
        name=ObjectiveName.MEAN_NEUTRAL, value=value, bound=bound, is_proven=is_proven, proved_by=proved_by
    )


def _capped(counter: Counter, cap: int) -> Counter:
    return Counter(counter.base, counter.costs, cap, counter.name)


def _least_mean(problem: LegProblem) -> float:
    """Mean over the rows of what no answer can take away: a weak bound, but an honest one."""
    rows = problem.neutral
    low = np.zeros(len(rows.offset), dtype=complex)
    half = np.zeros(len(rows.offset))
    for group in problem.groups:
        effects = np.concatenate([np.zeros((len(rows.offset), 1)), rows.effects[:, list(group)]], axis=1)
        middle = effects.mean(axis=1)
        low += middle
        half += np.abs(effects - middle[:, None]).max(axis=1)
    least = np.maximum(np.abs(rows.offset + low) - half, 0.0).reshape(len(problem.cases), -1)
    return float(least.max(axis=0).mean())
