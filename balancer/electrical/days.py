"""When a log's currents are high: the days to look at hour by hour, and the times of day and year."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balancer.electrical.phasors import LegCurrents
from balancer.electrical.scenarios import FloatArray

TimeArray = NDArray[np.datetime64]

HOURS_A_DAY = 24
_MONTHS_A_YEAR = 12
_DAY_S = 86400

_RUN = 3
"""Hours of a day, months of a year, that are named together as the time of the high currents."""

_FEWEST_HIGH = 20
"""With fewer intervals among the highest 1 % there is no saying when they fall."""

_NEARLY_A_YEAR_D = 300
"""With fewer days covered, months are not compared: some were hardly read."""


@dataclass(frozen=True, kw_only=True)
class Coverage:
    """What a log covers: its first and last interval, how many there are and how long each is [s]."""

    first: dt.datetime
    last: dt.datetime
    intervals: int
    interval_s: float

    @property
    def hours(self) -> float:
        """Hours read [h], gaps left out."""
        return self.intervals * self.interval_s / 3600.0

    @property
    def days(self) -> float:
        """Days read [d], gaps left out."""
        return self.hours / HOURS_A_DAY


def coverage(times: TimeArray, interval_s: float) -> Coverage:
    """Describe what a log covers."""
    first, last = (moment(time) for time in (times.min(), times.max()))
    return Coverage(first=first, last=last, intervals=len(times), interval_s=interval_s)


def moment(time: np.datetime64) -> dt.datetime:
    """Turn one time of a log into a date and time of day."""
    found: dt.datetime = time.astype("datetime64[s]").item()
    return found


@dataclass(frozen=True, kw_only=True, eq=False)
class DayCurve:
    """Highest reading of each hour of a day, arrays of shape (24,) in amperes [A]; NaN where the hour was not read."""

    leg_a: FloatArray
    leg_b: FloatArray
    neutral: FloatArray


def day_curve(currents: LegCurrents, times: TimeArray, date: dt.date) -> DayCurve:
    """Take the hourly maxima of one day. An interval counts in the hour in which it begins."""
    in_day = times.astype("datetime64[D]") == np.datetime64(date)
    hours = _hours(times[in_day])
    return DayCurve(
        leg_a=_hourly_maxima(currents.leg_a[in_day], hours),
        leg_b=_hourly_maxima(currents.leg_b[in_day], hours),
        neutral=_hourly_maxima(currents.neutral[in_day], hours),
    )


def _hours(times: TimeArray) -> NDArray[np.int64]:
    since_midnight = times.astype("datetime64[h]") - times.astype("datetime64[D]")
    return np.asarray(since_midnight.astype(np.int64))


def _hourly_maxima(values_a: FloatArray, hours: NDArray[np.int64]) -> FloatArray:
    highest = np.full(HOURS_A_DAY, np.nan)
    np.fmax.at(highest, hours, values_a)
    return highest


def worst_date(neutral_a: FloatArray, times: TimeArray) -> dt.date:
    """Date of the peak neutral; the earlier where two are equal."""
    return moment(times[int(np.argmax(neutral_a))]).date()


def ordinary_date(neutral_a: FloatArray, times: TimeArray, interval_s: float) -> dt.date | None:
    """Date whose peak neutral is the median of all days that were read from end to end; None where none was.

    Of an even number of days the lower median counts, of equal days the earlier.
    """
    first = times.min().astype("datetime64[D]")
    day_of_row = _days_since(first, times)
    peaks = np.zeros(int(day_of_row.max()) + 1)
    np.maximum.at(peaks, day_of_row, neutral_a)
    read = np.bincount(_days_since(first, _distinct(times)), minlength=len(peaks))
    complete = np.flatnonzero(read >= round(_DAY_S / interval_s))
    if not complete.size:
        return None
    by_peak = complete[np.argsort(peaks[complete], kind="stable")]
    return moment(first + by_peak[(len(by_peak) - 1) // 2]).date()


def _days_since(first: np.datetime64, times: TimeArray) -> NDArray[np.int64]:
    return np.asarray((times.astype("datetime64[D]") - first).astype(np.int64))


def _distinct(times: TimeArray) -> TimeArray:
    """Drop clock times that come again: the hour read twice in autumn makes up for no gap."""
    in_order = np.sort(times)
    return in_order[np.concatenate(([True], in_order[1:] != in_order[:-1]))]


@dataclass(frozen=True, kw_only=True)
class Run:
    """A run of three hours of the day (from 0) or months of the year (from 1), and the share of intervals in it."""

    first: int
    share: float


@dataclass(frozen=True, kw_only=True)
class HighTimes:
    """When the highest 1 % of the neutral currents fall; `months` is None where less than a year or so was read."""

    intervals: int
    hours: Run
    months: Run | None


def high_times(neutral_a: FloatArray, times: TimeArray, interval_s: float) -> HighTimes | None:
    """Find the time of day and of year of the highest neutral currents; None where too few stand out."""
    level_a = np.quantile(neutral_a.astype(np.float64), 0.99, method="inverted_cdf")
    high = times[neutral_a > level_a]
    if len(high) < _FEWEST_HIGH:
        return None
    months = None
    if len(times) * interval_s >= _NEARLY_A_YEAR_D * _DAY_S:
        of_year = high.astype("datetime64[M]").astype(np.int64) % _MONTHS_A_YEAR
        run = _fullest_run(of_year, _MONTHS_A_YEAR)
        months = Run(first=run.first + 1, share=run.share)
    return HighTimes(intervals=len(high), hours=_fullest_run(_hours(high), HOURS_A_DAY), months=months)


def _fullest_run(places: NDArray[np.int64], length: int) -> Run:
    """Find the fullest run on a circle: evenings and winters go on past its end."""
    counts = np.bincount(places, minlength=length)
    sums = sum(np.roll(counts, -step) for step in range(_RUN))
    first = int(np.argmax(sums))
    return Run(first=first, share=float(np.asarray(sums)[first]) / len(places))
