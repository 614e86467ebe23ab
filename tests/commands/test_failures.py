import json
from collections.abc import Callable
from pathlib import Path

import click
import pytest
from click.testing import Result

from balancer.commands.failures import describe_failure
from balancer.errors import (
    BalancerError,
    InfeasibleError,
    InputError,
    NoAnswerInTime,
    OptionError,
    Problem,
    SelfCheckError,
)

Run = Callable[..., Result]

ENDINGS = [
    pytest.param(InputError([Problem("h.csv", "is not a voltage.", "Write 120.", 2, "volts", "7")]), 2, id="input"),
    pytest.param(OptionError("contradiction", "Give one."), 2, id="options"),
    pytest.param(InfeasibleError(["13 poles need a place, the panel has 12"], ["Add a panel."]), 1, id="infeasible"),
    pytest.param(NoAnswerInTime("nothing found in 1 s"), 3, id="limit"),
    pytest.param(SelfCheckError(["leg A differs by 2 A"]), 4, id="self-check"),
    pytest.param(OSError(28, "No space left on device"), 2, id="system"),
    pytest.param(RuntimeError("unforeseen"), 4, id="unforeseen"),
    pytest.param(KeyboardInterrupt(), 130, id="interrupted"),
]


def fail_with(monkeypatch: pytest.MonkeyPatch, error: BaseException) -> None:
    def read(*_: object) -> None:
        raise error

    monkeypatch.setattr("balancer.files.read_inventory", read)


@pytest.mark.parametrize(("error", "exit_code"), ENDINGS)
def test_every_failure_ends_with_its_code_and_one_report_on_stderr(
    run: Run, monkeypatch: pytest.MonkeyPatch, error: BaseException, exit_code: int
) -> None:
    fail_with(monkeypatch, error)
    result = run("check", "house.csv")
    assert result.exit_code == exit_code
    assert result.stdout == ""
    assert "Traceback" not in result.stderr
    problems = describe_failure(error).problems
    assert all(problem.problem in " ".join(result.stderr.split()) for problem in problems)


@pytest.mark.parametrize(("error", "exit_code"), ENDINGS)
def test_every_failure_is_a_document_under_json(
    run: Run, monkeypatch: pytest.MonkeyPatch, error: BaseException, exit_code: int
) -> None:
    fail_with(monkeypatch, error)
    result = run("check", "house.csv", "--json")
    assert result.exit_code == exit_code
    document = json.loads(result.stdout)
    assert document.keys() == {"schema", "error", "problems"}
    for problem in document["problems"]:
        assert problem.keys() == {"file", "line", "column", "value", "problem", "remedy"}


def test_every_error_of_ours_has_a_headline_of_its_own() -> None:
    headlines = [describe_failure(case.values[0]).headline for case in ENDINGS]  # type: ignore[arg-type]
    assert len(set(headlines)) == len(headlines)
    assert all(isinstance(kind(""), BalancerError) for kind in (OptionError, NoAnswerInTime))


def test_our_fault_asks_for_a_report_and_shows_details_only_when_asked(
    run: Run, monkeypatch: pytest.MonkeyPatch
) -> None:
    fail_with(monkeypatch, RuntimeError("unforeseen"))
    assert "Please report it" in run("check", "house.csv").stderr
    with_flag = run("check", "house.csv", "--debug")
    with_setting = run("check", "house.csv", env={"BALANCER_DEBUG": "1"})
    assert with_flag.exit_code == with_setting.exit_code == 4
    assert "Traceback" in with_flag.stderr
    assert "Traceback" in with_setting.stderr


def test_a_wrong_command_line_is_a_document_under_json(run: Run) -> None:
    result = run("plan", "--json", "--within", "nan", "house.csv")
    assert result.exit_code == 2
    assert "nan" in json.loads(result.stdout)["problems"][0]["problem"]


def test_usage_problems_name_the_help_of_their_command() -> None:
    context = click.Context(click.Command("plan"), info_name="plan")
    failure = describe_failure(click.UsageError("No such option: --jsn", context))
    assert failure.problems[0].remedy == "See plan --help."


@pytest.mark.parametrize(
    "arguments",
    [
        pytest.param(["--within", "nan"], id="not a number"),
        pytest.param(["--within", "-1"], id="negative"),
        pytest.param(["--within", "inf"], id="infinite"),
        pytest.param(["--landings", "-1"], id="negative landings"),
        pytest.param(["--landings", "2.5"], id="part of a landing"),
        pytest.param(["--time-limit", "0"], id="no time at all"),
        pytest.param(["--aim", "voltage"], id="unknown aim"),
        pytest.param(["--scenarios", "a.csv", "--profiles", "b.csv"], id="scenarios with profiles"),
        pytest.param(["--force"], id="force without save"),
        pytest.param(["--landings", "99999999999999999999"], id="more landings than any panel has"),
        pytest.param(["--panel", "-", "--scenarios", "-"], id="two files from standard input"),
        pytest.param(["--save", "no/such/place/x.csv"], id="save nowhere"),
        pytest.param(["--save", ""], id="save without a name"),
        pytest.param(["--save", "-"], id="save to standard output"),
        pytest.param(["--save", "left.xlsx"], id="save as a workbook"),
        pytest.param(["--save", "."], id="save over a directory"),
        pytest.param(["--save", "n" * 300 + ".csv"], id="save under an endless name"),
    ],
)
def test_options_that_make_no_sense_end_with_two(run: Run, house: Path, arguments: list[str]) -> None:
    result = run("plan", house, *arguments)
    assert result.exit_code == 2
    assert result.stdout == ""
    assert "The command line is wrong" in result.stderr


@pytest.mark.parametrize("arguments", [["--save", "left.xlsx"], ["--save", "-"], ["--panel", "-", "--scenarios", "-"]])
def test_a_wrong_command_line_is_refused_before_anything_is_read(
    run: Run, monkeypatch: pytest.MonkeyPatch, arguments: list[str]
) -> None:
    fail_with(monkeypatch, AssertionError("read"))
    assert run("plan", "house.csv", *arguments).exit_code == 2


def test_a_curve_without_a_point_is_no_answer(run: Run, house: Path) -> None:
    result = run("tradeoff", house, "--time-limit", "0.000001", "--json")
    assert result.exit_code == 3
    assert json.loads(result.stdout)["error"] == "The limit was reached before any arrangement was found"


@pytest.mark.parametrize("value", ["1.5", "-1", "169", "many", "1e2"])
@pytest.mark.parametrize(("command", "option"), [("plan", "--landings"), ("tradeoff", "--upto")])
def test_a_number_of_landings_that_is_none_is_told_what_is_allowed(
    run: Run, house: Path, command: str, option: str, value: str
) -> None:
    result = run(command, house, option, value)
    assert result.exit_code == 2
    assert f"'{value}' is not a whole number from 0 to 168." in " ".join(result.stderr.split())
