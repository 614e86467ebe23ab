"""CP-SAT's decisions about leg answers: what it rules out has no answer, and what it gives keeps the limits."""

import itertools
from collections.abc import Iterator

import numpy as np
import pytest

from balancer.arrange.choices import Answer
from balancer.arrange.clock import Clock
from balancer.arrange.leg_model import LegModel
from balancer.arrange.legs import LegProblem, build_leg_problem
from balancer.arrange.results import Options
from balancer.arrange.seats import build_units
from balancer.arrange.solve import SolveStatus
from balancer.electrical.scenario_sets import share_scenarios
from balancer.panel import Circuit, Installation, Load, Panel, PowerFactor, Volts, ordinary_spaces, parse_landing

WORK_S = 10.0


def problem_of(seed: int, free: int = 8, slack_in: float | None = None) -> LegProblem:
    rng = np.random.default_rng(seed)
    circuits = tuple(
        Circuit(
            label=f"c{index}",
            landing=parse_landing(str(index + 1)),
            volts=Volts.V120,
            load=Load(neutral_a=float(rng.integers(10, 160)) / 10, neutral_pf=PowerFactor(float(rng.choice([1, 0.8])))),
            slack_in=slack_in,
        )
        for index in range(free)
    )
    installation = Installation(panel=Panel(spaces=ordinary_spaces(free)), circuits=circuits)
    scenarios = share_scenarios(installation, ["a", "b"], rng.integers(0, 5, (2, free)) / 4)
    return build_leg_problem(installation, scenarios, build_units(installation, Options()))


def counted_answers(problem: LegProblem) -> Iterator[Answer]:
    for taken in itertools.product((0, 1), repeat=len(problem.choices)):
        answer = np.array(taken, dtype=np.int8)
        if all(counter.value(answer) <= counter.cap for counter in problem.counters):
            yield answer


def lowest(problem: LegProblem) -> float:
    return min(problem.neutral.peak(answer) for answer in counted_answers(problem))


@pytest.mark.parametrize("seed", range(5))
def test_limit_just_above_the_optimum_has_an_answer_and_one_just_below_has_none(seed: int) -> None:
    problem = problem_of(seed)
    best = lowest(problem)
    above, below = (LegModel(problem, problem.counters, Clock()) for _ in range(2))
    above.limit(problem.neutral, best + 1e-6)
    below.limit(problem.neutral, best - 4.0 * below.rounding_a)
    decision = above.decide(WORK_S)
    assert decision.answer is not None
    assert problem.neutral.peak(decision.answer) <= best + 4.0 * above.rounding_a
    assert below.decide(WORK_S).status is SolveStatus.INFEASIBLE


def test_rounding_never_rules_out_the_optimum() -> None:
    for seed in range(12):
        problem = problem_of(seed, free=6)
        model = LegModel(problem, problem.counters, Clock())
        model.limit(problem.neutral, lowest(problem))
        assert model.decide(WORK_S).answer is not None


def test_forbidden_answers_do_not_come_back() -> None:
    problem = problem_of(1, free=4)
    model = LegModel(problem, problem.counters, Clock())
    expected = [tuple(answer) for answer in counted_answers(problem)]
    found = []
    while (answer := model.decide(WORK_S).answer) is not None:
        found.append(tuple(answer))
        model.forbid(answer)
    assert sorted(found) == sorted(expected)


def test_pinned_mirror_leaves_the_reference_leg() -> None:
    problem = problem_of(1, free=4)
    model = LegModel(problem, problem.counters, Clock())
    model.pin_mirror(2)
    answer = model.decide(WORK_S).answer
    assert answer is not None
    assert answer[2] == 0


def test_joined_seats_rule_out_what_counts_allow() -> None:
    # Full, and every conductor short: the legs could be exchanged by number, but nobody can move.
    problem = problem_of(1, free=4, slack_in=1.0)
    swapped = LegModel(problem, problem.counters, Clock())
    swapped.seat(1)
    swapped.forbid(np.zeros(len(problem.choices), dtype=np.int8))
    assert swapped.decide(WORK_S).status is SolveStatus.INFEASIBLE
    freer = LegModel(problem, problem.counters, Clock())
    freer.seat(2)
    freer.forbid(np.zeros(len(problem.choices), dtype=np.int8))
    assert freer.decide(WORK_S).answer is not None


@pytest.mark.parametrize("seed", range(3))
def test_least_effort_under_a_limit_is_the_least_of_all(seed: int) -> None:
    problem = problem_of(seed)
    limit_a = 1.2 * lowest(problem)
    model = LegModel(problem, problem.counters, Clock())
    model.limit(problem.neutral, limit_a)
    model.seat(None)
    decision = model.minimise_effort(WORK_S)
    kept = [answer for answer in counted_answers(problem) if problem.neutral.peak(answer) <= limit_a]
    assert decision.status is SolveStatus.OPTIMAL
    assert decision.bound == min(problem.effort.value(answer) for answer in kept)


def test_effort_without_seats_is_our_bug() -> None:
    problem = problem_of(0, free=4)
    with pytest.raises(ValueError, match="seats"):
        LegModel(problem, problem.counters, Clock()).minimise_effort(WORK_S)
