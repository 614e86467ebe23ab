"""Puts the rows of a log in order of time: clock changes, duplicates, rows out of order and gaps."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balancer.files.readings_times import Seconds, Stamps

_HOUR_S = 3600
_DAY_S = 86_400
_CHANGE_MONTHS = (3, 4, 9, 10, 11)
"""Clocks change in these months, north and south (common practice, from memory)."""

_CHANGE_HOURS = 4
"""... on a Sunday, in the first hours of the day."""

_GAP_STEPS = 1.5
"""A step this many times the usual one leaves an interval out."""


@dataclass(frozen=True)
class ClockChange:
    """Where the log's clock was put on or back by an hour, as the clock showed it, seconds [s] since 1970."""

    wall_s: int
    is_forward: bool


@dataclass(frozen=True)
class Gaps:
    """Intervals that no row stands for; the longest gap begins after `longest_after_s` on the log's clock."""

    count: int
    intervals: int
    longest_s: int
    longest_after_s: int


@dataclass(frozen=True, kw_only=True, eq=False)
class Clock:
    """The rows that are kept, in order of time.

    `rows` index the log's rows; `wall_s` is what the log's clock showed, `elapsed_s` runs evenly through its changes.
    """

    rows: NDArray[np.intp]
    wall_s: Seconds
    elapsed_s: Seconds
    changes: tuple[ClockChange, ...]
    same_twice: int
    """Rows left out that repeat an earlier one in every cell."""
    other_twice: int
    """Rows left out because a later one has the same timestamp and other readings."""
    is_newest_first: bool
    out_of_order: int
    """Rows that stand below a later one."""

    @property
    def interval_s(self) -> float:
        """Length of an interval [s]: the middle one of all steps."""
        return float(np.median(np.diff(self.elapsed_s))) if len(self.rows) > 1 else 0.0

    @property
    def uneven_steps(self) -> int:
        """Count the steps, gaps left out, that are not of the usual length."""
        steps, usual = np.diff(self.elapsed_s), self.interval_s
        return int(np.count_nonzero((steps <= _GAP_STEPS * usual) & (np.abs(steps - usual) > 0.1 * usual)))

    @property
    def gaps(self) -> Gaps:
        """Find where intervals are missing."""
        steps, usual = np.diff(self.elapsed_s), self.interval_s
        wide = np.flatnonzero(steps > _GAP_STEPS * usual)
        if not len(wide):
            return Gaps(0, 0, 0, 0)
        longest = wide[np.argmax(steps[wide])]
        intervals = int(np.sum(np.rint(steps[wide] / usual) - 1))
        return Gaps(len(wide), intervals, round(steps[longest] - usual), int(self.wall_s[longest]))


def order_rows(stamps: Stamps, values: NDArray[np.float32]) -> Clock:
    """Sort the rows by time and keep one of each interval.

    A log without offsets repeats an hour in autumn and leaves one out in spring; both are told from duplicates and gaps
    by the hour, the weekday and the month, and no interval is lost. Of rows with one timestamp and different readings
    the last in the file counts, since loggers append corrections.
    """
    rows = np.arange(len(stamps.wall_s))
    is_newest_first = np.count_nonzero(np.diff(stamps.wall_s) < 0) > len(rows) // 2
    if is_newest_first:
        rows = rows[::-1]
    changes: tuple[ClockChange, ...] = ()
    if stamps.offset_s is None:
        elapsed_s, changes = _without_offsets(stamps.wall_s[rows])
    else:
        elapsed_s = (stamps.wall_s - stamps.offset_s)[rows]
    out_of_order = int(np.count_nonzero(elapsed_s < np.maximum.accumulate(elapsed_s)))
    order = np.argsort(elapsed_s, kind="stable") if out_of_order else np.arange(len(rows))
    if is_newest_first:
        order = _later_line_last(elapsed_s, rows, order)
    rows, elapsed_s = rows[order], elapsed_s[order]
    is_last, is_same = _duplicates(elapsed_s, rows, values)
    if stamps.offset_s is not None:
        changes = _offset_changes(stamps.wall_s[rows], stamps.offset_s[rows])
    return Clock(
        rows=rows[is_last],
        wall_s=stamps.wall_s[rows[is_last]],
        elapsed_s=elapsed_s[is_last],
        changes=changes,
        same_twice=int(np.count_nonzero(is_same)),
        other_twice=int(np.count_nonzero(~is_last) - np.count_nonzero(is_same)),
        is_newest_first=bool(is_newest_first),
        out_of_order=out_of_order,
    )


def _later_line_last(elapsed_s: Seconds, rows: NDArray[np.intp], order: NDArray[np.intp]) -> NDArray[np.intp]:
    """Put rows of one timestamp back into file order in a log that was turned round."""
    return order[np.lexsort((rows[order], elapsed_s[order]))]


def _duplicates(
    elapsed_s: Seconds, rows: NDArray[np.intp], values: NDArray[np.float32]
) -> tuple[NDArray[np.bool_], NDArray[np.bool_]]:
    """Tell which row is the last of its timestamp, and which earlier ones agree with the next in every cell."""
    is_last = np.append(np.diff(elapsed_s) != 0, True)[: len(rows)]
    is_same = np.zeros(len(rows), dtype=bool)
    early = np.flatnonzero(~is_last)
    here, following = values[rows[early]], values[rows[early + 1]]
    is_same[early] = ((here == following) | (np.isnan(here) & np.isnan(following))).all(axis=1)
    return is_last, is_same


def _without_offsets(wall_s: Seconds) -> tuple[Seconds, tuple[ClockChange, ...]]:
    """Run an even clock through the changes of the wall clock; rows stay in their order."""
    order = np.argsort(wall_s, kind="stable")
    in_order = wall_s[order]
    distinct, counts = np.unique(in_order, return_counts=True)
    usual_s = float(np.median(np.diff(distinct))) if len(distinct) > 1 else 0.0
    if not 0.0 < usual_s <= _HOUR_S:
        return wall_s, ()
    back = _repeated_hours(distinct, counts, usual_s)
    forward = _missing_hours(distinct, usual_s)
    shift_s = np.zeros(len(wall_s), dtype=np.int64)
    is_second = np.append(False, np.diff(in_order) == 0)
    changes = sorted((*back, *forward), key=lambda change: change.wall_s)
    for change in changes:
        if change.is_forward:
            shift_s[in_order >= change.wall_s] -= _HOUR_S
        else:
            is_repeat = is_second & (in_order >= change.wall_s) & (in_order < change.wall_s + _HOUR_S)
            shift_s[is_repeat | (in_order >= change.wall_s + _HOUR_S)] += _HOUR_S
    elapsed_s = np.empty_like(wall_s)
    elapsed_s[order] = in_order + shift_s
    return elapsed_s, tuple(changes)


def _repeated_hours(distinct: Seconds, counts: NDArray[np.intp], usual_s: float) -> list[ClockChange]:
    """Find the hours of a night of clock change in which, and only in which, every timestamp stands twice."""
    twice = distinct[(counts == 2) & _may_change(distinct)]
    found = []
    for hour in np.unique(twice // _HOUR_S) * _HOUR_S:
        inside = (distinct >= hour) & (distinct < hour + _HOUR_S)
        beside = (distinct >= hour - _HOUR_S) & (distinct < hour + 2 * _HOUR_S) & ~inside
        is_alone = not (counts[beside] > 1).any()
        if is_alone and (counts[inside] == 2).all() and 2 * np.count_nonzero(inside) * usual_s >= _HOUR_S:
            found.append(ClockChange(int(hour), is_forward=False))
    return found


def _missing_hours(distinct: Seconds, usual_s: float) -> list[ClockChange]:
    """Find the steps on a night of clock change that are longer than usual by an hour."""
    steps = np.diff(distinct)
    wide = np.flatnonzero(np.abs(steps - usual_s - _HOUR_S) < usual_s / 2.0)
    before = distinct[wide]
    is_night = _may_change(distinct[wide + 1]) & _may_change(before + round(usual_s))
    return [ClockChange(int(second), is_forward=True) for second in distinct[wide + 1][is_night]]


def _may_change(wall_s: Seconds) -> NDArray[np.bool_]:
    """Whether it is a Sunday night of a month in which clocks change."""
    days = wall_s // _DAY_S
    months = days.astype("datetime64[D]").astype("datetime64[M]").astype(np.int64) % 12 + 1
    # 1970-01-01 was a Thursday.
    is_sunday = days % 7 == 3
    is_night = wall_s % _DAY_S < _CHANGE_HOURS * _HOUR_S
    return np.asarray(is_sunday & np.isin(months, _CHANGE_MONTHS) & is_night)


def _offset_changes(wall_s: Seconds, offset_s: Seconds) -> tuple[ClockChange, ...]:
    steps = np.diff(offset_s)
    return tuple(ClockChange(int(wall_s[row + 1]), is_forward=bool(steps[row] > 0)) for row in np.flatnonzero(steps))
