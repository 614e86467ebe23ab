"""Logs whose lowest peak neutral is known by hand, and what may or may not change it."""

import itertools
import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray
from oracles.readings_logs import dense_log, plain_panel, readings

from balancer.arrange.plan import plan_arrangement
from balancer.arrange.results import Options
from balancer.arrange.seats import build_units
from balancer.arrange.thin import reaches
from balancer.electrical.scenarios import Scenarios
from balancer.panel import Installation, PowerFactor

VALUE = 2e-4
"""Amps that two searches for one optimum may differ by."""


@pytest.fixture(params=[0, 10_000], ids=["thinned", "whole"], autouse=True)
def few(request: pytest.FixtureRequest, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("balancer.arrange.plan.FEW", request.param)


def lowest(installation: Installation, scenarios: Scenarios, max_landings: int | None = None) -> float:
    plan = plan_arrangement(installation, scenarios, Options(within_a=0.0, max_landings=max_landings))
    assert plan.is_proven
    assert plan.peaks_as_left.neutral.value_a == pytest.approx(plan.objectives[0].value, abs=VALUE)
    return plan.objectives[0].value


def two_at_a_time(pairs: Sequence[tuple[int, int]], amps: Sequence[float], circuits: int) -> Scenarios:
    """In every interval two circuits run at equal amps: nothing in the neutral on opposite legs, else their sum."""
    rows = np.zeros((len(pairs), circuits))
    for row, (pair, each) in enumerate(zip(pairs, amps, strict=True)):
        rows[row, list(pair)] = each
    return readings(rows)


@pytest.mark.parametrize("circuits", [4, 8, 14])
def test_an_even_ring_of_circuits_that_run_two_at_a_time_cancels(circuits: int) -> None:
    ring = [(i, (i + 1) % circuits) for i in range(circuits)]
    log = two_at_a_time(ring, [7.0] * circuits, circuits)
    assert lowest(plain_panel([7.0] * circuits), log) == pytest.approx(0.0, abs=VALUE)


@pytest.mark.parametrize("circuits", [3, 5, 13])
def test_an_odd_ring_pays_twice_for_its_lightest_two(circuits: int) -> None:
    """An odd ring has two neighbours on one leg wherever its circuits go."""
    ring = [(i, (i + 1) % circuits) for i in range(circuits)]
    amps = [3.0 + 0.5 * ((5 * i) % circuits) for i in range(circuits)]
    assert lowest(plain_panel([12.0] * circuits), two_at_a_time(ring, amps, circuits)) == pytest.approx(6.0, abs=VALUE)


def test_three_that_run_two_at_a_time_beside_a_year_of_little_else() -> None:
    chance = np.random.default_rng(1)
    rows = np.round(chance.uniform(0.0, 0.4, (5000, 9)), 3)
    for row, pair in zip((100, 2000, 4000), itertools.combinations(range(3), 2), strict=True):
        rows[row] = 0.0
        rows[row, list(pair)] = (10.0, 10.0)
    assert lowest(plain_panel([10.0] * 9), readings(rows)) == pytest.approx(20.0, abs=VALUE)


@pytest.mark.parametrize(("landings", "neutral_a"), [(0, 21.0), (1, 9.0), (2, 1.0), (3, 1.0)])
def test_each_landing_buys_what_can_be_counted_on_the_fingers(landings: int, neutral_a: float) -> None:
    """Of 6, 5, 4, 3, 2 and 1 A on one leg, one moved leaves 21 - 2 x 6, two leave 21 - 2 x (6 + 4)."""
    installation = plain_panel([6.0, 5.0, 4.0, 3.0, 2.0, 1.0])
    spaces = [s.number for s in installation.panel.spaces if s.leg is installation.panel.spaces[0].leg]
    circuits = tuple(
        replace(circuit, landing=(replace(circuit.landing[0], space=space),))
        for circuit, space in zip(installation.circuits, spaces, strict=False)
    )
    log = readings(np.array([[6.0, 5.0, 4.0, 3.0, 2.0, 1.0], [0.1] * 6]))
    assert lowest(replace(installation, circuits=circuits), log, landings) == pytest.approx(neutral_a, abs=VALUE)


def test_what_power_factors_leave_in_the_neutral() -> None:
    """3 A at unity opposite 5 A at 0.6 lagging, 3 - 4j: the 4 A that no real load cancels are left."""
    installation = plain_panel([3.0, 5.0], [PowerFactor(), PowerFactor(0.6)])
    assert lowest(installation, readings(np.array([[3.0, 5.0], [1.0, 1.0]]))) == pytest.approx(4.0, abs=VALUE)
    leading = plain_panel([5.0, 5.0], [PowerFactor(0.8, is_leading=True), PowerFactor(0.8)])
    apart, together = 2 * 5 * 0.6, 2 * 5 * 0.8
    assert lowest(leading, readings(np.array([[5.0, 5.0]] * 2))) == pytest.approx(min(apart, together), abs=VALUE)


def dense(seed: int) -> tuple[Installation, Scenarios]:
    return dense_log(seed, 11, 300, mixed=seed % 2 == 1)


def rows_of(scenarios: Scenarios, rows: NDArray[np.intp]) -> Scenarios:
    return scenarios.subset(rows.tolist())


@pytest.mark.parametrize("seed", range(6))
def test_more_intervals_never_lower_the_optimum(seed: int) -> None:
    installation, scenarios = dense(seed)
    order = np.random.default_rng(seed).permutation(len(scenarios))
    values = [lowest(installation, rows_of(scenarios, order[:count])) for count in (5, 20, 80, 300)]
    assert all(fewer <= more + VALUE for fewer, more in itertools.pairwise(values))
    assert values[0] < values[-1]


@pytest.mark.parametrize("seed", range(4))
def test_intervals_repeated_and_in_any_order_change_nothing(seed: int) -> None:
    installation, scenarios = dense(seed)
    repeated = np.random.default_rng(seed).permutation(np.repeat(np.arange(len(scenarios)), 3))
    one, other = (
        plan_arrangement(installation, each, Options(within_a=0.0))
        for each in (scenarios, rows_of(scenarios, repeated))
    )
    assert one.as_left == other.as_left
    for result, again in zip(one.objectives, other.objectives, strict=True):
        assert result.value == pytest.approx(again.value, abs=VALUE)


@pytest.mark.parametrize("seed", range(6))
def test_intervals_that_cannot_matter_may_go(seed: int) -> None:
    installation, scenarios = dense(seed)
    optimum = lowest(installation, scenarios)
    units = build_units(installation, Options())
    kept = reaches(installation, scenarios, units).matter(optimum - 1e-3)
    assert 0 < len(kept) < len(scenarios)
    assert lowest(installation, rows_of(scenarios, kept)) == pytest.approx(optimum, abs=VALUE)


@pytest.mark.parametrize("seed", range(4))
def test_an_interval_between_two_others_changes_nothing(seed: int) -> None:
    """What a mixture of intervals puts in the neutral is at most what the worse of them does; signs do not matter."""
    installation, scenarios = dense(seed)
    chance = np.random.default_rng(seed)
    amps = scenarios.neutral_a
    shares = chance.random((100, 1))
    first, second = chance.integers(len(amps), size=(2, 100))
    between = shares * amps[first] + (1.0 - shares) * amps[second]
    more = readings(np.concatenate([amps, between]))
    assert lowest(installation, more) == pytest.approx(lowest(installation, scenarios), abs=VALUE)


def test_a_lighter_interval_may_set_the_peak() -> None:
    """Every current of the second interval is at or below the first's, and its neutral is the higher one."""
    installation = plain_panel([10.0, 10.0])
    full, half = np.array([[10.0, 10.0]]), np.array([[10.0, 2.0]])
    assert lowest(installation, readings(full)) == pytest.approx(0.0, abs=VALUE)
    assert lowest(installation, readings(np.concatenate([full, half]))) == pytest.approx(8.0, abs=VALUE)
    assert math.isclose(lowest(installation, readings(half)), 8.0, abs_tol=VALUE)
