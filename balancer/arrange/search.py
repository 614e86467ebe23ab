"""Exact search over leg answers: breadth first in blocks of partial answers, deepest block first.

A partial answer settles the first units of a fixed order. It dies when in some row and some direction what it has added
up lies further from zero than the limit plus what the unsettled units can still take back, or when a counter can no
longer be kept. Complete answers are judged exactly, in every row. A search that ends within its budget has proven that
no answer is better than what it returns by more than its `step_a`.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from balancer.arrange.choices import Answer, Counter
from balancer.arrange.legs import FloatMatrix, LegProblem, Rows, mirror_choice

STEP_A = 1e-4
"""A better answer must be better by this [A]; what is closer counts as equal."""

_COARSE_STEP_A = 1e-3
"""The same where there are so many choices that single precision pays (measured: half the time)."""

_COARSE_FROM = 32
"""Choices from which single precision pays."""

_MARGIN_A = 1e-7
"""Float rounding allowed for before a partial answer is given up [A], in double precision."""

_ROUNDING_A = 1e-9
"""Float rounding allowed for when an answer is held against a limit [A]: 0.1 + 0.2 is no more than 0.3."""

_BLOCK = 8192
_DIRECTIONS = 6
"""Directions over 180 degrees in which the magnitude of a phasor row is bounded."""

_FIRST_ROWS = 32
_SAMPLE = 512
_CANDIDATES = 512
_MOST_ROWS = 1024
_TUNED_FROM = 2048
"""Partial answers in a block from which it pays to try on a sample which rows kill most."""

_ROW_OVERHEAD = 30
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

    def limit(self, level_a: float) -> FloatMatrix:
        """Limit of every row where the objective must reach a level [A]."""
        return np.where(self.is_objective, min(level_a, 1e9), self.fixed_limit)


@dataclass(eq=False)
class _Level:
    """Rows that can kill partial answers of one depth while the best value is `best`.

    Every row is divided by its limit, so that what exceeds 1 dies.
    """

    best: float
    offset: FloatMatrix
    """Shape (rows, 1)."""
    effects: FloatMatrix
    """Shape (rows, settled choices)."""
    is_tuned: bool = False

    def tune(self, sample: FloatMatrix) -> None:
        """Put those rows first that together kill most of a sample of partial answers (settled choices, answers).

        Of very many rows those that kill none of the sample are left out: an answer that only they would kill dies
        later, at the latest when it is complete.
        """
        kills = np.abs(self.effects @ sample + self.offset) > 1.0
        counts = kills.sum(axis=1)
        order = np.argsort(-counts, kind="stable")[: max(_MOST_ROWS, int((counts > 0).sum()))]
        deadliest = kills[order[:_CANDIDATES]].astype(np.float32)
        alive = np.ones(kills.shape[1], dtype=np.float32)
        first: list[int] = []
        while len(first) < 2 * _FIRST_ROWS and alive.any():
            gains = deadliest @ alive
            row = int(gains.argmax())
            if gains[row] == 0:
                break
            first.append(row)
            alive *= 1.0 - deadliest[row]
        order = np.concatenate([order[first], np.delete(order, first)])
        self.offset, self.effects = self.offset[order], np.ascontiguousarray(self.effects[order])
        self.is_tuned = True


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
    _columns: list[int] = field(default_factory=list)
    """Choices in the order in which they are settled: what the rows of a block of partial answers stand for."""
    _levels: dict[int, _Level] = field(default_factory=dict)
    _is_mirrored: bool = False

    @property
    def _is_coarse(self) -> bool:
        return len(self.problem.choices) >= _COARSE_FROM

    @property
    def step_a(self) -> float:
        """By how much [A] a better answer must be better to be found."""
        return _COARSE_STEP_A if self._is_coarse else STEP_A

    def _margin_a(self) -> float:
        """Bound the rounding [A] that a sum may carry: terms, one division each, times unit roundoff times size."""
        if not self._is_coarse:
            return _MARGIN_A
        size = float((np.abs(self._rows.offset) + np.abs(self._rows.effects).sum(axis=1)).max(initial=0.0))
        return (len(self.problem.choices) + 4) * float(np.finfo(np.float32).eps) / 2.0 * size

    def minimise_peak(self, objective: Rows, start: Answer | None, value: float) -> Found:
        """Lowest peak of a quantity; `start` is an accepted answer to beat, of that value [A]."""
        self._objective, self._answer, self._best = objective, start, value
        held = [cap.rows for cap in self.caps if not cap.rows.is_constant]
        self._is_mirrored = mirror_choice(self.problem, [objective, *held], self.counters) is not None
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
        if self._objective is not None and self._best < self.step_a:
            return True
        # Of an answer and its mirror image one is enough: the first unit stays on its reference leg.
        depth = 1 if self._is_mirrored else 0
        stack = [(depth, np.zeros((depth, 1), dtype=np.int8))]
        while stack:
            if self.budget.is_spent:
                return False
            depth, block = stack.pop()
            if depth == len(self._order):
                answers = self._keep_caps(self._answers(block))
                if len(answers) and not take(answers):
                    return False
                continue
            block = self._prune(self._branch(block, depth), depth + 1)
            stack += [(depth + 1, block[:, start : start + _BLOCK]) for start in range(0, block.shape[1], _BLOCK)]
        return True

    def _answers(self, block: NDArray[np.int8]) -> NDArray[np.int8]:
        """Turn a block of complete answers (settled choices, answers) into answers, one a row."""
        answers = np.zeros((block.shape[1], len(self._columns)), dtype=np.int8)
        answers[:, self._columns] = block.T
        return answers

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
        self._margin = self._margin_a()
        weights = self._weights()
        self._sequence = sorted(range(len(self.problem.groups)), key=lambda g: (-weights[g], g))
        self._order = [self.problem.groups[g] for g in self._sequence]
        self._columns = [choice for group in self._order for choice in group]

    def _relevant(self, rows: _Limits) -> _Limits:
        """Leave out the capped rows that no answer can break; the objective's limit falls, so all its rows stay."""
        reach = np.abs(rows.offset + self._centre.sum(axis=0)) + self._half.sum(axis=0)
        keep = rows.is_objective | (reach > rows.fixed_limit)
        self._centre, self._half = self._centre[:, keep], self._half[:, keep]
        return _Limits(rows.offset[keep], rows.effects[keep], rows.fixed_limit[keep], rows.is_objective[keep])

    def _weights(self) -> FloatMatrix:
        """Weigh units by how much of what must cancel is theirs: the heaviest are settled first."""
        reach = np.abs(self._rows.offset + self._centre.sum(axis=0)) + self._half.sum(axis=0)
        excess = np.maximum(reach - self._rows.limit(min(self._best, float(reach.max(initial=0.0)))), 0.0)
        return np.asarray(self._half @ (excess * excess))

    def _branch(self, block: NDArray[np.int8], depth: int) -> NDArray[np.int8]:
        count, width = len(self._order[depth]), block.shape[1]
        settled = np.zeros((count, (count + 1) * width), dtype=np.int8)
        for choice in range(count):
            settled[choice, (choice + 1) * width : (choice + 2) * width] = 1
        return np.concatenate([np.tile(block, (1, count + 1)), settled])

    def _prune(self, block: NDArray[np.int8], depth: int) -> NDArray[np.int8]:
        block = block[:, self._counters_kept(block, depth)]
        level = self._level(depth)
        taken = block.astype(level.effects.dtype)
        if not level.is_tuned and len(level.offset) and depth < len(self._order) and block.shape[1] >= _TUNED_FROM:
            level.tune(taken[:, :: block.shape[1] // _SAMPLE])
        start, size = 0, _FIRST_ROWS
        while start < len(level.offset) and block.shape[1]:
            end = min(start + size, len(level.offset))
            values = level.effects[start:end] @ taken
            values += level.offset[start:end]
            self.budget.work -= values.size * (len(block) + _ROW_OVERHEAD)
            keep = np.abs(values, out=values).max(axis=0) <= 1.0
            block, taken = block[:, keep], taken[:, keep]
            start, size = end, min(512, size * 2)
        return block

    def _counters_kept(self, block: NDArray[np.int8], depth: int) -> NDArray[np.bool_]:
        keep = np.ones(block.shape[1], dtype=bool)
        limits = [(counter, counter.cap) for counter in self.counters]
        if self._counted is not None and self._best < math.inf:
            limits.append((self._counted, math.ceil(self._best) - 1))
        for counter, cap in limits:
            costs = counter.costs[self._columns[: len(block)]]
            least = sum(min(0, *(int(counter.costs[c]) for c in g)) for g in self._order[depth:])
            if counter.base + least + int(np.maximum(costs, 0).sum()) > cap:
                # Whole numbers this small are exact in double precision, and only floats are multiplied fast.
                keep &= costs.astype(float) @ block.astype(float) + (counter.base + least) <= cap
        return keep

    def _level(self, depth: int) -> _Level:
        """Rows that can kill at a depth, the tightest first."""
        cached = self._levels.get(depth)
        if cached is not None and cached.best == self._best:
            return cached
        settled, open_ = self._sequence[:depth], self._sequence[depth:]
        limit = self._rows.limit(self._best - self.step_a) + self._margin + self._half[open_].sum(axis=0)
        offset = self._rows.offset + self._centre[open_].sum(axis=0)
        reach = np.abs(offset + self._centre[settled].sum(axis=0)) + self._half[settled].sum(axis=0)
        tightness = reach - limit
        rows = np.nonzero(tightness > 0)[0]
        rows = rows[np.argsort(-tightness[rows] / np.maximum(reach[rows], STEP_A), kind="stable")]
        columns = [choice for group in self._order[:depth] for choice in group]
        precision = np.dtype(np.float32 if self._is_coarse else np.float64)
        scale = 1.0 / limit[rows, None]
        effects = np.ascontiguousarray(self._rows.effects[rows][:, columns] * scale, dtype=precision)
        self._levels[depth] = _Level(self._best, np.asarray(offset[rows, None] * scale, dtype=precision), effects)
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
        step = self.step_a if self._objective is not None else 1.0
        for index in np.argsort(values, kind="stable"):
            if values[index] > self._best - step:
                break
            if self.budget.is_spent:
                return False
            for answer in [block[index], 1 - block[index]] if self._is_mirrored else [block[index]]:
                exact = self.accept(answer)
                if exact is not None and exact <= self._best - step:
                    self._best, self._answer = exact, answer.copy()
                    break
        return True
