"""The two consoles: stdout for the answer, stderr for everything else."""

from __future__ import annotations

import codecs
import io
import json
import os
import sys
from typing import IO, Any

from rich.console import Console, RenderableType

from balancer.reports.text import paragraph

PIPE_WIDTH = 80
WIDEST = 100
"""Lines longer than this are hard to read, however wide the window."""

_PLAIN = {"\u2026": "~", "\u00b1": "+", "\u2502": "|", "\u250c": "/", "\u2514": "\\", "\u2500": "-", "\u2013": "-"}


def _plain_signs(error: UnicodeError) -> tuple[str, int]:
    """Write a sign that the stream's encoding lacks as a plain one, and anything else as its escape."""
    if not isinstance(error, UnicodeEncodeError):
        raise error
    wrong = error.object[error.start : error.end]
    return "".join(_PLAIN.get(sign, sign.encode("ascii", "backslashreplace").decode()) for sign in wrong), error.end


codecs.register_error("balancer-plain-signs", _plain_signs)


class AnswerConsole(Console):
    """A console that stops writing, quietly, when nobody reads on: ``balancer plan ... | head``."""

    def on_broken_pipe(self) -> None:
        """Throw the rest away; the exit code still says what the answer was."""
        self.quiet = True
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def answer_console() -> Console:
    """Console on stdout."""
    return _console(sys.stdout)


def side_console() -> Console:
    """Console on stderr."""
    return _console(sys.stderr)


def show(answer: RenderableType | dict[str, Any]) -> None:
    """Print the answer on stdout: a report, or a JSON document."""
    if isinstance(answer, dict):
        # Pure ASCII, so that no name carries a control code to a terminal.
        answer_console().out(json.dumps(answer, indent=2, ensure_ascii=True, allow_nan=False), highlight=False)
    else:
        answer_console().print(answer)


def say(*words: str) -> None:
    """Print a line of plain words and data on stdout."""
    show(paragraph(" ".join(words)))


def _console(stream: IO[str]) -> Console:
    if isinstance(stream, io.TextIOWrapper):
        stream.reconfigure(errors="balancer-plain-signs")
    return AnswerConsole(file=stream, width=_width(stream), markup=False, highlight=False, emoji=False)


def _width(stream: IO[str]) -> int:
    columns = os.environ.get("COLUMNS", "")
    if columns.isdecimal() and int(columns) > 0:
        return int(columns)
    if not stream.isatty():
        return PIPE_WIDTH
    try:
        return min(os.get_terminal_size(stream.fileno()).columns or PIPE_WIDTH, WIDEST)
    except (OSError, ValueError):
        return PIPE_WIDTH
