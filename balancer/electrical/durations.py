"""How long the legs and the neutral carry what, over the intervals of a log of readings."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from balancer.electrical.phasors import LegCurrents, PanelCurrents
from balancer.electrical.scenarios import FloatArray, Scenarios
from balancer.panel import Installation, Landing

HOURS_A_YEAR = 8760.0

_ROUND_LEVELS_A = (0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 30, 40, 50, 75, 100, 150, 200, 300, 400, 600, 800, 1000)
_MOST_LEVELS = 4

_AT_LEVEL_A = 0.0005
"""Up to this far above a level a current is at it: sums in single precision end a hair beside whole amps [A]."""


@dataclass(frozen=True, kw_only=True)
class Spread:
    """What a current stays at or below in half, 95 % and 99 % of the intervals, and its peak, in amperes [A]."""

    median_a: float
    p95_a: float
    p99_a: float
    peak_a: float


@dataclass(frozen=True, kw_only=True)
class Distribution:
    """Spreads over all intervals of what a plan is judged by."""

    neutral: Spread
    imbalance: Spread
    heavy_leg: Spread


def spread(values_a: FloatArray) -> Spread:
    """Spread of a current over intervals of equal length; every figure is one that was reached, none interpolated."""
    median, p95, p99 = np.quantile(values_a.astype(np.float64), [0.5, 0.95, 0.99], method="inverted_cdf").tolist()
    return Spread(median_a=median, p95_a=p95, p99_a=p99, peak_a=float(values_a.max()))


def distribution(currents: LegCurrents) -> Distribution:
    """Spreads of an arrangement's neutral, imbalance and heavy leg."""
    return Distribution(
        neutral=spread(currents.neutral),
        imbalance=spread(currents.imbalance),
        heavy_leg=spread(currents.heavy_leg),
    )


def levels_below(peak_a: float) -> tuple[float, ...]:
    """Choose the highest few round levels [A] that a current with this peak exceeds."""
    return tuple(level for level in _ROUND_LEVELS_A if level < peak_a - _AT_LEVEL_A)[-_MOST_LEVELS:]


def hours_above(values_a: FloatArray, level_a: float) -> float:
    """Hours a year [h] for which a current exceeds a level.

    Notes
    -----
    Hours counted, over hours covered by the log, times the 8760 hours of a year: the part of the year that was not read
    is taken to be like the part that was. With intervals of equal length their length cancels out.
    """
    return float(np.mean(values_a > level_a + _AT_LEVEL_A)) * HOURS_A_YEAR


def mean_square_neutral(currents: LegCurrents) -> float:
    """Mean square [A^2] of the neutral current: the heat in the neutral conductor goes with it."""
    return float(np.mean(np.square(currents.neutral, dtype=np.float64)))


def neutral_loss_kwh(mean_square_a2: float, neutral_ohm: float) -> float:
    """Energy [kWh] that a neutral conductor turns into heat in a year, I^2 R over 8760 hours."""
    return mean_square_a2 * neutral_ohm * HOURS_A_YEAR / 1000.0


@dataclass(frozen=True, kw_only=True)
class JudgedPart:
    """One part of the readings, and what both arrangements carry in it; `as_found` is None where nothing was landed."""

    label: str
    intervals: int
    as_found: Distribution | None
    as_left: Distribution


@dataclass(frozen=True, kw_only=True)
class HoldOut:
    """A plan made on the readings before a date, judged on those from that date on, which it never saw."""

    before: JudgedPart
    after: JudgedPart


def judge_part(
    installation: Installation, label: str, scenarios: Scenarios, as_left: Mapping[str, Landing]
) -> JudgedPart:
    """Work out what the panel as found and as left carries in one part of the readings."""
    currents = PanelCurrents(installation, scenarios)
    found = installation.as_found
    return JudgedPart(
        label=label,
        intervals=len(scenarios),
        as_found=distribution(currents.currents(found)) if found else None,
        as_left=distribution(currents.currents(as_left)),
    )
