"""Pairs found on one leg, and new circuits beside old ones, where ties, bodies and fixed breakers stand in between."""

from collections.abc import Callable

import pytest

from balancer.arrange.plan import plan_arrangement
from balancer.arrange.results import Options, Plan
from balancer.electrical.scenario_sets import connected_scenarios
from balancer.errors import InfeasibleError
from balancer.panel import Circuit, Installation, Space, format_landing

Build = Callable[..., Installation]
Make = Callable[..., Circuit]


def plan(installation: Installation) -> Plan:
    return plan_arrangement(installation, connected_scenarios(installation), Options(within_a=0.0))


def left(found: Plan, *labels: str) -> list[str]:
    return [format_landing(found.as_left[label]) for label in labels]


def spaces(found: Plan, *labels: str) -> list[Space]:
    return [found.installation.panel.by_number[found.as_left[label][0].space] for label in labels]


def assert_in_line(found: Plan, *labels: str) -> None:
    """In one column, without a gap."""
    places = spaces(found, *labels)
    rows = sorted(place.row for place in places)
    assert len({place.column for place in places}) == 1
    assert rows == list(range(rows[0], rows[0] + len(labels)))


def test_half_leaves_its_tandem_for_the_space_beside_its_fixed_partner(installation: Build, circuit: Make) -> None:
    mates = [circuit("red", "1a", shared_neutral="n"), circuit("other", "1b")]
    found = plan(installation(*mates, circuit("black", "2", shared_neutral="n", is_fixed=True), spaces=6))
    assert left(found, "red", "other", "black") == ["4", "1b", "2"]


def test_conductor_under_the_breaker_of_a_fixed_one_makes_room(installation: Build, circuit: Make) -> None:
    pair = [circuit("red", "1", shared_neutral="n"), circuit("black", "2", shared_neutral="n", is_fixed=True)]
    found = plan(installation(*pair, circuit("other", "2"), spaces=6))
    assert left(found, "red", "black") == ["4", "2"]
    assert spaces(found, "other") != spaces(found, "black")


def test_third_circuit_of_a_tie_comes_along_when_a_pair_is_mended(installation: Build, circuit: Make) -> None:
    pair = [circuit("red", "1", shared_neutral="n", tied="t"), circuit("black", "2", shared_neutral="n")]
    found = plan(installation(*pair, circuit("third", "6", tied="t"), spaces=8))
    assert_in_line(found, "red", "black")
    assert_in_line(found, "red", "third")


def test_tandem_keeps_its_shape_when_what_it_is_tied_to_is_mended(installation: Build, circuit: Make) -> None:
    tandem = [circuit("half", "5a", tied="t"), circuit("mate", "5b")]
    pair = [circuit("red", "1", shared_neutral="n", tied="t"), circuit("black", "2", shared_neutral="n")]
    found = plan(installation(*tandem, *pair, spaces=8))
    assert left(found, "half", "mate") == ["5a", "5b"]
    assert_in_line(found, "half", "red")
    assert_in_line(found, "red", "black")


def test_new_circuit_stands_next_to_what_it_is_tied_to_and_not_past_others(installation: Build, circuit: Make) -> None:
    high = [circuit(f"s{space}", f"{space}a", tied="s") for space in (1, 3, 5)]
    new, mate = circuit("new", tied="t"), circuit("mate", "3b", tied="t")
    with pytest.raises(InfeasibleError, match="tied circuits spaces one below the other"):
        plan(installation(*high, mate, new, spaces=8))
    assert left(plan(installation(*high[1:], mate, new, spaces=8)), "new") == ["1"]


def test_pair_that_cannot_be_put_right_does_not_keep_a_new_circuit_out(installation: Build, circuit: Make) -> None:
    pair = [circuit(n, s, shared_neutral="n", is_fixed=True, tied=t) for n, s, t in (("r", "1", "t"), ("b", "2", ""))]
    found = plan(installation(*pair, circuit("new", tied="t"), spaces=6))
    assert left(found, "r", "b", "new") == ["1", "2", "3"]
