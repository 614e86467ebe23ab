"""Plans on whole logs against every pattern of legs in every interval, against HiGHS, and search against solver."""

import numpy as np
import pytest
from oracles.leg_counts import switches
from oracles.readings_logs import Whole, dense_log, four_weeks, metered_house

from balancer.arrange.plan import plan_arrangement
from balancer.arrange.results import Options, Plan
from balancer.arrange.stages import READINGS_TOLERANCE_A
from balancer.electrical.scenarios import Scenarios
from balancer.panel import Installation

MILLIAMP = 1e-3
LIGHTS = ("lights_2", "lights_3", "lights_4")
FIXED = (*LIGHTS, "garage", "hall_outlets")

HOUSES = [
    pytest.param({"fixed": LIGHTS, "unity": True}, Options(within_a=0.0), id="18 free, unity power factor"),
    pytest.param({"fixed": LIGHTS}, Options(within_a=0.0), id="18 free"),
    pytest.param({"fixed": FIXED}, Options(within_a=0.0, max_landings=2), id="2 landings"),
    pytest.param({"fixed": LIGHTS}, Options(within_a=0.0, max_landings=5), id="18 free, 5 landings"),
    pytest.param({"fixed": FIXED, "pair": True}, Options(within_a=0.0, turn_240=True), id="pair, 240 V turned"),
    pytest.param(
        {"fixed": FIXED, "pair": True},
        Options(within_a=0.0, max_landings=4, turn_240=True),
        id="pair, 240 V turned, 4 landings",
    ),
]


@pytest.fixture(scope="module")
def log() -> Scenarios:
    return four_weeks(metered_house())


@pytest.mark.parametrize(("house", "options"), HOUSES)
def test_plan_is_the_best_of_all_patterns_in_all_intervals_of_four_weeks(
    house: dict[str, bool], options: Options, log: Scenarios
) -> None:
    installation = metered_house(**house)
    whole = Whole.of(installation, log, options)
    assert len(switches(installation, options)) >= 15
    assert log.neutral_a.dtype == np.float32, "single precision must pass the re-check too"
    first = plan_arrangement(installation, log, options).objectives[0]
    exhausted = whole.exhausted()
    assert first.is_proven
    assert first.value == pytest.approx(exhausted, abs=MILLIAMP)
    assert first.bound <= exhausted + 1e-6
    assert whole.solved() == pytest.approx(exhausted, abs=MILLIAMP)


@pytest.mark.parametrize("mixed", [False, True], ids=["unity", "mixed power factor"])
def test_dense_logs_agree_with_highs_and_with_every_pattern(mixed: bool) -> None:
    installation, scenarios = dense_log(1, 13, 700, mixed=mixed)
    options = Options(within_a=0.0)
    whole = Whole.of(installation, scenarios, options)
    first = plan_arrangement(installation, scenarios, options).objectives[0]
    assert len(whole.phasors) > 600, "hardly two rows are equal"
    assert first.value == pytest.approx(whole.exhausted(), abs=MILLIAMP)
    assert whole.solved() == pytest.approx(first.value, abs=MILLIAMP)


def planned_by_solver(
    installation: Installation, scenarios: Scenarios, options: Options, monkeypatch: pytest.MonkeyPatch
) -> Plan:
    monkeypatch.setattr("balancer.arrange.peaks._ROUNDS", ((0.0, 60.0),))
    monkeypatch.setattr("balancer.arrange.stages._SEARCH_WORK", 0.0)
    return plan_arrangement(installation, scenarios, options)


@pytest.mark.parametrize("thins", [True, False], ids=["thinned", "whole"])
@pytest.mark.parametrize(
    ("mixed", "options"),
    [
        pytest.param(False, Options(within_a=0.0), id="unity"),
        pytest.param(True, Options(within_a=0.0), id="mixed"),
        pytest.param(True, Options(within_a=0.0, max_landings=3), id="mixed, 3 landings"),
    ],
)
def test_search_and_solver_agree(mixed: bool, options: Options, thins: bool, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("balancer.arrange.plan.FEW", 0 if thins else 10_000)
    installation, scenarios = dense_log(3, 12, 900, mixed=mixed)
    searched = plan_arrangement(installation, scenarios, options).objectives[0]
    solved = planned_by_solver(installation, scenarios, options, monkeypatch).objectives[0]
    assert (searched.proved_by, solved.proved_by) == ("search", "solver")
    assert searched.is_proven
    assert solved.is_proven
    assert solved.bound - MILLIAMP <= searched.value <= solved.value + MILLIAMP
    assert solved.value <= searched.value + READINGS_TOLERANCE_A + 1e-6
