"""A day on the legs, hour by hour, drawn with letters: it needs no colour and no sign beyond ASCII."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from rich.text import Text

from balancer.electrical.days import HOURS_A_DAY, DayCurve

ROWS = 9
"""Heights that a chart tells apart above zero."""

CHART_LEGEND = (
    "Amps by hour of the day: the highest reading of each hour, every mark on its own, not all at one moment. "
    "A, B: legs. N over colons: neutral. =: both legs at one height. a, b: that leg and the neutral. *: all three."
)

_NOTHING, _UNDER_NEUTRAL = " ", ":"
_MARKS = {"A": "A", "B": "B", "N": "N", "AB": "=", "AN": "a", "BN": "b", "ABN": "*"}
"""One mark for whatever stands at one height in one hour."""

_ROUND_STEPS = (1, 1.2, 1.5, 2, 2.5, 3, 4, 5, 6, 8, 10)
_GAP = 3
_LABEL_WIDTH = 6
_HOURS_AXIS = "".join(f"{hour:<6}" for hour in range(0, HOURS_A_DAY, 6))


def day_chart(columns: Sequence[tuple[str, DayCurve]]) -> Text:
    """Draw one day of one or two arrangements side by side under their headings, on one scale of amps."""
    step_a = _step_a(max(_highest_a(curve) for _, curve in columns))
    plots = [_plot(curve, step_a) for _, curve in columns]
    lines = [_line("", [heading for heading, _ in columns], edge=" ")]
    for height in range(ROWS, -1, -1):
        # Every second height is named, from zero up.
        label = "" if height % 2 else f"{height * step_a:g}"
        lines.append(_line(label, [plot[height] for plot in plots], edge="|"))
    lines.append(_line("hour", [_HOURS_AXIS] * len(plots), edge=" "))
    return Text("\n".join(lines), no_wrap=True, overflow="crop")


def _line(label: str, plots: Sequence[str], edge: str) -> str:
    parts = (f"{edge}{plot:<{HOURS_A_DAY}}" for plot in plots)
    return f"{label:>{_LABEL_WIDTH}} {(' ' * _GAP).join(parts)}".rstrip()


def _highest_a(curve: DayCurve) -> float:
    values = np.concatenate((curve.leg_a, curve.leg_b, curve.neutral))
    return float(np.nanmax(values, initial=0.0))


def _step_a(highest_a: float) -> float:
    """Choose the smallest round step of the amps axis that keeps the highest reading on the chart."""
    least_a = highest_a / ROWS
    if least_a <= 0:
        return 1.0
    decade = 10.0 ** math.floor(math.log10(least_a))
    # A hair of leeway: 9 A over 9 rows is a step of 1 A, whatever the rounding of quotient and logarithm.
    return next(step * decade for step in _ROUND_STEPS if step * decade >= least_a * (1 - 1e-9))


def _plot(curve: DayCurve, step_a: float) -> list[str]:
    """Draw the lines of one plot, the lowest first."""
    hours = [
        _hour({"A": float(leg_a), "B": float(leg_b), "N": float(neutral)}, step_a)
        for leg_a, leg_b, neutral in zip(curve.leg_a, curve.leg_b, curve.neutral, strict=True)
    ]
    return ["".join(marks) for marks in zip(*hours, strict=True)]


def _hour(readings_a: dict[str, float], step_a: float) -> list[str]:
    """Draw the marks of one hour from the lowest height to the highest."""
    heights = {name: round(value / step_a) for name, value in readings_a.items() if not math.isnan(value)}
    marks = [_UNDER_NEUTRAL if height < heights.get("N", 0) else _NOTHING for height in range(ROWS + 1)]
    for height in heights.values():
        marks[height] = _MARKS["".join(name for name, other in heights.items() if other == height)]
    return marks
