"""Write the parts of README.md that the program itself knows best, between their markers.

Run it with the Python of the virtual environment: ``.venv/bin/python scripts/refresh_readme.py``.
"""

from __future__ import annotations

import os
import re
import subprocess
import sys
from collections.abc import Callable, Iterator

import click
from demo import HOUSE
from environment import ROOT

from balancer.commands import cli
from balancer.electrical.defaults import known_uses
from balancer.files.columns import COLUMNS

README = ROOT / "README.md"
SHOWN_SECTIONS = (
    "",
    "AS FOUND AND AS LEFT",
    "WHAT MAKES THE PEAK",
    "HOW GOOD IT IS",
    "WHAT FEWER LANDINGS WOULD GIVE",
    "THE PANEL AS LEFT",
    "CLAMP CHECK",
)
"""Sections of the demo's report that the README shows, by heading; "" is what stands before the first one."""


def command_table() -> str:
    """List the commands with what they answer."""
    lines = ["| command | what it does |", "|---|---|"]
    for name, command in cli.commands.items():
        arguments = [str(param.metavar) for param in command.params if isinstance(param, click.Argument)]
        usage = " ".join(["balancer", name, *arguments])
        lines.append(f"| `{usage}` | {command.get_short_help_str(200)} |")
    return "\n".join(lines)


def option_table() -> str:
    """List every option with the commands that take it."""
    takers: dict[tuple[str, str], list[str]] = {}
    for name, command in cli.commands.items():
        for record in _option_records(command):
            takers.setdefault(record, []).append(name)
    lines = ["| option | of | meaning |", "|---|---|---|"]
    for (option, meaning), names in takers.items():
        of = "all commands" if len(names) == len(cli.commands) else ", ".join(f"`{name}`" for name in names)
        lines.append(f"| `{_cell(option)}` | {of} | {_cell(meaning)} |")
    return "\n".join(lines)


def column_table() -> str:
    """List the inventory's columns."""
    rows = [f"| `{column.name}` | {_cell(column.meaning)} | {_cell(column.default)} |" for column in COLUMNS]
    return "\n".join(["| column | meaning | when blank |", "|---|---|---|", *rows])


def use_list() -> str:
    """List the names that the column `use` knows."""
    return ", ".join(f"`{use}`" for use in known_uses()) + "."


def screen() -> str:
    """Show some sections of the demo's report as a terminal of 80 columns prints them."""
    environment = {name: value for name, value in os.environ.items() if name not in ("COLUMNS", "FORCE_COLOR")}
    command = [sys.executable, "-m", "balancer", "plan", *HOUSE]
    done = subprocess.run(
        command,
        cwd=ROOT,
        env={**environment, "PYTHONIOENCODING": "utf-8"},
        capture_output=True,
        encoding="utf-8",
        check=True,
    )
    sections = sections_of(done.stdout)
    shown = "\n\n".join(sections[heading] for heading in SHOWN_SECTIONS)
    return f"```text\n{shown}\n```"


def sections_of(report: str) -> dict[str, str]:
    """Part a report at its headings, lines in capitals; blanks at the ends of lines are dropped."""
    sections: dict[str, list[str]] = {"": []}
    for line in map(str.rstrip, report.splitlines()):
        if re.fullmatch(r"[A-Z][A-Z ]+", line):
            sections[line] = []
        sections[next(reversed(sections))].append(line)
    return {heading: "\n".join(lines).strip("\n") for heading, lines in sections.items()}


BLOCKS: dict[str, Callable[[], str]] = {
    "commands": command_table,
    "options": option_table,
    "columns": column_table,
    "uses": use_list,
    "screen": screen,
}


def block_pattern(name: str) -> re.Pattern[str]:
    """Match a block with its markers; the group is what stands between them."""
    return re.compile(rf"<!-- begin {name} -->\n(.*?)<!-- end {name} -->", re.DOTALL)


def block_in(text: str, name: str) -> str:
    """Give what stands in a block now.

    Raises
    ------
    ValueError
        When the markers are not there exactly once.
    """
    found = block_pattern(name).findall(text)
    if len(found) != 1:
        message = f"README.md has {len(found)} blocks named {name}, not one"
        raise ValueError(message)
    return str(found[0]).strip("\n")


def refreshed(text: str) -> str:
    """Fill every block anew."""
    for name, build in BLOCKS.items():
        block_in(text, name)
        filled = f"<!-- begin {name} -->\n{build()}\n<!-- end {name} -->"
        text = block_pattern(name).sub(lambda _, filled=filled: filled, text)
    return text


def _option_records(command: click.Command) -> Iterator[tuple[str, str]]:
    context = click.Context(command)
    for param in command.params:
        record = param.get_help_record(context)
        if isinstance(param, click.Option) and record is not None:
            yield record


def _cell(text: str) -> str:
    return " ".join(text.split()).replace("|", "\\|")


if __name__ == "__main__":
    README.write_text(refreshed(README.read_text(encoding="utf-8")), encoding="utf-8")
