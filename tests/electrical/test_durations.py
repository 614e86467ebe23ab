import numpy as np
import pytest

from balancer.electrical.durations import (
    distribution,
    hours_above,
    judge_part,
    levels_below,
    mean_square_neutral,
    neutral_loss_kwh,
    spread,
)
from balancer.electrical.phasors import LegCurrents
from balancer.electrical.scenarios import ScenarioKind, Scenarios
from balancer.panel import Terminal


def leg_currents(leg_a, leg_b) -> LegCurrents:
    leg_a, leg_b = (np.asarray(leg, dtype=np.float32) for leg in (leg_a, leg_b))
    return LegCurrents(
        leg_a=leg_a,
        leg_b=leg_b,
        heavy_leg=np.maximum(leg_a, leg_b),
        imbalance=np.abs(leg_a - leg_b),
        neutral=np.abs(leg_a - leg_b),
    )


def test_spread_is_made_of_readings_that_were_reached() -> None:
    found = spread(np.random.default_rng(3).permutation(np.arange(1.0, 201.0)))
    assert (found.median_a, found.p95_a, found.p99_a, found.peak_a) == (100, 190, 198, 200)


def test_a_spread_says_what_that_share_of_the_intervals_stays_at_or_below() -> None:
    values = np.random.default_rng(5).exponential(4.0, 1237).astype(np.float32)
    found = spread(values)
    for share, level_a in ((0.5, found.median_a), (0.95, found.p95_a), (0.99, found.p99_a), (1.0, found.peak_a)):
        assert level_a in values
        assert np.mean(values <= level_a) >= share
        assert np.mean(values < level_a) < share


def test_spread_of_one_interval_is_that_interval() -> None:
    found = spread(np.array([7.5]))
    assert {found.median_a, found.p95_a, found.p99_a, found.peak_a} == {7.5}


def test_distribution_keeps_the_quantities_apart() -> None:
    found = distribution(leg_currents([10, 20], [4, 30]))
    assert (found.neutral.peak_a, found.imbalance.peak_a, found.heavy_leg.peak_a) == (10, 10, 30)


@pytest.mark.parametrize(
    ("peak_a", "expected"),
    [
        pytest.param(33.0, (5, 10, 20, 30), id="the highest four"),
        pytest.param(30.0, (2, 5, 10, 20), id="a peak at a level is not above it"),
        pytest.param(30.0004, (2, 5, 10, 20), id="nor is one that single precision put a hair above"),
        pytest.param(0.3, (0.1, 0.2), id="few levels below a small peak"),
        pytest.param(0.0, (), id="nothing flows"),
    ],
)
def test_levels_are_round_and_below_the_peak(peak_a, expected) -> None:
    assert levels_below(peak_a) == expected


def test_hours_are_scaled_to_a_year_from_the_hours_covered() -> None:
    # 672 hours of 15 minutes' readings, 42 of them above 10 A: 42 / 672 x 8760 = 547.5 h.
    values = np.full(2688, 10.0, dtype=np.float32)
    values[:168] = 10.5
    assert hours_above(values, 10) == pytest.approx(547.5)


def test_a_hair_above_a_level_is_at_it() -> None:
    assert hours_above(np.array([10.0004, 10.0]), 10) == 0
    assert hours_above(np.array([10.001, 10.0]), 10) == 4380


def test_neutral_loss_is_that_of_a_resistance() -> None:
    # 0.1 ohm at 10 A is 10 W: 87.6 kWh in 8760 hours; 0 A half of the time halves it.
    steady, half = leg_currents([10, 10], [0, 0]), leg_currents([10, 4], [0, 4])
    assert neutral_loss_kwh(mean_square_neutral(steady), 0.1) == pytest.approx(87.6)
    assert neutral_loss_kwh(mean_square_neutral(half), 0.1) == pytest.approx(43.8)


def test_a_year_of_minutes_sums_without_losing_digits() -> None:
    year = leg_currents(np.full(525_600, 33.3), np.zeros(525_600))
    assert mean_square_neutral(year) == pytest.approx(33.3**2, rel=1e-6)


def test_a_part_is_judged_as_found_and_as_left(build) -> None:
    installation = build.installation(build.single("one", 10, 1), build.single("two", 10, 2))
    amps = np.array([[8.0, 6.0], [3.0, 2.0]])
    scenarios = Scenarios(
        kind=ScenarioKind.READINGS, names=("first", "second"), neutral_a=amps, line_a=np.zeros_like(amps)
    )
    part = judge_part(installation, "from a day on", scenarios, {"one": (Terminal(1),), "two": (Terminal(3),)})
    assert part.as_found is not None
    assert (part.label, part.intervals) == ("from a day on", 2)
    assert part.as_found.neutral.peak_a == pytest.approx(14)
    assert part.as_left.neutral.peak_a == pytest.approx(2)


def test_a_part_of_a_panel_with_nothing_landed_has_no_figures_as_found(build) -> None:
    installation = build.installation(build.single("one", 10))
    amps = np.array([[8.0]])
    scenarios = Scenarios(kind=ScenarioKind.READINGS, names=("only",), neutral_a=amps, line_a=np.zeros_like(amps))
    part = judge_part(installation, "before", scenarios, {"one": (Terminal(1),)})
    assert part.as_found is None
    assert part.as_left.neutral.peak_a == pytest.approx(8)
