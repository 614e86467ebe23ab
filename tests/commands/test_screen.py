import io
import subprocess
import sys
from pathlib import Path

import pytest
from rich.table import Table
from rich.text import Text

from balancer.commands.screen import answer_console, show


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
