"""CP-SAT over leg answers: is there one that keeps every limit? Rows enter only when an answer breaks them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from ortools.sat.python import cp_model

from balancer.arrange.clock import Clock
from balancer.arrange.legs import Answer, Counter, LegProblem, Rows
from balancer.arrange.solve import SolveStatus, solve
from balancer.units import MA_PER_A

_CUTS_A_ROUND = 12
_FIRST_ROWS = 64
_FIRST_DIRECTIONS = 8
_FULL_TURN = 2.0 * np.pi


@dataclass(frozen=True, eq=False)
class Decision:
    """What a decision came to: an answer, proof that there is none, or neither."""

    status: SolveStatus
    answer: Answer | None
    bound: float = float("-inf")
    """Proven lower bound of the counter that was minimised."""


class LegModel:
    """A growing model: limits are cut where answers break them, and answers without seats are forbidden.

    Notes
    -----
    The magnitude of a row is the largest of its projections Re(v e^(-j theta)), so a cut in any direction is valid.
    Coefficients are rounded to 1 mA. A real answer's projection differs from the model's by at most half a milliampere
    a choice and one for the constant and the limit: limits are widened by that, so that infeasible is infeasible.
    """

    def __init__(self, problem: LegProblem, counters: Sequence[Counter], clock: Clock) -> None:
        self._problem = problem
        self._clock = clock
        self._model = cp_model.CpModel()
        self._taken = [
            self._model.new_bool_var(f"{problem.units[choice.unit].name} {choice.signs}") for choice in problem.choices
        ]
        self._limits: list[tuple[Rows, float]] = []
        for group in problem.groups:
            if len(group) > 1:
                self._model.add_at_most_one(self._taken[index] for index in group)
        for counter in counters:
            self._model.add(self._sum(counter) <= counter.cap)

    @property
    def rounding_a(self) -> float:
        """How far [A] rounding may put the model from the truth in any row."""
        return (len(self._taken) / 2.0 + 1.0) / MA_PER_A

    def _sum(self, counter: Counter) -> cp_model.LinearExprT:
        return counter.base + cp_model.LinearExpr.weighted_sum(self._taken, [int(cost) for cost in counter.costs])

    def limit(self, rows: Rows, limit_a: float) -> None:
        """Keep a quantity at or below a limit [A] in every row."""
        self._limits.append((rows, limit_a))
        reach = np.abs(rows.offset) + np.abs(rows.effects).sum(axis=1)
        count = 2 if rows.is_real else _FIRST_DIRECTIONS
        for row in np.argsort(-reach, kind="stable")[:_FIRST_ROWS]:
            for direction in range(count):
                self._cut(rows, int(row), _FULL_TURN * direction / count, limit_a)

    def _cut(self, rows: Rows, row: int, angle: float, limit_a: float) -> None:
        """Re(v e^(-j theta)) <= limit, in whole milliamperes, widened by the rounding."""
        turn = np.exp(-1j * angle)
        effects = np.rint((rows.effects[row] * turn).real * MA_PER_A).astype(np.int64)
        offset = round(float((rows.offset[row] * turn).real) * MA_PER_A)
        allowed = int(np.floor((limit_a + self.rounding_a) * MA_PER_A)) - offset
        if int(np.maximum(effects, 0).sum()) > allowed:
            self._model.add(cp_model.LinearExpr.weighted_sum(self._taken, [int(e) for e in effects]) <= allowed)

    def forbid(self, answer: Answer) -> None:
        """Exclude one answer."""
        self._model.add_bool_or(v.negated() if taken else v for v, taken in zip(self._taken, answer, strict=True))

    def decide(self, work_s: float, hint: Answer | None = None, workers: int = 1) -> Decision:
        """Find an answer that keeps every limit to within the rounding, or prove that there is none."""
        return self._with_cuts(work_s, hint, workers)

    def minimise(self, counter: Counter, work_s: float, hint: Answer | None = None) -> Decision:
        """Find the answer of the lowest counter under the limits; OPTIMAL says proven."""
        self._model.minimize(self._sum(counter))
        try:
            return self._with_cuts(work_s, hint, 1)
        finally:
            self._model.clear_objective()  # type: ignore[no-untyped-call]

    def _with_cuts(self, work_s: float, hint: Answer | None, workers: int) -> Decision:
        while True:
            self._model.clear_hints()  # type: ignore[no-untyped-call]
            if hint is not None:
                for variable, taken in zip(self._taken, hint, strict=True):
                    self._model.add_hint(variable, int(taken))
            solved = solve(self._model, self._taken, self._clock, work_s, workers)
            if not solved.status.has_answer:
                return Decision(solved.status, None, solved.bound)
            answer = np.array(solved.values, dtype=np.int8)
            if not self._cut_broken(answer):
                return Decision(solved.status, answer, solved.bound)

    def _cut_broken(self, answer: Answer) -> bool:
        """Cut the worst rows that an answer breaks, in the direction in which it breaks them."""
        has_cut = False
        for rows, limit_a in self._limits:
            values = rows.offset + rows.effects @ answer.astype(float)
            magnitudes = np.abs(values)
            worst = np.argsort(-magnitudes, kind="stable")[:_CUTS_A_ROUND]
            for row in worst[magnitudes[worst] > limit_a + 2.0 * self.rounding_a]:
                self._cut(rows, int(row), float(np.angle(values[row])), limit_a)
                has_cut = True
        return has_cut
