import datetime as dt

import numpy as np
import pytest

from balancer.electrical.days import coverage, day_curve, high_times, ordinary_date, worst_date
from balancer.electrical.phasors import LegCurrents

QUARTER_S = 900
A_DAY = 96


def quarters(days: int, first: str = "2023-01-02T00:00:00"):
    """Times of whole days of quarter hours; the first is a Monday."""
    return np.datetime64(first) + np.arange(days * A_DAY) * np.timedelta64(QUARTER_S, "s")


def neutral_of(*daily_peaks_a: float):
    """1 A all the time, and the day's peak at 18:15."""
    values = np.ones((len(daily_peaks_a), A_DAY))
    values[:, 73] = daily_peaks_a
    return values.ravel()


def currents(leg_a, leg_b=None) -> LegCurrents:
    leg_b = np.zeros_like(leg_a) if leg_b is None else leg_b
    return LegCurrents(
        leg_a=leg_a,
        leg_b=leg_b,
        heavy_leg=np.maximum(leg_a, leg_b),
        imbalance=np.abs(leg_a - leg_b),
        neutral=np.abs(leg_a - leg_b),
    )


def test_coverage_counts_what_was_read_and_not_the_gaps() -> None:
    times = quarters(3)
    read = coverage(np.concatenate((times[:A_DAY], times[2 * A_DAY :])), QUARTER_S)
    assert (read.intervals, read.hours, read.days) == (192, 48, 2)
    assert (read.first, read.last) == (dt.datetime(2023, 1, 2), dt.datetime(2023, 1, 4, 23, 45))


@pytest.mark.parametrize(
    ("peaks_a", "ordinary", "worst"),
    [
        pytest.param((9, 30, 12), 4, 3, id="median of three"),
        pytest.param((9, 30, 12, 20), 4, 3, id="lower median of four"),
        pytest.param((9, 9, 9), 3, 2, id="equal days: the median by date, the earliest worst"),
        pytest.param((9,), 2, 2, id="one day is both"),
    ],
)
def test_ordinary_day_is_the_median_and_worst_day_the_peak(peaks_a, ordinary, worst) -> None:
    neutral, times = neutral_of(*peaks_a), quarters(len(peaks_a))
    assert ordinary_date(neutral, times, QUARTER_S) == dt.date(2023, 1, ordinary)
    assert worst_date(neutral, times) == dt.date(2023, 1, worst)


def test_a_day_with_a_gap_is_no_ordinary_day_but_may_be_the_worst() -> None:
    neutral, times = neutral_of(9, 30, 40, 12, 20), quarters(5)
    kept = np.arange(len(times)) != 2 * A_DAY + 5
    assert ordinary_date(neutral[kept], times[kept], QUARTER_S) == dt.date(2023, 1, 5)
    assert worst_date(neutral[kept], times[kept]) == dt.date(2023, 1, 4)


def test_there_is_no_ordinary_day_where_no_day_was_read_whole() -> None:
    assert ordinary_date(neutral_of(9)[1:], quarters(1)[1:], QUARTER_S) is None


def test_the_hour_read_twice_in_autumn_makes_up_for_no_gap() -> None:
    times = quarters(1)
    twice = np.concatenate((times[:8], times[4:8], times[8:]))
    neutral = np.ones(len(twice))
    assert ordinary_date(neutral, twice, QUARTER_S) == dt.date(2023, 1, 2)
    assert ordinary_date(neutral[:-4], twice[:-4], QUARTER_S) is None


def test_order_of_the_rows_does_not_matter() -> None:
    neutral, times = neutral_of(9, 30, 12, 20, 25), quarters(5)
    mixed = np.random.default_rng(1).permutation(len(times))
    assert ordinary_date(neutral[mixed], times[mixed], QUARTER_S) == ordinary_date(neutral, times, QUARTER_S)


def test_day_curve_takes_the_highest_reading_of_each_hour_of_that_day() -> None:
    leg_a = np.tile(np.arange(A_DAY, dtype=np.float32), 2)
    leg_a[:A_DAY] += 1000
    curve = day_curve(currents(leg_a, np.full_like(leg_a, 10)), quarters(2), dt.date(2023, 1, 3))
    assert curve.leg_a.tolist() == [4 * hour + 3 for hour in range(24)]
    assert curve.leg_b.tolist() == [10] * 24
    # In the first hours the neutral is highest where leg A is lowest.
    assert curve.neutral[:3].tolist() == [10, 6, 2]
    assert curve.neutral[3] == 5


def test_hours_that_were_not_read_are_left_open() -> None:
    curve = day_curve(currents(np.ones(A_DAY - 4)), quarters(1)[4:], dt.date(2023, 1, 2))
    assert np.isnan(curve.leg_a[0])
    assert curve.leg_a[1:].tolist() == [1] * 23


def high_at(times, is_high):
    """High currents, all different, where asked; 1 A elsewhere, with a hair of noise."""
    noise = np.random.default_rng(2).random(len(times)) * 0.01
    return np.where(is_high, 20.0, 1.0) + noise


def test_high_readings_are_found_in_the_evening_across_midnight() -> None:
    times = quarters(28)
    hours = (times - times[0]).astype("timedelta64[h]").astype(int) % 24
    found = high_times(high_at(times, np.isin(hours, (23, 0, 1))), times, QUARTER_S)
    assert found is not None
    assert (found.hours.first, found.hours.share) == (23, 1.0)
    assert found.intervals == 26
    assert found.months is None


def test_a_year_tells_the_months_across_new_year() -> None:
    times = np.datetime64("2023-01-01T00:00:00") + np.arange(8760) * np.timedelta64(3600, "s")
    months = times.astype("datetime64[M]").astype(int) % 12 + 1
    found = high_times(high_at(times, np.isin(months, (11, 12, 1))), times, 3600)
    assert found is not None
    assert found.months is not None
    assert (found.months.first, found.months.share) == (11, 1.0)


def test_too_few_high_readings_tell_nothing() -> None:
    times = quarters(10)
    assert high_times(high_at(times, np.arange(len(times)) % 50 == 0), times, QUARTER_S) is None


def test_a_flat_log_has_no_high_readings() -> None:
    times = quarters(40)
    assert high_times(np.full(len(times), 5.0), times, QUARTER_S) is None
