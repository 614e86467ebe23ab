import json
import signal
from collections.abc import Callable
from pathlib import Path

import pytest
from click.testing import Result

from balancer.commands.interrupts import StopRequest
from balancer.commands.progress import STOPPING, ProgressLine
from balancer.errors import InfeasibleError, NoAnswerInTime, SelfCheckError

Run = Callable[..., Result]


def press_ctrl_c(*_: object) -> None:
    signal.raise_signal(signal.SIGINT)


def press_once_on_news(monkeypatch: pytest.MonkeyPatch) -> None:
    presses = iter((press_ctrl_c,))
    monkeypatch.setattr(ProgressLine, "__call__", lambda *_: next(presses, lambda: None)())


def test_first_ctrl_c_is_a_wish_and_the_second_an_order() -> None:
    told: list[str] = []
    with StopRequest(lambda: told.append("stopping")) as stop:
        assert not stop.is_made
        press_ctrl_c()
        assert stop.is_made
        with pytest.raises(KeyboardInterrupt):
            press_ctrl_c()
    assert told == ["stopping"]


def test_ctrl_c_is_given_back() -> None:
    before = signal.getsignal(signal.SIGINT)
    with StopRequest(lambda: None):
        assert signal.getsignal(signal.SIGINT) is not before
    assert signal.getsignal(signal.SIGINT) is before


def test_a_job_that_ignores_ctrl_c_goes_on_ignoring_it() -> None:
    before = signal.signal(signal.SIGINT, signal.SIG_IGN)
    try:
        with StopRequest(lambda: None) as stop:
            press_ctrl_c()
            assert not stop.is_made
    finally:
        signal.signal(signal.SIGINT, before)


@pytest.mark.parametrize(
    ("error", "raised"),
    [
        (NoAnswerInTime("nothing found"), KeyboardInterrupt),
        (InfeasibleError(["at most 0 landings may change"]), KeyboardInterrupt),
        (SelfCheckError(["leg A differs"]), SelfCheckError),
    ],
)
def test_what_a_stopped_search_did_not_find_counts_as_interrupted(
    error: Exception, raised: type[BaseException]
) -> None:
    def search(*, is_stopped: bool) -> None:
        with StopRequest(lambda: None) as stop:
            stop.is_made = is_stopped
            raise error

    with pytest.raises(raised):
        search(is_stopped=True)
    with pytest.raises(type(error)):
        search(is_stopped=False)


@pytest.mark.parametrize("command", ["plan", "tradeoff"])
def test_first_ctrl_c_says_at_once_that_it_stops_and_shows_the_best_so_far(
    run: Run, house: Path, monkeypatch: pytest.MonkeyPatch, command: str
) -> None:
    press_once_on_news(monkeypatch)
    result = run(command, house)
    assert result.exit_code == 130
    assert result.stderr == f"{STOPPING}\n"
    assert "best" in result.stdout


def test_stopping_is_not_said_when_quiet(run: Run, house: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    press_once_on_news(monkeypatch)
    result = run("plan", house, "--quiet", "--json")
    assert (result.exit_code, result.stderr) == (130, "")
    assert json.loads(result.stdout)["complete"] is False


def test_second_ctrl_c_quits_without_an_answer(run: Run, house: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(ProgressLine, "__call__", press_ctrl_c)
    result = run("plan", house, "--save", house.with_name("left.csv"))
    assert result.exit_code == 130
    assert result.stdout == ""
    assert "Interrupted before there was anything to show" in result.stderr
    assert not house.with_name("left.csv").exists()


def test_ctrl_c_after_the_search_loses_nothing(run: Run, house: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("balancer.commands.plan._save", press_ctrl_c)
    result = run("plan", house)
    assert result.exit_code == 130
    assert "AFTERWARDS" in result.stdout


@pytest.mark.parametrize("arguments", [(), ("--json",)])
def test_ctrl_c_while_a_library_is_loaded_is_no_fault_of_ours(
    run: Run, house: Path, monkeypatch: pytest.MonkeyPatch, arguments: tuple[str, ...]
) -> None:
    def read(*_: object) -> None:
        try:
            press_ctrl_c()
        except KeyboardInterrupt:
            message = "initialization failed"
            raise ImportError(message) from None

    monkeypatch.setattr("balancer.files.read_inventory", read)
    result = run("check", house, *arguments)
    assert result.exit_code == 130
    assert "Interrupted" in result.stderr
    assert "fault" not in result.stderr
