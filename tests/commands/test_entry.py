import subprocess
import sys
from collections.abc import Callable

import click
import pytest
from click.testing import Result

from balancer import __version__
from balancer.commands import cli
from balancer.commands.examples import ExampleCommand

Run = Callable[..., Result]

COMMANDS = ("asfound", "check", "plan", "start", "tradeoff")


def test_no_arguments_show_the_help(run: Run) -> None:
    result = run()
    assert result.exit_code == 2
    assert "Commands:" in result.output


@pytest.mark.parametrize("flag", ["-h", "--help"])
def test_help_begins_with_examples_and_ends_with_exit_codes(run: Run, flag: str) -> None:
    result = run(flag)
    assert result.exit_code == 0
    assert result.stdout.index("Examples:") < result.stdout.index("Balance the legs") < result.stdout.index("Options:")
    for code in ("0 ", "1 ", "2 ", "3 ", "4 ", "130 "):
        assert f"\n  {code}" in result.stdout


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_begins_its_help_with_examples_that_parse(run: Run, name: str) -> None:
    result = run(name, "-h")
    assert result.exit_code == 0
    assert result.stdout.index("Examples:") < result.stdout.index("Options:")
    command = cli.commands[name]
    assert isinstance(command, ExampleCommand)
    for example in command.examples:
        tool, called, *arguments = example.split()
        assert (tool, called) == ("balancer", name)
        assert command.make_context(name, arguments)


def test_all_commands_are_there() -> None:
    assert tuple(sorted(cli.commands)) == COMMANDS


def test_version_is_the_package_version(run: Run) -> None:
    assert __version__ in run("--version").stdout


def test_unknown_option_ends_with_two_and_names_the_help(run: Run) -> None:
    result = run("plan", "house.csv", "--jsn")
    assert result.exit_code == 2
    assert result.stdout == ""
    assert "--jsn" in result.stderr
    assert "balancer plan --help" in " ".join(result.stderr.split())


def test_same_flag_has_the_same_help_everywhere() -> None:
    said: dict[str, set[str]] = {}
    for command in cli.commands.values():
        for option in (param for param in command.params if isinstance(param, click.Option)):
            said.setdefault(option.opts[0], set()).add(option.help or "")
    assert {flag for flag, helps in said.items() if len(helps) > 1} == {"--force"}


def test_help_loads_no_heavy_library() -> None:
    code = (
        "import sys\n"
        "from balancer.commands import cli\n"
        "try:\n    cli.main(['--help'], prog_name='balancer')\nexcept SystemExit:\n    pass\n"
        "print(sorted({'numpy', 'ortools', 'rich', 'pandas', 'openpyxl'} & sys.modules.keys()))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.splitlines()[-1] == "[]"
