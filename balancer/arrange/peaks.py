"""Closing the peak of a quantity: first answers, exact search and decisions by the solver, until the gap is small."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

from balancer.arrange.choices import Answer
from balancer.arrange.incumbent import Heuristic
from balancer.arrange.legs import Rows, mirror_choice
from balancer.arrange.results import ObjectiveName, ObjectiveResult
from balancer.arrange.search import STEP_A, Budget, LegSearch
from balancer.arrange.solve import SolveStatus
from balancer.arrange.state import State
from balancer.arrange.subset_sums import least_peak

_ROUNDS = ((1e11, 4.0), (4e11, 15.0), (2e12, 60.0))
"""Search and solver take turns, at first with a few seconds each: which of them is quick differs from panel to panel.

Work of the search in column additions, of one decision by the solver in its deterministic seconds.
"""

SEAT_CHECK_WORK = 1e8
"""What one exact seat assignment takes from a search's budget."""

_FIRST_STEP = 4
"""First step below the best answer, in tolerances; doubled on success."""

_LEAP_WORK_S = 2.0
"""Work on a step wider than the tolerance: one that finds or refutes nothing soon gives way to the step that counts."""

_ROUNDING_A = 1e-9


def close_peak(state: State, name: ObjectiveName) -> ObjectiveResult:
    """Lower the peak of a quantity as far as possible and prove how far that is."""
    rows = state.problem.rows(name)
    if rows.is_constant:
        value = rows.peak(state.answer)
        return ObjectiveResult(name=name, value=value, bound=value, is_proven=True, proved_by="arithmetic")
    task = _PeakTask(state, rows)
    task.begin()
    for search_work, decision_work_s in _ROUNDS:
        if state.clock.is_stopped or task.is_exact:
            break
        task.search(search_work)
        task.decide(decision_work_s)
        if task.is_closed:
            break
    state.answer = task.answer
    return ObjectiveResult(
        name=name,
        value=task.value,
        bound=task.bound,
        is_proven=task.is_closed,
        proved_by=task.proved_by if task.is_closed else "",
    )


@dataclass
class _PeakTask:
    """Closing one peak: first answers, then the search, then decisions by the solver."""

    state: State
    rows: Rows
    answer: Answer = field(init=False)
    value: float = field(init=False)
    bound: float = field(default=0.0, init=False)
    proved_by: str = field(default="arithmetic", init=False)
    """What gives the bound; no magnitude is below zero."""

    def __post_init__(self) -> None:
        self.answer = self.state.answer
        self.value = self.rows.peak(self.answer)

    @property
    def is_closed(self) -> bool:
        """Whether the value is within the tolerance of the bound."""
        return self.value - self.bound <= self.state.tolerance_a + _ROUNDING_A

    @property
    def is_exact(self) -> bool:
        """Whether nothing better by more than a search's step can exist."""
        return self.value - self.bound <= STEP_A

    def _prove(self, bound: float, proved_by: str) -> None:
        if bound > self.bound:
            self.bound, self.proved_by = bound, proved_by

    def begin(self) -> None:
        """Improve on the present answer by descent and annealing."""
        state = self.state
        # Seated before annealing takes its time: once the clock has stopped, no answer finds seats any more.
        self._improve([self.answer])
        heuristic = self._heuristic()
        for answer in heuristic.first_answers(state.clock):
            value = self.rows.peak(answer)
            if value > self.value - STEP_A:
                break
            if self._seated(answer):
                self.answer, self.value = answer, value
                break
        self._prove(least_peak(state.problem, self.rows), "arithmetic")
        state.report(self.rows.name, self.value, 0.0)

    def _heuristic(self) -> Heuristic:
        return Heuristic(self.state.problem, self.rows, self.state.caps, self.state.counters)

    def _seated(self, answer: Answer) -> bool:
        return self.state.seating(answer) is not None

    def search(self, work: float) -> None:
        """Search exactly within a budget."""
        budget = Budget(work, lambda: self.state.clock.is_stopped)

        def accept(answer: Answer) -> float | None:
            budget.work -= SEAT_CHECK_WORK
            return self.rows.peak(answer) if self._seated(answer) else None

        search = LegSearch(self.state.problem, self.state.caps, self.state.counters, budget, accept)
        found = search.minimise_peak(self.rows, self.answer, self.value)
        if found.answer is not None:
            self.answer, self.value = found.answer, found.value
        if self.state.is_exhaustive(found):
            self._prove(self.value - search.step_a, "search")
        self.state.report(self.rows.name, self.value, self.bound)

    def decide(self, work_s: float) -> None:
        """Ask the solver whether anything is below a level, and close in from both sides."""
        tolerance = self.state.tolerance_a
        step, with_seats = _FIRST_STEP * tolerance, False
        while not self.is_closed and not self.state.clock.is_stopped:
            step = max(tolerance, min(step, (self.value - self.bound) / 2.0))
            level = self.value - step
            is_leap = step > tolerance + _ROUNDING_A
            decision = self._below(level, with_seats, _LEAP_WORK_S if is_leap else work_s)
            if decision is None:
                if not is_leap:
                    break
                step = tolerance
            elif len(decision) == 0:
                self._prove(level, "solver")
                step = tolerance
            elif self._improve(decision):
                step *= 2.0
            elif with_seats:
                break
            else:
                with_seats = True
            self.state.report(self.rows.name, self.value, self.bound)

    def _below(self, level: float, with_seats: bool, work_s: float) -> list[Answer] | None:
        """Answers at or below a level: none is proof that there are none; None says that the solver gave up."""
        state = self.state
        model = state.new_model()
        model.limit(self.rows, level)
        pinned = None
        if with_seats:
            model.seat(state.seater.max_landings)
        else:
            held = [cap.rows for cap in state.caps if not cap.rows.is_constant]
            pinned = mirror_choice(state.problem, [self.rows, *held], state.counters)
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
            if value < self.value - STEP_A and self.state.keeps_everything(candidate) and self._seated(candidate):
                self.answer, self.value = candidate, value
                return True
        return False
