"""The exact search over leg answers, against looking at every answer."""

import itertools
from collections.abc import Callable, Iterator

import numpy as np
import pytest

from balancer.arrange.choices import Answer, Counter
from balancer.arrange.legs import LegProblem, Rows, build_leg_problem
from balancer.arrange.results import Options
from balancer.arrange.search import STEP_A, Budget, Cap, Found, LegSearch, project
from balancer.arrange.seats import build_units
from balancer.electrical.scenario_sets import share_scenarios
from balancer.panel import Circuit, Installation, Load, Panel, PowerFactor, Volts, ordinary_spaces, parse_landing


def problem_of(seed: int, free: int = 9, factors: tuple[float, ...] = (1.0, 0.9, 0.7)) -> LegProblem:
    """A full panel of single-pole breakers and one shared-neutral pair."""
    rng = np.random.default_rng(seed)
    circuits = tuple(
        Circuit(
            label=f"c{index}",
            landing=parse_landing(str(index + 1)),
            volts=Volts.V120,
            load=Load(neutral_a=float(rng.integers(10, 160)) / 10, neutral_pf=PowerFactor(float(rng.choice(factors)))),
            shared_neutral="n" if index in (0, 2) else "",
        )
        for index in range(free)
    )
    installation = Installation(panel=Panel(spaces=ordinary_spaces(free + free % 2)), circuits=circuits)
    scenarios = share_scenarios(installation, ["a", "b", "c"], rng.integers(0, 5, (3, free)) / 4)
    return build_leg_problem(installation, scenarios, build_units(installation, Options()))


def answers(problem: LegProblem) -> Iterator[Answer]:
    for taken in itertools.product((0, 1), repeat=len(problem.choices)):
        yield np.array(taken, dtype=np.int8)


def keeps(answer: Answer, caps: list[Cap], counters: tuple[Counter, ...]) -> bool:
    is_counted = all(counter.value(answer) <= counter.cap for counter in counters)
    return is_counted and all(cap.rows.peak(answer) <= cap.limit_a for cap in caps)


def search(problem: LegProblem, caps: list[Cap], rows: Rows, accept: Callable[[Answer], float | None]) -> Found:
    return LegSearch(problem, caps, problem.counters, Budget(1e9), accept).minimise_peak(rows, None, float("inf"))


@pytest.mark.parametrize("seed", range(6))
def test_lowest_peak_is_the_lowest_of_all_answers(seed: int) -> None:
    problem = problem_of(seed)
    found = search(problem, [], problem.neutral, problem.neutral.peak)
    best = min(problem.neutral.peak(a) for a in answers(problem) if keeps(a, [], problem.counters))
    assert found.is_complete
    assert found.value == pytest.approx(best, abs=STEP_A)


@pytest.mark.parametrize("seed", range(6))
def test_lowest_peak_keeps_caps(seed: int) -> None:
    problem = problem_of(seed)
    caps = [Cap(problem.neutral, 1.15 * search(problem, [], problem.neutral, problem.neutral.peak).value)]
    found = search(problem, caps, problem.heavy_leg, problem.heavy_leg.peak)
    best = min(problem.heavy_leg.peak(a) for a in answers(problem) if keeps(a, caps, problem.counters))
    assert found.value == pytest.approx(best, abs=STEP_A)


def test_answers_without_seats_are_passed_over() -> None:
    problem = problem_of(1)

    def accept(answer: Answer) -> float | None:
        return problem.neutral.peak(answer) if answer.sum() == 3 else None

    found = search(problem, [], problem.neutral, accept)
    seated = [a for a in answers(problem) if a.sum() == 3 and keeps(a, [], problem.counters)]
    assert found.value == pytest.approx(min(problem.neutral.peak(a) for a in seated), abs=STEP_A)


@pytest.mark.parametrize("seed", range(3))
def test_lowest_count_is_the_lowest_of_all_answers(seed: int) -> None:
    problem = problem_of(seed)
    caps = [Cap(problem.neutral, 1.2 * search(problem, [], problem.neutral, problem.neutral.peak).value)]
    task = LegSearch(problem, caps, problem.counters, Budget(1e9), lambda a: float(problem.landings.value(a)))
    found = task.minimise_count(problem.landings, None, 1e6)
    best = min(problem.landings.value(a) for a in answers(problem) if keeps(a, caps, problem.counters))
    assert (found.is_complete, found.value) == (True, best)


@pytest.mark.parametrize("seed", range(3))
def test_survivors_are_all_answers_that_keep_the_caps(seed: int) -> None:
    problem = problem_of(seed)
    caps = [Cap(problem.neutral, 1.3 * search(problem, [], problem.neutral, problem.neutral.peak).value)]
    survivors = LegSearch(problem, caps, problem.counters, Budget(1e9), problem.neutral.peak).survivors(10_000)
    expected = {tuple(a) for a in answers(problem) if keeps(a, caps, problem.counters)}
    assert survivors is not None
    assert {tuple(answer) for answer in survivors} == expected


def test_more_survivors_than_asked_for_are_none() -> None:
    problem = problem_of(0)
    assert LegSearch(problem, [], problem.counters, Budget(1e9), problem.neutral.peak).survivors(1) is None


def test_search_with_a_spent_budget_proves_nothing() -> None:
    problem = problem_of(0)
    found = LegSearch(problem, [], problem.counters, Budget(0.0), problem.neutral.peak).minimise_peak(
        problem.neutral, None, float("inf")
    )
    assert not found.is_complete


def test_budget_spent_on_the_last_block_proves_nothing() -> None:
    problem, budget = problem_of(0), Budget(1e9)

    def accept(answer: Answer) -> None:
        budget.work = 0.0  # all spent on the seats of one answer; the others were never looked at

    task = LegSearch(problem, [], problem.counters, budget, accept)
    assert not task.minimise_peak(problem.neutral, None, float("inf")).is_complete


def test_start_that_nothing_beats_is_kept() -> None:
    problem = problem_of(2)
    best = search(problem, [], problem.neutral, problem.neutral.peak)
    again = LegSearch(problem, [], problem.counters, Budget(1e9), problem.neutral.peak)
    assert again.minimise_peak(problem.neutral, best.answer, best.value).answer is best.answer


def test_projections_never_exceed_the_magnitude() -> None:
    rows = problem_of(3).neutral
    offset, effects = project(rows)
    for taken in ((0,) * rows.effects.shape[1], (1,) * rows.effects.shape[1]):
        projected = np.abs(offset + effects @ np.array(taken, dtype=float)).reshape(-1, len(rows.offset)).max(axis=0)
        magnitude = rows.values(np.array(taken, dtype=np.int8))
        assert (projected <= magnitude + 1e-9).all()
        # Six directions over half a turn leave at most cos(15 degrees).
        assert (projected >= magnitude * np.cos(np.pi / 12) - 1e-9).all()


def test_projection_of_unity_power_factor_is_exact() -> None:
    rows = problem_of(3, factors=(1.0,)).neutral
    offset, _ = project(rows)
    assert offset.shape == rows.offset.shape


def test_limits_that_rule_nothing_out_leave_every_answer() -> None:
    problem = problem_of(0, free=14)
    caps = [Cap(problem.neutral, 1e6)]
    survivors = LegSearch(problem, caps, (), Budget(1e12), problem.neutral.peak).survivors(100_000)
    assert survivors is not None
    assert len(survivors) == 2 ** len(problem.choices)
