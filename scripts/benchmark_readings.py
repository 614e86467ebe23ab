"""Side by side on whole logs: the project's way, the whole model in CP-SAT and in HiGHS, each in a fresh process."""

from __future__ import annotations

import concurrent.futures
import itertools
import math
import multiprocessing
import re
import tempfile
import time
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import TypeVar

from benchmark_logs import Case, all_cases, first_rows, read_house, year_files
from benchmark_solvers import RIVALS, Outcome, solve_ours, solve_whole

from balancer.arrange.results import Options
from balancer.arrange.seats import build_units
from balancer.arrange.thin import reaches

OURS_LIMIT_S = 150.0
MILLIAMP = 1e-3
LEAST_RATIO = 50.0
RATIO_CASE = "dense 30, unity"
GROWTH = "growth"
GROWTH_ROWS = 65_700
"""An eighth of a year of minutes."""

T = TypeVar("T")


@dataclass(frozen=True)
class Wanted:
    """What is asked for: cases by pattern, all rivals or the usual ones, and the rivals' time limit [s]."""

    cases: str = ""
    has_all_rivals: bool = False
    rival_limit_s: float = 150.0


def in_fresh_process(work: Callable[[], T]) -> T:
    """Run something in a process of its own."""
    alone = multiprocessing.get_context("spawn")
    with concurrent.futures.ProcessPoolExecutor(1, mp_context=alone) as process:
        return process.submit(work).result()


def print_readings(wanted: Wanted) -> list[str]:
    """Print the tables line by line; gives what is wrong: disagreements and missed targets."""
    with tempfile.TemporaryDirectory() as scratch:
        directory = Path(scratch)
        files = year_files(directory)
        problems = _print_cases([c for c in all_cases(files) if re.search(wanted.cases, c.name)], wanted)
        if re.search(wanted.cases, GROWTH):
            _print_growth(directory, files["1 min, noise"])
    return problems


def _print_cases(cases: Sequence[Case], wanted: Wanted) -> list[str]:
    print("\n| log | way | optimum | bound | proven by | solve | whole plan | memory | ratio |")
    print("|---|---|---|---|---|---|---|---|---|")
    problems: list[str] = []
    for case in cases:
        outcomes: list[Outcome] = []
        for outcome in _outcomes(case, wanted):
            outcomes.append(outcome)
            print(_line(case, outcome, outcomes[0]), flush=True)
        problems += _disagreements(case, outcomes) + _missed(case, outcomes)
    print("\nratio: seconds of the way over the project's; where nothing is proven in time, at least that")
    for problem in problems:
        print(f"MISSED: {problem}")
    return problems


def _outcomes(case: Case, wanted: Wanted) -> Iterator[Outcome]:
    yield in_fresh_process(partial(solve_ours, case, OURS_LIMIT_S))
    if case.has_rivals or wanted.has_all_rivals:
        for way in RIVALS:
            yield in_fresh_process(partial(solve_whole, case, wanted.rival_limit_s, way))


def _line(case: Case, outcome: Outcome, ours: Outcome) -> str:
    ratio = "" if outcome is ours else f"{'' if outcome.is_proven else '> '}{outcome.solve_s / ours.solve_s:.0f}"
    cells = (
        case.name,
        outcome.way,
        f"{outcome.value_a:.3f} A",
        f"{outcome.bound_a:.3f} A",
        outcome.by,
        f"{outcome.solve_s:.2f} s",
        "" if math.isnan(outcome.plan_s) else f"{outcome.plan_s:.2f} s",
        "not known" if math.isnan(outcome.memory_mb) else f"{outcome.memory_mb:.0f} MB",
        ratio,
    )
    return f"| {' | '.join(cells)} |"


def _disagreements(case: Case, outcomes: Sequence[Outcome]) -> list[str]:
    """No bound above another way's answer; so two that are proven agree to a milliampere and their gaps."""
    return [
        f"{case.name}: {one.way} proves {one.bound_a:.4f} A, {other.way} has {other.value_a:.4f} A"
        for one, other in itertools.permutations(outcomes, 2)
        if one.bound_a > other.value_a + one.rounding_a + MILLIAMP
    ]


def _missed(case: Case, outcomes: Sequence[Outcome]) -> list[str]:
    ours = outcomes[0]
    problems = []
    if case.limit_s is not None and not (ours.is_proven and ours.solve_s <= case.limit_s):
        state = "proven" if ours.is_proven else "NOT PROVEN"
        problems.append(f"{case.name}: {ours.solve_s:.2f} s, {state}; {case.limit_s:g} s are wanted")
    cp_sat = [outcome for outcome in outcomes if outcome.way == "CP-SAT"]
    if case.name == RATIO_CASE and cp_sat and cp_sat[0].solve_s < LEAST_RATIO * ours.solve_s:
        problems.append(f"{case.name}: not {LEAST_RATIO:g} times faster than CP-SAT")
    return problems


def _print_growth(directory: Path, log: Path) -> None:
    """Show that reading and filtering take time in proportion to the rows."""
    print("\n| rows | reading | filtering | microseconds a row |\n|---|---|---|---|")
    for times in (1, 2, 4, 8):
        part = first_rows(log, GROWTH_ROWS * times, directory / "part.csv")
        rows, reading_s, filtering_s = in_fresh_process(partial(time_reading, part))
        each = (reading_s + filtering_s) / rows * 1e6
        print(f"| {rows:,} | {reading_s:.2f} s | {filtering_s:.2f} s | {each:.1f} |", flush=True)


def time_reading(log: Path) -> tuple[int, float, float]:
    """Count the rows of a log; seconds [s] to read them, and to find out how high each can reach."""
    began = time.perf_counter()
    installation, scenarios = read_house(log)
    reading_s = time.perf_counter() - began
    reaches(installation, scenarios, tuple(unit for unit in build_units(installation, Options()) if unit.placements))
    return len(scenarios), reading_s, time.perf_counter() - began - reading_s
