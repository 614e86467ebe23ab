"""Measure the speeds that balancer promises and print them beside their targets, as a table for the README.

Run it with the Python of the virtual environment: ``.venv/bin/python scripts/benchmark.py``. Every run that is timed
has a process of its own, so imports count.
"""

from __future__ import annotations

import argparse
import json
import os
import platform
import statistics
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import partial

import numpy as np
from benchmark_readings import Wanted, in_fresh_process, print_readings
from demo import HOUSE
from environment import ROOT

from balancer.electrical.defaults import known_uses
from balancer.electrical.profiles import HOURS, Season, shipped_profiles
from balancer.electrical.scenario_sets import share_scenarios
from balancer.electrical.scenarios import Scenarios
from balancer.panel import Circuit, Installation, Load, Panel, PowerFactor, Terminal, Volts, ordinary_spaces

SPACES = 60
CIRCUITS = 48
SCENARIOS = 48
SEEDS = 10
GIVEN_UP_AFTER_S = 90.0
POWER_FACTORS = (1.0, 0.98, 0.95, 0.9, 0.85, 0.8, 0.7)
SHARES = (0.25, 0.5, 0.75, 1.0)


@dataclass(frozen=True)
class Timing:
    """One line of the table: seconds [s] measured, against the most that is allowed."""

    name: str
    seconds: float
    limit_s: float
    remark: str
    is_good: bool = True

    @property
    def verdict(self) -> str:
        """Whether the target is met, in one word."""
        return "met" if self.is_good and self.seconds <= self.limit_s else "MISSED"


def time_command(arguments: list[str]) -> tuple[float, str]:
    """Wall time [s] and standard output of the command line in a fresh process."""
    began = time.perf_counter()
    command = [sys.executable, "-m", "balancer", *arguments]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=True)
    return time.perf_counter() - began, done.stdout


def median_of_runs(arguments: list[str], runs: int) -> tuple[float, str]:
    """Median wall time [s] of several runs, and the output of the last one."""
    timed = [time_command(arguments) for _ in range(runs)]
    return statistics.median(seconds for seconds, _ in timed), timed[-1][1]


def measure_help(runs: int) -> Iterator[Timing]:
    """Time until help is on the screen."""
    seconds, _ = median_of_runs(["--help"], runs)
    yield Timing("`balancer --help`", seconds, 0.3, f"median of {runs}")


def measure_plan(runs: int) -> Iterator[Timing]:
    """Time the crowded house from the command line to the proven plan."""
    seconds, output = median_of_runs(["plan", *HOUSE, "--json"], runs)
    bound = json.loads(output)["bound"]
    remark = f"median of {runs}, {bound['optimum_peak_neutral']:.2f} A, {'proven' if bound['proven'] else 'NOT PROVEN'}"
    yield Timing("`balancer plan`, crowded house", seconds, 4.0, remark, bound["proven"])


def measure_tradeoff(runs: int) -> Iterator[Timing]:
    """Time the curve of the crowded house from no landing to ten."""
    seconds, output = median_of_runs(["tradeoff", *HOUSE, "--upto", "10", "--json"], runs)
    points = json.loads(output)["points"]
    # Fewer landings than it takes to cure the house's error give no point.
    is_proven = points[-1]["landings"] == 10 and all(point["proven"] for point in points)
    remark = f"median of {runs}, {len(points)} points, {'all proven' if is_proven else 'NOT ALL PROVEN'}"
    yield Timing("`balancer tradeoff`, 0 to 10 landings, crowded house", seconds, 15.0, remark, is_proven)


def build_large_panel(seed: int, *, is_random: bool = False) -> tuple[Installation, Scenarios]:
    """Land 48 free single-pole circuits of mixed power factor at random in 60 spaces, with 48 scenarios.

    Every circuit has a use, and the scenarios are the hours of a summer and a winter day, each share scattered by a
    fifth; with `is_random` every circuit is on in half the scenarios at a random share, which no house is.
    """
    chance = np.random.default_rng(seed)
    spaces = chance.permutation(np.arange(1, SPACES + 1))[:CIRCUITS]
    circuits = tuple(
        Circuit(
            label=f"c{number}",
            landing=(Terminal(int(space)),),
            volts=Volts.V120,
            is_neutral_checked=True,
            load=Load(
                neutral_a=int(chance.integers(10, 161)) / 10,
                neutral_pf=PowerFactor(float(chance.choice(POWER_FACTORS))),
            ),
            use=str(chance.choice(known_uses())),
        )
        for number, space in enumerate(spaces, start=1)
    )
    if is_random:
        is_on = chance.random((SCENARIOS, CIRCUITS)) < 0.5
        shares = is_on * chance.choice(SHARES, (SCENARIOS, CIRCUITS))
    else:
        hours = [(season, hour) for season in Season for hour in HOURS]
        profiles = shipped_profiles()
        shares = np.array([[profiles.share(c.use, season, hour) for c in circuits] for season, hour in hours])
        shares = shares * chance.uniform(0.8, 1.2, shares.shape)
    installation = Installation(panel=Panel(spaces=ordinary_spaces(SPACES)), circuits=circuits)
    return installation, share_scenarios(installation, [f"s{row}" for row in range(1, SCENARIOS + 1)], shares)


def solve_large_panel(seed: int, is_random: bool) -> tuple[float, float, float]:
    """Wall time [s], lowest peak neutral [A] and its proven bound [A] of one seeded panel, imports included."""
    began = time.perf_counter()
    from balancer.arrange.clock import Clock
    from balancer.arrange.plan import Planner
    from balancer.arrange.results import ObjectiveName, Options

    stages = Planner(*build_large_panel(seed, is_random=is_random), Options(), Clock(GIVEN_UP_AFTER_S)).stages()
    first = stages.close_peak(ObjectiveName.NEUTRAL)
    return time.perf_counter() - began, first.value, first.bound


def measure_large_panels(runs: int) -> Iterator[Timing]:
    """Time the proof of the lowest peak neutral on ten seeded panels, once each, whatever `runs` says."""
    del runs
    yield from _large_panels(is_random=False, limit_s=30.0)


def measure_random_panels(runs: int) -> Iterator[Timing]:
    """Time the same with random scenarios, harder than any house; only to show where the limits are."""
    del runs
    yield from _large_panels(is_random=True, limit_s=GIVEN_UP_AFTER_S)


def _large_panels(*, is_random: bool, limit_s: float) -> Iterator[Timing]:
    kind = "random scenarios" if is_random else "hours"
    for seed in range(1, SEEDS + 1):
        seconds, value_a, bound_a = in_fresh_process(partial(solve_large_panel, seed, is_random))
        remark = f"{value_a:.3f} A, at most {value_a - bound_a:.3f} A above the best possible"
        name = f"{SPACES} spaces, {CIRCUITS} circuits, {SCENARIOS} {kind}, seed {seed}"
        yield Timing(name, seconds, limit_s, remark, value_a - bound_a <= 0.05 + 1e-9)


MEASUREMENTS: dict[str, Callable[[int], Iterator[Timing]]] = {
    "help": measure_help,
    "plan": measure_plan,
    "tradeoff": measure_tradeoff,
    "large": measure_large_panels,
    "random": measure_random_panels,
}
READINGS = "readings"


def print_timings(names: list[str], runs: int) -> list[str]:
    """Print what is measured against a target as one table, line by line; gives what missed it."""
    print("| what | time | target | verdict | remark |\n|---|---|---|---|---|")
    missed = []
    for name in names:
        for timing in MEASUREMENTS[name](runs):
            cells = (
                f"{timing.name} | {timing.seconds:.2f} s | {timing.limit_s:g} s | {timing.verdict} | {timing.remark}"
            )
            print(f"| {cells} |", flush=True)
            missed += [timing.name] if timing.verdict == "MISSED" else []
    return missed


def parse_options() -> argparse.Namespace:
    """Read the command line."""
    parser = argparse.ArgumentParser(description=__doc__)
    parts = [*MEASUREMENTS, READINGS]
    usual = [part for part in parts if part != "random"]
    parser.add_argument("--only", choices=parts, nargs="+", default=usual, help="what to measure")
    parser.add_argument("--runs", type=int, default=5, help="runs behind each median (default 5)")
    parser.add_argument("--cases", default="", help="of the readings: logs whose name this pattern finds, or growth")
    parser.add_argument("--all-rivals", action="store_true", help="put every log to CP-SAT and HiGHS as well: hours")
    parser.add_argument("--rival-limit", type=float, default=150.0, help="seconds that each of them has (default 150)")
    return parser.parse_args()


def main() -> int:
    """Print the tables; the exit code is 1 where a target is missed."""
    options = parse_options()
    print(f"{platform.system()} {platform.machine()}, {os.cpu_count()} cores, Python {platform.python_version()}\n")
    timed = [name for name in options.only if name in MEASUREMENTS]
    missed = print_timings(timed, options.runs) if timed else []
    if READINGS in options.only:
        missed += print_readings(Wanted(options.cases, options.all_rivals, options.rival_limit))
    return 1 if missed else 0


if __name__ == "__main__":
    sys.exit(main())
