"""What a log of readings tells beyond the peaks, on the screen."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator

from rich.console import RenderableType
from rich.table import Table
from rich.text import Text

from balancer.electrical.days import HOURS_A_DAY, Coverage, HighTimes
from balancer.electrical.durations import Distribution, HoldOut, JudgedPart, Spread
from balancer.reports.day_chart import CHART_LEGEND, day_chart
from balancer.reports.readings_answer import QUANTITIES, ChartedDay, Level, NeutralLoss, ReadingsAnswer, ReadingsProof
from balancer.reports.text import bullets, figures_table, format_amps, format_number, paragraph, section

_DAY_NAMES = {"ordinary": "An ordinary day", "worst": "The worst day"}
_WEEKDAYS = ("Monday", "Tuesday", "Wednesday", "Thursday", "Friday", "Saturday", "Sunday")
_MONTHS = (
    "January", "February", "March", "April", "May", "June",
    "July", "August", "September", "October", "November", "December",
)  # fmt: skip

_BY = {"search": "a complete search", "solver": "the solver", "arithmetic": "arithmetic"}

_TELLS_APART_A = 0.05
"""Peaks nearer than this are the same [A]."""


def readings_sections(answer: ReadingsAnswer) -> Iterator[RenderableType]:
    """Show how long the panel carries what, the hours above a few levels, two days, and whether the plan holds."""
    yield section("How long it carries what", spreads_table(answer), Text(""), _beside_spreads(answer))
    if answer.levels:
        yield section("Hours a year above", levels_table(answer.levels), paragraph(scaled_text(answer.coverage)))
    yield section("The day, hour by hour", *_charts(answer.days), Text(""), paragraph(CHART_LEGEND))
    if answer.holdout is not None:
        yield section("Does it hold?", *_held_out(answer.holdout))


def date_text(date: dt.date) -> str:
    """Name a day of a log as a reader looks it up: workdays and days off differ."""
    return f"{_WEEKDAYS[date.weekday()]} {date.isoformat()}"


def high_times_text(high: HighTimes) -> str:
    """Say when the highest neutral currents fall, or that no time of day stands out."""
    if high.hours.share < 0.5:
        when = "are spread over the day"
    else:
        until = (high.hours.first + 3) % HOURS_A_DAY
        when = f"fall {_percent(high.hours.share)} between {high.hours.first:02}:00 and {until:02}:00"
    if high.months is not None and high.months.share >= 0.5:
        last = (high.months.first + 1) % len(_MONTHS)
        when += f", {_percent(high.months.share)} from {_MONTHS[high.months.first - 1]} to {_MONTHS[last]}"
    return f"The highest 1 % of the neutral's readings ({high.intervals:,} intervals) {when}."


def _percent(share: float) -> str:
    return f"{100 * share:.0f} %"


def spreads_table(answer: ReadingsAnswer) -> Table:
    """Show what each quantity stays at or below in a share of the intervals, as found above as left."""
    table = figures_table("at or below, in A", "", "half the time", "95 %", "99 %", "peak", names=2)
    known = [(name, each) for name, each in (("as found", answer.as_found), ("as left", answer.as_left)) if each]
    for quantity, shown in QUANTITIES.items():
        for index, (name, each) in enumerate(known):
            table.add_row(shown if index == 0 else "", name, *_spread_cells(getattr(each, quantity)))
    return table


def _spread_cells(spread: Spread) -> tuple[str, ...]:
    return tuple(map(format_number, (spread.median_a, spread.p95_a, spread.p99_a, spread.peak_a)))


def _beside_spreads(answer: ReadingsAnswer) -> Table:
    high = "" if answer.high_times is None else high_times_text(answer.high_times)
    return bullets(filter(None, (*answer.warnings, high, loss_text(answer.neutral_loss))))


def loss_text(loss: NeutralLoss) -> str:
    """Compare the heat in the neutral conductor, in kilowatt-hours where the panel file describes it."""
    yearly = [
        f"{kwh:.3g} kWh {name}"
        for name, kwh in (("as found", loss.as_found_kwh), ("as left", loss.as_left_kwh))
        if kwh is not None
    ]
    sentences = []
    if loss.ratio is not None:
        sentences.append(f"Energy lost in the neutral: as left {_percent(loss.ratio)} of as found.")
    if yearly:
        sentences.append(f"In the service's neutral conductor that is {' and '.join(yearly)} a year.")
    return " ".join(sentences)


def levels_table(levels: tuple[Level, ...]) -> Table:
    """Show the hours a year above a few round levels, chosen from what the panel carries as found."""
    named = [("as found", [level.as_found_h for level in levels]), ("as left", [level.as_left_h for level in levels])]
    known = [(name, hours) for name, hours in named if None not in hours]
    table = figures_table("", "above", *(f"{name}, h" for name, _ in known))
    before = ""
    for level, *hours in zip(levels, *(hours for _, hours in known), strict=True):
        shown = "" if level.quantity == before else QUANTITIES[level.quantity]
        table.add_row(shown, f"{level.level_a:g} A", *map(_hours_cell, hours))
        before = level.quantity
    return table


def _hours_cell(hours: float | None) -> str:
    if not hours:
        return "0"
    return f"{hours:.1f}" if hours < 10 else f"{hours:,.0f}"


def scaled_text(coverage: Coverage) -> str:
    """Say how the hours were brought to a year."""
    return (
        f"Counted in {coverage.hours:,.0f} hours of readings and scaled to the 8,760 hours of a year, as if all of it "
        "were like them."
    )


def _charts(days: tuple[ChartedDay, ...]) -> Iterator[RenderableType]:
    for index, day in enumerate(days):
        if index:
            yield Text("")
        yield paragraph(f"{_DAY_NAMES[day.name]}, {date_text(day.date)}")
        columns = (("as found", day.as_found), ("as left", day.as_left))
        yield day_chart([(name, curve) for name, curve in columns if curve is not None])


def _held_out(holdout: HoldOut) -> Iterator[RenderableType]:
    yield paragraph(holdout_text(holdout), style="bold")
    table = figures_table("in A", "", "neutral 95 %", "99 %", "peak", "imbalance", "heavy leg", names=2)
    table.columns[0].no_wrap = True
    for part in (holdout.before, holdout.after):
        known = [(name, each) for name, each in (("as found", part.as_found), ("as left", part.as_left)) if each]
        for index, (name, each) in enumerate(known):
            table.add_row("" if index else paragraph(part.label), name, *_judged_cells(each))
    yield table
    counts = "; ".join(f"{part.intervals:,} intervals {part.label}" for part in (holdout.before, holdout.after))
    yield paragraph(f"Imbalance and heavy leg: their peaks. {counts}.")


def _judged_cells(judged: Distribution) -> tuple[str, ...]:
    figures_a = (
        judged.neutral.p95_a,
        judged.neutral.p99_a,
        judged.neutral.peak_a,
        judged.imbalance.peak_a,
        judged.heavy_leg.peak_a,
    )
    return tuple(map(format_number, figures_a))


def holdout_text(holdout: HoldOut) -> str:
    """Judge the plan on the readings that it never saw."""
    learned_a, left_a = (_peak_a(part) for part in (holdout.before, holdout.after))
    on_rest = f"On the readings {holdout.after.label}, which the plan never saw, the neutral peaks at"
    beside = f"{format_amps(learned_a)} {holdout.before.label}"
    if holdout.after.as_found is None:
        return f"{on_rest} {format_amps(left_a)} ({beside})."
    found_a = holdout.after.as_found.neutral.peak_a
    if left_a < found_a - _TELLS_APART_A:
        verdict = "it holds"
    elif left_a > found_a + _TELLS_APART_A:
        verdict = "it does not hold"
    else:
        verdict = "it gains nothing there"
    return f"{on_rest} {format_amps(left_a)} as left and {format_amps(found_a)} as found: {verdict} ({beside})."


def _peak_a(part: JudgedPart) -> float:
    return part.as_left.neutral.peak_a


def bound_text(proof: ReadingsProof, intervals: int) -> str:
    """Say what the lower bound of the first objective is, what proved it and on how many intervals it rests."""
    first = proof.first
    by = f" by {_BY[first.proved_by]}" if first.is_proven and first.proved_by in _BY else ""
    sentences = [f"No allowed arrangement has a lower {first.name} than {format_amps(first.bound)} (proven{by})."]
    if proof.rows is not None:
        sentences.append(
            f"Of {intervals:,} intervals {proof.rows:,} could exceed that under some arrangement and were weighed; the "
            "others cannot, whatever goes where."
        )
    return " ".join(sentences)
