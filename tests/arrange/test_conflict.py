"""Reasons why nothing fits: each of them is needed for the conflict, and nothing else is named."""

from collections.abc import Callable
from dataclasses import replace

import pytest

from balancer.arrange.clock import Clock
from balancer.arrange.conflict import explain_no_seats
from balancer.arrange.results import Options
from balancer.errors import NoAnswerInTime
from balancer.panel import Circuit, Installation, Role

Build = Callable[..., Installation]
Make = Callable[..., Circuit]


def reasons(installation: Installation, options: Options | None = None) -> list[str]:
    error = explain_no_seats(installation, options or Options(), Clock())
    assert len(error.remedies) == len(error.reasons)
    return list(error.reasons)


def no_room_for_a_two_pole(
    installation: Build, circuit: Make, stab_a: float | None = None, **c1: object
) -> Installation:
    """Space 2 is free in the right column and space 3 in the left: no two adjacent ones."""
    landed = [circuit("c1", "1", **c1), circuit("c4", "4", is_fixed=True)]
    return installation(*landed, circuit("new", volts="240"), spaces=4, stab_a=stab_a)


def test_either_of_two_constraints_would_do_and_both_are_named(installation: Build, circuit: Make) -> None:
    panel = no_room_for_a_two_pole(installation, circuit, slack_in=2.0)
    assert reasons(panel) == [
        '"c4" is fixed in space 4',
        'the conductor of "c1" reaches 2 in from space 1',
    ]


def test_constraints_that_have_no_part_in_it_are_not_named(installation: Build, circuit: Make) -> None:
    panel = no_room_for_a_two_pole(installation, circuit, stab_a=200.0, is_fixed=True, slack_in=30.0)
    assert reasons(panel) == ['"c1" is fixed in space 1', '"c4" is fixed in space 4']


def test_devices_count_as_fixed(installation: Build, circuit: Make) -> None:
    devices = [circuit(f"d{n}", str(n), amps=0.0, role=Role.SURGE) for n in (1, 4)]
    panel = installation(*devices, circuit("new", volts="240"), spaces=4)
    assert reasons(panel) == ['"d1" is fixed in space 1', '"d4" is fixed in space 4']


def test_spaces_that_nothing_can_free_are_a_matter_of_the_panel(installation: Build, circuit: Make) -> None:
    # Two-poles that stay leave one space in each column.
    landed = [circuit("left", "1-3", volts="240"), circuit("right", "4-6", volts="240")]
    assert (
        "adjacent spaces on opposite legs" in reasons(installation(*landed, circuit("new", volts="240"), spaces=6))[0]
    )


def test_spares_need_no_space(installation: Build, circuit: Make) -> None:
    landed = [circuit(str(n), str(n)) for n in (1, 2, 3)]
    spare = circuit("spare", "4", amps=0.0, role=Role.SPARE)
    panel = installation(*landed, spare, circuit("new"), circuit("newer"), spaces=4)
    assert reasons(panel) == ["the breakers need 5 spaces and the panel has 4 to use"]


def test_clock_that_runs_out_gives_no_reason(installation: Build, circuit: Make) -> None:
    panel = no_room_for_a_two_pole(installation, circuit)
    with pytest.raises(NoAnswerInTime, match="in the way"):
        explain_no_seats(panel, Options(), Clock(0.0))


def test_too_few_landings_name_what_must_be_mended_and_what_it_takes(installation: Build, circuit: Make) -> None:
    pair = [circuit("left", "1", shared_neutral="m"), circuit("right", "5", shared_neutral="m")]
    assert reasons(installation(*pair, spaces=6), Options(max_landings=0)) == [
        "at most 0 landings may change, and mending shared-neutral-one-leg (left and right) takes at least 1 landing"
    ]


def test_the_size_of_a_panel_that_nobody_gave_is_asked_for(installation: Build, circuit: Make) -> None:
    given = installation(circuit("c1", "1"), circuit("c2", "2"), circuit("new"), spaces=2)
    assert "larger panel" in explain_no_seats(given, Options(), Clock()).remedies[0]
    assumed = replace(given, panel=replace(given.panel, is_assumed=True))
    assert "panel file" in explain_no_seats(assumed, Options(), Clock()).remedies[0]
