"""CP-SAT over leg answers: is there one that keeps every limit? Rows enter only when an answer breaks them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from ortools.sat.python import cp_model

from balancer.arrange.choices import Answer, Counter
from balancer.arrange.clock import Clock
from balancer.arrange.legs import LegProblem, Rows
from balancer.arrange.seating import SeatModel, row_limits_a
from balancer.arrange.solve import SolveStatus, solve

_CUTS_A_ROUND = 12
_LEAST_ROUND_S = 0.01
"""What a round of cuts takes from the work at least: building the model counts too."""

_FIRST_ROWS = 64
_FIRST_DIRECTIONS = 16
_UNITS_PER_A = 100_000
"""Whole units that a cut's coefficients are rounded to: 10 microamperes. Proofs take no longer than at 1 mA (measured
on 48 free circuits of mixed power factor), and rounding takes less from a bound than a clamp meter can tell."""
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
    Coefficients are rounded to whole units. A real answer's projection differs from the model's by at most half a unit
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
        self._seats: SeatModel | None = None

    @property
    def rounding_a(self) -> float:
        """How far [A] rounding may put the model from the truth in any row."""
        return (len(self._taken) / 2.0 + 1.0) / _UNITS_PER_A

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
        """Re(v e^(-j theta)) <= limit, in whole units, widened by the rounding."""
        turn = np.exp(-1j * angle)
        effects = np.rint((rows.effects[row] * turn).real * _UNITS_PER_A).astype(np.int64)
        offset = round(float((rows.offset[row] * turn).real) * _UNITS_PER_A)
        allowed = int(np.floor((limit_a + self.rounding_a) * _UNITS_PER_A)) - offset
        if int(np.maximum(effects, 0).sum()) > allowed:
            self._model.add(cp_model.LinearExpr.weighted_sum(self._taken, [int(e) for e in effects]) <= allowed)

    def seat(self, max_landings: int | None) -> None:
        """Join the exact seats to the legs, so that every answer has some."""
        limits_a = row_limits_a(self._problem.installation.panel.stab_a, self._problem.units)
        self._seats = SeatModel(self._model, self._problem.units, limits_a)
        taken = {(c.unit, c.signs): v for c, v in zip(self._problem.choices, self._taken, strict=True)}
        for index, (unit, seats) in enumerate(zip(self._problem.units, self._seats.seats, strict=True)):
            for placement, literal in zip(unit.placements, seats, strict=True):
                for (other, signs), variable in taken.items():
                    if other == index:
                        self._model.add_implication(literal, variable if signs == placement.signs else ~variable)
        if max_landings is not None:
            self._model.add(self._seats.landings_changed <= max_landings)

    def cap_effort(self, effort: int) -> None:
        """Keep the effort of the seats, in thousandths of a landing, at or below a cap."""
        if self._seats is not None:
            self._model.add(self._seats.effort <= effort)

    def pin_mirror(self, choice: int) -> None:
        """Keep one unit on its reference leg, where an answer and its mirror image are the same to every row."""
        self._model.add(self._taken[choice] == 0)

    def forbid(self, answer: Answer) -> None:
        """Exclude one answer."""
        self._model.add_bool_or(v.negated() if taken else v for v, taken in zip(self._taken, answer, strict=True))

    def decide(self, work_s: float, hint: Answer | None = None) -> Decision:
        """Find an answer that keeps every limit to within the rounding, or prove that there is none."""
        return self._with_cuts(work_s, hint)

    def minimise_effort(self, work_s: float, hint: Answer | None = None) -> Decision:
        """Find the answer whose seats cost the least effort under the limits; OPTIMAL says proven."""
        if self._seats is None:
            message = "effort is a matter of seats: join them first"
            raise ValueError(message)
        self._model.minimize(self._seats.effort)
        try:
            return self._with_cuts(work_s, hint)
        finally:
            self._model.clear_objective()  # type: ignore[no-untyped-call]

    def _with_cuts(self, work_s: float, hint: Answer | None) -> Decision:
        bound = float("-inf")
        while work_s > 0:
            self._model.clear_hints()  # type: ignore[no-untyped-call]
            if hint is not None:
                for variable, taken in zip(self._taken, hint, strict=True):
                    self._model.add_hint(variable, int(taken))
            solved = solve(self._model, self._taken, self._clock, work_s)
            # A model with fewer cuts allows more, so that its bound holds for one with more of them too.
            bound = max(bound, solved.bound)
            if not solved.status.has_answer:
                return Decision(solved.status, None, bound)
            answer = np.array(solved.values, dtype=np.int8)
            if not self._cut_broken(answer):
                return Decision(solved.status, answer, bound)
            work_s -= max(solved.work_s, _LEAST_ROUND_S)
        return Decision(SolveStatus.UNKNOWN, None, bound)

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
