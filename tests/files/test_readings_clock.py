"""Rows put in order of time: clock changes, duplicates, disorder and gaps, all by hand."""

import numpy as np
import pytest

from balancer.files.readings_clock import Clock, ClockChange, Gaps, order_rows
from balancer.files.readings_times import DateOrder, Stamps

AUTUMN, SPRING = "2023-11-05", "2023-03-12"
"""Sundays on which clocks in most of the United States changed in 2023 (from memory)."""


def seconds(text: str) -> int:
    return int(np.datetime64(text, "s").astype(int))


def stamps_at(*texts: str, offsets_h: list[float] | None = None) -> Stamps:
    wall_s = np.array([seconds(text) for text in texts], dtype=np.int64)
    offset_s = None if offsets_h is None else (np.array(offsets_h) * 3600).astype(np.int64)
    return Stamps(wall_s, offset_s, DateOrder.YEAR_FIRST)


def ordered(*texts: str, values: list[float] | None = None, offsets_h: list[float] | None = None) -> Clock:
    column = np.array(values if values is not None else range(len(texts)), dtype=np.float32)[:, np.newaxis]
    return order_rows(stamps_at(*texts, offsets_h=offsets_h), column)


def on(day: str, *times: str) -> list[str]:
    return [f"{day} {time}" for time in times]


def quarters(day: str, *hours: int) -> list[str]:
    return [f"{day} {hour:02d}:{minute:02d}" for hour in hours for minute in (0, 15, 30, 45)]


def test_rows_in_order_stay_as_they_are() -> None:
    clock = ordered(*quarters("2023-06-01", 0, 1))
    assert clock.rows.tolist() == list(range(8))
    assert (clock.interval_s, clock.uneven_steps, clock.gaps) == (900.0, 0, Gaps(0, 0, 0, 0))
    assert clock.changes == ()


def test_a_gap_is_counted_and_placed() -> None:
    clock = ordered(*on("2023-06-01", "00:00", "00:15", "00:30", "01:30", "01:45", "02:15"))
    assert clock.gaps == Gaps(2, 4, 45 * 60, seconds("2023-06-01 00:30"))


def test_uneven_steps_are_counted() -> None:
    assert ordered(*on("2023-06-01", "00:00", "00:10", "00:20", "00:32", "00:40", "00:50")).uneven_steps == 2


def test_rows_out_of_order_are_sorted_and_counted() -> None:
    clock = ordered(*on("2023-06-01", "00:00", "00:30", "00:15", "00:45", "01:00", "01:15"))
    assert clock.rows.tolist() == [0, 2, 1, 3, 4, 5]
    assert (clock.out_of_order, clock.is_newest_first) == (1, False)


def test_newest_first_is_turned_round() -> None:
    clock = ordered(*on("2023-06-01", "00:45", "00:30", "00:15", "00:00"))
    assert clock.rows.tolist() == [3, 2, 1, 0]
    assert (clock.out_of_order, clock.is_newest_first) == (0, True)


def test_of_equal_rows_one_is_kept() -> None:
    clock = ordered(*on("2023-06-01", "00:00", "00:15", "00:15", "00:30"), values=[1, np.nan, np.nan, 3])
    assert clock.wall_s.tolist() == [seconds(text) for text in on("2023-06-01", "00:00", "00:15", "00:30")]
    assert (clock.same_twice, clock.other_twice) == (1, 0)


@pytest.mark.parametrize("is_newest_first", [False, True])
def test_of_different_rows_with_one_timestamp_the_last_in_the_file_counts(is_newest_first: bool) -> None:
    texts = on("2023-06-01", "00:00", "00:15", "00:15", "00:30", "00:45")
    clock = ordered(*(texts[::-1] if is_newest_first else texts))
    assert clock.rows.tolist() == ([4, 3, 1, 0] if is_newest_first else [0, 2, 3, 4])
    assert (clock.same_twice, clock.other_twice) == (0, 1)


@pytest.mark.parametrize(
    "texts",
    [
        pytest.param(quarters(AUTUMN, 0, 1, 1, 2), id="as it was logged"),
        pytest.param(sorted(quarters(AUTUMN, 0, 1, 1, 2)), id="sorted by a spreadsheet"),
        pytest.param(quarters(AUTUMN, 0, 1, 1, 2)[::-1], id="newest first"),
    ],
)
def test_the_hour_that_stands_twice_in_autumn_is_used_twice(texts: list[str]) -> None:
    clock = ordered(*texts)
    assert len(clock.rows) == 16
    assert np.diff(clock.elapsed_s).tolist() == [900] * 15
    assert clock.wall_s.tolist() == [seconds(text) for text in quarters(AUTUMN, 0, 1, 1, 2)]
    assert clock.changes == (ClockChange(seconds(f"{AUTUMN} 01:00"), is_forward=False),)
    assert (clock.same_twice, clock.other_twice, clock.gaps.count) == (0, 0, 0)


def test_a_quiet_hour_twice_is_used_twice() -> None:
    assert len(ordered(*quarters(AUTUMN, 0, 1, 1, 2), values=[0.5] * 16).rows) == 16


def test_an_hourly_log_repeats_one_row_in_autumn() -> None:
    clock = ordered(*on(AUTUMN, "00:00", "01:00", "01:00", "02:00", "03:00"))
    assert np.diff(clock.elapsed_s).tolist() == [3600] * 4
    assert len(clock.changes) == 1


@pytest.mark.parametrize(
    "texts",
    [
        pytest.param(quarters("2023-11-06", 0, 1, 1, 2), id="on a Monday"),
        pytest.param(quarters("2023-06-04", 0, 1, 1, 2), id="in June"),
        pytest.param(quarters(AUTUMN, 11, 12, 12, 13), id="at noon"),
        pytest.param(quarters(AUTUMN, 0, 1, 0, 1), id="two hours"),
        pytest.param([*quarters(AUTUMN, 0, 1, 2), f"{AUTUMN} 01:15"], id="one row of an hour"),
    ],
)
def test_other_rows_that_stand_twice_are_duplicates(texts: list[str]) -> None:
    clock = ordered(*texts)
    assert clock.changes == ()
    assert len(clock.rows) == len(set(texts))


@pytest.mark.parametrize("hours", [(0, 1, 3, 4), (1, 3), (0, 1, 3)])
def test_the_hour_left_out_in_spring_is_no_gap(hours: tuple[int, ...]) -> None:
    clock = ordered(*quarters(SPRING, *hours))
    assert (np.diff(clock.elapsed_s) == 900).all()
    assert clock.changes == (ClockChange(seconds(f"{SPRING} 03:00"), is_forward=True),)
    assert clock.gaps.count == 0


@pytest.mark.parametrize(
    "texts",
    [
        pytest.param(quarters("2023-03-13", 0, 1, 3, 4), id="on a Monday"),
        pytest.param(quarters(SPRING, 12, 13, 15), id="at noon"),
        pytest.param(quarters(SPRING, 0, 3, 4), id="two hours"),
        pytest.param(quarters("2023-07-02", 0, 1, 3, 4), id="in July"),
    ],
)
def test_other_hours_left_out_are_gaps(texts: list[str]) -> None:
    clock = ordered(*texts)
    assert (clock.changes, clock.gaps.count) == ((), 1)


def test_a_log_through_both_changes_runs_evenly() -> None:
    days = [str(day) for day in np.arange(np.datetime64("2023-03-11"), np.datetime64("2023-11-07"))]
    texts = []
    for day in days:
        hours = list(range(24))
        hours = [*hours[:2], *hours[3:]] if day == SPRING else [*hours[:2], 1, *hours[2:]] if day == AUTUMN else hours
        texts += quarters(day, *hours)
    clock = ordered(*texts)
    assert len(clock.rows) == len(texts)
    assert (np.diff(clock.elapsed_s) == 900).all()
    assert [change.is_forward for change in clock.changes] == [True, False]


def test_offsets_order_the_hour_that_stands_twice() -> None:
    texts = quarters(AUTUMN, 1, 1)
    clock = ordered(*texts, offsets_h=[-4] * 4 + [-5] * 4)
    assert np.diff(clock.elapsed_s).tolist() == [900] * 7
    assert clock.wall_s.tolist() == [seconds(text) for text in texts]
    assert clock.changes == (ClockChange(seconds(f"{AUTUMN} 01:00"), is_forward=False),)


def test_offsets_bridge_the_hour_left_out() -> None:
    clock = ordered(*on(SPRING, "01:30", "01:45", "03:00", "03:15"), offsets_h=[-5, -5, -4, -4])
    assert np.diff(clock.elapsed_s).tolist() == [900] * 3
    assert (clock.gaps.count, clock.changes[0].is_forward) == (0, True)


def test_with_offsets_an_hour_left_out_is_a_gap() -> None:
    clock = ordered(*quarters(SPRING, 0, 1, 3), offsets_h=[-5] * 12)
    assert (clock.changes, clock.gaps.intervals) == ((), 4)
