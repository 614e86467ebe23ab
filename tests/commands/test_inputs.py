import io
import sys
from collections.abc import Callable
from pathlib import Path

import pytest
from click.testing import Result

from balancer.commands.inputs import read_installation
from balancer.commands.options import InputFiles

Run = Callable[..., Result]


class Keyboard(io.TextIOWrapper):
    def isatty(self) -> bool:
        return True


def keyboard(house: Path) -> Keyboard:
    return Keyboard(io.BytesIO(house.read_bytes()), encoding="utf-8")


FROM_KEYBOARD = InputFiles(inventory="-", panel_file=None, scenario_file=None, profile_file=None)


@pytest.mark.parametrize(("is_quiet", "is_said"), [(False, True), (True, False)])
def test_waiting_for_the_keyboard_is_said_unless_quiet(
    house: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    is_quiet: bool,
    is_said: bool,
) -> None:
    monkeypatch.setattr(sys, "stdin", keyboard(house))
    assert read_installation(FROM_KEYBOARD, is_quiet=is_quiet).inventory_file == "standard input"
    out, err = capsys.readouterr()
    assert out == ""
    assert ("Waiting for standard input" in err) is is_said


def test_a_pipe_is_read_without_a_word(run: Run, house: Path) -> None:
    result = run("check", "-", input=house.read_bytes())
    assert result.exit_code == 0
    assert result.stderr == ""
    assert "standard input" in result.stdout


def test_a_panel_file_may_come_from_standard_input(run: Run, house: Path) -> None:
    result = run("check", house, "--panel", "-", "--json", input=b"[panel]\nspaces = 12\n")
    assert result.exit_code == 0


@pytest.mark.parametrize("name", ["", "a\0b", "n" * 300])
def test_names_that_no_file_can_have_end_with_two(run: Run, name: str) -> None:
    result = run("check", name)
    assert result.exit_code == 2
    assert "The input cannot be used" in result.stderr
