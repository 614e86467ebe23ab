"""Breakers that can stand where the inventory says, and those that cannot."""

from collections.abc import Callable

import pytest

from balancer.errors import Problem
from balancer.panel import Installation, format_landing

Read = Callable[..., Installation]
ProblemsOf = Callable[..., tuple[Problem, ...]]

PANEL_42 = "[panel]\nspaces = 42\nreserved = [9]\n"


def inventory(*landings: str, tied: str = "") -> str:
    """120 V circuits on one space and 240 V circuits on two."""
    lines = ["circuit,space,volts,load_a,tied"]
    for number, landing in enumerate(landings, 1):
        lines.append(f"c{number},{landing},{240 if '-' in landing else 120},5,{tied}")
    return "\n".join(lines) + "\n"


@pytest.mark.parametrize(
    "landings",
    [
        pytest.param(("5-7", "7-5"), id="two circuits on one two-pole: a double tap, turned"),
        pytest.param(("7", "7"), id="double tap"),
        pytest.param(("12a", "12b"), id="tandem"),
        pytest.param(("12a", "12a"), id="double tap on a half"),
        pytest.param(("12b-14a", "12a-14b"), id="quad of two two-poles"),
        pytest.param(("12b-14a", "12a", "14b"), id="quad with two singles outside"),
        pytest.param(("14a-12b",), id="quad's inner two-pole, turned"),
        pytest.param(("5-7", "9-11"), id="neighbours"),
    ],
)
def test_breakers_that_fit_are_taken(read: Read, landings: tuple[str, ...]) -> None:
    circuits = read(inventory(*landings)).circuits
    assert tuple(format_landing(circuit.landing) for circuit in circuits) == landings


@pytest.mark.parametrize(
    ("landings", "problem"),
    [
        pytest.param(("7", "7a"), "a full-width breaker and a half cannot both be in space 7", id="full and half"),
        pytest.param(("5-7", "7"), "two breakers cannot both be in space 7", id="two-pole and single"),
        pytest.param(("5-7", "7-9"), "two breakers cannot both be in space 7", id="overlapping two-poles"),
        pytest.param(("12b-14a", "14a"), "two breakers cannot both be in space 14", id="quad pole and single half"),
        pytest.param(("12b-14a", "14"), "a full-width breaker and a half", id="quad and full-width"),
        pytest.param(("12b-14a", "14b-16a"), "two quad bodies cannot both be in space 14", id="two quad bodies"),
    ],
)
def test_breakers_that_cannot_stand_together_are_told(
    problems_of: ProblemsOf, landings: tuple[str, ...], problem: str
) -> None:
    (only,) = problems_of(inventory(*landings))
    assert problem in only.problem
    assert "c1 (line 2)" in only.problem
    assert (only.line, only.column, only.value) == (3, "space", landings[1])


def test_two_conductors_on_a_pole_of_a_two_pole_breaker_are_taken_where_tied(read: Read) -> None:
    assert len(read(inventory("5-7", "7", tied="one breaker")).circuits) == 2


def test_overlapping_two_poles_are_told_even_where_tied(problems_of: ProblemsOf) -> None:
    assert len(problems_of(inventory("5-7", "7-9", tied="x"))) == 1


@pytest.mark.parametrize(
    ("landing", "problem"),
    [
        pytest.param("43", "the panel has no space 43: it has 42 spaces", id="beyond the panel"),
        pytest.param("41-43", "the panel has no space 43", id="half beyond the panel"),
        pytest.param("9", "space 9 is reserved", id="reserved"),
        pytest.param("5-6", "no two-pole breaker fits", id="across the columns"),
        pytest.param("3-7", "no two-pole breaker fits", id="apart"),
        pytest.param("5-5", "no two-pole breaker fits", id="one space"),
        pytest.param("12a-12b", "no two-pole breaker fits", id="both halves of one space: one leg"),
        pytest.param("12a-14a", "no quad breaker has poles like this", id="two upper halves"),
        pytest.param("12-14a", "no quad breaker has poles like this", id="full and half"),
    ],
)
def test_place_that_the_panel_does_not_have_is_told(problems_of: ProblemsOf, landing: str, problem: str) -> None:
    (only,) = problems_of(inventory(landing), PANEL_42)
    assert problem in only.problem
    assert only.remedy


def test_two_pole_needs_opposite_legs(problems_of: ProblemsOf, read: Read) -> None:
    panel = '[panel]\nspaces = 8\nrow_legs = "AABB"\n'
    assert read(inventory("3-5"), panel)
    (only,) = problems_of(inventory("1-3"), panel)
    assert "opposite legs" in only.problem


def test_quad_remedy_names_the_poles_that_exist(problems_of: ProblemsOf) -> None:
    (only,) = problems_of(inventory("14b-12b"))
    assert only.remedy == "write 12b-14a for its inner two-pole, 12a-14b for its outer one"


@pytest.mark.parametrize(
    ("space", "volts", "problem"),
    [("7", "240", "takes two spaces"), ("5-7", "120", "takes one space"), ("7", "120/240", "takes two spaces")],
)
def test_spaces_and_volts_must_agree(problems_of: ProblemsOf, space: str, volts: str, problem: str) -> None:
    (only,) = problems_of(f"circuit,space,volts,load_a\nc1,{space},{volts},5\n")
    assert problem in only.problem


def test_fixed_circuit_needs_a_space(problems_of: ProblemsOf) -> None:
    (only,) = problems_of("circuit,space,volts,load_a,fixed\nc1,,120,5,yes\n")
    assert (only.column, only.line) == ("fixed", 2)


def test_device_needs_a_space(problems_of: ProblemsOf) -> None:
    (only,) = problems_of("circuit,space,volts,role\ninlet,,240,backfed\n")
    assert "stays where it is" in only.problem


def test_without_a_panel_file_the_panel_ends_at_the_highest_space(read: Read) -> None:
    house = read(inventory("1", "5-7"))
    assert len(house.panel.spaces) == 8
    assert house.panel.is_assumed
    assert any("8 spaces" in notice for notice in house.notices)


def test_without_landings_the_panel_is_of_a_common_size_with_a_choice_of_spaces(read: Read) -> None:
    lines = "\n".join(f"c{number},{volts},5" for number, volts in enumerate([120] * 9 + [240] * 2))
    assert len(read(f"circuit,volts,load_a\n{lines}\n").panel.spaces) == 20


def test_more_poles_than_any_panel_holds_is_no_file_error(read: Read) -> None:
    lines = "\n".join(f"c{number},120,5" for number in range(100))
    assert len(read(f"circuit,volts,load_a\n{lines}\n").panel.spaces) == 84
