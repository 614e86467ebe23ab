"""Every way a command can fail, as one headline, its problems and an exit code."""

from __future__ import annotations

from dataclasses import dataclass

import click

from balancer.errors import (
    BalancerError,
    InfeasibleError,
    InputError,
    NoAnswerInTime,
    OptionError,
    Problem,
    SelfCheckError,
)

INTERRUPTED = 130
OUR_FAULT = 4
USAGE = 2

_HEADLINES: dict[type[BalancerError], str] = {
    InputError: "The input cannot be used",
    OptionError: "The command line is wrong",
    InfeasibleError: "No arrangement of this panel fits",
    NoAnswerInTime: "The limit was reached before any arrangement was found",
    SelfCheckError: "The plan failed its own re-check and is not shown",
}

_REPORT_US = (
    "This is a fault in balancer, not in your files. Please report it with the command line and, if you can share "
    "them, the files; --debug shows the details."
)


@dataclass(frozen=True)
class Failure:
    """What is reported when a command cannot answer; `closing` is the last line of the report."""

    exit_code: int
    headline: str
    problems: tuple[Problem, ...]
    closing: str = ""


def describe_failure(error: BaseException) -> Failure:
    """Put an exception into the user's words."""
    if isinstance(error, BalancerError):
        closing = _REPORT_US if error.exit_code == OUR_FAULT else ""
        return Failure(error.exit_code, _headline(error), error.problems, closing)
    if isinstance(error, click.ClickException):
        return Failure(USAGE, _HEADLINES[OptionError], (_usage_problem(error),))
    if isinstance(error, (click.Abort, KeyboardInterrupt)):
        return Failure(INTERRUPTED, "Interrupted before there was anything to show", ())
    if isinstance(error, OSError):
        return Failure(USAGE, "A file cannot be read or written", (_system_problem(error),))
    problem = Problem(file="", problem=f"{type(error).__name__}: {error}", remedy="")
    return Failure(OUR_FAULT, "Something went wrong inside balancer", (problem,), _REPORT_US)


def _headline(error: BalancerError) -> str:
    for kind, headline in _HEADLINES.items():
        if isinstance(error, kind):
            return headline
    return "balancer cannot answer"


def _usage_problem(error: click.ClickException) -> Problem:
    context = getattr(error, "ctx", None)
    command = context.command_path if context is not None else "balancer"
    return Problem(file="", problem=error.format_message(), remedy=f"See {command} --help.")


def _system_problem(error: OSError) -> Problem:
    file = error.filename if isinstance(error.filename, str) else ""
    return Problem(file=file, problem=error.strerror or str(error), remedy="Check the place and who may write there.")
