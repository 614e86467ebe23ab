"""``balancer check``: what is wrong with the inventory or the panel as it stands."""

from __future__ import annotations

import click

from balancer.commands.examples import ExampleCommand
from balancer.commands.options import InputFiles, Output, output_options, panel_inputs


@click.command(
    cls=ExampleCommand,
    short_help="What is wrong with the inventory or the panel.",
    examples=(
        "balancer check house/inventory.csv",
        "balancer check house/inventory.csv --panel house/panel.toml --json",
    ),
)
@panel_inputs()
@output_options()
def check(files: InputFiles, output: Output) -> int:
    """Say what is wrong with the inventory or the panel as it stands.

    Ends with exit code 1 when a finding is an error.
    """
    from balancer.commands.inputs import read_installation, read_scenarios_of
    from balancer.commands.screen import show
    from balancer.reports.answers import as_found_answer
    from balancer.reports.document import check_document
    from balancer.reports.terminal import check_report

    installation = read_installation(files, is_quiet=output.is_quiet)
    answer = as_found_answer(installation, read_scenarios_of(installation, files))
    show(check_document(answer) if output.as_json else check_report(answer))
    return 1 if answer.has_errors else 0
