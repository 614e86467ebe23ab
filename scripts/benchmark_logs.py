"""Logs of readings to measure on: a metered house, logs of which hardly two rows are equal, and smooth ones."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from pathlib import Path

import numpy as np
import pandas as pd
from environment import ROOT
from numpy.typing import NDArray

from balancer.electrical.scenarios import ScenarioKind, Scenarios
from balancer.files import read_inventory
from balancer.files.readings import read_readings
from balancer.panel import Circuit, Installation, Load, Panel, PowerFactor, Terminal, Volts, ordinary_spaces

HOUSE = ROOT / "data" / "readings_house.csv"
FOUR_WEEKS = ROOT / "data" / "readings_28d_15min.csv"
YEAR = ROOT.parent / "shared" / "data" / "house_year_1min_w.csv.xz"
"""Where a year of minutes may lie beside the checkout; without it a year is made of four weeks."""

QUARTERS_A_YEAR = 35_040
NOISE_A = 0.05
FREE = (24, 30, 36, 40, 44)
SMOOTH_CIRCUITS = 48
POWER_FACTORS = (1.0, 0.98, 0.95, 0.9, 0.85, 0.8)
HARMONICS = 3


@dataclass(frozen=True)
class Case:
    """A log, and whether the whole model is put to other solvers when nobody asks for more."""

    name: str
    build: Callable[[], tuple[Installation, Scenarios]]
    has_rivals: bool = False
    limit_s: float | None = None
    """Most seconds [s] that the solve part of the project's way may take."""


def year_files(directory: Path) -> dict[str, Path]:
    """Write the year of the metered house as files: by minutes and by quarters of an hour, as it is and with noise."""
    year = pd.read_csv(YEAR) if YEAR.exists() else _made_year()
    stamps, values = year.iloc[:, 0], year.iloc[:, 1:]
    noisy = _with_noise(values)
    quarters = stamps[::15].reset_index(drop=True)
    files = {}
    for name, table in {"1 min": values, "1 min, noise": noisy}.items():
        files[name] = _write(directory / f"{name}.csv", stamps, table, "%.2f")
    for name, table in {"15 min": values, "15 min, noise": noisy}.items():
        means = pd.DataFrame(table.to_numpy().reshape(len(quarters), 15, -1).mean(axis=1), columns=values.columns)
        files[name] = _write(directory / f"{name}.csv", quarters, means, "%.3f")
    return files


def _made_year() -> pd.DataFrame:
    """Thirteen times the four weeks that the project ships and a day more, every quarter in minutes."""
    weeks = pd.read_csv(FOUR_WEEKS).iloc[:, 1:]
    quarters = np.tile(weeks.to_numpy(), (14, 1))[:QUARTERS_A_YEAR]
    minutes = pd.DataFrame(np.repeat(quarters, 15, axis=0), columns=weeks.columns)
    stamps = pd.date_range("2023-01-01", periods=len(minutes), freq="min").strftime("%Y-%m-%d %H:%M")
    minutes.insert(0, "time", stamps)
    return minutes


def _with_noise(values: pd.DataFrame) -> pd.DataFrame:
    """Add noise of a meter to what runs: a real log hardly has two equal rows."""
    a_unit = np.array([_units_per_a(column) for column in values.columns])
    running = values.to_numpy()
    noise = np.random.default_rng(1).normal(0.0, NOISE_A, running.shape) * a_unit
    return pd.DataFrame(np.where(running > 0.0, np.maximum(running + noise, 0.0), running), columns=values.columns)


def _units_per_a(column: str) -> float:
    """How many of a column's unit an ampere is: one ampere, or so many watts."""
    if column.endswith("_A"):
        return 1.0
    return 240.0 if "240" in column else 120.0


def _write(path: Path, stamps: pd.Series[str], values: pd.DataFrame, form: str) -> Path:
    values = values.copy()
    values.insert(0, "time", stamps)
    values.to_csv(path, index=False, float_format=form)
    return path


def first_rows(log: Path, rows: int, target: Path) -> Path:
    """Copy the header and the first rows of a log."""
    with log.open(encoding="utf-8") as source, target.open("w", encoding="utf-8") as sink:
        for _, line in zip(range(rows + 1), source, strict=False):
            sink.write(line)
    return target


def read_house(log: Path) -> tuple[Installation, Scenarios]:
    """Read the metered house under a log."""
    found = read_readings(log, read_inventory(HOUSE))
    return found.installation, found.scenarios


def dense_log(free: int, *, mixed: bool) -> tuple[Installation, Scenarios]:
    """Give a year of quarters in which every circuit is often on, at any share of its load."""
    chance = np.random.default_rng(free)
    full_a = chance.uniform(1.0, 16.0, free).round(1)
    is_on = chance.random((QUARTERS_A_YEAR, free)) < chance.uniform(0.05, 0.3, free)
    amps = (is_on * chance.uniform(0.3, 1.0, is_on.shape) * full_a).round(3)
    factors = chance.choice(POWER_FACTORS, free) if mixed else np.ones(free)
    return _panel(full_a, factors), _readings(amps)


def smooth_log() -> tuple[Installation, Scenarios]:
    """Give a year of quarters in which every circuit is always on and follows a smooth course of the day."""
    chance = np.random.default_rng(SMOOTH_CIRCUITS)
    full_a = chance.uniform(1.0, 16.0, SMOOTH_CIRCUITS).round(1)
    day = 2.0 * np.pi * np.arange(QUARTERS_A_YEAR)[:, None] / 96.0
    shares = np.full((QUARTERS_A_YEAR, SMOOTH_CIRCUITS), 0.5)
    for harmonic in range(1, HARMONICS + 1):
        phase = chance.uniform(0.0, 2.0 * np.pi, SMOOTH_CIRCUITS)
        # No two days are equal: every circuit's course drifts through the year.
        drift = chance.uniform(0.9, 1.1, SMOOTH_CIRCUITS)
        shares += 0.45 / HARMONICS * np.sin(harmonic * day * drift + phase)
    return _panel(full_a, np.ones(SMOOTH_CIRCUITS)), _readings((shares * full_a).round(3))


def _panel(full_a: NDArray[np.float64], factors: NDArray[np.float64]) -> Installation:
    """Land single-pole circuits from the top of a panel with spaces enough to put all of them on either leg."""
    circuits = tuple(
        Circuit(
            label=f"c{number}",
            landing=(Terminal(number),),
            volts=Volts.V120,
            is_neutral_checked=True,
            load=Load(neutral_a=float(amps), neutral_pf=PowerFactor(float(factor))),
        )
        for number, (amps, factor) in enumerate(zip(full_a, factors, strict=True), start=1)
    )
    return Installation(panel=Panel(spaces=ordinary_spaces(2 * len(circuits))), circuits=circuits)


def _readings(amps: NDArray[np.float64]) -> Scenarios:
    return Scenarios(
        kind=ScenarioKind.READINGS,
        names=tuple(f"interval {row}" for row in range(1, len(amps) + 1)),
        neutral_a=amps,
        line_a=np.zeros_like(amps),
        are_averages=True,
    )


def all_cases(files: dict[str, Path]) -> list[Case]:
    """Every log that is measured, in the order of the table."""
    houses = [Case(f"house, {name}", partial(read_house, file), name == "15 min") for name, file in files.items()]
    dense = [
        Case(
            f"dense {free}, {'mixed' if mixed else 'unity'}",
            partial(dense_log, free, mixed=mixed),
            has_rivals=free <= 30 and not mixed,
            limit_s=_dense_limit_s(free, mixed=mixed),
        )
        for mixed in (False, True)
        for free in FREE
    ]
    return [*houses, *dense, Case(f"smooth {SMOOTH_CIRCUITS}", smooth_log)]


def _dense_limit_s(free: int, *, mixed: bool) -> float | None:
    if mixed:
        return 20.0 if free == 40 else None
    return {30: 1.0, 36: 2.0, 40: 8.0, 44: 20.0}.get(free)
