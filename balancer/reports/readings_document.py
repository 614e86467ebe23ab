"""What a log of readings tells beyond the peaks, as the JSON document says it under ``readings``."""

from __future__ import annotations

import math
from dataclasses import asdict
from typing import Any

from balancer.electrical.days import DayCurve, HighTimes, Run
from balancer.electrical.durations import Distribution, HoldOut, JudgedPart, Spread
from balancer.electrical.scenarios import FloatArray
from balancer.reports.readings_answer import QUANTITIES, ChartedDay, Level, ReadingsAnswer, ReadingsProof

Document = dict[str, Any]


def readings_document(answer: ReadingsAnswer) -> Document:
    """Build the part of a document that readings add: amps to 1 mA, hours of the day from 0 to 23."""
    coverage = answer.coverage
    return {
        "first": coverage.first.isoformat(),
        "last": coverage.last.isoformat(),
        "intervals": coverage.intervals,
        "interval_s": coverage.interval_s,
        "hours_covered": _rounded(coverage.hours),
        "warnings": list(answer.warnings),
        "as_found": _distribution(answer.as_found),
        "as_left": _distribution(answer.as_left),
        "hours_a_year_above": [_level(level) for level in answer.levels],
        "neutral_loss": {key: _rounded(value) for key, value in asdict(answer.neutral_loss).items()},
        "high_times": _high_times(answer.high_times),
        "days": {day.name: _day(day) for day in answer.days},
        "hold_out": _hold_out(answer.holdout),
        "proof": _proof(answer.proof),
    }


def _rounded(value: float | None) -> float | None:
    # Adding zero turns -0.0 into 0.0.
    return None if value is None or math.isnan(value) else round(float(value), 3) + 0.0


def _distribution(each: Distribution | None) -> Document | None:
    return None if each is None else {quantity: _spread(getattr(each, quantity)) for quantity in QUANTITIES}


def _spread(spread: Spread) -> Document:
    return {
        "median": _rounded(spread.median_a),
        "p95": _rounded(spread.p95_a),
        "p99": _rounded(spread.p99_a),
        "peak": _rounded(spread.peak_a),
    }


def _level(level: Level) -> Document:
    return {
        "quantity": level.quantity,
        "level": level.level_a,
        "as_found": _rounded(level.as_found_h),
        "as_left": _rounded(level.as_left_h),
    }


def _high_times(high: HighTimes | None) -> Document | None:
    if high is None:
        return None
    return {"intervals": high.intervals, "hours": _run(high.hours), "months": _run(high.months)}


def _run(run: Run | None) -> Document | None:
    return None if run is None else {"first": run.first, "share": _rounded(run.share)}


def _day(day: ChartedDay) -> Document:
    return {"date": day.date.isoformat(), "as_found": _curve(day.as_found), "as_left": _curve(day.as_left)}


def _curve(curve: DayCurve | None) -> Document | None:
    if curve is None:
        return None
    return {"leg_a": _hourly(curve.leg_a), "leg_b": _hourly(curve.leg_b), "neutral": _hourly(curve.neutral)}


def _hourly(values_a: FloatArray) -> list[float | None]:
    return [_rounded(value) for value in values_a.tolist()]


def _hold_out(holdout: HoldOut | None) -> Document | None:
    return None if holdout is None else {"before": _judged(holdout.before), "after": _judged(holdout.after)}


def _judged(part: JudgedPart) -> Document:
    return {
        "label": part.label,
        "intervals": part.intervals,
        "as_found": _distribution(part.as_found),
        "as_left": _distribution(part.as_left),
    }


def _proof(proof: ReadingsProof | None) -> Document | None:
    if proof is None:
        return None
    return {"proved_by": proof.first.proved_by or None, "rows_that_matter": proof.rows}
