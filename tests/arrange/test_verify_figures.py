"""The re-check of a plan's figures: each of them right, then each of them wrong by a little."""

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from balancer.arrange.results import Aim, ObjectiveName, ObjectiveResult, Options, Plan
from balancer.arrange.verify import verify_plan
from balancer.electrical.phasors import PanelCurrents, Peaks
from balancer.electrical.scenario_sets import share_scenarios
from balancer.electrical.scenarios import ScenarioKind
from balancer.errors import SelfCheckError
from balancer.panel import Installation, Load, PowerFactor, parse_landing


@pytest.fixture
def house(circuit, installation) -> Installation:
    """Four loads all on leg A but one, and a heater across both legs."""
    return installation(
        circuit("c1", "1", amps=8.0, breaker_type="gfci"),
        circuit("c2", "2", load=Load(neutral_a=6.0, neutral_pf=PowerFactor(0.8))),
        circuit("c3", "5", amps=4.0, effort=2.0),
        circuit("c4", "3", amps=3.0),
        circuit("c5", "9-11", "240", amps=20.0),
        main_a=100.0,
    )


def objective(name: ObjectiveName, value: float, bound: float | None = None) -> ObjectiveResult:
    return ObjectiveResult(
        name=name, value=value, bound=value if bound is None else bound, is_proven=True, proved_by="search"
    )


@pytest.fixture
def plan(house: Installation) -> Plan:
    """A plan with every figure right: c1 and c3 went to leg B, at efforts 1 + 0.5 and 2."""
    scenarios = share_scenarios(house, ["all on", "half"], np.array([[1.0] * 5, [0.5, 1.0, 0.5, 0.5, 0.5]]))
    as_left = house.as_found | {"c1": parse_landing("4"), "c3": parse_landing("7")}
    currents = PanelCurrents(house, scenarios)
    peaks = currents.peaks(as_left)
    neutral_a = peaks.neutral.value_a
    (case,) = currents.cases(as_left)
    projected = case.difference_phasor_a * case.sum_phasor_a.conj() / np.abs(case.sum_phasor_a)
    projected_a = float(np.abs(projected.real).max())
    return Plan(
        installation=house,
        scenarios=scenarios,
        options=Options(within_a=0.0),
        as_found=house.as_found,
        as_left=as_left,
        peaks_as_found=currents.peaks(house.as_found),
        peaks_as_left=peaks,
        objectives=(
            objective(ObjectiveName.NEUTRAL, neutral_a),
            objective(ObjectiveName.IMBALANCE, projected_a),
            objective(ObjectiveName.HEAVY_LEG, peaks.heavy_leg.value_a),
            objective(ObjectiveName.EFFORT, 3.5),
            objective(ObjectiveName.MEAN_NEUTRAL, peaks.mean_neutral_a),
        ),
        optimum_peak_neutral_a=neutral_a,
        bound_peak_neutral_a=neutral_a - 0.04,
        is_proven=True,
        landings_changed=2,
        effort=3.5,
    )


def details_of(plan: Plan) -> tuple[str, ...]:
    with pytest.raises(SelfCheckError) as caught:
        verify_plan(plan)
    return caught.value.details


def with_objective(plan: Plan, name: ObjectiveName, **changes: Any) -> Plan:
    changed = tuple(replace(each, **changes) if each.name is name else each for each in plan.objectives)
    return replace(plan, objectives=changed)


def test_a_plan_with_every_figure_right_passes(plan: Plan) -> None:
    assert plan.peaks_as_left.imbalance.value_a < plan.objectives[1].value
    verify_plan(plan)


def test_what_is_wrong_with_the_landings_comes_alone(plan: Plan) -> None:
    wrong = replace(plan, as_left=plan.as_left | {"c1": parse_landing("3")}, effort=9.0)
    details = details_of(wrong)
    assert any("two breakers in one place" in each for each in details)
    assert not any("effort" in each for each in details)


def test_figures_as_found_belong_to_the_inventory(plan: Plan) -> None:
    assert details_of(replace(plan, as_found={})) == ("the landings as found are not those of the inventory",)
    (missing,) = details_of(replace(plan, peaks_as_found=None))
    assert "figures as found are given exactly where something was landed" in missing


def test_a_new_layout_has_no_figures_as_found(circuit, installation) -> None:
    house = installation(circuit("c1", amps=8.0), circuit("c2", amps=8.0))
    scenarios = share_scenarios(house, ["all on"], np.ones((1, 2)))
    as_left = {"c1": parse_landing("1"), "c2": parse_landing("3")}
    peaks = PanelCurrents(house, scenarios).peaks(as_left)
    new = Plan(
        installation=house,
        scenarios=scenarios,
        options=Options(),
        as_found={},
        as_left=as_left,
        peaks_as_found=None,
        peaks_as_left=peaks,
        objectives=(objective(ObjectiveName.NEUTRAL, 0.0),),
        optimum_peak_neutral_a=0.0,
        bound_peak_neutral_a=0.0,
        is_proven=True,
        landings_changed=0,
        effort=0.0,
    )
    verify_plan(new)
    (told,) = details_of(replace(new, peaks_as_found=peaks))
    assert "and here they are not" in told


PEAKS = {"leg_a": "leg A", "leg_b": "leg B", "heavy_leg": "heavy leg", "imbalance": "imbalance", "neutral": "neutral"}


def wrong_peaks(peaks: Peaks, name: str) -> tuple[Peaks, Peaks]:
    """The same peaks with one value off by 10 microamperes, and with the other of two scenarios told."""
    peak = getattr(peaks, name)
    off = replace(peaks, **{name: replace(peak, value_a=peak.value_a + 1e-5)})
    return off, replace(peaks, **{name: replace(peak, scenario=1 - peak.scenario)})


@pytest.mark.parametrize("when", ["as found", "as left"])
@pytest.mark.parametrize(("name", "words"), PEAKS.items(), ids=PEAKS)
def test_every_peak_is_recomputed(plan: Plan, when: str, name: str, words: str) -> None:
    attribute = "peaks_" + when.replace(" ", "_")
    value_off, scenario_off = wrong_peaks(getattr(plan, attribute), name)
    (detail,) = details_of(replace(plan, **{attribute: value_off}))
    assert detail.startswith(f"peak {words} {when}: ")
    assert detail.endswith(" A is right")
    (detail,) = details_of(replace(plan, **{attribute: scenario_off}))
    assert detail == f"peak {words} {when}: it does not happen in the scenario that is told"


@pytest.mark.parametrize("name", ["mean_neutral_a", "imbalance_pct", "largest_possible_neutral_a"])
def test_every_single_figure_is_recomputed(plan: Plan, name: str) -> None:
    told = replace(plan.peaks_as_left, **{name: getattr(plan.peaks_as_left, name) - 1e-5})
    (detail,) = details_of(replace(plan, peaks_as_left=told))
    assert detail.startswith(f"{name.removesuffix('_a').replace('_', ' ')} as left: ")


def test_landings_and_effort_are_counted_again(plan: Plan) -> None:
    assert details_of(replace(plan, landings_changed=3)) == ("3 landings changed are told, 2 is right",)
    assert details_of(replace(plan, effort=3.0)) == ("an effort of 3 is told, 3.5 is right",)
    verify_plan(replace(plan, effort=3.5005))


@pytest.mark.parametrize("name", ObjectiveName)
def test_an_objective_is_not_better_than_what_is_left(plan: Plan, name: ObjectiveName) -> None:
    value = next(each.value for each in plan.objectives if each.name is name) - 0.01
    details = details_of(with_objective(plan, name, value=value, bound=value))
    assert details == (f"{name}: {value:.6f} is told and {value + 0.01:.6f} is left",)


@pytest.mark.parametrize(
    "name", [ObjectiveName.NEUTRAL, ObjectiveName.IMBALANCE, ObjectiveName.HEAVY_LEG, ObjectiveName.EFFORT]
)
def test_only_peaks_may_be_given_away(plan: Plan, name: ObjectiveName) -> None:
    value = next(each.value for each in plan.objectives if each.name is name) - 0.2
    generous = replace(plan, options=replace(plan.options, within_a=0.25))
    generous = with_objective(generous, name, value=value, bound=value)
    if name is ObjectiveName.EFFORT:
        assert len(details_of(generous)) == 1
    else:
        verify_plan(generous)


@pytest.mark.parametrize(
    "name", [ObjectiveName.NEUTRAL, ObjectiveName.IMBALANCE, ObjectiveName.HEAVY_LEG, ObjectiveName.MEAN_NEUTRAL]
)
def test_nothing_is_below_its_bound(plan: Plan, name: ObjectiveName) -> None:
    value = next(each.value for each in plan.objectives if each.name is name) + 0.01
    details = details_of(with_objective(plan, name, value=value, bound=value))
    assert f"{name}: {value - 0.01:.6f} is left, which is below the bound {value:.6f}" in details


def test_a_mean_neutral_is_the_arrangements_own(plan: Plan) -> None:
    value = plan.peaks_as_left.mean_neutral_a + 0.01
    (detail,) = details_of(with_objective(plan, ObjectiveName.MEAN_NEUTRAL, value=value, bound=value - 0.02))
    assert detail == f"mean neutral: {value:.6f} is told and {value - 0.01:.6f} is left"


def test_a_bound_is_not_above_its_value(plan: Plan) -> None:
    (detail,) = details_of(with_objective(plan, ObjectiveName.EFFORT, bound=3.6))
    assert detail == "effort: the bound 3.6 is above the value 3.5"


def test_what_is_no_number_is_wrong(plan: Plan) -> None:
    assert len(details_of(with_objective(plan, ObjectiveName.HEAVY_LEG, value=float("nan")))) == 3
    assert details_of(replace(plan, bound_peak_neutral_a=float("nan")))


@pytest.mark.parametrize(
    ("kind", "gap_a", "is_well"),
    [
        (ScenarioKind.SCENARIOS, 0.05, True),
        (ScenarioKind.SCENARIOS, 0.051, False),
        (ScenarioKind.READINGS, 0.01, True),
        (ScenarioKind.READINGS, 0.011, False),
    ],
)
def test_proven_says_how_near_the_bound_is(plan: Plan, kind: ScenarioKind, gap_a: float, is_well: bool) -> None:
    plan = replace(plan, scenarios=replace(plan.scenarios, kind=kind), bound_peak_neutral_a=plan.optimum_peak_neutral_a)
    loose = with_objective(plan, ObjectiveName.HEAVY_LEG, bound=plan.peaks_as_left.heavy_leg.value_a - gap_a)
    if is_well:
        verify_plan(loose)
    else:
        (detail,) = details_of(loose)
        assert detail.startswith("peak heavy leg: it is called proven and its bound is ")
    verify_plan(with_objective(loose, ObjectiveName.HEAVY_LEG, is_proven=False, proved_by=""))


def test_a_proven_plan_has_its_neutral_near_the_bound(plan: Plan) -> None:
    loose = replace(plan, bound_peak_neutral_a=plan.optimum_peak_neutral_a - 0.06)
    (detail,) = details_of(loose)
    assert detail.startswith("the plan is called proven and its bound is 0.06 A below")
    verify_plan(replace(loose, is_proven=False))


def test_the_bound_of_the_neutral_is_below_all(plan: Plan) -> None:
    optimum_a = plan.optimum_peak_neutral_a
    above_both = details_of(replace(plan, bound_peak_neutral_a=optimum_a + 0.01))
    assert [each.split(",")[0] for each in above_both] == [
        "the bound of the peak neutral",
        "the peak neutral as left",
    ]
    (detail,) = details_of(
        replace(plan, bound_peak_neutral_a=optimum_a + 0.01, optimum_peak_neutral_a=optimum_a + 0.02)
    )
    assert detail.startswith("the peak neutral as left")
    assert "is below its bound" in detail


def test_the_neutral_is_near_the_optimum_where_it_comes_first(plan: Plan) -> None:
    optimum_a = plan.optimum_peak_neutral_a - 0.2
    lower = replace(plan, optimum_peak_neutral_a=optimum_a, bound_peak_neutral_a=optimum_a)
    (detail,) = details_of(lower)
    assert "is over 0 A above the optimum" in detail
    verify_plan(replace(lower, options=Options(within_a=0.25)))
    verify_plan(replace(lower, options=Options(within_a=0.0, aim=Aim.LEGS)))


@pytest.mark.parametrize(
    ("main_a", "kind", "is_well"),
    [
        (35.0, ScenarioKind.SCENARIOS, True),
        (34.0, ScenarioKind.SCENARIOS, False),
        (34.0, ScenarioKind.PROFILES, False),
        (34.0, ScenarioKind.CONNECTED, True),
        (None, ScenarioKind.SCENARIOS, True),
    ],
)
def test_no_leg_is_above_the_main(plan: Plan, main_a: float | None, kind: ScenarioKind, is_well: bool) -> None:
    assert plan.peaks_as_left.heavy_leg.value_a == pytest.approx(20 + 8 + 4 + 3)
    house = replace(plan.installation, panel=replace(plan.installation.panel, main_a=main_a))
    plan = replace(plan, installation=house, scenarios=replace(plan.scenarios, kind=kind))
    if is_well:
        verify_plan(plan)
    else:
        (detail,) = details_of(plan)
        assert detail.endswith("A behind a main of 34 A")
