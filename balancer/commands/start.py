"""``balancer start``: files to begin with."""

from __future__ import annotations

import click

from balancer.commands.examples import ExampleCommand


@click.command(
    cls=ExampleCommand,
    short_help="Write files to begin with.",
    examples=(
        "balancer start my-panel",
        "balancer start house --example",
    ),
)
@click.argument("directory", metavar="DIR")
@click.option("--example", "is_example", is_flag=True, help="Write a filled-in example house instead of blank files.")
@click.option("--force", "is_forced", is_flag=True, help="Replace files that exist.")
@click.option("--debug", is_flag=True, expose_value=False, help="Show the details of a fault in balancer.")
def start(directory: str, is_example: bool, is_forced: bool) -> int:
    """Write a blank inventory and panel file into DIR, or with --example a filled one."""
    from balancer.commands.screen import command_line, say
    from balancer.files.starter import blank_files, example_files, write_files

    written = write_files(directory, example_files() if is_example else blank_files(), force=is_forced)
    say(f"Written: {', '.join(written)}")
    if is_example:
        inventory, panel, scenarios = written
        say(f"Next: {command_line('balancer', 'plan', inventory, '--panel', panel, '--scenarios', scenarios)}")
    else:
        inventory, panel = written
        say("Fill them in, one row a circuit.")
        say(f"Next: {command_line('balancer', 'check', inventory, '--panel', panel)}")
    return 0
