"""The objectives one after the other: each is closed as far as it can be, then held while the next is lowered."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from balancer.arrange.clock import Clock
from balancer.arrange.incumbent import Heuristic
from balancer.arrange.leg_model import LegModel
from balancer.arrange.legs import Answer, Counter, LegProblem, Rows, mirror_choice
from balancer.arrange.placements import EFFORT_SCALE
from balancer.arrange.results import ObjectiveName, ObjectiveResult, Progress, ProgressListener
from balancer.arrange.search import STEP_A, Budget, Cap, Found, LegSearch
from balancer.arrange.seating import Seater, Seating
from balancer.arrange.solve import SolveStatus

SCENARIO_TOLERANCE_A = 0.05
READINGS_TOLERANCE_A = 0.01

_ROUNDS = ((1e11, 4.0), (4e11, 15.0), (2e12, 60.0))
"""Search and solver take turns, at first with a few seconds each: which of them is quick differs from panel to panel.

Work of the search in column additions, of one decision by the solver in its deterministic seconds.
"""

_SEARCH_WORK = 4e10

_SEAT_CHECK_WORK = 1e8
"""What one exact seat assignment takes from a search's budget."""

_EFFORT_WORK_S = 30.0
_MOST_SURVIVORS = 20_000
_FIRST_STEP = 4
"""First step below the best answer, in tolerances; doubled on success."""

_LEAP_WORK_S = 2.0
"""Work on a step wider than the tolerance: one that finds or refutes nothing soon gives way to the step that counts."""

_ROUNDING_A = 1e-9


@dataclass
class Stages:
    """The state between objectives: the best answer, and what it must keep.

    `answer` always has seats and keeps every cap and counter.
    """

    problem: LegProblem
    seater: Seater
    clock: Clock
    tolerance_a: float
    answer: Answer
    caps: list[Cap] = field(default_factory=list)
    counters: list[Counter] = field(default_factory=list)
    listener: ProgressListener | None = None

    def seating(self, answer: Answer) -> Seating | None:
        """Seats of an answer, the least effort first; None where it has none."""
        return self.seater.least_effort(self.problem.signs(answer))

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
        rows = self.problem.rows(name)
        if rows.is_constant:
            value = rows.peak(self.answer)
            return ObjectiveResult(name=name, value=value, bound=value, is_proven=True, proved_by="arithmetic")
        task = _PeakTask(self, rows)
        task.begin()
        bound, proved_by = 0.0, ""
        for search_work, decision_work_s in _ROUNDS:
            bound, proved_by = task.search(search_work)
            if not proved_by and not self.clock.is_stopped:
                bound, proved_by = task.decide(decision_work_s)
            if self.clock.is_stopped or task.value - bound <= self.tolerance_a + _ROUNDING_A:
                break
        self.answer = task.answer
        is_proven = task.value - bound <= self.tolerance_a + _ROUNDING_A
        return ObjectiveResult(
            name=name, value=task.value, bound=bound, is_proven=is_proven, proved_by=proved_by if is_proven else ""
        )

    def hold(self, name: ObjectiveName, limit_a: float) -> None:
        """Keep the peak of a quantity at or below a limit [A] from now on."""
        self.caps.append(Cap(self.problem.rows(name), limit_a))

    def report(self, name: ObjectiveName, best: float, bound: float) -> None:
        """Tell the listener the news."""
        if self.listener is not None:
            self.listener(Progress(name, best, bound))

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
        is_exhaustive = self.is_exhaustive(found)
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

    def is_exhaustive(self, found: Found) -> bool:
        """Whether a search has looked at every answer, and every one that it passed over has no seats for certain."""
        return found.is_complete and not self.seater.has_given_up

    def _take(self, found: Found) -> None:
        if found.answer is not None:
            self.answer = found.answer

    def _true_effort(self, answer: Answer, budget: Budget) -> float | None:
        budget.work -= _SEAT_CHECK_WORK
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

    def new_model(self) -> LegModel:
        """Give a solver model under everything that is held."""
        model = LegModel(self.problem, self.counters, self.clock)
        for cap in self.caps:
            if not cap.rows.is_constant:
                model.limit(cap.rows, cap.limit_a)
        return model

    def keeps_everything(self, answer: Answer) -> bool:
        """Whether an answer keeps every cap and counter, recomputed."""
        return all(counter.value(answer) <= counter.cap for counter in self.counters) and all(
            cap.rows.peak(answer) <= cap.limit_a + _ROUNDING_A for cap in self.caps
        )

    def close_mean(self) -> ObjectiveResult:
        """Lowest mean neutral among what is left, then the canonical order among equals."""
        effort = self.effort
        search = LegSearch(self.problem, self.caps, self.counters, self._budget(), lambda answer: 0.0)
        survivors = search.survivors(_MOST_SURVIVORS)
        value = self.problem.mean_neutral(self.answer)
        if survivors is None:
            bound = _least_mean(self.problem)
            return ObjectiveResult(
                name=ObjectiveName.MEAN_NEUTRAL, value=value, bound=min(bound, value), is_proven=False, proved_by=""
            )
        ranked = sorted(survivors, key=lambda a: (round(self.problem.mean_neutral(a), 7), tuple(a.tolist())))
        for answer in ranked:
            seating = self.seating(answer)
            if seating is not None and seating.effort <= effort:
                self.answer = answer
                break
        value = self.problem.mean_neutral(self.answer)
        return ObjectiveResult(
            name=ObjectiveName.MEAN_NEUTRAL,
            value=value,
            bound=value,
            is_proven=not self.clock.is_stopped,
            proved_by="search",
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


@dataclass
class _PeakTask:
    """Closing one peak: first answers, then the search, then decisions by the solver."""

    stages: Stages
    rows: Rows
    answer: Answer = field(init=False)
    value: float = field(init=False)

    def __post_init__(self) -> None:
        self.answer = self.stages.answer
        self.value = self.rows.peak(self.answer)

    def begin(self) -> None:
        """Improve on the present answer by descent and annealing."""
        stages = self.stages
        # Seated before annealing takes its time: once the clock has stopped, no answer finds seats any more.
        self._improve([self.answer])
        heuristic = self._heuristic()
        for answer in heuristic.first_answers(stages.clock):
            value = self.rows.peak(answer)
            if value > self.value - STEP_A:
                break
            if self._seated(answer):
                self.answer, self.value = answer, value
                break
        stages.report(self.rows.name, self.value, 0.0)

    def _heuristic(self) -> Heuristic:
        return Heuristic(self.stages.problem, self.rows, self.stages.caps, self.stages.counters)

    def _seated(self, answer: Answer) -> bool:
        return self.stages.seating(answer) is not None

    def search(self, work: float) -> tuple[float, str]:
        """Search exactly within a budget; gives the bound and what proved it."""
        budget = Budget(work, lambda: self.stages.clock.is_stopped)

        def accept(answer: Answer) -> float | None:
            budget.work -= _SEAT_CHECK_WORK
            return self.rows.peak(answer) if self._seated(answer) else None

        search = LegSearch(self.stages.problem, self.stages.caps, self.stages.counters, budget, accept)
        found = search.minimise_peak(self.rows, self.answer, self.value)
        if found.answer is not None:
            self.answer, self.value = found.answer, found.value
        self.stages.report(self.rows.name, self.value, 0.0)
        return (max(0.0, self.value - search.step_a), "search") if self.stages.is_exhaustive(found) else (0.0, "")

    def decide(self, work_s: float) -> tuple[float, str]:
        """Ask the solver whether anything is below a level, and close in from both sides."""
        tolerance = self.stages.tolerance_a
        bound, step, with_seats = 0.0, _FIRST_STEP * tolerance, False
        while self.value - bound > tolerance + _ROUNDING_A and not self.stages.clock.is_stopped:
            step = max(tolerance, min(step, (self.value - bound) / 2.0))
            level = self.value - step
            is_leap = step > tolerance + _ROUNDING_A
            decision = self._below(level, with_seats, _LEAP_WORK_S if is_leap else work_s)
            if decision is None:
                if not is_leap:
                    break
                step = tolerance
            elif len(decision) == 0:
                bound, step = max(bound, level), tolerance
            elif self._improve(decision):
                step *= 2.0
            elif with_seats:
                break
            else:
                with_seats = True
            self.stages.report(self.rows.name, self.value, bound)
        return bound, "solver"

    def _below(self, level: float, with_seats: bool, work_s: float) -> list[Answer] | None:
        """Answers at or below a level: none is proof that there are none; None says that the solver gave up."""
        stages = self.stages
        model = stages.new_model()
        model.limit(self.rows, level)
        pinned = None
        if with_seats:
            model.seat(stages.seater.max_landings)
        else:
            held = [cap.rows for cap in stages.caps if not cap.rows.is_constant]
            pinned = mirror_choice(stages.problem, [self.rows, *held], stages.counters)
        if pinned is not None:
            model.pin_mirror(pinned)
        decision = model.decide(work_s)
        if decision.status is SolveStatus.INFEASIBLE:
            return []
        if decision.answer is None:
            return None
        return [decision.answer] if pinned is None else [decision.answer, 1 - decision.answer]

    def _improve(self, answers: Sequence[Answer]) -> bool:
        """Take the best seatable of some answers and what descends from them."""
        heuristic = self._heuristic()
        for candidate in [*(heuristic.improved(answer) for answer in answers), *answers]:
            value = self.rows.peak(candidate)
            if value < self.value - STEP_A and self.stages.keeps_everything(candidate) and self._seated(candidate):
                self.answer, self.value = candidate, value
                return True
        return False
