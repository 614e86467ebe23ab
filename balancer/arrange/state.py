"""The best answer so far, and what every better one must keep."""

from __future__ import annotations

from dataclasses import dataclass, field

from balancer.arrange.choices import Answer, Counter
from balancer.arrange.clock import Clock
from balancer.arrange.leg_model import LegModel
from balancer.arrange.legs import LegProblem
from balancer.arrange.results import ObjectiveName, Progress, ProgressListener
from balancer.arrange.search import Cap, Found
from balancer.arrange.seating import Seater, Seating


@dataclass
class State:
    """What one objective hands to the next. `answer` always has seats and keeps every cap and counter.

    A bound that is no further than `tolerance_a` [A] below the value proves it.
    """

    problem: LegProblem
    seater: Seater
    clock: Clock
    tolerance_a: float
    answer: Answer
    caps: list[Cap] = field(default_factory=list)
    counters: list[Counter] = field(default_factory=list)
    listener: ProgressListener | None = None
    scenario_count: int = 0
    """All scenarios that planning is over, of which the problem may hold only those that matter."""

    def seating(self, answer: Answer) -> Seating | None:
        """Seats of an answer, the least effort first; None where it has none."""
        return self.seater.least_effort(self.problem.signs(answer))

    def report(self, name: ObjectiveName, best: float, bound: float) -> None:
        """Tell the listener the news."""
        if self.listener is not None:
            weighed = len(self.problem.cases[0].total)
            self.listener(Progress(name, best, bound, self.scenario_count, weighed))

    def is_exhaustive(self, found: Found) -> bool:
        """Whether a search has looked at every answer, and every one that it passed over has no seats for certain."""
        return found.is_complete and not self.seater.has_given_up

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
            cap.is_kept(answer) for cap in self.caps
        )
