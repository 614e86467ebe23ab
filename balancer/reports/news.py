"""What a long piece of work says while it goes on, in one line of a terminal."""

from __future__ import annotations

from balancer.arrange.results import ObjectiveName, Progress
from balancer.reports.text import format_number

STOP_HINT = "(Ctrl-C: stop and show)"


def reading_news(rows: int) -> str:
    """Say how much of a log has been read."""
    return f"Reading the log: {rows:,} rows"


def planning_news(progress: Progress) -> str:
    """Say how far an objective is closed and, of readings, how many rows can still decide it."""
    gap = max(0.0, progress.best - progress.bound)
    best, bound, short_of = (_figure(progress.objective, value) for value in (progress.best, progress.bound, gap))
    matter = ""
    if progress.rows_that_matter is not None:
        matter = f"; {progress.rows_that_matter:,} of {progress.rows:,} rows matter"
    return f"{progress.objective}: best so far {best}, no less than {bound}, gap {short_of}{matter} {STOP_HINT}"


def _figure(objective: ObjectiveName, value: float) -> str:
    return f"{value:g}" if objective is ObjectiveName.EFFORT else format_number(value)
