"""What a run of the solver is said to have established."""

import pytest
from ortools.sat.python import cp_model

from balancer.arrange.clock import Clock
from balancer.arrange.solve import SolveStatus, solve


def choice_of_two() -> tuple[cp_model.CpModel, list[cp_model.IntVar]]:
    model = cp_model.CpModel()
    variables = [model.new_bool_var(name) for name in "ab"]
    model.add(sum(variables) == 1)
    return model, variables


def test_answer_without_an_objective_is_an_answer() -> None:
    model, variables = choice_of_two()
    solved = solve(model, variables, Clock(), 1.0)
    assert solved.status.has_answer
    assert sum(solved.values) == 1


def test_optimum_comes_with_its_bound() -> None:
    model, variables = choice_of_two()
    model.minimize(3 * variables[0] + 2 * variables[1])
    solved = solve(model, variables, Clock(), 1.0)
    assert (solved.status, solved.values, solved.bound) == (SolveStatus.OPTIMAL, (0, 1), 2.0)


def test_contradiction_is_infeasible_and_has_no_values() -> None:
    model, variables = choice_of_two()
    model.add(sum(variables) == 2)
    solved = solve(model, variables, Clock(), 1.0)
    assert (solved.status, solved.values) == (SolveStatus.INFEASIBLE, ())
    assert not solved.status.has_answer


def test_stopped_clock_establishes_nothing() -> None:
    model, variables = choice_of_two()
    solved = solve(model, variables, Clock(0.0), 1.0)
    assert (solved.status, solved.values, solved.bound) == (SolveStatus.UNKNOWN, (), float("-inf"))


def pigeons(count: int) -> tuple[cp_model.CpModel, list[cp_model.IntVar]]:
    """More pigeons than holes, in clauses: a contradiction that takes far longer to prove than to state."""
    model = cp_model.CpModel()
    seats = [[model.new_bool_var(f"{p} in {h}") for h in range(count - 1)] for p in range(count)]
    for seat in seats:
        model.add_bool_or(seat)
    for hole in range(count - 1):
        for first in range(count):
            for second in range(first):
                model.add_bool_or(seats[first][hole].negated(), seats[second][hole].negated())
    return model, [literal for seat in seats for literal in seat]


def test_work_that_runs_out_establishes_nothing() -> None:
    model, variables = pigeons(12)
    assert solve(model, variables, Clock(), 1e-6).status is SolveStatus.UNKNOWN


def test_invalid_model_is_our_bug() -> None:
    model = cp_model.CpModel()
    variable = model.new_bool_var("a")
    model.add_hint(variable, 0)
    model.add_hint(variable, 1)
    with pytest.raises(ValueError, match="invalid"):
        solve(model, [variable], Clock(), 1.0)
