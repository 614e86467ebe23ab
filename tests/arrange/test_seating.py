"""Seats for answers about legs: the least effort, exactly, and never a seat twice."""

from collections.abc import Callable

import pytest
from ortools.sat.python import cp_model

from balancer.arrange.clock import Clock
from balancer.arrange.placements import SPARE_REMOVAL_EFFORT
from balancer.arrange.results import Options
from balancer.arrange.seating import Seater, SeatModel, row_limits_a
from balancer.arrange.seats import build_units
from balancer.panel import Circuit, Installation, Role, format_landing

Build = Callable[..., Installation]
Make = Callable[..., Circuit]


def seater_of(installation: Installation, options: Options | None = None, clock: Clock | None = None) -> Seater:
    options = options or Options()
    units = build_units(installation, options)
    return Seater(installation.panel, units, options.max_landings, clock or Clock())


def test_circuits_that_stay_on_their_legs_stay_in_their_spaces(installation: Build, circuit: Make) -> None:
    seating = seater_of(installation(circuit("a", "1"), circuit("b", "3"))).least_effort(((1,), (-1,)))
    assert seating is not None
    assert (seating.effort, seating.landings_changed) == (0, 0)


def test_two_circuits_exchange_legs_in_two_landings(installation: Build, circuit: Make) -> None:
    seating = seater_of(installation(circuit("a", "1"), circuit("b", "3"), spaces=4)).least_effort(((-1,), (1,)))
    assert seating is not None
    assert seating.landings_changed == 2


@pytest.mark.parametrize(("signs", "has_seats"), [(((1,), (1,)), True), (((1,), (1,), (1,)), False)])
def test_a_leg_holds_as_many_breakers_as_it_has_spaces(
    installation: Build, circuit: Make, signs: tuple[tuple[int, ...], ...], has_seats: bool
) -> None:
    circuits = [circuit(label, space) for label, space in (("a", "1"), ("b", "2"), ("c", "3"))][: len(signs)]
    assert (seater_of(installation(*circuits, spaces=4)).least_effort(signs) is not None) is has_seats


@pytest.mark.parametrize(("most", "has_seats"), [(2, True), (1, False)])
def test_landings_are_capped(installation: Build, circuit: Make, most: int, has_seats: bool) -> None:
    seater = seater_of(installation(circuit("a", "1"), circuit("b", "3"), spaces=4), Options(max_landings=most))
    assert (seater.least_effort(((-1,), (1,))) is not None) is has_seats


def test_nearest_of_equal_seats_is_taken(installation: Build, circuit: Make) -> None:
    seating = seater_of(installation(circuit("a", "1"), spaces=12)).least_effort(((-1,),))
    assert seating is not None
    assert format_landing(seating.arrangement["a"]) == "3"


def test_spare_comes_out_only_where_a_circuit_needs_its_space(installation: Build, circuit: Make) -> None:
    spare = circuit("s", "3", amps=0.0, role=Role.SPARE)
    tight = seater_of(installation(circuit("a", "1"), spare, circuit("b", "2"), circuit("new"), spaces=4))
    seating = tight.least_effort(((1,), (1,), (0,), (-1,)))
    assert seating is not None
    assert seating.removed == ()
    full = installation(circuit("a", "1"), spare, circuit("b", "2"), circuit("c", "4"), circuit("new"), spaces=4)
    seating = seater_of(full).least_effort(((1,), (1,), (0,), (-1,), (-1,)))
    assert seating is not None
    assert (seating.removed, seating.effort) == (("s",), SPARE_REMOVAL_EFFORT)


def test_least_rating_of_a_row_is_what_no_placement_keeps_out(installation: Build, circuit: Make) -> None:
    panel = installation(
        circuit("a", "1", breaker_a=50.0, is_fixed=True), circuit("b", "2", breaker_a=30.0), spaces=4, stab_a=40.0
    )
    assert row_limits_a(40.0, build_units(panel, Options())) == {1: 50.0, 2: 40.0}
    assert row_limits_a(None, build_units(panel, Options())) == {}


@pytest.mark.parametrize(("stab_a", "has_seats"), [(60.0, True), (50.0, False)])
def test_row_limit_holds_on_the_chosen_legs(installation: Build, circuit: Make, stab_a: float, has_seats: bool) -> None:
    # On leg A of two rows there is one seat left for b, beside a; on leg B it would have had a row to itself.
    panel = installation(
        circuit("a", "1", breaker_a=30.0, is_fixed=True), circuit("b", "4", breaker_a=30.0), spaces=4, stab_a=stab_a
    )
    assert (seater_of(panel).least_effort(((1,), (1,))) is not None) is has_seats


def test_seats_never_overlap(installation: Build, circuit: Make) -> None:
    panel = installation(circuit("a", "1"), circuit("b", "2"), circuit("new", volts="240"), spaces=6)
    units = build_units(panel, Options())
    model = cp_model.CpModel()
    seats = SeatModel(model, units, {})
    solver = cp_model.CpSolver()
    solver.parameters.num_workers = 1
    assert solver.solve(model) in (cp_model.OPTIMAL, cp_model.FEASIBLE)
    landings = seats.seating([solver.value(v) for v in seats.flat]).arrangement
    spaces = [terminal.space for landing in landings.values() for terminal in landing]
    assert sorted(landings) == ["a", "b", "new"]
    assert len(spaces) == len(set(spaces)) == 4


def test_canonical_seats_cost_no_more(installation: Build, circuit: Make) -> None:
    seater = seater_of(installation(*(circuit(f"c{n}", str(n)) for n in (1, 2, 5)), spaces=12))
    signs = ((-1,), (-1,), (1,))
    seating = seater.least_effort(signs)
    assert seating is not None
    canonical = seater.canonical(signs, seating)
    assert (canonical.effort, canonical.landings_changed) == (seating.effort, seating.landings_changed)


def test_undecided_seats_are_remembered_as_such(installation: Build, circuit: Make) -> None:
    # Space 3 is the nearest for both, so that who takes which is left to the solver, which has no time.
    seater = seater_of(installation(circuit("a", "1"), circuit("b", "5"), spaces=8), clock=Clock(0.0))
    assert seater.least_effort(((-1,), (-1,))) is None
    assert seater.has_given_up
