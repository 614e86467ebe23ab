"""Timestamps of a log: every way in which loggers and spreadsheets write them, a whole column at a time."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

from balancer.errors import InputError
from balancer.files.problems import Place, ProblemList, one_problem
from balancer.files.readings_cells import LogCells

Seconds = NDArray[np.int64]

_TIME = r"(?P<hour>0{1,2})[:.](?P<minute>00)(?:[:.](?P<second>00)(?:[.,]0{1,9})?)?(?:\s*(?P<half>[AP])\.?M\.?)?"
_OFFSET = r"(?:\s?(?P<zulu>Z|UTC|GMT)|\s?(?P<sign>[+-])(?P<off_hour>00):?(?P<off_minute>00)?)?"
_YEAR_FIRST = re.compile(
    rf"(?P<year>0000)([-/.])(?P<month>0{{1,2}})\2(?P<day>0{{1,2}})(?:(?:T|,?\s+){_TIME}{_OFFSET})?"
)
_YEAR_LAST = re.compile(
    rf"(?P<first>0{{1,2}})(?P<mark>[-/.])(?P<second_field>0{{1,2}})(?P=mark)(?P<year>0000|00)"
    rf"(?:(?:T|,?\s+){_TIME}{_OFFSET})?"
)
_SERIAL = re.compile(r"(?P<day>00000)(?:[.,](?P<fraction>0{1,11}))?")
_SERIAL_START = np.datetime64("1899-12-30", "s").astype(np.int64)
_MOST_SHAPES = 64
_MOST_SHOWN = 5
_DAY_S = 86_400
_FORMS = "write 2023-01-14 18:30 (2023-01-14T18:30:00-05:00 with an offset), 1/14/2023 6:30 PM or 14.01.2023 18:30"


class DateOrder(StrEnum):
    """How the column writes its dates, in the words of the report."""

    YEAR_FIRST = "year, month, day"
    MONTH_FIRST = "month, day, year"
    DAY_FIRST = "day, month, year"


@dataclass(frozen=True, eq=False)
class Stamps:
    """Timestamps as the log's clock showed them, in seconds [s] since 1970, shape (rows,).

    `offset_s` is how far that clock was ahead of UTC, None where the log does not say.
    """

    wall_s: Seconds
    offset_s: Seconds | None
    order: DateOrder


@dataclass(frozen=True, eq=False)
class _Shape:
    """Rows whose timestamps are alike but for their digits."""

    rows: NDArray[np.intp]
    match: re.Match[str]
    digits: NDArray[np.uint8]

    def has(self, name: str) -> bool:
        return self.match.groupdict().get(name) is not None

    def field(self, name: str) -> Seconds:
        """Whole numbers in a field of these rows; 0 where the form has no such field."""
        if not self.has(name):
            return np.zeros(len(self.rows), dtype=np.int64)
        value = np.zeros(len(self.rows), dtype=np.int64)
        for place in range(*self.match.span(name)):
            value = 10 * value + self.digits[:, place]
        return value


def read_stamps(file: str, column: str, cells: LogCells) -> Stamps:
    """Read the first column of a log.

    Raises
    ------
    InputError
        When some rows hold no timestamp, some have an offset and others none, or day and month cannot be told apart.
    """
    column_of = _Column(file, column, cells)
    shapes = list(_shapes(cells.stamps))
    known = np.zeros(len(cells.stamps), dtype=bool)
    for shape in shapes:
        known[shape.rows] = True
    column_of.refuse(~known, "is not a timestamp")
    order = column_of.order(shapes)
    wall_s = np.zeros(len(known), dtype=np.int64)
    offset_s = np.zeros(len(known), dtype=np.int64)
    has_offset = np.zeros(len(known), dtype=bool)
    for shape in shapes:
        wall_s[shape.rows], known[shape.rows] = _wall_s(shape, order)
        offset_s[shape.rows] = _offset_s(shape)
        has_offset[shape.rows] = shape.has("zulu") or shape.has("sign")
    column_of.refuse(~known, "is no date or time that exists")
    if has_offset.any():
        column_of.refuse(~has_offset, "has no offset from UTC, and other rows have one")
    return Stamps(wall_s, offset_s if has_offset.any() else None, order)


@dataclass(frozen=True, eq=False)
class _Column:
    """Says what is wrong with the column of timestamps."""

    file: str
    name: str
    cells: LogCells

    def refuse(self, is_wrong: NDArray[np.bool_], problem: str) -> None:
        rows = np.flatnonzero(is_wrong)
        problems = ProblemList(self.file)
        for row in rows[:_MOST_SHOWN]:
            text = self.cells.stamps[row].decode()
            place = Place(int(self.cells.lines[row]), self.name, text or None)
            problems.add(place, problem if text else "is blank", _FORMS)
        if len(rows) > _MOST_SHOWN:
            remedy = "correct them alike; the first are listed"
            problems.add(Place(column=self.name), f"{len(rows)} of {len(is_wrong)} rows are alike: {problem}", remedy)
        problems.raise_if_any()

    def order(self, shapes: list[_Shape]) -> DateOrder:
        """Decide over the whole column which of two numbers is the month."""
        dated = [shape for shape in shapes if shape.has("mark")]
        if not dated:
            return DateOrder.YEAR_FIRST
        first = np.concatenate([shape.field("first") for shape in dated])
        second = np.concatenate([shape.field("second_field") for shape in dated])
        if first.max() > 12 or second.max() > 12:
            if first.max() > 12 and second.max() > 12:
                raise self._dates_error(dated, is_mixed=True)
            return DateOrder.DAY_FIRST if first.max() > 12 else DateOrder.MONTH_FIRST
        if all(shape.match["mark"] == "." for shape in dated):
            return DateOrder.DAY_FIRST
        year = np.concatenate([_full_year(shape) for shape in dated])
        day_first, month_first = _has_every_day(year, second, first), _has_every_day(year, first, second)
        if day_first == month_first:
            raise self._dates_error(dated, is_mixed=False)
        return DateOrder.DAY_FIRST if day_first else DateOrder.MONTH_FIRST

    def _dates_error(self, dated: list[_Shape], *, is_mixed: bool) -> InputError:
        mixed, undecided = "some dates have the day first and others the month", "it cannot be told which is the month"
        row = dated[0].rows[0]
        text = self.cells.stamps[row].decode()
        remedy = "write dates with the year first: 2023-01-14 18:30"
        return one_problem(
            self.file, f"{mixed if is_mixed else undecided}, such as in {text}", remedy, int(self.cells.lines[row])
        )


def _shapes(stamps: NDArray[np.bytes_]) -> Iterator[_Shape]:
    """Sort the rows by the form of their timestamps, with 0 for every digit; forms not known here are left out."""
    if not len(stamps):
        return
    codes = np.ascontiguousarray(stamps).view(np.uint8).reshape(len(stamps), -1)
    digits = (codes - ord("0")).astype(np.uint8)
    masked = np.where(digits <= 9, np.uint8(ord("0")), codes)
    forms, inverse = _distinct(masked)
    for index, form in enumerate(forms[:_MOST_SHAPES]):
        text = form.decode("ascii", "replace").rstrip().upper()
        match = _YEAR_FIRST.fullmatch(text) or _YEAR_LAST.fullmatch(text) or _SERIAL.fullmatch(text)
        if match is not None:
            rows = np.flatnonzero(inverse == index)
            yield _Shape(rows, match, digits[rows])


def _distinct(masked: NDArray[np.uint8]) -> tuple[list[bytes], NDArray[np.intp]]:
    if (masked == masked[0]).all():
        return [masked[0].tobytes().rstrip(b"\0")], np.zeros(len(masked), dtype=np.intp)
    forms, inverse, counts = np.unique(
        masked.view(f"S{masked.shape[1]}").ravel(), return_inverse=True, return_counts=True
    )
    by_count = np.argsort(-counts, kind="stable")
    rank = np.empty_like(by_count)
    rank[by_count] = np.arange(len(by_count))
    return [bytes(form) for form in forms[by_count]], rank[inverse]


def _full_year(shape: _Shape) -> Seconds:
    start, end = shape.match.span("year")
    return shape.field("year") + (2000 if end - start == 2 else 0)


def _days(year: Seconds, month: Seconds, day: Seconds) -> tuple[Seconds, NDArray[np.bool_]]:
    """Days since 1970, and whether there is such a day."""
    months = ((year - 1970) * 12 + month - 1).astype("datetime64[M]")
    dates = months.astype("datetime64[D]") + (day - 1)
    exists = (month >= 1) & (month <= 12) & (day >= 1) & (dates.astype("datetime64[M]") == months) & (year >= 1970)
    return dates.astype(np.int64), exists


def _has_every_day(year: Seconds, month: Seconds, day: Seconds) -> bool:
    """Whether this reading of the dates gives two or more days on end, as a log does."""
    days, exists = _days(year, month, day)
    distinct = np.unique(days)
    return bool(exists.all()) and len(distinct) > 1 and int(distinct[-1] - distinct[0]) == len(distinct) - 1


def _wall_s(shape: _Shape, order: DateOrder) -> tuple[Seconds, NDArray[np.bool_]]:
    if shape.match.re is _SERIAL:
        return _serial_s(shape)
    if shape.match.re is _YEAR_FIRST:
        days, exists = _days(shape.field("year"), shape.field("month"), shape.field("day"))
    else:
        first, second = shape.field("first"), shape.field("second_field")
        month, day = (second, first) if order is DateOrder.DAY_FIRST else (first, second)
        days, exists = _days(_full_year(shape), month, day)
    hour, minute, second = shape.field("hour"), shape.field("minute"), shape.field("second")
    exists &= (hour <= 23) & (minute <= 59) & (second <= 59)
    if shape.has("half"):
        exists &= (hour >= 1) & (hour <= 12)
        hour = hour % 12 + (12 if shape.match["half"] == "P" else 0)
    return days * _DAY_S + hour * 3600 + minute * 60 + second, exists


def _serial_s(shape: _Shape) -> tuple[Seconds, NDArray[np.bool_]]:
    """Days since 1899-12-30 with the time as a fraction, as spreadsheets count (from memory)."""
    start, end = shape.match.span("fraction")
    days = shape.field("day") + shape.field("fraction") / 10.0 ** (end - start)
    seconds = np.rint(days * _DAY_S).astype(np.int64) + _SERIAL_START
    return seconds, np.full(len(seconds), True)


def _offset_s(shape: _Shape) -> Seconds:
    size = shape.field("off_hour") * 3600 + shape.field("off_minute") * 60
    return -size if shape.has("sign") and shape.match["sign"] == "-" else size
