"""``balancer plan``: which circuit goes where, step by step, and how good that is."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click

from balancer.commands.examples import ExampleCommand
from balancer.commands.options import (
    InputFiles,
    Output,
    Saving,
    Wishes,
    output_options,
    panel_inputs,
    planning_options,
    saving_options,
)

if TYPE_CHECKING:
    from balancer.arrange.results import Options, Plan
    from balancer.commands.progress import ProgressLine
    from balancer.electrical.scenarios import Scenarios
    from balancer.panel import Installation
    from balancer.reports.answers import PlanAnswer

MOST_FEWER = 3
"""Points of the small table of what fewer landings would give."""


@click.command(
    cls=ExampleCommand,
    short_help="The main job: which circuit goes where, proven.",
    examples=(
        "balancer plan house/inventory.csv --panel house/panel.toml",
        "balancer plan house/inventory.csv --landings 4",
        "balancer plan house/inventory.csv --save as-left.csv",
    ),
)
@panel_inputs()
@planning_options()
@click.option("--landings", "max_landings", type=click.IntRange(min=0), metavar="N", help="Change at most N landings.")
@saving_options()
@output_options()
def plan(files: InputFiles, wishes: Wishes, max_landings: int | None, saving: Saving, output: Output) -> int:
    """Find the arrangement with the lowest peak neutral current, and say what to do at the panel."""
    from balancer.commands.inputs import check_save_path, planning_choices, read_installation, read_scenarios_of
    from balancer.commands.progress import ProgressLine
    from balancer.commands.screen import show, side_console
    from balancer.reports.document import plan_document
    from balancer.reports.terminal import plan_report

    check_save_path(saving, files)
    installation = read_installation(files)
    scenarios = read_scenarios_of(installation, files)
    options = planning_choices(installation, wishes, max_landings)
    with ProgressLine(side_console(), is_quiet=output.is_quiet) as progress:
        answer = _answer(installation, scenarios, options, progress)
    _save(answer.plan, saving)
    show(plan_document(answer) if output.as_json else plan_report(answer))
    return _exit_code(answer)


def _answer(installation: Installation, scenarios: Scenarios, options: Options, progress: ProgressLine) -> PlanAnswer:
    from balancer.arrange.plan import plan_arrangement
    from balancer.arrange.results import Tradeoff
    from balancer.arrange.tradeoff import trade_landings
    from balancer.errors import InfeasibleError
    from balancer.reports.answers import plan_answer

    found = plan_arrangement(installation, scenarios, options, progress)
    fewer = fewer_landings(found.landings_changed) if found.is_complete else ()
    if not fewer:
        return plan_answer(found)
    try:
        return plan_answer(found, trade_landings(installation, scenarios, options, fewer, progress))
    except InfeasibleError as refusal:
        return plan_answer(found, Tradeoff(points=(), flat_from=None, refused=fewer, refusal=str(refusal)))


def fewer_landings(landings: int) -> tuple[int, ...]:
    """Choose caps between none and `landings` that show how the gain builds up."""
    shares = (landings * part // (MOST_FEWER + 1) for part in range(1, MOST_FEWER + 1))
    return tuple(sorted({share for share in shares if share > 0}))


def _save(found: Plan, saving: Saving) -> None:
    from balancer.files import save_inventory

    if saving.save is not None:
        save_inventory(saving.save, found.installation, found.as_left, found.removed_spares, force=saving.is_forced)


def _exit_code(answer: PlanAnswer) -> int:
    from balancer.arrange.results import Stop
    from balancer.commands.failures import INTERRUPTED

    stops = (answer.plan.stop, answer.fewer.stop if answer.fewer else Stop.NONE)
    if Stop.INTERRUPTED in stops:
        return INTERRUPTED
    return 1 if answer.has_errors else 0
