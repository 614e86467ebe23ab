import io
import os
import shlex
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest
from click.testing import Result
from rich.table import Table
from rich.text import Text

from balancer.commands.screen import answer_console, command_line, show

Run = Callable[..., Result]


def stream(monkeypatch: pytest.MonkeyPatch, encoding: str) -> io.BytesIO:
    raw = io.BytesIO()
    monkeypatch.setattr(sys, "stdout", io.TextIOWrapper(raw, encoding=encoding, write_through=True))
    return raw


def test_signs_that_an_encoding_lacks_become_plain_ones_in_place(monkeypatch: pytest.MonkeyPatch) -> None:
    raw = stream(monkeypatch, "ascii")
    show(Text("A \u2502 \u250c range \u2026 \u2502 \U0001f525"))
    assert raw.getvalue() == b"A | / range ~ | \\U0001f525\n"


def test_an_encoding_that_has_the_signs_keeps_them(monkeypatch: pytest.MonkeyPatch) -> None:
    raw = stream(monkeypatch, "utf-8")
    show(Text("A \u2502 \u2026"))
    assert raw.getvalue().decode() == "A \u2502 \u2026\n"


def test_tables_can_be_printed_in_ascii(monkeypatch: pytest.MonkeyPatch) -> None:
    raw = stream(monkeypatch, "ascii")
    table = Table("a", "b")
    table.add_row("1", "2")
    show(table)
    assert raw.getvalue().isascii()


def test_documents_are_pure_ascii_json(monkeypatch: pytest.MonkeyPatch) -> None:
    raw = stream(monkeypatch, "utf-8")
    show({"circuit": "\x1b[31m\u6f22 [bold]x[/bold] \x9b"})
    assert raw.getvalue() == b'{\n  "circuit": "\\u001b[31m\\u6f22 [bold]x[/bold] \\u009b"\n}\n'


def test_documents_refuse_what_json_has_no_number_for() -> None:
    with pytest.raises(ValueError, match="not JSON compliant"):
        show({"amps": float("nan")})


def test_a_pipe_is_eighty_wide_unless_columns_says_otherwise(monkeypatch: pytest.MonkeyPatch) -> None:
    stream(monkeypatch, "utf-8")
    assert answer_console().width == 80
    monkeypatch.setenv("COLUMNS", "132")
    assert answer_console().width == 132
    monkeypatch.setenv("COLUMNS", "wide")
    assert answer_console().width == 80


def test_a_pipe_gets_no_colours(monkeypatch: pytest.MonkeyPatch) -> None:
    raw = stream(monkeypatch, "utf-8")
    show(Text("ERROR", style="bold red"))
    assert raw.getvalue() == b"ERROR\n"


def test_no_color_leaves_no_colour_on_a_terminal(monkeypatch: pytest.MonkeyPatch) -> None:
    raw = stream(monkeypatch, "utf-8")
    monkeypatch.setenv("FORCE_COLOR", "1")
    monkeypatch.setenv("NO_COLOR", "1")
    show(Text("ERROR", style="bold red"))
    assert b"31" not in raw.getvalue()


def test_a_reader_who_leaves_early_causes_no_traceback(house: Path) -> None:
    command = [sys.executable, "-m", "balancer", "check", str(house)]
    with subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE) as process:
        assert process.stdout is not None
        assert process.stderr is not None
        process.stdout.close()
        assert process.stderr.read() == b""
    assert process.returncode == 0


def test_lines_in_a_pipe_carry_no_trailing_blanks(monkeypatch: pytest.MonkeyPatch) -> None:
    raw = stream(monkeypatch, "utf-8")
    table = Table("circuit", "was", box=None)
    table.add_row("kitchen", "")
    show(table)
    assert [line.strip() for line in raw.getvalue().decode().splitlines()] == ["circuit  was", "kitchen"]
    assert not any(line.endswith(" ") for line in raw.getvalue().decode().splitlines())


def test_a_problem_report_in_a_pipe_carries_no_trailing_blanks(run: Run, house: Path) -> None:
    result = run("plan", house, "--landings", "-1")
    assert result.exit_code == 2
    assert not any(line.endswith(" ") for line in result.stderr.splitlines())


def test_a_command_to_copy_is_quoted_and_unbroken(run: Run, tmp_path: Path) -> None:
    folder = tmp_path / ("long " * 20 + "'name")
    result = run("start", folder)
    line = next(line for line in result.stdout.splitlines() if line.startswith("Next: "))
    inventory, panel = (str(folder / name) for name in ("inventory.csv", "panel.toml"))
    assert line == f"Next: {command_line('balancer', 'check', inventory, '--panel', panel)}"
    if os.name != "nt":
        assert shlex.split(line)[1:] == ["balancer", "check", inventory, "--panel", panel]


@pytest.mark.skipif(os.name == "nt", reason="the shell's redirections")
@pytest.mark.parametrize(
    ("redirection", "exit_code"),
    [("> /dev/full", 2), ("--json > /dev/full", 2), (">&-", 0), ("2>&-", 0), ("--json >&-", 0)],
)
def test_streams_that_take_nothing_are_no_fault_of_ours(house: Path, redirection: str, exit_code: int) -> None:
    if "/dev/full" in redirection and not Path("/dev/full").exists():
        pytest.skip("no full device here")
    command = f"{shlex.quote(sys.executable)} -m balancer check {shlex.quote(str(house))} {redirection}"
    done = subprocess.run(command, shell=True, capture_output=True, text=True, check=False)
    assert done.returncode == exit_code
    assert "Traceback" not in done.stderr
    assert "fault" not in done.stderr


@pytest.mark.skipif(os.name == "nt", reason="the shell's redirections")
def test_a_closed_standard_input_is_empty(house: Path) -> None:
    command = f"{shlex.quote(sys.executable)} -m balancer check - <&-"
    done = subprocess.run(command, shell=True, capture_output=True, text=True, check=False)
    assert done.returncode == 2
    assert "is empty" in done.stderr
