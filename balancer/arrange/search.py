"""Exact search over leg answers: breadth first in blocks of partial answers, deepest block first.

A partial answer settles the first units of a fixed order. It dies when in some row and some direction what it has added
up lies further from zero than the limit plus what the unsettled units can still take back, or when a counter can no
longer be kept. Complete answers are judged exactly, in every row. A search that ends within its budget has proven that
no answer is better than what it returns by more than `STEP_A`.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from balancer.arrange.legs import Answer, Counter, FloatMatrix, LegProblem, Rows

STEP_A = 1e-4
"""A better answer must be better by this [A]; what is closer counts as equal."""

_MARGIN_A = 1e-7
"""Float rounding allowed for before a partial answer is given up [A]."""

_ROUNDING_A = 1e-9
"""Float rounding allowed for when an answer is held against a limit [A]: 0.1 + 0.2 is no more than 0.3."""

_BLOCK = 8192
_DIRECTIONS = 6
"""Directions over 180 degrees in which the magnitude of a phasor row is bounded."""

_FIRST_ROWS = 32
_ROW_OVERHEAD = 20
"""What comparing a sum costs beside adding one column to it."""

_EXPLODED = 1 << 18


@dataclass(frozen=True, eq=False)
class Cap:
    """An amps limit that every row of a quantity keeps."""

    rows: Rows
    limit_a: float

    def is_kept(self, answer: Answer) -> bool:
        """Whether an answer keeps the limit, but for the rounding of floats."""
        return self.rows.peak(answer) <= self.limit_a + _ROUNDING_A


@dataclass
class Budget:
    """Work that a search may still do, in column additions: deterministic where a clock is not."""

    work: float
    is_stopped: Callable[[], bool] = lambda: False
    """Asked now and then: the clock or Ctrl-C."""

    @property
    def is_spent(self) -> bool:
        """Whether the search must end here."""
        return self.work <= 0 or self.is_stopped()


@dataclass(frozen=True, eq=False)
class Found:
    """Best answer of a search and its value; `is_complete` says that nothing was left unsearched."""

    answer: Answer | None
    value: float
    is_complete: bool


Accept = Callable[[Answer], float | None]
"""Exact value of a complete answer that improves, or None where it has no seats."""


@dataclass(eq=False)
class _Limits:
    """Projected rows with their limits; `is_objective` rows have the moving one."""

    offset: FloatMatrix
    effects: FloatMatrix
    fixed_limit: FloatMatrix
    is_objective: NDArray[np.bool_]

    def limit(self, best: float) -> FloatMatrix:
        return np.where(self.is_objective, min(best - STEP_A, 1e9), self.fixed_limit) + _MARGIN_A


def project(rows: Rows, directions: int = _DIRECTIONS) -> tuple[FloatMatrix, FloatMatrix]:
    """Real rows whose largest magnitude bounds a phasor row's from below, exact where all lies on one line."""
    if rows.is_real or not _has_imaginary(rows):
        return rows.offset.real, rows.effects.real
    angles = np.pi * np.arange(directions) / directions
    turns = np.exp(-1j * angles)
    offset = np.concatenate([(rows.offset * turn).real for turn in turns])
    effects = np.concatenate([(rows.effects * turn).real for turn in turns])
    return offset, effects


def _has_imaginary(rows: Rows) -> bool:
    largest = max(np.abs(rows.offset.imag).max(initial=0.0), np.abs(rows.effects.imag).max(initial=0.0))
    return bool(largest > _MARGIN_A)


@dataclass(eq=False)
class LegSearch:
    """One search: minimise an amps quantity, a counter or the mean neutral, under caps and counters."""

    problem: LegProblem
    caps: Sequence[Cap]
    counters: Sequence[Counter]
    budget: Budget
    accept: Accept
    _objective: Rows | None = None
    _counted: Counter | None = None
    _best: float = math.inf
    _answer: Answer | None = None
    _order: list[tuple[int, ...]] = field(default_factory=list)
    _levels: dict[int, tuple[float, FloatMatrix, FloatMatrix, FloatMatrix]] = field(default_factory=dict)

    def minimise_peak(self, objective: Rows, start: Answer | None, value: float) -> Found:
        """Lowest peak of a quantity; `start` is an accepted answer to beat, of that value [A]."""
        self._objective, self._answer, self._best = objective, start, value
        return self._run()

    def minimise_count(self, counter: Counter, start: Answer | None, value: float) -> Found:
        """Lowest value of a counter, where `accept` gives its exact value."""
        self._counted, self._answer, self._best = counter, start, value
        return self._run()

    def survivors(self, most: int) -> list[Answer] | None:
        """Give every answer that keeps the caps and counters, in a fixed order; None where more than `most` do."""
        answers: list[Answer] = []

        def collect(block: NDArray[np.int8]) -> bool:
            answers.extend(block)
            return len(answers) <= most

        return answers if self._descend(collect) else None

    def _run(self) -> Found:
        is_complete = self._descend(self._judge)
        return Found(self._answer, self._best, is_complete)

    def _descend(self, take: Callable[[NDArray[np.int8]], bool]) -> bool:
        """Search; `take` gets blocks of complete answers that keep every limit. True when nothing was left."""
        self._prepare()
        stack = [np.zeros((1, len(self.problem.choices)), dtype=np.int8)]
        depths = [0]
        while stack:
            if self.budget.is_spent:
                return False
            block, depth = stack.pop(), depths.pop()
            if depth == len(self._order):
                block = self._keep_caps(block)
                if len(block) and not take(block):
                    return False
                continue
            block = self._prune(self._branch(block, depth), depth + 1)
            for start in range(0, len(block), _BLOCK):
                stack.append(block[start : start + _BLOCK])
                depths.append(depth + 1)
        return True

    def _prepare(self) -> None:
        parts = [(*project(cap.rows), cap.limit_a, False) for cap in self.caps if not cap.rows.is_constant]
        if self._objective is not None:
            parts.append((*project(self._objective), math.inf, True))
        size = len(self.problem.choices)
        offset = np.concatenate([np.zeros(0), *(part[0] for part in parts)])
        effects = np.concatenate([np.zeros((0, size)), *(part[1] for part in parts)])
        fixed = np.concatenate([np.zeros(0), *(np.full(len(part[0]), part[2]) for part in parts)])
        moving = np.concatenate([np.zeros(0, dtype=bool), *(np.full(len(part[0]), part[3]) for part in parts)])
        low = np.stack([np.minimum(effects[:, list(g)].min(axis=1), 0.0) for g in self.problem.groups] or [offset * 0])
        high = np.stack([np.maximum(effects[:, list(g)].max(axis=1), 0.0) for g in self.problem.groups] or [offset * 0])
        self._centre, self._half = (low + high) / 2.0, (high - low) / 2.0
        self._rows = self._relevant(_Limits(offset, effects, fixed, moving))
        weights = self._weights()
        self._sequence = sorted(range(len(self.problem.groups)), key=lambda g: (-weights[g], g))
        self._order = [self.problem.groups[g] for g in self._sequence]

    def _relevant(self, rows: _Limits) -> _Limits:
        """Leave out the capped rows that no answer can break; the objective's limit falls, so all its rows stay."""
        reach = np.abs(rows.offset + self._centre.sum(axis=0)) + self._half.sum(axis=0)
        keep = rows.is_objective | (reach > rows.fixed_limit)
        self._centre, self._half = self._centre[:, keep], self._half[:, keep]
        return _Limits(rows.offset[keep], rows.effects[keep], rows.fixed_limit[keep], rows.is_objective[keep])

    def _weights(self) -> FloatMatrix:
        """Weigh units by how much of what must cancel is theirs: the heaviest are settled first."""
        reach = np.abs(self._rows.offset + self._centre.sum(axis=0)) + self._half.sum(axis=0)
        excess = np.maximum(reach - self._rows.limit(min(self._best, 1e6)), 0.0)
        return np.asarray(self._half @ (excess * excess))

    def _branch(self, block: NDArray[np.int8], depth: int) -> NDArray[np.int8]:
        branches = [block]
        for choice in self._order[depth]:
            taken = block.copy()
            taken[:, choice] = 1
            branches.append(taken)
        return np.concatenate(branches)

    def _prune(self, block: NDArray[np.int8], depth: int) -> NDArray[np.int8]:
        block = block[self._counters_kept(block, depth)]
        _, offset, effects, limit = self._level(depth)
        columns = [c for group in self._order[:depth] for c in group]
        start, size = 0, _FIRST_ROWS
        while start < len(limit) and len(block):
            end = start + size
            settled = block[:, columns].astype(np.float64) @ effects[:, start:end]
            self.budget.work -= len(block) * (min(end, len(limit)) - start) * (len(columns) + _ROW_OVERHEAD)
            block = block[(np.abs(settled + offset[start:end]) <= limit[start:end]).all(axis=1)]
            start, size = end, min(512, size * 2)
        return block

    def _counters_kept(self, block: NDArray[np.int8], depth: int) -> NDArray[np.bool_]:
        keep = np.ones(len(block), dtype=bool)
        limits = [(counter, counter.cap) for counter in self.counters]
        if self._counted is not None and self._best < math.inf:
            limits.append((self._counted, math.ceil(self._best) - 1))
        for counter, cap in limits:
            least = sum(min(0, *(int(counter.costs[c]) for c in g)) for g in self._order[depth:])
            keep &= block.astype(np.int64) @ counter.costs + (counter.base + least) <= cap
        return keep

    def _level(self, depth: int) -> tuple[float, FloatMatrix, FloatMatrix, FloatMatrix]:
        """Rows that can kill at a depth, the tightest first, as (best, offset, effects, limit)."""
        cached = self._levels.get(depth)
        if cached is not None and cached[0] == self._best:
            return cached
        settled, open_ = self._sequence[:depth], self._sequence[depth:]
        limit = self._rows.limit(self._best) + self._half[open_].sum(axis=0)
        offset = self._rows.offset + self._centre[open_].sum(axis=0)
        reach = np.abs(offset + self._centre[settled].sum(axis=0)) + self._half[settled].sum(axis=0)
        tightness = reach - limit
        rows = np.nonzero(tightness > 0)[0]
        rows = rows[np.argsort(-tightness[rows] / np.maximum(reach[rows], STEP_A), kind="stable")]
        columns = [c for group in self._order[:depth] for c in group]
        effects = np.ascontiguousarray(self._rows.effects[rows][:, columns].T)
        self._levels[depth] = (self._best, offset[rows], effects, limit[rows])
        return self._levels[depth]

    def _keep_caps(self, block: NDArray[np.int8]) -> NDArray[np.int8]:
        for cap in self.caps:
            if len(block):
                values = np.abs(block.astype(float) @ cap.rows.effects.T + cap.rows.offset)
                block = block[values.max(axis=1, initial=0.0) <= cap.limit_a + _MARGIN_A]
        return block

    def _judge(self, block: NDArray[np.int8]) -> bool:
        if self._objective is not None:
            values = np.abs(block.astype(float) @ self._objective.effects.T + self._objective.offset).max(axis=1)
        elif self._counted is not None:
            values = (block.astype(np.int64) @ self._counted.costs + self._counted.base).astype(float)
        step = STEP_A if self._objective is not None else 1.0
        for index in np.argsort(values, kind="stable"):
            if values[index] > self._best - step:
                break
            if self.budget.is_spent:
                return False
            exact = self.accept(block[index])
            if exact is not None and exact <= self._best - step:
                self._best, self._answer = exact, block[index].copy()
        return True
