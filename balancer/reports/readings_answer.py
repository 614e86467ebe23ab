"""What a log of readings tells beyond the peaks, gathered once for the terminal report and for the JSON document."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace

from balancer.arrange.results import ObjectiveResult, Plan
from balancer.electrical.days import (
    Coverage,
    DayCurve,
    HighTimes,
    TimeArray,
    coverage,
    day_curve,
    high_times,
    ordinary_date,
    worst_date,
)
from balancer.electrical.durations import (
    Distribution,
    HoldOut,
    distribution,
    hours_above,
    levels_below,
    mean_square_neutral,
    neutral_loss_kwh,
)
from balancer.electrical.impedances import service_impedances
from balancer.electrical.phasors import LegCurrents, PanelCurrents
from balancer.electrical.scenarios import Scenarios
from balancer.panel import Installation

TWO_WEEKS_D = 14
HALF_A_YEAR_D = 182.5

QUANTITIES = {"neutral": "Neutral", "imbalance": "Imbalance", "heavy_leg": "Heavy leg"}
"""What is counted over the intervals: its name in `LegCurrents` and in the document, and on the screen."""


@dataclass(frozen=True, kw_only=True)
class Level:
    """Hours a year [h] above a level [A] of one of `QUANTITIES`."""

    quantity: str
    level_a: float
    as_found_h: float | None
    as_left_h: float | None


@dataclass(frozen=True, kw_only=True)
class NeutralLoss:
    """Heat in the neutral conductor: as left over as found, and each in a year [kWh]; None where it is not known."""

    ratio: float | None
    as_found_kwh: float | None
    as_left_kwh: float | None


@dataclass(frozen=True, kw_only=True, eq=False)
class ChartedDay:
    """A day to look at hour by hour; `name` is ``ordinary`` or ``worst``."""

    name: str
    date: dt.date
    as_found: DayCurve | None
    as_left: DayCurve | None


@dataclass(frozen=True, kw_only=True)
class ReadingsProof:
    """How far the first objective was closed, and how many intervals had to be weighed for that; None: not counted."""

    first: ObjectiveResult
    rows: int | None


@dataclass(frozen=True, kw_only=True, eq=False)
class ReadingsAnswer:
    """The statistics of a log; what is as found or as left is None where there is no such arrangement.

    `holdout` and `proof` belong to plans.
    """

    coverage: Coverage
    as_found: Distribution | None
    as_left: Distribution | None
    levels: tuple[Level, ...]
    neutral_loss: NeutralLoss
    high_times: HighTimes | None
    days: tuple[ChartedDay, ...]
    holdout: HoldOut | None = None
    proof: ReadingsProof | None = None

    @property
    def warnings(self) -> tuple[str, ...]:
        """What the log is too short for; silent where the readings after a date judge the plan."""
        if self.holdout is not None:
            return ()
        days, hours = self.coverage.days, self.coverage.hours
        covered = f"{days:.0f} days are covered" if days >= 2 else f"{hours:.0f} hours are covered"
        if days < TWO_WEEKS_D:
            return (
                f"Only {covered}, fewer than two weeks: what did not run in them is not in these figures. Read longer, "
                "or plan with use profiles beside this.",
            )
        if days < HALF_A_YEAR_D:
            return (
                f"Only {covered}, less than half a year: heating, cooling and lighting of another season may peak "
                "elsewhere and higher.",
            )
        return ()


def readings_answer(
    installation: Installation, scenarios: Scenarios, found: LegCurrents | None, left: LegCurrents | None
) -> ReadingsAnswer | None:
    """Gather the statistics of a log under one or both arrangements; None where the scenarios are no readings."""
    governing = found or left
    if scenarios.times is None or scenarios.interval_s is None or governing is None:
        return None
    times, interval_s = scenarios.times, scenarios.interval_s
    dates = {
        "ordinary": ordinary_date(governing.neutral, times, interval_s),
        "worst": worst_date(governing.neutral, times),
    }
    return ReadingsAnswer(
        coverage=coverage(times, interval_s),
        as_found=None if found is None else distribution(found),
        as_left=None if left is None else distribution(left),
        levels=tuple(_levels(found, left, governing)),
        neutral_loss=_neutral_loss(installation, found, left),
        high_times=high_times(governing.neutral, times, interval_s),
        days=tuple(_days(dates, times, found, left)),
    )


def found_readings(installation: Installation, scenarios: Scenarios) -> ReadingsAnswer | None:
    """Gather the statistics of a log for the panel as it stands; None where there are none."""
    if scenarios.times is None or not installation.as_found:
        return None
    found = PanelCurrents(installation, scenarios).currents(installation.as_found)
    return readings_answer(installation, scenarios, found, None)


def planned_readings(plan: Plan) -> ReadingsAnswer | None:
    """Gather the statistics of a log for a plan; None where it was not made on readings."""
    if plan.scenarios.times is None:
        return None
    currents = PanelCurrents(plan.installation, plan.scenarios)
    found = currents.currents(plan.as_found) if plan.as_found else None
    answer = readings_answer(plan.installation, plan.scenarios, found, currents.currents(plan.as_left))
    proof = ReadingsProof(first=plan.objectives[0], rows=plan.search_rows)
    return None if answer is None else replace(answer, holdout=plan.holdout, proof=proof)


def _levels(found: LegCurrents | None, left: LegCurrents | None, governing: LegCurrents) -> Iterator[Level]:
    for quantity in QUANTITIES:
        for level_a in levels_below(float(getattr(governing, quantity).max())):
            as_found_h, as_left_h = (
                None if each is None else hours_above(getattr(each, quantity), level_a) for each in (found, left)
            )
            yield Level(quantity=quantity, level_a=level_a, as_found_h=as_found_h, as_left_h=as_left_h)


def _neutral_loss(installation: Installation, found: LegCurrents | None, left: LegCurrents | None) -> NeutralLoss:
    found_a2, left_a2 = (None if each is None else mean_square_neutral(each) for each in (found, left))
    impedances = service_impedances(installation.panel.supply)
    neutral_ohm = 0.0 if impedances is None else impedances.neutral_ohm.real
    as_found_kwh, as_left_kwh = (
        None if each_a2 is None or neutral_ohm == 0 else neutral_loss_kwh(each_a2, neutral_ohm)
        for each_a2 in (found_a2, left_a2)
    )
    ratio = None if not found_a2 or left_a2 is None else left_a2 / found_a2
    return NeutralLoss(ratio=ratio, as_found_kwh=as_found_kwh, as_left_kwh=as_left_kwh)


def _days(
    dates: Mapping[str, dt.date | None], times: TimeArray, found: LegCurrents | None, left: LegCurrents | None
) -> Iterator[ChartedDay]:
    for name, date in dates.items():
        if date is not None:
            yield ChartedDay(
                name=name,
                date=date,
                as_found=None if found is None else day_curve(found, times, date),
                as_left=None if left is None else day_curve(left, times, date),
            )
