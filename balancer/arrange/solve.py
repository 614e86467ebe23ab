"""The one place that runs CP-SAT and reads its answers: status first, then values."""

from __future__ import annotations

import threading
from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum

from ortools.sat.python import cp_model

from balancer.arrange.clock import Clock


class SolveStatus(StrEnum):
    """What a run of the solver established."""

    OPTIMAL = "optimal"
    FEASIBLE = "feasible"
    INFEASIBLE = "infeasible"
    UNKNOWN = "unknown"

    @property
    def has_answer(self) -> bool:
        """Whether values may be read."""
        return self in (SolveStatus.OPTIMAL, SolveStatus.FEASIBLE)


@dataclass(frozen=True)
class Solved:
    """Status, values of the asked variables (empty without an answer) and the proven lower bound of the objective."""

    status: SolveStatus
    values: tuple[int, ...]
    bound: float
    work_s: float = 0.0
    """Deterministic time [s] that the run took."""


_STATUS = {
    cp_model.OPTIMAL: SolveStatus.OPTIMAL,
    cp_model.FEASIBLE: SolveStatus.FEASIBLE,
    cp_model.INFEASIBLE: SolveStatus.INFEASIBLE,
    cp_model.UNKNOWN: SolveStatus.UNKNOWN,
}

_POLL_S = 0.02


def solve(
    model: cp_model.CpModel,
    variables: Sequence[cp_model.IntVar],
    clock: Clock,
    work_s: float,
    *,
    is_assignment: bool = False,
) -> Solved:
    """Run CP-SAT on a model and read `variables`.

    Parameters
    ----------
    model
        A valid model, with or without an objective to minimise.
    variables
        What to read from the answer.
    clock
        The user's clock and Ctrl-C.
    work_s
        Limit in the solver's deterministic time [s], which does not depend on the machine.
    is_assignment
        Lean on the linear relaxation, which all but solves seat assignments (measured: 48 units and 60 spaces in 0.1 s,
        where the default took up to 5 s).

    Raises
    ------
    ValueError
        When the model is invalid: a bug of ours.
    """
    if clock.is_stopped:
        return Solved(SolveStatus.UNKNOWN, (), float("-inf"))
    solver = cp_model.CpSolver()
    parameters = solver.parameters
    # Only a single worker gives the same answer every time.
    parameters.num_workers = 1
    if is_assignment:
        parameters.linearization_level = 2
    parameters.random_seed = 1
    parameters.max_deterministic_time = work_s
    parameters.catch_sigint_signal = False
    if clock.remaining_s is not None:
        parameters.max_time_in_seconds = clock.remaining_s
    code = _run_beside(solver, model, clock)
    if code not in _STATUS:
        message = f"the solver calls the model invalid: {model.validate()}"
        raise ValueError(message)
    status = _STATUS[code]
    spent_s = float(solver.response_proto.deterministic_time)
    if not status.has_answer:
        return Solved(status, (), float("-inf"), spent_s)
    return Solved(status, tuple(solver.value(v) for v in variables), solver.best_objective_bound, spent_s)


def _run_beside(solver: cp_model.CpSolver, model: cp_model.CpModel, clock: Clock) -> cp_model.CpSolverStatus:
    """Solve in a thread of its own: while the main thread sits in C++, Python sees no Ctrl-C."""
    codes: list[cp_model.CpSolverStatus] = []
    errors: list[BaseException] = []
    done = threading.Event()

    def run() -> None:
        try:
            codes.append(solver.solve(model))
        except BaseException as error:  # handed to the caller's thread
            errors.append(error)
        finally:
            done.set()

    threading.Thread(target=run, daemon=True).start()
    while not done.wait(_POLL_S):
        if clock.is_stopped:
            solver.stop_search()
    if errors:
        raise errors[0]
    return codes[0]
