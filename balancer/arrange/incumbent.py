"""First answers: simulated annealing and descent, to give the exact methods something good to beat.

Nothing here proves anything. All is seeded, so that the same input gives the same answers.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balancer.arrange.choices import Answer, Counter
from balancer.arrange.clock import Clock
from balancer.arrange.legs import ComplexMatrix, FloatMatrix, LegProblem, Rows
from balancer.arrange.search import Cap

_SEED = 20
_CHAINS = 48
_STEPS_A_CHOICE = 30
_STEPS_A_CHOICE_AGAIN = 400
_MANY_CHOICES = 32
_MOST_ROWS = 250
_WARM = 0.33
_COLD = 0.017
"""First and last temperature, as shares of a typical current in a row."""

_NORM = 8
"""Rows are judged by their 8-norm, not by the highest alone: the way down is smoother, and it ends lower (measured)."""

_FEW_CHOICES = 14
"""Up to so many choices the exact search looks at every answer in less time than annealing takes."""

_PAIR_SHARE = 0.6
_COUNT_PENALTY = 50.0
"""Weight of one unit of a broken counter against a typical current in a row."""

_ROUNDING_A = 1e-9
_PAIR_ROWS = 32
_MOST_PAIRS = 256


@dataclass(frozen=True, eq=False)
class Heuristic:
    """What first answers must keep, and what they aim for."""

    problem: LegProblem
    objective: Rows
    caps: Sequence[Cap]
    counters: Sequence[Counter]

    def value(self, answer: Answer) -> float | None:
        """Peak of the objective [A], or None where an answer breaks a cap or counter."""
        if any(counter.value(answer) > counter.cap for counter in self.counters):
            return None
        if not all(cap.is_kept(answer) for cap in self.caps):
            return None
        if any(answer[list(group)].sum() > 1 for group in self.problem.groups if len(group) > 1):
            return None
        return self.objective.peak(answer)

    def first_answers(self, clock: Clock) -> list[Answer]:
        """Good answers that keep every cap and counter, the best first; the reference answer among them if it does."""
        found = [np.zeros(len(self.problem.choices), dtype=np.int8), *self._annealed(clock)]
        improved = [self._descended(answer) for answer in found]
        rated = [(self.value(a), i, a) for i, a in enumerate([*improved, found[0]])]
        kept = [(value, index, answer) for value, index, answer in rated if value is not None]
        return [answer for _, _, answer in sorted(kept, key=lambda item: item[:2])]

    def improved(self, answer: Answer) -> Answer:
        """Descend from an answer by single and double moves."""
        return self._descended(answer)

    def _descended(self, answer: Answer) -> Answer:
        value = self.value(answer)
        while value is not None:
            step = self._better_neighbour(answer, value)
            if step is None:
                break
            answer, value = step
        return answer

    def _better_neighbour(self, answer: Answer, value: float) -> tuple[Answer, float] | None:
        current = self.objective.offset + self.objective.effects @ answer.astype(float)
        worst = np.argsort(-np.abs(current), kind="stable")[:_PAIR_ROWS]
        flips = self.objective.effects[worst] * (1.0 - 2.0 * answer.astype(float))
        single = np.abs(current[worst, None] + flips).max(axis=0, initial=0.0)
        first, second = np.triu_indices(len(answer), 1)
        double = np.abs(current[worst, None] + flips[:, first] + flips[:, second]).max(axis=0, initial=0.0)
        moves = [(single[k], [int(k)]) for k in np.argsort(single, kind="stable")]
        moves += [(double[k], [int(first[k]), int(second[k])]) for k in np.argsort(double, kind="stable")[:_MOST_PAIRS]]
        for estimate, columns in moves:
            if estimate < value - _ROUNDING_A:
                moved = answer.copy()
                moved[columns] ^= 1
                exact = self.value(moved)
                if exact is not None and exact < value - _ROUNDING_A:
                    return moved, exact
        return None

    def _annealed(self, clock: Clock) -> list[Answer]:
        size = len(self.problem.choices)
        if size <= _FEW_CHOICES:
            return []
        chains = _Chains(self, np.random.default_rng(_SEED))
        steps = size * (_STEPS_A_CHOICE if size < _MANY_CHOICES else _STEPS_A_CHOICE_AGAIN)
        for step in range(steps):
            if step % 256 == 0 and clock.is_stopped:
                break
            chains.step(step / steps)
        return chains.best_answers()


class _Chains:
    """Many annealing chains side by side, on the rows that matter most."""

    def __init__(self, task: Heuristic, generator: np.random.Generator) -> None:
        self._random = generator
        self._size = len(task.problem.choices)
        offset, effects = _heaviest_rows(task.objective)
        parts = [(offset, effects, np.zeros(len(offset)))]
        for cap in task.caps:
            cap_offset, cap_effects = _heaviest_rows(cap.rows)
            parts.append((cap_offset, cap_effects, np.full(len(cap_offset), cap.limit_a)))
        self._effects: ComplexMatrix = np.concatenate([part[1] for part in parts]).T.copy()
        self._excess_over: FloatMatrix = np.concatenate([part[2] for part in parts])
        self._objective_rows = len(offset)
        self._scale = max(float(np.abs(self._effects).sum(axis=0).max(initial=0.0)) / self._size, _ROUNDING_A)
        self._costs = np.array([counter.costs for counter in task.counters], dtype=float).reshape(-1, self._size)
        self._room = np.array([counter.cap - counter.base for counter in task.counters], dtype=float)
        self._is_choice_shared = _shared_groups(task.problem)
        self._answers = np.zeros((_CHAINS, self._size))
        self._values = np.tile(np.concatenate([part[0] for part in parts]), (_CHAINS, 1))
        self._energy = self._energy_of(self._values, self._answers)
        self._best = self._energy.copy()
        self._best_answers = self._answers.copy()

    def _energy_of(self, values: ComplexMatrix, answers: FloatMatrix) -> FloatMatrix:
        magnitudes = np.abs(values)
        energy = (magnitudes[:, : self._objective_rows] ** _NORM).sum(axis=1) ** (1.0 / _NORM)
        excess = magnitudes[:, self._objective_rows :] - self._excess_over[self._objective_rows :]
        energy = energy + _COUNT_PENALTY * np.maximum(excess, 0.0).max(axis=1, initial=0.0)
        over = np.maximum(answers @ self._costs.T - self._room, 0.0).sum(axis=1)
        double = sum(np.maximum(answers[:, group].sum(axis=1) - 1.0, 0.0) for group in self._is_choice_shared)
        return np.asarray(energy + _COUNT_PENALTY * self._scale * (over + double))

    def step(self, progress: float) -> None:
        """Try one single or double move in every chain."""
        chains = np.arange(_CHAINS)
        first, second = self._random.integers(self._size, size=(2, _CHAINS))
        is_pair = (self._random.random(_CHAINS) < _PAIR_SHARE) & (first != second)
        sign_first = 1.0 - 2.0 * self._answers[chains, first]
        sign_second = np.where(is_pair, 1.0 - 2.0 * self._answers[chains, second], 0.0)
        change = sign_first[:, None] * self._effects[first] + sign_second[:, None] * self._effects[second]
        values = self._values + change
        answers = self._answers.copy()
        answers[chains, first] += sign_first
        answers[chains, second] += sign_second
        energy = self._energy_of(values, answers)
        temperature = self._scale * _WARM * (_COLD / _WARM) ** progress
        gain = np.minimum((self._energy - energy) / temperature, 0.0)
        accepted = self._random.random(_CHAINS) < np.exp(gain)
        self._values[accepted], self._answers[accepted] = values[accepted], answers[accepted]
        self._energy[accepted] = energy[accepted]
        better = self._energy < self._best
        self._best[better], self._best_answers[better] = self._energy[better], self._answers[better]

    def best_answers(self) -> list[Answer]:
        """Best answer of every chain, the best first, each once."""
        order = np.argsort(self._best, kind="stable")
        distinct: dict[bytes, NDArray[np.int8]] = {}
        for index in order[: _CHAINS // 4]:
            answer = self._best_answers[index].astype(np.int8)
            distinct.setdefault(answer.tobytes(), answer)
        return list(distinct.values())


def _heaviest_rows(rows: Rows) -> tuple[ComplexMatrix, ComplexMatrix]:
    reach = np.abs(rows.offset) + np.abs(rows.effects).sum(axis=1)
    kept = np.sort(np.argsort(-reach, kind="stable")[:_MOST_ROWS])
    return rows.offset[kept], rows.effects[kept]


def _shared_groups(problem: LegProblem) -> list[list[int]]:
    return [list(group) for group in problem.groups if len(group) > 1]
