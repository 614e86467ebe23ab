"""The report of what is wrong with the files or the command line."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import groupby

from rich.console import Group, RenderableType
from rich.text import Text

from balancer.errors import Problem
from balancer.reports.text import count_of, crop, indented, paragraph, visible

MOST_SHOWN = 20
_VALUE_WIDTH = 40


def problems_report(headline: str, problems: Sequence[Problem], *, closing: str = "") -> Group:
    """Show every problem, by file, with its place, its value and what would be right."""
    counted = f"{headline}: {count_of(len(problems), 'problem')}" if len(problems) > 1 else headline
    blocks: list[RenderableType] = [Text(f"{counted}.", style="bold")]
    for file, group in groupby(problems[:MOST_SHOWN], key=lambda problem: problem.file):
        if file:
            blocks.append(paragraph(file, style="bold"))
        blocks.extend(indented(_one(problem)) for problem in group)
    if len(problems) > MOST_SHOWN:
        blocks.append(Text(f"  and {len(problems) - MOST_SHOWN} more"))
    if closing:
        blocks.append(paragraph(closing))
    return Group(*blocks)


def _one(problem: Problem) -> Group:
    place = _place(problem)
    text = paragraph(f"{place}: {problem.problem}" if place else problem.problem)
    if not problem.remedy:
        return Group(text)
    return Group(text, indented(paragraph(problem.remedy)))


def _place(problem: Problem) -> str:
    parts = []
    if problem.line is not None:
        parts.append(f"line {problem.line}")
    if problem.column:
        parts.append(visible(problem.column))
    if problem.value is not None:
        parts.append(f'"{crop(visible(problem.value), _VALUE_WIDTH).rstrip()}"')
    return ", ".join(parts)
