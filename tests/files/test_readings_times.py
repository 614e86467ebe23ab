"""Timestamps as loggers and spreadsheets write them."""

import numpy as np
import pytest

from balancer.errors import InputError, Problem
from balancer.files.readings_cells import LogCells
from balancer.files.readings_times import DateOrder, Stamps, read_stamps


def cells_of(*texts: str) -> LogCells:
    stamps = np.array([text.encode() for text in texts], dtype="S")
    return LogCells(stamps, np.zeros((len(texts), 1), dtype=np.float32), np.arange(2, len(texts) + 2))


def stamps_of(*texts: str) -> Stamps:
    return read_stamps("log.csv", "time", cells_of(*texts))


def problems_of(*texts: str) -> tuple[Problem, ...]:
    with pytest.raises(InputError) as caught:
        stamps_of(*texts)
    return caught.value.problems


def wall(stamps: Stamps) -> list[str]:
    return [str(np.datetime64(int(second), "s")) for second in stamps.wall_s]


@pytest.mark.parametrize(
    "text",
    [
        "2023-01-14 18:30",
        "2023-01-14 18:30:00",
        "2023-01-14T18:30",
        "2023-01-14T18:30:00.000",
        "2023/01/14 18:30",
        "2023/1/14 18:30",
        "2023.01.14 18:30",
        "1/14/2023 6:30 PM",
        "01/14/2023 06:30 pm",
        "1/14/2023, 6:30:00 p.m.",
        "1/14/23 18:30",
        "14.01.2023 18:30",
        "14.1.23 18.30",
        "14/01/2023 18:30",
        "14-01-2023 18:30",
        "44940.7708333333",
        "44940,77083",
    ],
)
def test_one_moment_in_many_forms(text: str) -> None:
    seconds = stamps_of(text).wall_s[0] - np.datetime64("2023-01-14T18:30:00").astype("datetime64[s]").astype(int)
    # Five digits of a day are 0.9 s.
    assert abs(seconds) <= (1 if "," in text and text.startswith("4") else 0)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("1/14/2023 12:00 AM", "2023-01-14T00:00:00"),
        ("1/14/2023 12:30 PM", "2023-01-14T12:30:00"),
        ("1/14/2023 1:05:09 AM", "2023-01-14T01:05:09"),
        ("2024-02-29", "2024-02-29T00:00:00"),
    ],
)
def test_noon_midnight_and_days_alone(text: str, expected: str) -> None:
    assert wall(stamps_of(text)) == [expected]


def test_forms_may_mix_in_one_column() -> None:
    assert wall(stamps_of("1/9/2023 23:45", "1/10/2023", "1/13/2023 0:15")) == [
        "2023-01-09T23:45:00",
        "2023-01-10T00:00:00",
        "2023-01-13T00:15:00",
    ]


@pytest.mark.parametrize(
    ("texts", "order"),
    [
        pytest.param(["1/2/2023", "1/13/2023"], DateOrder.MONTH_FIRST, id="a second number above 12"),
        pytest.param(["1/2/2023", "13/2/2023"], DateOrder.DAY_FIRST, id="a first number above 12"),
        pytest.param(["1.2.2023", "1.3.2023"], DateOrder.DAY_FIRST, id="points stand after the day"),
        pytest.param(["1.2.2023", "1.13.2023"], DateOrder.MONTH_FIRST, id="points, but a number above 12"),
        pytest.param(["1/2/2023", "1/3/2023", "1/4/2023"], DateOrder.MONTH_FIRST, id="days on end, month first"),
        pytest.param(["1/2/2023", "2/2/2023", "3/2/2023"], DateOrder.DAY_FIRST, id="days on end, day first"),
        pytest.param(["2023-02-01", "2023-03-01"], DateOrder.YEAR_FIRST, id="year first"),
    ],
)
def test_day_and_month_are_told_apart_over_the_whole_column(texts: list[str], order: DateOrder) -> None:
    assert stamps_of(*texts).order is order


@pytest.mark.parametrize(
    ("texts", "problem"),
    [
        pytest.param(["1/2/2023 0:00", "1/2/2023 0:15"], "cannot be told which is the month", id="one day"),
        pytest.param(["1/2/2023", "5/9/2023"], "cannot be told which is the month", id="days far apart"),
        pytest.param(["1/13/2023", "13/1/2023"], "some dates have the day first", id="both"),
    ],
)
def test_undecided_dates_are_refused(texts: list[str], problem: str) -> None:
    (found,) = problems_of(*texts)
    assert problem in found.problem
    assert found.line == 2
    assert "year first" in found.remedy


def test_offsets_are_kept_beside_the_clock() -> None:
    stamps = stamps_of(
        "2023-01-14T18:30:00-05:00", "2023-01-14 18:30+0130", "2023-01-14T18:30Z", "2023-01-14 18:30 UTC"
    )
    assert wall(stamps) == ["2023-01-14T18:30:00"] * 4
    assert stamps.offset_s is not None
    assert stamps.offset_s.tolist() == [-5 * 3600, 5400, 0, 0]
    assert stamps_of("2023-01-14 18:30").offset_s is None


def test_rows_without_offset_among_others_are_refused() -> None:
    (found,) = problems_of("2023-01-14 18:30Z", "2023-01-14 18:45")
    assert (found.line, found.problem) == (3, "has no offset from UTC, and other rows have one")


@pytest.mark.parametrize(
    "text",
    [
        "2023-02-29",
        "2023-13-01",
        "2023-00-10",
        "2023-01-00",
        "2023-01-14 24:00",
        "2023-01-14 12:60",
        "14/1/2023 13:00 PM",
    ],
)
def test_dates_and_times_that_do_not_exist_are_refused(text: str) -> None:
    (found,) = problems_of("2023-01-14 18:30", text)
    assert (found.line, found.column, found.value) == (3, "time", text)
    assert found.problem == "is no date or time that exists"


@pytest.mark.parametrize("text", ["soon", "18:30", "2023", "20230114", "2023-01-14 18", "14 Jan 2023", "1/2-2023"])
def test_other_texts_are_refused(text: str) -> None:
    (found,) = problems_of("2023-01-14 18:30", text)
    assert (found.value, found.problem) == (text, "is not a timestamp")


def test_a_blank_one_is_called_so() -> None:
    assert problems_of("2023-01-14 18:30", "")[0].problem == "is blank"


def test_the_first_five_are_listed_and_all_counted() -> None:
    total, *first = problems_of(*["never"] * 8)
    assert total.problem == "8 of 8 rows are alike: is not a timestamp"
    assert [found.line for found in first] == [2, 3, 4, 5, 6]
