"""What changes nothing, what may only help and what may only harm."""

import itertools
import json
import os
import subprocess
import sys
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from oracles.made_up_panels import plain_installation, small_installation, some_options, some_scenarios

import balancer
from balancer.arrange.plan import plan_arrangement
from balancer.arrange.results import Aim, Options, Plan, Tradeoff
from balancer.arrange.tradeoff import trade_landings
from balancer.arrange.verify import verify_arrangement, verify_plan
from balancer.electrical.scenarios import Scenarios
from balancer.errors import InfeasibleError
from balancer.files import read_inventory, read_scenarios, save_inventory
from balancer.panel import Circuit, Installation, PowerFactor, SupplySystem, ordinary_spaces

SEEDS = range(700, 712)
VALUE = 2e-4
"""Amps that two searches for one optimum may differ by: what is closer than 0.1 mA counts as equal to either."""

DATA = Path(balancer.__file__).parents[1] / "data"
Change = Callable[[Circuit], Circuit]
seeds = st.integers(10_000, 20_000)
few = settings(max_examples=12, deadline=None, derandomize=True)


def plan_or_none(installation: Installation, scenarios: Scenarios, options: Options) -> Plan | None:
    try:
        return plan_arrangement(installation, scenarios, options)
    except InfeasibleError:
        return None


def problem(seed: int) -> tuple[Installation, Scenarios, Options]:
    installation = small_installation(seed)
    return installation, some_scenarios(seed, installation), replace(some_options(seed), within_a=0.25)


def values(plan: Plan) -> list[float]:
    return [result.value for result in plan.objectives]


def with_circuits(installation: Installation, change: Change) -> Installation:
    return replace(installation, circuits=tuple(change(circuit) for circuit in installation.circuits))


def assert_same_values(one: Plan | None, other: Plan | None) -> None:
    assert (one is None) == (other is None)
    if one is not None and other is not None:
        assert values(one) == pytest.approx(values(other), abs=VALUE)
        assert one.landings_changed == other.landings_changed


@pytest.mark.parametrize("seed", SEEDS)
def test_order_of_rows_changes_nothing(seed: int) -> None:
    installation, scenarios, options = problem(seed)
    order = np.random.default_rng(seed).permutation(len(installation.circuits)).tolist()
    shuffled = replace(installation, circuits=tuple(installation.circuits[index] for index in order))
    moved = replace(scenarios, neutral_a=scenarios.neutral_a[:, order], line_a=scenarios.line_a[:, order])
    one, other = (
        plan_or_none(installation, scenarios, options),
        plan_or_none(shuffled, moved.subset([2, 0, 1]), options),
    )
    assert (one is None) == (other is None)
    if one is not None and other is not None:
        assert one.as_left == other.as_left
        assert one.objectives == other.objectives


@pytest.mark.parametrize("seed", SEEDS)
def test_exchanging_the_names_of_the_legs_changes_no_value(seed: int) -> None:
    installation, scenarios, options = problem(seed)
    panel, supply = installation.panel, installation.panel.supply
    mirrored = replace(
        panel,
        spaces=tuple(replace(space, leg=space.leg.other) for space in panel.spaces),
        supply=replace(supply, leading_leg=supply.leading_leg.other if supply.leading_leg else None),
    )
    one = plan_or_none(installation, scenarios, options)
    other = plan_or_none(replace(installation, panel=mirrored), scenarios, options)
    assert_same_values(one, other)


@pytest.mark.parametrize("seed", SEEDS)
def test_lead_and_lag_exchanged_change_no_value(seed: int) -> None:
    installation, scenarios, options = problem(seed)
    supply = installation.panel.supply
    panel = replace(
        installation.panel,
        supply=replace(supply, leading_leg=supply.leading_leg.other if supply.leading_leg else None),
    )

    def mirrored(circuit: Circuit) -> Circuit:
        load = circuit.load
        swapped = (PowerFactor(pf.value, not pf.is_leading) for pf in (load.neutral_pf, load.line_pf))
        neutral_pf, line_pf = swapped
        return replace(circuit, load=replace(load, neutral_pf=neutral_pf, line_pf=line_pf))

    other = plan_or_none(with_circuits(replace(installation, panel=panel), mirrored), scenarios, options)
    assert_same_values(plan_or_none(installation, scenarios, options), other)


@pytest.mark.parametrize("seed", SEEDS)
def test_load_from_leg_to_leg_changes_no_neutral(seed: int) -> None:
    installation, scenarios, options = problem(seed)
    panel = replace(
        installation.panel, supply=replace(installation.panel.supply, system=SupplySystem.SPLIT), main_a=None
    )
    installation, options = replace(installation, panel=panel), replace(options, aim=Aim.NEUTRAL)
    heavier = replace(scenarios, line_a=scenarios.line_a * 3.0)
    one, other = (plan_or_none(installation, each, options) for each in (scenarios, heavier))
    assert (one is None) == (other is None)
    if one is not None and other is not None:
        assert one.optimum_peak_neutral_a == pytest.approx(other.optimum_peak_neutral_a, abs=VALUE)


@given(seeds)
@few
def test_twice_the_load_is_twice_the_neutral(seed: int) -> None:
    installation, scenarios, options = problem(seed)
    installation = replace(installation, panel=replace(installation.panel, main_a=None))

    def doubled(circuit: Circuit) -> Circuit:
        load = circuit.load
        return replace(circuit, load=replace(load, neutral_a=2 * load.neutral_a, line_a=2 * load.line_a))

    twice = replace(scenarios, neutral_a=2 * scenarios.neutral_a, line_a=2 * scenarios.line_a)
    one = plan_or_none(installation, scenarios, options)
    other = plan_or_none(with_circuits(installation, doubled), twice, options)
    assert (one is None) == (other is None)
    if one is not None and other is not None:
        assert 2 * one.objectives[0].value == pytest.approx(other.objectives[0].value, abs=4e-4)


@given(seeds)
@few
def test_every_plan_passes_the_check_without_the_solver(seed: int) -> None:
    plan = plan_or_none(*problem(seed))
    if plan is not None:
        verify_plan(plan)
        assert verify_arrangement(plan.installation, plan.options, plan.as_left, plan.removed_spares) == []


@given(seeds)
@few
def test_another_vacant_row_never_worsens_the_first_objective(seed: int) -> None:
    installation, scenarios, options = problem(seed)
    longer = "".join(str(space.leg) for space in installation.panel.spaces[::2])
    roomy = replace(installation.panel, spaces=ordinary_spaces(12, longer))
    one = plan_or_none(installation, scenarios, options)
    other = plan_or_none(replace(installation, panel=roomy), scenarios, options)
    if one is not None:
        assert other is not None
        assert other.objectives[0].value <= one.objectives[0].value + VALUE


@given(seeds)
@few
def test_another_scenario_never_lowers_the_optimum_and_a_repeated_one_changes_nothing(seed: int) -> None:
    installation, scenarios, options = problem(seed)
    installation = replace(installation, panel=replace(installation.panel, main_a=None))
    some, twice = scenarios.subset([0, 1]), scenarios.subset([0, 1, 2, 0, 1, 2])
    fewer, all_of_them, repeated = (plan_or_none(installation, s, options) for s in (some, scenarios, twice))
    assert (fewer is None) == (all_of_them is None) == (repeated is None)
    if fewer is None or all_of_them is None or repeated is None:
        return
    assert all_of_them.objectives[0].value >= fewer.objectives[0].value - VALUE
    assert values(repeated) == pytest.approx(values(all_of_them), abs=VALUE)
    assert repeated.as_left == all_of_them.as_left


@pytest.mark.parametrize("aim", list(Aim))
@pytest.mark.parametrize("seed", [0, 1, 2])
def test_more_landings_never_make_it_worse(seed: int, aim: Aim) -> None:
    installation = plain_installation(seed, 9)
    curve = trade_landings(installation, some_scenarios(seed, installation), Options(aim=aim), range(7))
    amps = first_objective(curve, aim)
    assert all(later <= earlier + 1e-9 for earlier, later in itertools.pairwise(amps))
    assert all(point.is_proven and point.landings_changed <= point.landings for point in curve.points)
    for point in curve.points:
        capped = Options(aim=aim, within_a=0.0, max_landings=point.landings)
        plan = plan_arrangement(installation, some_scenarios(seed, installation), capped)
        assert plan.objectives[0].value == pytest.approx(amps[curve.points.index(point)], abs=VALUE)


def first_objective(curve: Tradeoff, aim: Aim) -> list[float]:
    return [p.peak_neutral_a if aim is Aim.NEUTRAL else p.peak_heavy_leg_a for p in curve.points]


@pytest.fixture(scope="module")
def saved_house(tmp_path_factory: pytest.TempPathFactory) -> tuple[Plan, Installation]:
    """The demo house planned, saved and read back."""
    house = read_inventory(str(DATA / "crowded_house.csv"), str(DATA / "crowded_house.toml"))
    scenarios = read_scenarios(str(DATA / "crowded_house_scenarios.csv"), house)
    plan = plan_arrangement(house, scenarios, Options(within_a=0.0))
    saved = tmp_path_factory.mktemp("saved") / "as_left.csv"
    save_inventory(saved, house, plan.as_left, plan.removed_spares)
    return plan, read_inventory(str(saved), str(DATA / "crowded_house.toml"))


def test_saved_plan_reads_back_as_it_was_left(saved_house: tuple[Plan, Installation]) -> None:
    plan, house = saved_house
    assert house.as_found == plan.as_left


def test_saved_plan_needs_no_landings_and_gives_the_same_figures(saved_house: tuple[Plan, Installation]) -> None:
    plan, house = saved_house
    scenarios = read_scenarios(str(DATA / "crowded_house_scenarios.csv"), house)
    again = plan_arrangement(house, scenarios, Options(within_a=0.0))
    assert again.landings_changed == 0
    assert again.as_left == plan.as_left
    assert again.peaks_as_left.neutral.value_a == pytest.approx(plan.peaks_as_left.neutral.value_a, abs=1e-9)


def document_bytes(hash_seed: str) -> bytes:
    checkout = Path(balancer.__file__).parents[1]
    environment = {**os.environ, "PYTHONHASHSEED": hash_seed, "PYTHONPATH": str(checkout)}
    files = [str(DATA / "cabin.csv"), "--panel", str(DATA / "cabin.toml")]
    command = [sys.executable, "-m", "balancer", "plan", *files, "--json"]
    return subprocess.run(command, env=environment, check=True, capture_output=True, timeout=60).stdout


def test_same_input_gives_the_same_bytes_whatever_the_hash_seed() -> None:
    first, second = document_bytes("1"), document_bytes("2")
    assert json.loads(first)["circuits"]
    assert first == second


def test_same_plan_twice_in_one_process() -> None:
    installation = plain_installation(5, 15)
    one, other = (plan_arrangement(installation, some_scenarios(5, installation), Options()) for _ in range(2))
    assert one.as_left == other.as_left
    assert one.objectives == other.objectives
