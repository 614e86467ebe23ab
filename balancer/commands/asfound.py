"""``balancer asfound``: what the legs and the neutral carry today."""

from __future__ import annotations

import click

from balancer.commands.examples import ExampleCommand
from balancer.commands.options import InputFiles, Output, output_options, panel_inputs


@click.command(
    cls=ExampleCommand,
    short_help="What the legs and the neutral carry today.",
    examples=(
        "balancer asfound house/inventory.csv",
        "balancer asfound house/inventory.csv --scenarios house/scenarios.csv",
    ),
)
@panel_inputs()
@output_options()
def asfound(files: InputFiles, output: Output) -> int:
    """Show what the legs and the neutral carry today, and when."""
    from balancer.commands.inputs import read_installation, read_scenarios_of
    from balancer.commands.screen import show
    from balancer.reports.answers import as_found_answer
    from balancer.reports.document import as_found_document
    from balancer.reports.terminal import as_found_report

    installation = read_installation(files, is_quiet=output.is_quiet)
    answer = as_found_answer(installation, read_scenarios_of(installation, files))
    show(as_found_document(answer) if output.as_json else as_found_report(answer))
    return 0
