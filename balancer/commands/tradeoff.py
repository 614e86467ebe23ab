"""``balancer tradeoff``: what each further landing buys."""

from __future__ import annotations

import click

from balancer.commands.examples import ExampleCommand
from balancer.commands.failures import INTERRUPTED
from balancer.commands.interrupts import StopRequest
from balancer.commands.options import (
    MOST_LANDINGS,
    Count,
    InputFiles,
    LandingWishes,
    Output,
    Wishes,
    output_options,
    panel_inputs,
    planning_options,
)


@click.command(
    cls=ExampleCommand,
    short_help="What each further landing buys.",
    examples=(
        "balancer tradeoff house/inventory.csv",
        "balancer tradeoff house/inventory.csv --upto 6",
    ),
)
@panel_inputs()
@planning_options()
@click.option(
    "--upto",
    type=Count(min=0, max=MOST_LANDINGS),
    metavar="N",
    default=10,
    show_default=True,
    help="Show 0 to N landings.",
)
@output_options()
def tradeoff(files: InputFiles, wishes: Wishes, upto: int, output: Output) -> int:
    """Show what each further landing buys, and where the curve goes flat."""
    from balancer.arrange.results import Stop
    from balancer.arrange.tradeoff import trade_landings
    from balancer.commands.inputs import planning_choices, read_installation, read_scenarios_of
    from balancer.commands.progress import ProgressLine
    from balancer.commands.screen import show, side_console
    from balancer.errors import NoAnswerInTime
    from balancer.reports.document import tradeoff_document
    from balancer.reports.terminal import tradeoff_report

    installation = read_installation(files, is_quiet=output.is_quiet)
    scenarios = read_scenarios_of(installation, files)
    options = planning_choices(installation, wishes, LandingWishes(within_a=0.0))
    progress = ProgressLine(side_console(), is_quiet=output.is_quiet)
    with StopRequest(progress.say_stopping) as stop:
        stop.raise_if_made()
        with progress:
            curve = trade_landings(installation, scenarios, options, range(upto + 1), progress, on_interrupt=stop.make)
        if not curve.points:
            message = "no arrangement was found before the limit, and none was ruled out"
            raise NoAnswerInTime(message)
        if output.as_json:
            show(tradeoff_document(installation, scenarios, curve))
        else:
            show(tradeoff_report(installation, scenarios, curve, options.aim))
    return INTERRUPTED if stop.is_made or curve.stop is Stop.INTERRUPTED else 0
