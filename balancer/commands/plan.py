"""``balancer plan``: which circuit goes where, step by step, and how good that is."""

from __future__ import annotations

import time
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import click

from balancer.commands.examples import ExampleCommand
from balancer.commands.failures import INTERRUPTED
from balancer.commands.interrupts import StopRequest
from balancer.commands.options import (
    InputFiles,
    LandingWishes,
    Output,
    Saving,
    Wishes,
    landing_options,
    output_options,
    panel_inputs,
    planning_options,
    saving_options,
)

if TYPE_CHECKING:
    from balancer.arrange.results import Options, Plan, Tradeoff
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
@landing_options()
@saving_options()
@output_options()
def plan(files: InputFiles, wishes: Wishes, landing: LandingWishes, saving: Saving, output: Output) -> int:
    """Find the arrangement with the lowest peak neutral current, and say what to do at the panel."""
    from balancer.commands.inputs import check_save_path, planning_choices, read_installation, read_scenarios_of
    from balancer.commands.progress import ProgressLine
    from balancer.commands.screen import show, side_console
    from balancer.reports.document import plan_document
    from balancer.reports.terminal import plan_report

    check_save_path(saving, files)
    installation = read_installation(files, is_quiet=output.is_quiet)
    scenarios = read_scenarios_of(installation, files)
    options = planning_choices(installation, wishes, landing)
    search = _Search(installation, scenarios, options)
    progress = ProgressLine(side_console(), is_quiet=output.is_quiet)
    with StopRequest(progress.say_stopping) as stop:
        with progress:
            answer = search.answer(progress, stop)
        _save(answer.plan, saving)
        show(plan_document(answer) if output.as_json else plan_report(answer))
    return INTERRUPTED if stop.is_made or _was_interrupted(answer) else int(answer.has_errors)


@dataclass(frozen=True)
class _Search:
    """What is to be planned, and how."""

    installation: Installation
    scenarios: Scenarios
    options: Options

    def answer(self, progress: ProgressLine, stop: StopRequest) -> PlanAnswer:
        """Plan, then look at what fewer landings would give in the time that is left."""
        from balancer.arrange.plan import plan_arrangement
        from balancer.reports.answers import plan_answer

        stop.raise_if_made()
        began_s = time.monotonic()
        found = plan_arrangement(self.installation, self.scenarios, self.options, progress, on_interrupt=stop.make)
        fewer = fewer_landings(found.landings_changed) if found.is_complete and not stop.is_made else ()
        if not fewer:
            return plan_answer(found)
        rest = replace(self, options=_options_after(self.options, time.monotonic() - began_s))
        return plan_answer(found, rest.trade(fewer, progress, stop))

    def trade(self, landings: Sequence[int], progress: ProgressLine, stop: StopRequest) -> Tradeoff:
        """Find what these numbers of landings give; that they give nothing is an answer too."""
        from balancer.arrange.results import Tradeoff
        from balancer.arrange.tradeoff import trade_landings
        from balancer.errors import InfeasibleError

        try:
            return trade_landings(
                self.installation, self.scenarios, self.options, landings, progress, on_interrupt=stop.make
            )
        except InfeasibleError as refusal:
            return Tradeoff(points=(), flat_from=None, refused=tuple(landings), refusal=str(refusal))


def _options_after(options: Options, spent_s: float) -> Options:
    """Take the time already spent off the limit."""
    if options.time_limit_s is None:
        return options
    return replace(options, time_limit_s=max(0.0, options.time_limit_s - spent_s))


def fewer_landings(landings: int) -> tuple[int, ...]:
    """Choose caps between none and `landings` that show how the gain builds up."""
    shares = (landings * part // (MOST_FEWER + 1) for part in range(1, MOST_FEWER + 1))
    return tuple(sorted({share for share in shares if share > 0}))


def _save(found: Plan, saving: Saving) -> None:
    from balancer.files import save_inventory

    if saving.save is not None:
        save_inventory(saving.save, found.installation, found.as_left, found.removed_spares, force=saving.is_forced)


def _was_interrupted(answer: PlanAnswer) -> bool:
    from balancer.arrange.results import Stop

    return Stop.INTERRUPTED in (answer.plan.stop, answer.fewer.stop if answer.fewer else Stop.NONE)
