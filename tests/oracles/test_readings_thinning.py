"""Intervals that are left out: none of them can matter, and plans are the same as with all of them."""

from dataclasses import replace

import numpy as np
import pytest
from oracles.brute_force import enumerate_arrangements, figures
from oracles.made_up_panels import SUPPLIES, plain_installation, small_installation, some_options
from oracles.readings_logs import dense_log, plain_panel, readings

from balancer.arrange.plan import Planner, plan_arrangement
from balancer.arrange.results import Aim, ObjectiveName, ObjectiveResult, Options, Plan, Stop
from balancer.arrange.seats import build_units
from balancer.arrange.stages import Stages
from balancer.arrange.thin import reaches
from balancer.electrical.scenarios import Scenarios
from balancer.errors import InfeasibleError
from balancer.panel import Installation, Supply, SupplySystem

VALUE = 2e-4
"""Amps that two searches for one optimum may differ by."""

NOTHING_FITS = (1201, 1204, 1207, 1208, 1213, 1221, 1230, 1231)
"""Seeds of panels that are too full for every arrangement."""


def random_log(seed: int, installation: Installation, rows: int) -> Scenarios:
    """Give readings of which a few tower over the rest."""
    rng = np.random.default_rng(seed)
    shares = rng.random((rows, len(installation.circuits))) * (rng.random((rows, 1)) ** 3)
    shares[:, rng.random(len(installation.circuits)) < 0.1] *= -1.0
    loads = [circuit.load for circuit in installation.circuits]
    return readings(
        shares * np.array([load.neutral_a for load in loads]), shares * np.array([load.line_a for load in loads])
    )


def outcome(installation: Installation, scenarios: Scenarios, options: Options) -> Plan | None:
    try:
        return plan_arrangement(installation, scenarios, options)
    except InfeasibleError:
        return None


@pytest.mark.parametrize("seed", [seed for seed in range(1200, 1240) if seed not in NOTHING_FITS])
def test_reach_is_never_below_the_highest_of_all_answers(seed: int) -> None:
    installation, options = small_installation(seed), some_options(seed)
    scenarios = random_log(seed, installation, 6)
    signs = np.array(list(enumerate_arrangements(installation, options).cheapest), dtype=np.int8)
    units = tuple(unit for unit in build_units(installation, options) if unit.placements)
    found = reaches(installation, scenarios, units)
    for row in range(len(scenarios)):
        values = figures(installation, scenarios.subset([row]), signs)
        assert values.neutral.max() <= found.neutral[row] + 1e-6
        assert values.imbalance.max() <= found.imbalance[row] + 1e-6
        assert values.heavy_leg.max() <= found.heavy_leg[row] + 1e-6
    assert found.least_heavy_a <= figures(installation, scenarios, signs).heavy_leg.min() + 1e-6


def test_reach_is_the_highest_of_all_answers_where_every_circuit_may_take_either_leg() -> None:
    installation, scenarios = dense_log(1, 8, 50)
    units = build_units(installation, Options())
    all_on_one_leg_a = scenarios.neutral_a.sum(axis=1)
    found = reaches(installation, scenarios, units)
    assert found.neutral == pytest.approx(all_on_one_leg_a, abs=1e-9)
    assert found.heavy_leg == pytest.approx(all_on_one_leg_a, abs=1e-9)
    assert found.least_heavy_a == pytest.approx(all_on_one_leg_a.max() / 2.0, abs=1e-9)


def assert_same(whole: Plan | None, thinned: Plan | None) -> None:
    assert (whole is None) == (thinned is None)
    if whole is None or thinned is None:
        return
    assert thinned.search_rows is not None
    assert whole.search_rows is None
    for one, other in zip(whole.objectives, thinned.objectives, strict=False):
        assert (one.name, one.is_proven) == (other.name, other.is_proven)
        assert one.value == pytest.approx(other.value, abs=VALUE), one.name
    assert len(whole.objectives) == len(thinned.objectives)
    assert whole.optimum_peak_neutral_a == pytest.approx(thinned.optimum_peak_neutral_a, abs=VALUE)
    assert whole.bound_peak_neutral_a == pytest.approx(thinned.bound_peak_neutral_a, abs=VALUE)
    assert whole.landings_changed == thinned.landings_changed


@pytest.fixture(params=[1.0, 2.0, 5.0], ids=["first peak as it is", "twice", "five times"])
def first_peak_times(request: pytest.FixtureRequest, monkeypatch: pytest.MonkeyPatch) -> float:
    """How far off the first good arrangement is: the higher its peak, the more intervals are left out at first."""
    factor, first_peak = float(request.param), Planner._first_peak
    monkeypatch.setattr(Planner, "_first_peak", lambda planner: factor * first_peak(planner))
    return factor


def assert_thinning_changes_nothing(
    installation: Installation, scenarios: Scenarios, options: Options, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("balancer.arrange.plan.FEW", len(scenarios))
    whole = outcome(installation, scenarios, options)
    monkeypatch.setattr("balancer.arrange.plan.FEW", 0)
    monkeypatch.setattr("balancer.arrange.thin._FIRST", 3)
    assert_same(whole, outcome(installation, scenarios, options))


@pytest.mark.usefixtures("first_peak_times")
@pytest.mark.parametrize("seed", range(1300, 1325))
def test_plan_is_the_same_with_and_without_the_intervals_left_out(seed: int, monkeypatch: pytest.MonkeyPatch) -> None:
    installation, options = small_installation(seed), some_options(seed)
    assert_thinning_changes_nothing(installation, random_log(seed, installation, 300), options, monkeypatch)


@pytest.mark.usefixtures("first_peak_times")
@pytest.mark.parametrize("aim", list(Aim))
@pytest.mark.parametrize("seed", range(len(SUPPLIES)))
def test_larger_plan_is_the_same_on_every_supply(seed: int, aim: Aim, monkeypatch: pytest.MonkeyPatch) -> None:
    installation = plain_installation(seed, 9)
    options = Options(aim=aim, within_a=0.0, max_landings=4 if seed % 2 else None)
    assert_thinning_changes_nothing(installation, random_log(seed, installation, 400), options, monkeypatch)


@pytest.mark.usefixtures("first_peak_times")
def test_lowest_neutral_is_right_where_keeping_the_legs_low_first_costs_more_than_the_cut(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """The lowest neutral of all, 8 A, is set in an interval that cannot matter while the legs come first."""
    monkeypatch.setattr("balancer.arrange.plan.FEW", 0)
    log = readings(
        np.array(
            [
                [1.0, 1.0, 0.0, 0.0],  # the heavy leg is lowest with the first two on opposite legs
                [10.0, 0.0, 10.0, 0.0],  # and then the third meets one of them on its leg: 20 A
                [0.0, 10.0, 10.0, 0.0],
                [0.0, 0.0, 0.0, 8.0],
            ]
        ),
        np.array([[100.0, 0.0, 0.0, 0.0], [0.0] * 4, [0.0] * 4, [0.0] * 4]),
    )
    plan = plan_arrangement(plain_panel([10.0, 10.0, 10.0, 8.0]), log, Options(aim=Aim.LEGS, within_a=0.0))
    assert plan.peaks_as_left.neutral.value_a == pytest.approx(20.0)
    assert plan.optimum_peak_neutral_a == pytest.approx(8.0, abs=VALUE)
    assert plan.bound_peak_neutral_a == pytest.approx(8.0, abs=VALUE)


def test_imbalance_is_right_where_export_hides_it_from_the_neutral(monkeypatch: pytest.MonkeyPatch) -> None:
    """On legs in phase the neutral carries the sum, next to nothing here, whatever the legs' difference is."""
    monkeypatch.setattr("balancer.arrange.plan.FEW", 0)
    installation = plain_panel([17.5, 12.5])
    in_phase = replace(installation.panel, supply=Supply(system=SupplySystem.IN_PHASE))
    log = readings(np.array([[17.5, 12.5], [7.0, -6.9]]))
    plan = plan_arrangement(replace(installation, panel=in_phase), log, Options(within_a=0.0))
    by_name = {result.name: result.value for result in plan.objectives}
    assert by_name[ObjectiveName.IMBALANCE] == pytest.approx(13.9, abs=VALUE)


def test_what_is_told_after_an_interruption_holds_in_the_intervals_left_out_too(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """Stopped with too much left out, planning tells no peak that an interval left out exceeds."""
    monkeypatch.setattr("balancer.arrange.plan.FEW", 0)
    first_peak, close_peaks = Planner._first_peak, Planner._close_peaks
    monkeypatch.setattr(Planner, "_first_peak", lambda planner: 3.0 * first_peak(planner))

    def interrupted(planner: Planner, stages: Stages) -> list[ObjectiveResult]:
        results = close_peaks(planner, stages)
        planner.clock._is_interrupted = True
        return results

    monkeypatch.setattr(Planner, "_close_peaks", interrupted)
    installation, scenarios = dense_log(2, 8, 200)
    plan = plan_arrangement(installation, scenarios, Options(within_a=0.0))
    assert plan.stop is Stop.INTERRUPTED
    assert not plan.is_proven
    assert plan.peaks_as_left.neutral.value_a <= plan.objectives[0].value + VALUE
