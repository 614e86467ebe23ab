"""Three ways to the lowest peak neutral of a whole log: the project's, and the whole model in CP-SAT and in HiGHS."""

from __future__ import annotations

import math
import os
import sys
import time
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from benchmark_logs import Case
from numpy.typing import NDArray

from balancer.arrange.clock import Clock
from balancer.arrange.legs import LegProblem, Rows, build_leg_problem
from balancer.arrange.plan import Planner, plan_arrangement
from balancer.arrange.results import Options
from balancer.arrange.seats import build_units
from balancer.units import MA_PER_A

WORKERS = 2
DIRECTIONS = 16
MEMORY = Path("/proc/self/status")


@dataclass(frozen=True)
class Outcome:
    """What one way came to: the peak [A] of its answer over all rows, the proven bound [A] and what it took."""

    way: str
    value_a: float
    bound_a: float
    rounding_a: float
    """How far its bound may be off."""
    is_proven: bool
    by: str
    solve_s: float
    plan_s: float
    """All objectives and the re-check, from the start; NaN where nothing is planned."""
    memory_mb: float


@dataclass(frozen=True)
class Raw:
    """What a solver came to: the answer, the proven bound [A], whether it is optimal."""

    answer: NDArray[np.float64] | None
    bound_a: float
    is_optimal: bool


def solve_ours(case: Case, limit_s: float) -> Outcome:
    """Find and prove the lowest peak neutral the project's way, then the whole plan, timed apart."""
    installation, scenarios = case.build()
    began = time.perf_counter()
    planner = Planner(installation, scenarios, Options(), Clock(limit_s))
    result = planner.free_neutral(planner.stages())
    solve_s = time.perf_counter() - began
    memory_mb = peak_memory_mb()
    plan = plan_arrangement(installation, scenarios, Options(time_limit_s=limit_s))
    plan_s = time.perf_counter() - began - solve_s
    if plan.is_proven and plan.optimum_peak_neutral_a > result.value + 1e-6:
        message = f"the plan tells {plan.optimum_peak_neutral_a} A, and {result.value} A can be had"
        raise AssertionError(message)
    by = result.proved_by or "nothing"
    return Outcome("balancer", result.value, result.bound, 0.0, result.is_proven, by, solve_s, plan_s, memory_mb)


def solve_whole(case: Case, limit_s: float, way: str) -> Outcome:
    """Put every row at once to a solver."""
    installation, scenarios = case.build()
    began = time.perf_counter()
    units = tuple(unit for unit in build_units(installation, Options()) if unit.placements)
    problem = build_leg_problem(installation, scenarios, units)
    raw = _SOLVERS[way](problem, limit_s)
    seconds = time.perf_counter() - began
    value = math.inf if raw.answer is None else float(np.abs(problem.neutral.values(raw.answer)).max())
    rounding_a = (len(problem.choices) + 1) / 2.0 / MA_PER_A if way == "CP-SAT" else 1e-5
    # Tangents of a circle bound a magnitude from below: with mixed power factors the answer may be higher.
    is_proven = raw.is_optimal and not _is_mixed(problem.neutral)
    by = way if is_proven else f"{way}, {DIRECTIONS} directions" if raw.is_optimal else "nothing"
    return Outcome(way, value, raw.bound_a, rounding_a, is_proven, by, seconds, math.nan, peak_memory_mb())


def _is_mixed(rows: Rows) -> bool:
    return bool(max(np.abs(rows.offset.imag).max(), np.abs(rows.effects.imag).max()) > 1e-9)


def _directions(rows: Rows) -> list[complex]:
    count = DIRECTIONS if _is_mixed(rows) else 2
    return [complex(np.exp(-2j * np.pi * step / count)) for step in range(count)]


def _cp_sat(problem: LegProblem, limit_s: float) -> Raw:
    """Minimise z in whole milliamperes."""
    from ortools.sat.python import cp_model

    rows, model = problem.neutral, cp_model.CpModel()
    taken = [model.new_bool_var("") for _ in problem.choices]
    most = int((np.abs(rows.offset) + np.abs(rows.effects).sum(axis=1)).max() * MA_PER_A) + 1
    peak = model.new_int_var(0, most, "")
    for group in problem.groups:
        model.add_at_most_one(taken[choice] for choice in group)
    for counter in problem.counters:
        model.add(cp_model.LinearExpr.weighted_sum(taken, counter.costs.tolist()) <= counter.cap - counter.base)
    for turn in _directions(rows):
        offset = np.rint((rows.offset * turn).real * MA_PER_A).astype(np.int64).tolist()
        effects = np.rint((rows.effects * turn).real * MA_PER_A).astype(np.int64).tolist()
        for constant, factors in zip(offset, effects, strict=True):
            model.add(cp_model.LinearExpr.weighted_sum([*taken, peak], [*factors, -1]) <= -constant)
    model.minimize(peak)
    solver = cp_model.CpSolver()
    solver.parameters.num_workers = WORKERS
    solver.parameters.max_time_in_seconds = limit_s
    status = solver.solve(model)
    bound_a = max(0.0, solver.best_objective_bound) / MA_PER_A
    if status not in (cp_model.OPTIMAL, cp_model.FEASIBLE):
        return Raw(None, bound_a, is_optimal=False)
    answer = np.array([solver.value(v) for v in taken], dtype=float)
    return Raw(answer, bound_a, status == cp_model.OPTIMAL)


def _highs(problem: LegProblem, limit_s: float) -> Raw:
    """Minimise z over real rows and binary choices."""
    import highspy

    matrix, right = _inequalities(problem)
    places, size = np.nonzero(matrix), len(problem.choices)
    lp = highspy.HighsLp()
    lp.num_col_, lp.num_row_ = size + 1, len(right)
    lp.col_cost_ = np.append(np.zeros(size), 1.0)
    lp.col_lower_, lp.col_upper_ = np.zeros(size + 1), np.append(np.ones(size), highspy.kHighsInf)
    lp.row_lower_, lp.row_upper_ = np.full(len(right), -highspy.kHighsInf), right
    lp.a_matrix_.format_ = highspy.MatrixFormat.kRowwise
    lp.a_matrix_.start_ = np.append(0, np.cumsum(np.count_nonzero(matrix, axis=1)))
    lp.a_matrix_.index_, lp.a_matrix_.value_ = places[1], matrix[places]
    lp.integrality_ = [highspy.HighsVarType.kInteger] * size + [highspy.HighsVarType.kContinuous]
    # It greets on standard output whatever its options say, and this process has nothing else to say there.
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    highs = highspy.Highs()
    for option, value in _highs_options(limit_s).items():
        highs.setOptionValue(option, value)
    highs.passModel(lp)
    highs.run()
    info = highs.getInfo()
    has_answer = info.primal_solution_status == highspy.SolutionStatus.kSolutionStatusFeasible
    answer = np.rint(np.array(highs.getSolution().col_value[:size])) if has_answer else None
    return Raw(answer, max(0.0, info.mip_dual_bound), highs.getModelStatus() == highspy.HighsModelStatus.kOptimal)


def _highs_options(limit_s: float) -> dict[str, bool | float]:
    gaps = {"mip_rel_gap": 1e-6, "mip_abs_gap": 1e-4}
    return {"output_flag": False, "threads": WORKERS, "time_limit": limit_s, **gaps}


def _inequalities(problem: LegProblem) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Matrix over the choices and z, and right-hand sides that its rows may not exceed."""
    rows, size = problem.neutral, len(problem.choices)
    turns = _directions(rows)
    parts = [np.column_stack([(rows.effects * turn).real, -np.ones(len(rows.offset))]) for turn in turns]
    upper = [-(rows.offset * turn).real for turn in turns]
    parts += [np.append(counter.costs, 0.0)[None, :] for counter in problem.counters]
    upper += [np.array([float(counter.cap - counter.base)]) for counter in problem.counters]
    parts += [np.isin(np.arange(size + 1), group).astype(float)[None, :] for group in problem.groups]
    upper += [np.ones(1) for _ in problem.groups]
    return np.concatenate(parts), np.concatenate(upper)


_SOLVERS: dict[str, Callable[[LegProblem, float], Raw]] = {"CP-SAT": _cp_sat, "HiGHS": _highs}
RIVALS = tuple(_SOLVERS)


def peak_memory_mb() -> float:
    """Most memory [MB] that this process has held; not known outside Linux."""
    if not MEMORY.exists():
        return math.nan
    lines = dict(line.split(":", 1) for line in MEMORY.read_text(encoding="utf-8").splitlines() if ":" in line)
    return float(lines["VmHWM"].split()[0]) / 1024.0
