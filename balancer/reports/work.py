"""The work on the screen: tests before, steps, parts and the clamp check after."""

from __future__ import annotations

from collections.abc import Sequence

from rich.console import Group, RenderableType
from rich.table import Table
from rich.text import Text

from balancer.arrange.clamp import ClampReading
from balancer.arrange.work import Part, PartKind, PreMoveTest, Step, Work
from balancer.reports.text import bullets, count_of, figures_table, format_number, numbered, paragraph


def pre_move_list(tests: Sequence[PreMoveTest]) -> Table:
    """List the tests to make while the panel is still live."""
    return bullets((test.text for test in tests), sign="[ ]")


def step_list(work: Work) -> Group:
    """List the steps by number; each says what to do and what goes along."""
    loose = (
        "No conductor is ever loose but the one at hand."
        if work.max_loose == 0
        else f"At most {count_of(work.max_loose, 'conductor')} set aside at any time."
    )
    return Group(numbered(_step(step) for step in work.steps), Text(loose))


def _step(step: Step) -> Group:
    way = " -> ".join(filter(None, [step.from_text, step.to_text or "out"]))
    blocks: list[RenderableType] = [paragraph(f"{step.circuit}  {way}  ({step.how})", style="bold")]
    blocks.append(paragraph(step.action))
    notes = [*step.goes_along, *filter(None, [step.splice_text])]
    if notes:
        blocks.append(bullets(notes))
    return Group(*blocks)


def part_list(parts: Sequence[Part]) -> Group:
    """List what to bring."""
    listed = bullets(part.text if part.is_certain else f"perhaps {part.text}" for part in parts)
    if not any(part.kind is PartKind.SPLICE for part in parts):
        return Group(listed)
    return Group(listed, paragraph("Splices need room in the panel: NEC 2023, 312.8, from memory."))


def clamp_table(readings: Sequence[ClampReading]) -> Table:
    """Show what the meter must read as circuits are switched on one after the other."""
    table = figures_table("switch on", "leg A", "leg B", "neutral", "within", names=1)
    for reading in readings:
        figures = (reading.leg_a_a, reading.leg_b_a, reading.neutral_a, reading.tolerance_a)
        name = f"{reading.switch_on} (assumed load)" if reading.is_assumed else reading.switch_on
        table.add_row(paragraph(name), *(format_number(figure) for figure in figures))
    return table
