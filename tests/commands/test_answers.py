import json
from collections.abc import Callable
from pathlib import Path

from click.testing import Result

Run = Callable[..., Result]

ONE_LEG_PAIR = """\
circuit,space,volts,load_a,breaker_a,shared_neutral
left,1,120,8,20,pair
right,2,120,7,20,pair
"""


def test_check_of_a_sound_panel_ends_with_zero(run: Run, house: Path) -> None:
    result = run("check", house)
    assert result.exit_code == 0
    assert "house.csv" in "".join(result.stdout.splitlines()[:5]), "a long path is folded"
    assert result.stderr == ""


def test_check_ends_with_one_on_an_error(run: Run, tmp_path: Path) -> None:
    path = tmp_path / "pair.csv"
    path.write_text(ONE_LEG_PAIR, encoding="utf-8")
    result = run("check", path)
    assert result.exit_code == 1
    assert "ERROR  shared-neutral-one-leg (left and right)" in result.stdout
    document = json.loads(run("check", path, "--json").stdout)
    assert document["findings"][0]["severity"] == "error"
    assert document["as_found"]["peak_neutral"] == 15.0


def test_asfound_gives_the_currents_of_everything_on(run: Run, house: Path) -> None:
    document = json.loads(run("asfound", house, "--json").stdout)
    # Spaces 1, 2, 5, 6, 9 are on leg A: range 20, kitchen 10, bath 9, hall 8, lights 3; leg B: range 20, desk 2.
    assert document["as_found"]["peak_leg_a"] == 50.0
    assert document["as_found"]["peak_leg_b"] == 22.0
    assert document["as_found"]["peak_neutral"] == 28.0
    assert document["scenarios"]["kind"] == "connected"
    assert "28.0 A" in run("asfound", house).stdout


def test_asfound_takes_the_scenario_file(run: Run, house: Path, scenario_file: Path) -> None:
    document = json.loads(run("asfound", house, "--scenarios", scenario_file, "--json").stdout)
    # Morning: A 10 + 9 + 4 + 3 = 26 of 120 V load, B nothing; evening: A 10 + 8 + 3, B 2.
    assert document["scenarios"] == {"kind": "scenarios", "count": 2, "averages": False}
    assert document["as_found"]["peak_neutral"] == 26.0
    assert document["as_found"]["mean_neutral"] == 22.5
    assert document["peak"]["scenario"] == "morning"


def test_json_is_all_there_is_on_stdout(run: Run, house: Path) -> None:
    for command in ("check", "asfound"):
        result = run(command, house, "--json")
        json.loads(result.stdout)
        assert result.stderr == ""


def test_every_problem_of_a_file_is_reported_once_with_two(run: Run, tmp_path: Path) -> None:
    path = tmp_path / "bad.csv"
    path.write_text("circuit,space,volts,load_a,pf\na,1,121,5,1\nb,2,120,-3,1\nc,3,120,5,0\n", encoding="utf-8")
    result = run("asfound", path, "--json")
    assert result.exit_code == 2
    problems = json.loads(result.stdout)["problems"]
    assert [(each["line"], each["column"]) for each in problems] == [(2, "volts"), (3, "load_a"), (4, "pf")]
    assert "The input cannot be used: 3 problems." in result.stderr


def test_a_missing_file_ends_with_two(run: Run, tmp_path: Path) -> None:
    result = run("check", tmp_path / "nowhere.csv")
    assert result.exit_code == 2
    assert "nowhere.csv" in result.stderr.replace("\n", "")


def test_names_are_shown_as_text(run: Run, tmp_path: Path) -> None:
    path = tmp_path / "names.csv"
    name = "k\x1b[31m [/bold] =cmd \U0001f525"
    path.write_text(f"circuit,space,volts,load_a,shared_neutral\n{name},1,120,5,none\n", encoding="utf-8")
    result = run("asfound", path)
    assert result.exit_code == 0
    assert "\x1b" not in result.stdout
    assert "k\\x1b[31m [/bold] =cmd" in result.stdout
    assert json.loads(run("asfound", path, "--json").stdout)["circuits"][0]["circuit"] == name
