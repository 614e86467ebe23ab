"""First answers: they keep every cap and counter, and come out the same every time."""

import numpy as np
import pytest

from balancer.arrange.clock import Clock
from balancer.arrange.incumbent import Heuristic
from balancer.arrange.legs import LegProblem, build_leg_problem
from balancer.arrange.results import Options
from balancer.arrange.search import Cap
from balancer.arrange.seats import build_units
from balancer.electrical.scenario_sets import share_scenarios
from balancer.panel import Circuit, Installation, Load, Panel, PowerFactor, Volts, ordinary_spaces, parse_landing


def problem_of(free: int) -> LegProblem:
    """A full panel, so that as many circuits must be on each leg."""
    rng = np.random.default_rng(7)
    circuits = tuple(
        Circuit(
            label=f"c{index}",
            landing=parse_landing(str(index + 1)),
            volts=Volts.V120,
            load=Load(neutral_a=float(rng.integers(10, 160)) / 10, neutral_pf=PowerFactor(float(rng.choice([1, 0.8])))),
        )
        for index in range(free)
    )
    installation = Installation(panel=Panel(spaces=ordinary_spaces(free)), circuits=circuits)
    scenarios = share_scenarios(installation, list("abc"), rng.integers(0, 5, (3, free)) / 4)
    return build_leg_problem(installation, scenarios, build_units(installation, Options()))


@pytest.mark.parametrize("free", [8, 20])
def test_first_answers_keep_caps_and_counters(free: int) -> None:
    problem = problem_of(free)
    reference = np.zeros(free, dtype=np.int8)
    caps = [Cap(problem.heavy_leg, problem.heavy_leg.peak(reference))]
    answers = Heuristic(problem, problem.neutral, caps, problem.counters).first_answers(Clock())
    assert answers
    for answer in answers:
        assert all(cap.is_kept(answer) for cap in caps)
        assert all(counter.value(answer) <= counter.cap for counter in problem.counters)
    peaks = [problem.neutral.peak(answer) for answer in answers]
    assert peaks == sorted(peaks)
    assert peaks[0] < problem.neutral.peak(reference)


def test_annealing_is_the_same_every_time() -> None:
    problem = problem_of(20)
    one, other = (Heuristic(problem, problem.neutral, [], problem.counters).first_answers(Clock()) for _ in range(2))
    assert [answer.tolist() for answer in one] == [answer.tolist() for answer in other]


def test_descent_never_makes_an_answer_worse() -> None:
    problem = problem_of(20)
    heuristic = Heuristic(problem, problem.neutral, [], problem.counters)
    start = np.zeros(20, dtype=np.int8)
    better = heuristic.improved(start)
    assert problem.neutral.peak(better) <= problem.neutral.peak(start)
    assert heuristic.value(better) is not None


def test_answer_that_breaks_a_counter_has_no_value() -> None:
    problem = problem_of(8)
    one_moved = np.eye(8, dtype=np.int8)[0]
    assert Heuristic(problem, problem.neutral, [], problem.counters).value(one_moved) is None


def test_answer_above_a_cap_has_no_value() -> None:
    problem = problem_of(8)
    reference = np.zeros(8, dtype=np.int8)
    caps = [Cap(problem.neutral, problem.neutral.peak(reference) - 0.001)]
    assert Heuristic(problem, problem.neutral, caps, problem.counters).value(reference) is None
