"""The two consoles: stdout for the answer, stderr for everything else."""

from __future__ import annotations

import codecs
import contextlib
import io
import json
import os
import shlex
import subprocess
import sys
from typing import IO, Any

from rich.console import Console, RenderableType

from balancer.reports.text import paragraph

PIPE_WIDTH = 80
WIDEST = 100
"""Lines longer than this are hard to read, however wide the window."""

_NOWHERE = io.StringIO()
"""Takes what is written to a stream that the shell has closed."""

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
        discard(self.file)

    def write(self, report: RenderableType) -> None:
        """Print a report; in a pipe or a file without the blanks that fill its lines up."""
        if self.is_terminal:
            self.print(report)
            return
        with self.capture() as capture:
            self.print(report)
        self.out("\n".join(line.rstrip(" ") for line in capture.get().split("\n")), end="", highlight=False)


def discard(stream: IO[str]) -> None:
    """Throw away what a stream still holds and gets: its reader has gone, or its disk is full."""
    with contextlib.suppress(OSError, ValueError):
        os.dup2(os.open(os.devnull, os.O_WRONLY), stream.fileno())


def answer_console() -> AnswerConsole:
    """Console on stdout."""
    return _console(sys.stdout or _NOWHERE)


def side_console() -> AnswerConsole:
    """Console on stderr."""
    return _console(sys.stderr or _NOWHERE)


def show(answer: RenderableType | dict[str, Any]) -> None:
    """Print the answer on stdout: a report, or a JSON document."""
    if isinstance(answer, dict):
        # Pure ASCII, so that no name carries a control code to a terminal.
        answer_console().out(json.dumps(answer, indent=2, ensure_ascii=True, allow_nan=False), highlight=False)
    else:
        answer_console().write(answer)


def say(text: str) -> None:
    """Print a line of words and data on stdout, unbroken, so that a command in it can be copied."""
    answer_console().print(paragraph(text), soft_wrap=True)


def command_line(*words: str) -> str:
    """Write a command as it is typed, with quotation marks where the shell needs them."""
    return subprocess.list2cmdline(words) if os.name == "nt" else shlex.join(words)


def notify(text: str) -> None:
    """Print a line of words and data on stderr."""
    side_console().write(paragraph(text))


def _console(stream: IO[str]) -> AnswerConsole:
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
