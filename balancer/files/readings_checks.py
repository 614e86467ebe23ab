"""What makes a log misleading: too much of it missing, watts for amps, figures that no breaker would hold."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balancer.files.problems import Place, ProblemList
from balancer.files.readings_amps import amps_per_unit, full_load_w
from balancer.files.readings_columns import LogColumn, ReadingUnit
from balancer.files.readings_text import LogText
from balancer.panel import Circuit, Installation

Readings = NDArray[np.float32]

MOST_MISSING = 0.5
"""Share of the cells, or of the intervals, that may be missing."""

_FAR_ABOVE_BREAKER = 4.0
"""No breaker holds this multiple of its rating over an interval, not even once."""

_ABOVE_BREAKER = 2.5
"""... and none holds this multiple again and again."""

_OFTEN_SHARE = 0.001
_OFTEN_LEAST = 3
_UNKNOWN_BREAKER_A = 60.0
_TELLING_W = 300.0
"""Full load from which a column of watts tells whether it really holds watts."""

_LIKE = 3.0
"""A peak within this factor of the full load looks like it."""

_LIKELY_LEAST_SHARE = 0.05
_LINE_V, _LEG_V, _W_PER_KW = 240.0, 120.0, 1000.0


@dataclass(frozen=True, eq=False)
class LogReadings:
    """Readings by column, (intervals, columns), with the circuits that they are of."""

    log: LogText
    installation: Installation
    columns: tuple[LogColumn, ...]
    values: Readings

    def circuit(self, column: LogColumn) -> Circuit:
        """Circuit of a column."""
        return self.installation.circuits[column.circuit]

    def amps_per_unit(self, column: LogColumn) -> float:
        """Amps [A] for one unit of a column."""
        return amps_per_unit(self.circuit(column), column, self.installation.panel.supply.system)


def refuse_misleading(readings: LogReadings) -> None:
    """Raise what no plan should be built on.

    Raises
    ------
    InputError
        When over half is missing, a unit is likely to be wrong, or amps are far above the breaker.
    """
    problems = ProblemList(readings.log.file)
    missing = np.isnan(readings.values)
    _report_missing(problems, readings, missing)
    _report_too_high(problems, readings)
    _report_tiny_watts(problems, readings)
    problems.raise_if_any()


def _report_missing(problems: ProblemList, readings: LogReadings, missing: NDArray[np.bool_]) -> None:
    by_column = missing.mean(axis=0)
    remedy = "read the log out again, or take the columns with most of them out"
    worst = [readings.columns[index].name for index in np.argsort(-by_column, kind="stable")[:3] if by_column[index]]
    if missing.mean() > MOST_MISSING:
        problem = f"{missing.mean():.0%} of the readings are missing, most in {', '.join(worst)}"
        problems.add(Place(), problem, remedy)
    elif (lacking := missing.any(axis=1).mean()) > MOST_MISSING:
        problem = f"{lacking:.0%} of the intervals lack a reading, most in {', '.join(worst)}"
        problems.add(Place(), problem, remedy)


def _report_too_high(problems: ProblemList, readings: LogReadings) -> None:
    for index, column in enumerate(readings.columns):
        circuit = readings.circuit(column)
        breaker_a = circuit.breaker_a or max(_UNKNOWN_BREAKER_A, circuit.load.neutral_a + circuit.load.line_a)
        amps = np.abs(readings.values[:, index]) * np.float32(readings.amps_per_unit(column))
        rating = f"a {breaker_a:g} A breaker" if circuit.breaker_a else "a circuit without a breaker rating"
        peak_a = float(np.nanmax(amps))
        often = int(np.count_nonzero(amps > _ABOVE_BREAKER * breaker_a))
        place = Place(readings.log.header_line, column.name)
        if peak_a > _FAR_ABOVE_BREAKER * breaker_a:
            problems.add(place, f"reaches {peak_a:.4g} A on {rating}", _check(column))
        elif often >= max(_OFTEN_LEAST, _OFTEN_SHARE * len(amps)):
            problem = f"is above {_ABOVE_BREAKER * breaker_a:g} A in {often} intervals, on {rating}"
            problems.add(place, problem, _check(column))


def _check(column: LogColumn) -> str:
    if column.unit is ReadingUnit.AMPS:
        return "if these are watts, end the name with _w; else check the circuit and its breaker"
    return "check that these are watts, and the circuit and its breaker"


def _report_tiny_watts(problems: ProblemList, readings: LogReadings) -> None:
    """Report columns of watts that look like amps or kilowatts, where at least half of those that can tell do."""
    telling, slips = 0, []
    for index, column in enumerate(readings.columns):
        full_w = full_load_w(readings.circuit(column))
        peak = float(np.nanmax(np.abs(readings.values[:, index])))
        if column.unit is not ReadingUnit.WATTS or full_w < _TELLING_W or peak == 0.0:
            continue
        telling += 1
        unit = _likely_unit(peak, full_w, readings.circuit(column))
        if unit:
            slips.append((column, peak, full_w, unit))
    if 2 * len(slips) < telling:
        return
    for column, peak, full_w, unit in slips:
        problem = f"reaches only {peak:.4g} W where the inventory has {full_w:.0f} W: these look like {unit}"
        remedy = "end the name with _a" if unit == "amps" else "multiply by 1000"
        problems.add(Place(readings.log.header_line, column.name), problem, remedy)


def _likely_unit(peak: float, full_w: float, circuit: Circuit) -> str:
    if peak >= _LIKELY_LEAST_SHARE * full_w:
        return ""
    volts = _LEG_V if circuit.poles == 1 else _LINE_V
    for unit, factor in (("amps", volts), ("kilowatts", _W_PER_KW)):
        if full_w / _LIKE <= peak * factor <= full_w * _LIKE:
            return unit
    return ""


def empty_columns(values: Readings) -> Sequence[int]:
    """Columns without a single reading."""
    return [int(index) for index in np.flatnonzero(np.isnan(values).all(axis=0))]
