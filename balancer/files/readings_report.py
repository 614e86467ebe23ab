"""What a log of readings holds and lacks, in plain words: nothing that was left out or mended is hidden."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import overload

import numpy as np
from numpy.typing import NDArray

from balancer.files.readings_clock import ClockChange, Gaps
from balancer.files.readings_times import DateOrder

_YEAR_S = 365 * 86_400
_MANY_NAMES = 12


class IntervalNames(Sequence[str]):
    """Names of intervals such as ``2023-01-14 18:30``, made when they are asked for: a year has many."""

    def __init__(self, times: NDArray[np.datetime64]) -> None:
        self._times = times

    def __len__(self) -> int:
        return len(self._times)

    @overload
    def __getitem__(self, index: int) -> str: ...

    @overload
    def __getitem__(self, index: slice) -> IntervalNames: ...

    def __getitem__(self, index: int | slice) -> str | IntervalNames:
        if isinstance(index, slice):
            return IntervalNames(self._times[index])
        return time_name(int(self._times[index].astype("datetime64[s]").astype(np.int64)))


@dataclass(frozen=True, kw_only=True)
class LogReport:
    """What was read, used, left out and mended."""

    rows_read: int
    intervals_used: int
    first: str
    last: str
    interval_s: float
    uneven_steps: int
    gaps: Gaps
    clock_changes: tuple[ClockChange, ...]
    has_offsets: bool
    date_order: DateOrder
    same_twice: int
    other_twice: int
    is_newest_first: bool
    out_of_order: int
    incomplete_intervals: int
    """Intervals left out because a reading is missing in them."""
    absent: tuple[str, ...]
    """Loads without a column: counted with 0 A."""
    strangers: tuple[tuple[str, str | None], ...]
    """Columns without a circuit, and the label that was perhaps meant."""
    devices: tuple[str, ...]
    """Columns of spares and of devices that carry no load when planning."""
    empty: tuple[str, ...]
    """Columns without a single reading: counted with 0 A."""
    missing_cells: int = 0
    constant: tuple[tuple[str, float], ...] = ()
    """Columns that show one and the same figure throughout."""
    noise_cells: int = 0
    """Small negative readings counted as 0."""
    negative: tuple[tuple[str, int, float], ...] = ()
    """Columns with export: name, intervals, lowest reading."""
    turned: tuple[str, ...] = ()
    """Circuits on two legs of a wye whose heavier pole changes."""

    @property
    def covered_share(self) -> float:
        """Share of a year that the used intervals make up."""
        return self.intervals_used * self.interval_s / _YEAR_S

    def lines(self) -> tuple[str, ...]:
        """Say everything, one fact a line."""
        return (
            *self._time_lines(),
            *self._row_lines(),
            *self._column_lines(),
            *self._sign_lines(),
        )

    def warnings(self) -> tuple[str, ...]:
        """Say what makes the figures worth less than they look."""
        return tuple(self._circuits_without_readings())

    def _time_lines(self) -> Iterator[str]:
        length = duration(self.interval_s)
        yield f"Readings from {self.first} to {self.last}, an interval every {length}, each an average over it."
        covered = duration(self.intervals_used * self.interval_s)
        yield (
            f"{self.intervals_used:,} of {self.rows_read:,} rows used: {covered}, "
            f"{100.0 * self.covered_share:.3g} % of a year."
        )
        if self.date_order is not DateOrder.YEAR_FIRST:
            yield f"Dates are read as {self.date_order}."
        if self.uneven_steps:
            yield f"{_count(self.uneven_steps, 'step')} between rows are not {length} long."
        if self.gaps.count:
            yield (
                f"{_count(self.gaps.count, 'gap')}, {_count(self.gaps.intervals, 'interval')} in all; the longest, "
                f"{duration(self.gaps.longest_s)}, after {time_name(self.gaps.longest_after_s)}."
            )
        yield from (self._change_line(change) for change in self.clock_changes)

    def _change_line(self, change: ClockChange) -> str:
        when = time_name(change.wall_s)
        if self.has_offsets:
            return f"The clock was put {'on' if change.is_forward else 'back'}, now {when}: no interval is lost."
        if change.is_forward:
            return f"An hour is missing before {when}: taken for the clock being put on, not for a gap."
        return f"The hour from {when} stands twice: taken for the clock being put back, and both are used."

    def _row_lines(self) -> Iterator[str]:
        if self.is_newest_first:
            yield "The newest row stands first: the order was turned round."
        if self.out_of_order:
            yield f"{_count(self.out_of_order, 'row')} out of order: sorted by time."
        if self.same_twice:
            yield f"{_count(self.same_twice, 'row')} repeated in every cell: one of each is used."
        if self.other_twice:
            yield (
                f"{_count(self.other_twice, 'row')} with the timestamp of a later row and other readings: "
                "the later row is used."
            )
        if self.missing_cells:
            yield (
                f"{_count(self.missing_cells, 'reading')} missing, and a missing reading is not zero: "
                f"{_count(self.incomplete_intervals, 'interval')} left out."
            )

    def _circuits_without_readings(self) -> Iterator[str]:
        if self.absent:
            yield f"Circuits without a column, counted with 0 A: {_names(self.absent)}."
        if self.empty:
            yield f"Columns without a single reading, counted with 0 A: {_names(self.empty)}."

    def _column_lines(self) -> Iterator[str]:
        yield from self._circuits_without_readings()
        if self.strangers:
            shown = [f"{name} (did you mean {meant}?)" if meant else name for name, meant in self.strangers]
            yield f"Columns without a circuit, not used: {_names(shown)}."
        if self.devices:
            yield f"Columns of spares and devices, which carry no load when planning, not used: {_names(self.devices)}."
        idle = [name for name, value in self.constant if value == 0.0]
        stuck = [f"{name} ({value:g})" for name, value in self.constant if value != 0.0]
        if idle:
            yield f"Columns that never show anything but 0: {_names(idle)}."
        if stuck:
            yield f"Columns that show one figure throughout: {_names(stuck)}. Check the meter."
        if self.turned:
            yield (
                f"The heavier pole of {_names(self.turned)} changes; on a 120/208 V supply its 120 V part is taken "
                "to be on the pole that carries more in all."
            )

    def _sign_lines(self) -> Iterator[str]:
        if self.noise_cells:
            yield f"{_count(self.noise_cells, 'reading')} just below zero: counted as 0."
        for name, count, lowest in self.negative:
            yield (
                f"{name} is negative in {_count(count, 'interval')}, down to {lowest:.4g}: kept as power fed back. "
                "If nothing there can feed back, the metering coil sits the wrong way round."
            )


def time_name(wall_s: int) -> str:
    """Print a time on the log's clock, seconds only where they count."""
    text = str(np.datetime64(wall_s, "s")).replace("T", " ")
    return text.removesuffix(":00") if text.endswith(":00") else text


def duration(seconds: float) -> str:
    """Print a length of time in the largest unit that fits it whole."""
    for size, unit in ((86_400, "days"), (3600, "h"), (60, "min")):
        if seconds >= size and (seconds % size == 0 or seconds >= 10 * size):
            return f"{seconds / size:.4g} {unit}"
    return f"{seconds:.4g} s"


def _count(number: int, noun: str) -> str:
    return f"{number:,} {noun}{'' if number == 1 else 's'}"


def _names(names: Sequence[str]) -> str:
    shown = ", ".join(names[:_MANY_NAMES])
    return f"{shown} and {len(names) - _MANY_NAMES} more" if len(names) > _MANY_NAMES else shown
