"""Plans against every arrangement of small panels and every pattern of legs of larger ones, listed outright."""

import numpy as np
import pytest
from oracles.brute_force import (
    SPARE_MOVED,
    Cost,
    Enumeration,
    Figures,
    enumerate_arrangements,
    figures,
    keeps_main,
    pattern,
)
from oracles.leg_counts import every_pattern
from oracles.made_up_panels import (
    plain_installation,
    short_conductors,
    small_installation,
    some_options,
    some_scenarios,
)

from balancer.arrange.plan import plan_arrangement
from balancer.arrange.results import Aim, ObjectiveName, Options, Plan
from balancer.arrange.stages import SCENARIO_TOLERANCE_A
from balancer.electrical.scenarios import Scenarios
from balancer.errors import InfeasibleError
from balancer.panel import Installation, Role

SEEDS = range(120)
MILLIAMP = 1e-3


class Answers:
    """What is left of the listed patterns of legs, objective after objective."""

    def __init__(self, listed: Enumeration, scenarios: Scenarios) -> None:
        installation = listed.installation
        self.signs = np.array(list(listed.cheapest), dtype=np.int8).reshape(-1, len(installation.circuits))
        self.costs = list(listed.cheapest.values())
        self.figures = figures(installation, scenarios, self.signs) if len(self.signs) else None
        self.left = np.zeros(0, dtype=bool)
        if self.figures is not None:
            self.left = keeps_main(installation, scenarios, self.figures)

    def best(self, name: ObjectiveName) -> float:
        assert self.figures is not None
        return float(self.figures.of(name)[self.left].min())

    def hold(self, name: ObjectiveName, value: float) -> None:
        assert self.figures is not None
        self.left &= self.figures.of(name) <= value + 1e-6

    @property
    def least(self) -> Cost:
        return min((cost for cost, keep in zip(self.costs, self.left, strict=True) if keep), key=self._key)

    def hold_cost(self, most: Cost) -> None:
        self.left &= np.array([self._key(cost) <= self._key(most) for cost in self.costs])

    @staticmethod
    def _key(cost: Cost) -> tuple[int, float]:
        return cost.removed, cost.effort


def outcome(installation: Installation, scenarios: Scenarios, options: Options) -> Plan | None:
    """Give the plan, or None where the planner says that none exists; any other error fails the test."""
    try:
        return plan_arrangement(installation, scenarios, options)
    except InfeasibleError:
        return None


def assert_least_cost(plan: Plan, answers: Answers) -> None:
    """No other arrangement gives up fewer spares or, with as few, takes less effort; moved spares cost but a hair."""
    spares = [c for c in plan.installation.circuits if c.role is Role.SPARE and c.landing]
    moved = sum(c.landing != plan.as_left[c.label] for c in spares if c.label in plan.as_left)
    cost = (len(plan.removed_spares), plan.effort + moved * SPARE_MOVED)
    assert cost == pytest.approx(Answers._key(answers.least), abs=1e-6)
    answers.hold_cost(answers.least)


def assert_objectives_agree(plan: Plan, answers: Answers) -> None:
    for result in plan.objectives:
        assert result.is_proven, result.name
        if result.name is ObjectiveName.EFFORT:
            assert_least_cost(plan, answers)
            continue
        best = answers.best(result.name)
        assert result.value == pytest.approx(best, abs=MILLIAMP), result.name
        assert result.bound <= best + 1e-6, result.name
        answers.hold(result.name, result.value)


def evaluated(plan: Plan) -> Figures:
    signs = np.array([pattern(plan.installation, plan.as_left)], dtype=np.int8)
    return figures(plan.installation, plan.scenarios, signs)


@pytest.mark.parametrize("seed", SEEDS)
def test_plan_is_the_best_of_all_arrangements(seed: int) -> None:
    installation, options = small_installation(seed), some_options(seed)
    scenarios = some_scenarios(seed, installation)
    listed = enumerate_arrangements(installation, options)
    answers = Answers(listed, scenarios)
    plan = outcome(installation, scenarios, options)
    assert (plan is not None) == bool(answers.left.any())
    if plan is None:
        return
    assert plan.is_proven
    assert listed.allows(plan.as_left)
    assert_objectives_agree(plan, answers)
    neutral = evaluated(plan).neutral[0]
    assert plan.peaks_as_left.neutral.value_a == pytest.approx(neutral, abs=1e-6)
    assert plan.bound_peak_neutral_a <= neutral + 1e-6


@pytest.mark.parametrize(
    ("seed", "free", "options"),
    [
        (0, 18, Options(within_a=0.0)),
        (1, 14, Options(within_a=0.0, turn_240=True, aim=Aim.LEGS)),
        (2, 14, Options(within_a=0.0, max_landings=3)),
        (3, 14, Options(within_a=0.0, aim=Aim.LEGS)),
        (4, 13, Options(within_a=0.0, max_landings=5)),
        (5, 13, Options(within_a=0.0)),
        (6, 15, Options(within_a=0.0, max_landings=1)),
        (7, 15, Options(within_a=0.0, max_landings=0)),
        (8, 12, Options(within_a=0.0, aim=Aim.LEGS)),
        (12, 14, Options(within_a=0.0, turn_240=True, max_landings=4)),
        (13, 14, Options(within_a=0.5)),
        (18, 12, Options(within_a=0.5, aim=Aim.LEGS)),
    ],
)
def test_plan_is_the_best_of_all_patterns_of_legs(seed: int, free: int, options: Options) -> None:
    installation = plain_installation(seed, free)
    scenarios = some_scenarios(seed, installation, count=4)
    signs, landings = every_pattern(installation, options)
    values = figures(installation, scenarios, signs)
    plan = plan_arrangement(installation, scenarios, options)
    assert plan.is_proven
    left = np.ones(len(signs), dtype=bool)
    for result in plan.objectives:
        assert result.is_proven, result.name
        if result.name is ObjectiveName.EFFORT:
            assert result.value == landings[left].min()
            left &= landings == landings[left].min()
            continue
        best = values.of(result.name)[left].min()
        assert result.value == pytest.approx(best, abs=MILLIAMP), result.name
        assert result.bound <= best + 1e-6, result.name
        left &= values.of(result.name) <= result.value + options.within_a + 1e-6
    assert plan.bound_peak_neutral_a <= values.neutral.min() + 1e-6


@pytest.mark.parametrize("seed", range(4))
def test_plan_is_proven_where_most_legs_have_no_seats(seed: int) -> None:
    installation, options = short_conductors(seed), Options(within_a=0.0)
    scenarios = some_scenarios(seed, installation)
    plan = plan_arrangement(installation, scenarios, options)
    assert_objectives_agree(plan, Answers(enumerate_arrangements(installation, options), scenarios))


@pytest.fixture
def no_search(monkeypatch: pytest.MonkeyPatch) -> None:
    """Leave everything to the solver, as on panels that are too large to search."""
    monkeypatch.setattr("balancer.arrange.peaks._ROUNDS", ((0.0, 60.0),))
    monkeypatch.setattr("balancer.arrange.stages._SEARCH_WORK", 0.0)


def assert_solved_objectives_agree(plan: Plan, answers: Answers) -> None:
    """Peaks proven to the tolerance, effort exactly; the mean neutral is not proven without the search."""
    for result in plan.objectives:
        if result.name is ObjectiveName.MEAN_NEUTRAL:
            assert result.bound <= answers.best(result.name) + 1e-6
            continue
        assert result.is_proven, result.name
        assert result.proved_by != "search", result.name
        if result.name is ObjectiveName.EFFORT:
            assert_least_cost(plan, answers)
            continue
        best = answers.best(result.name)
        assert best - 1e-6 <= result.value <= best + SCENARIO_TOLERANCE_A + 1e-6, result.name
        assert result.bound <= best + 1e-6, result.name
        answers.hold(result.name, result.value)


@pytest.mark.usefixtures("no_search")
@pytest.mark.parametrize("seed", range(300, 330))
def test_plan_by_the_solver_alone_is_the_best_within_the_tolerance(seed: int) -> None:
    installation, options = small_installation(seed), some_options(seed)
    scenarios = some_scenarios(seed, installation)
    listed = enumerate_arrangements(installation, options)
    answers = Answers(listed, scenarios)
    plan = outcome(installation, scenarios, options)
    assert (plan is not None) == bool(answers.left.any())
    if plan is not None:
        assert listed.allows(plan.as_left)
        assert_solved_objectives_agree(plan, answers)


@pytest.mark.usefixtures("no_search")
@pytest.mark.parametrize("seed", range(4))
def test_solver_alone_finds_legs_that_have_seats(seed: int) -> None:
    installation, options = short_conductors(seed), Options(within_a=0.0)
    scenarios = some_scenarios(seed, installation)
    plan = plan_arrangement(installation, scenarios, options)
    assert_solved_objectives_agree(plan, Answers(enumerate_arrangements(installation, options), scenarios))
