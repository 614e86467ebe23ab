"""Interval logs: what every circuit really drew, interval by interval, as scenarios."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from balancer.electrical.scenarios import ScenarioKind, Scenarios
from balancer.files.problems import one_problem
from balancer.files.readings_amps import amps_of
from balancer.files.readings_cells import RowListener, read_cells
from balancer.files.readings_checks import LogReadings, empty_columns, refuse_misleading
from balancer.files.readings_clock import Clock, order_rows
from balancer.files.readings_columns import LogColumn, MatchedColumns, ReadingUnit, match_columns
from balancer.files.readings_report import IntervalNames, LogReport, duration, time_name
from balancer.files.readings_text import LogText, open_log
from balancer.files.readings_times import Stamps, read_stamps
from balancer.files.source import FilePath
from balancer.panel import Installation

NOISE_A = 0.1
"""Readings of a load [A] this little below zero are noise of the meter (common practice, from memory)."""


@dataclass(frozen=True, kw_only=True, eq=False)
class ReadingsLog:
    """A log as scenarios.

    `installation` differs from the inventory's where the log reads the two poles of a circuit apart: its 120 V part
    then has a known pole and the power factor of the whole. Plan with this one.
    """

    scenarios: Scenarios
    installation: Installation
    report: LogReport


def read_readings(
    path: FilePath,
    installation: Installation,
    *,
    unit: str | None = None,
    mapping: FilePath | None = None,
    listener: RowListener | None = None,
) -> ReadingsLog:
    """Read an interval log (CSV, plain or packed with gzip, xz or bzip2; ``-`` for standard input).

    Parameters
    ----------
    path
        First column a timestamp, then a column a circuit.
    installation
        Its labels name the columns, its power factors turn watts into amps.
    unit
        ``A`` or ``W`` for the columns whose names do not say it.
    mapping
        CSV file ``column,circuit[,unit]`` for other names.
    listener
        Called with the number of rows read so far.

    Raises
    ------
    InputError
        With everything that is wrong, and where the log would mislead.
    """
    log = open_log(path)
    matched = match_columns(log, installation, None if unit is None else ReadingUnit(unit.upper()), mapping)
    cells = read_cells(log, [column.index for column in matched.columns], listener)
    if len(cells.stamps) < 2:
        raise one_problem(log.file, "holds fewer than two rows of readings", "read the log out again")
    stamps = read_stamps(log.file, log.header[0], cells)
    clock = order_rows(stamps, cells.values)
    if len(clock.rows) < 2:
        raise one_problem(log.file, "holds one and the same timestamp in every row", "read the log out again")
    values, columns, empty = _with_readings(log, matched, _rows(cells.values, clock.rows))
    refuse_misleading(LogReadings(log, installation, columns, values))
    complete = np.asarray(~np.isnan(values).any(axis=1))
    used = LogReadings(log, installation, columns, values if complete.all() else values[complete])
    return _Builder(matched, empty, stamps, clock, used).build(complete, int(np.count_nonzero(np.isnan(values))))


def _rows(values: NDArray[np.float32], rows: NDArray[np.intp]) -> NDArray[np.float32]:
    """Pick rows in an order, without a copy where that is all of them as they stand."""
    is_whole = len(rows) == len(values) and bool((np.diff(rows) == 1).all())
    return values if is_whole else values[rows]


def _with_readings(
    log: LogText, matched: MatchedColumns, values: NDArray[np.float32]
) -> tuple[NDArray[np.float32], tuple[LogColumn, ...], tuple[LogColumn, ...]]:
    """Part the columns that hold readings from those that hold none, both poles of a circuit together."""
    blank = {matched.columns[index].circuit for index in empty_columns(values)}
    kept = [index for index, column in enumerate(matched.columns) if column.circuit not in blank]
    if not kept:
        raise one_problem(log.file, "holds not a single reading", "read the log out again")
    columns = tuple(matched.columns[index] for index in kept)
    empty = tuple(column for column in matched.columns if column.circuit in blank)
    return values[:, kept] if empty else values, columns, empty


@dataclass(frozen=True, eq=False)
class _Builder:
    """Puts scenarios and report together from the rows that are used."""

    matched: MatchedColumns
    empty: Sequence[LogColumn]
    stamps: Stamps
    clock: Clock
    used: LogReadings

    def build(self, complete: NDArray[np.bool_], missing_cells: int) -> ReadingsLog:
        constant = self._constant()
        noise_cells, negative = self._settle_signs()
        amps = amps_of(self.used.installation, self.used.columns, self.used.values)
        report = replace(
            self._time_report(complete),
            missing_cells=missing_cells,
            constant=constant,
            noise_cells=noise_cells,
            negative=negative,
            turned=amps.turned,
        )
        times = self.clock.wall_s[complete].astype("datetime64[s]")
        scenarios = Scenarios(
            kind=ScenarioKind.READINGS,
            names=IntervalNames(times),
            neutral_a=amps.neutral_a,
            line_a=amps.line_a,
            are_averages=True,
            notes=(_average_note(report.interval_s), *report.warnings()),
            times=times,
            interval_s=report.interval_s,
        )
        return ReadingsLog(scenarios=scenarios, installation=amps.installation, report=report)

    def _time_report(self, complete: NDArray[np.bool_]) -> LogReport:
        """Report on rows and columns; what the readings themselves are like is still to come."""
        clock, wall_s = self.clock, self.clock.wall_s[complete]
        return LogReport(
            rows_read=len(self.stamps.wall_s),
            intervals_used=len(wall_s),
            incomplete_intervals=len(complete) - len(wall_s),
            first=time_name(int(wall_s[0])),
            last=time_name(int(wall_s[-1])),
            interval_s=clock.interval_s,
            uneven_steps=clock.uneven_steps,
            gaps=clock.gaps,
            clock_changes=clock.changes,
            has_offsets=self.stamps.offset_s is not None,
            date_order=self.stamps.order,
            same_twice=clock.same_twice,
            other_twice=clock.other_twice,
            is_newest_first=clock.is_newest_first,
            out_of_order=clock.out_of_order,
            absent=self.matched.absent,
            strangers=self.matched.strangers,
            devices=self.matched.devices,
            empty=tuple(column.name for column in self.empty),
        )

    def _constant(self) -> tuple[tuple[str, float], ...]:
        low, high = self.used.values.min(axis=0), self.used.values.max(axis=0)
        names = [column.name for column in self.used.columns]
        return tuple((name, float(least)) for name, least, most in zip(names, low, high, strict=True) if least == most)

    def _settle_signs(self) -> tuple[int, tuple[tuple[str, int, float], ...]]:
        """Count what is just below zero as 0, in place, and list what is clearly export."""
        noise_cells, negative = 0, []
        for index, column in enumerate(self.used.columns):
            values = self.used.values[:, index]
            if not values.min() < 0.0:
                continue
            is_noise = (values < 0.0) & (values >= -NOISE_A / self.used.amps_per_unit(column) * (1.0 + 1e-6))
            values[is_noise] = 0.0
            noise_cells += int(np.count_nonzero(is_noise))
            if (values < 0.0).any():
                negative.append((column.name, int(np.count_nonzero(values < 0.0)), float(values.min())))
        return noise_cells, tuple(negative)


def _average_note(interval_s: float) -> str:
    return f"Every reading is an average over {duration(interval_s)}: moments within it were higher."
