"""The invented panels in ``data/``: what the demo and ``start --example`` promise of them."""

from pathlib import Path

import numpy as np
import pytest

import balancer
from balancer.arrange.plan import plan_arrangement
from balancer.arrange.results import Aim, Options
from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenario_sets import choose_scenarios
from balancer.electrical.scenarios import Scenarios
from balancer.files import read_inventory, read_scenarios
from balancer.panel import Installation, Leg, Role
from balancer.rules import check_installation, errors_of

PACKAGE = Path(balancer.__file__).parent
DATA = PACKAGE.parent / "data"


@pytest.fixture(scope="module")
def house() -> Installation:
    return read_inventory(str(DATA / "crowded_house.csv"), str(DATA / "crowded_house.toml"))


@pytest.fixture(scope="module")
def house_scenarios(house: Installation) -> Scenarios:
    return read_scenarios(str(DATA / "crowded_house_scenarios.csv"), house)


@pytest.fixture(scope="module")
def cabin() -> Installation:
    return read_inventory(str(DATA / "cabin.csv"), str(DATA / "cabin.toml"))


@pytest.mark.parametrize(
    ("example", "original"),
    [
        ("inventory.csv", "crowded_house.csv"),
        ("panel.toml", "crowded_house.toml"),
        ("scenarios.csv", "crowded_house_scenarios.csv"),
    ],
)
def test_example_of_start_is_the_demo_house(example: str, original: str) -> None:
    assert (PACKAGE / "files" / "example" / example).read_bytes() == (DATA / original).read_bytes()


def test_house_is_crowded(house: Installation) -> None:
    filled = {terminal.space for landing in house.as_found.values() for terminal in landing}
    assert len(house.panel.spaces) == 40
    assert len(filled) == 39
    assert len(house.circuits) == 34


def test_house_has_one_of_everything_that_holds_a_plan_up(house: Installation) -> None:
    circuits = house.circuits
    assert {circuit.role for circuit in circuits} >= {Role.FEEDER, Role.BACKFED, Role.SPARE, Role.SURGE}
    assert len({circuit.shared_neutral for circuit in circuits if circuit.shared_neutral}) == 2
    assert sum(circuit.load.line_a > 0 and circuit.load.neutral_a > 0 for circuit in circuits) == 3
    assert any(terminal.half for circuit in circuits for terminal in circuit.landing)
    assert any(circuit.slack_in == 0.0 for circuit in circuits)
    assert any(circuit.is_fixed for circuit in circuits)


def test_nothing_in_the_demo_panels_is_assumed(house: Installation, cabin: Installation) -> None:
    for circuit in (*house.circuits, *cabin.circuits):
        assert not circuit.load.is_assumed, circuit.label


def test_house_is_lopsided_as_found(house: Installation, house_scenarios: Scenarios) -> None:
    peaks = PanelCurrents(house, house_scenarios).peaks(house.as_found)
    assert 25.0 < peaks.neutral.value_a < 40.0


def test_loads_that_never_run_together_never_do(house: Installation, house_scenarios: Scenarios) -> None:
    groups: dict[str, list[int]] = {}
    for column, circuit in enumerate(house.circuits):
        if circuit.not_with:
            groups.setdefault(circuit.not_with, []).append(column)
    running = (house_scenarios.neutral_a + house_scenarios.line_a) > 0
    assert sorted(groups) == ["den", "season"]
    for columns in groups.values():
        assert np.count_nonzero(running[:, columns], axis=1).max() == 1


def test_plan_of_the_house_is_proven_and_cures_its_error(house: Installation, house_scenarios: Scenarios) -> None:
    plan = plan_arrangement(house, house_scenarios, Options())
    assert plan.is_proven
    assert plan.peaks_as_left.neutral.value_a < 10.0
    assert [finding.circuits for finding in errors_of(check_installation(house))] == [("counter-1", "counter-2")]
    assert errors_of(check_installation(house, plan.as_left)) == ()


def test_cabin_is_behind_an_inverter_and_has_circuits_to_place(cabin: Installation) -> None:
    assert cabin.panel.supply.is_trip_per_leg
    assert sum(not circuit.is_landed for circuit in cabin.circuits) == 4
    assert errors_of(check_installation(cabin)) == ()


def test_plan_of_the_cabin_places_every_circuit(cabin: Installation) -> None:
    plan = plan_arrangement(cabin, choose_scenarios(cabin), Options(aim=Aim.LEGS))
    assert plan.is_proven
    assert sorted(plan.as_left) == sorted(circuit.label for circuit in cabin.circuits)
    legs = {cabin.panel.leg(terminal.space) for terminal in plan.as_left["mini-split"]}
    assert legs == {Leg.A, Leg.B}
