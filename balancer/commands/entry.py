"""The ``balancer`` command group, and what each way of ending means for the exit code."""

from __future__ import annotations

import os
import sys
import traceback
from typing import Any

import click

from balancer import __version__
from balancer.commands import asfound, check, plan, start, tradeoff
from balancer.commands.examples import write_examples
from balancer.commands.failures import OUR_FAULT, Failure, describe_failure
from balancer.commands.interrupts import Interruption
from balancer.commands.options import CONTEXT_SETTINGS

EXAMPLES = (
    "balancer start house --example",
    "balancer plan house/inventory.csv --panel house/panel.toml",
    "balancer check house/inventory.csv",
)

EXIT_CODES = (
    ("0", "done"),
    ("1", "the answer is no: an error-level finding, or no arrangement fits"),
    ("2", "the command line or a file is wrong"),
    ("3", "a limit was reached with nothing found"),
    ("4", "a fault in balancer itself: please report it"),
    ("130", "interrupted; the best so far was shown"),
)

CAUTION = (
    "A plan is work on equipment that can kill. Local code, the authority having jurisdiction and a licensed "
    "electrician decide."
)


class CommandLine(click.Group):
    """A group that ends with our exit codes and our words, whatever goes wrong."""

    def format_help_text(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """Write the examples, then the description."""
        write_examples(formatter, EXAMPLES)
        super().format_help_text(ctx, formatter)

    def format_epilog(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """Write what the exit codes mean, and the caution."""
        with formatter.section("Exit codes"):
            formatter.write_dl(EXIT_CODES)
        formatter.write_paragraph()
        formatter.write_text(CAUTION)

    def main(self, *args: Any, **kwargs: Any) -> Any:
        """Run, report any failure once, and leave with the exit code that says how it ended."""
        given = kwargs.get("args", args[0] if args else None)
        words = sys.argv[1:] if given is None else list(given)
        kwargs["standalone_mode"] = False
        interruption = Interruption()
        try:
            with interruption:
                code = super().main(*args, **kwargs)
        except click.exceptions.NoArgsIsHelpError as help_wanted:
            help_wanted.show()
            code = help_wanted.exit_code
        except (KeyboardInterrupt, Exception) as error:
            failure = describe_failure(KeyboardInterrupt() if interruption.has_come else error)
            if failure.exit_code == OUR_FAULT and _wants_traceback(words):
                traceback.print_exc()
            code = _report(failure, as_json="--json" in words)
        sys.exit(code if isinstance(code, int) else 0)


def _wants_traceback(words: list[str]) -> bool:
    return "--debug" in words or os.environ.get("BALANCER_DEBUG", "") not in ("", "0")


def _report(failure: Failure, *, as_json: bool) -> int:
    from balancer.commands.screen import discard, show, side_console
    from balancer.reports.document import error_document
    from balancer.reports.problems import problems_report

    side_console().write(problems_report(failure.headline, failure.problems, closing=failure.closing))
    if not as_json:
        return failure.exit_code
    try:
        show(error_document(failure.headline, failure.problems))
    except OSError:
        # The failure was most likely this one: stdout takes nothing any more.
        discard(sys.stdout)
    return failure.exit_code


@click.group(cls=CommandLine, context_settings=CONTEXT_SETTINGS, no_args_is_help=True)
@click.version_option(__version__, prog_name="balancer")
def cli() -> None:
    """Balance the legs of a crowded 120/240 V panel.

    Reads a circuit inventory (CSV), finds the arrangement of breakers with the lowest peak neutral current, proves how
    good it is, and says what to do at the panel.
    """


for command in (start.start, check.check, asfound.asfound, plan.plan, tradeoff.tradeoff):
    cli.add_command(command)


def main() -> None:
    """Run the command line; the installed ``balancer`` script."""
    cli.main(prog_name="balancer")
