from collections.abc import Callable

from balancer.errors import Problem
from balancer.reports.problems import problems_report

Render = Callable[..., str]


def problem(line: int, file: str = "house.csv") -> Problem:
    return Problem(file, "is not a voltage.", "Write 120, 240 or 120/240.", line, "volts", "121")


def test_problems_are_grouped_by_file_with_place_value_and_remedy(render: Render) -> None:
    text = render(problems_report("The input cannot be used", [problem(3), problem(9), problem(2, "panel.toml")]))
    assert text == (
        "The input cannot be used: 3 problems.\n"
        "house.csv\n"
        '  line 3, volts, "121": is not a voltage.\n'
        "    Write 120, 240 or 120/240.\n"
        '  line 9, volts, "121": is not a voltage.\n'
        "    Write 120, 240 or 120/240.\n"
        "panel.toml\n"
        '  line 2, volts, "121": is not a voltage.\n'
        "    Write 120, 240 or 120/240.\n"
    )


def test_more_than_twenty_problems_are_counted(render: Render) -> None:
    text = render(problems_report("The input cannot be used", [problem(line) for line in range(2, 29)]))
    assert "27 problems" in text
    assert text.count("is not a voltage") == 20
    assert "and 7 more" in text


def test_exactly_twenty_problems_are_all_shown(render: Render) -> None:
    text = render(problems_report("Wrong", [problem(line) for line in range(2, 22)]))
    assert text.count("is not a voltage") == 20
    assert " more" not in text


def test_a_lone_problem_without_a_place_is_said_plainly(render: Render) -> None:
    lone = Problem(file="", problem="--scenarios and --profiles contradict each other", remedy="Give one.")
    assert render(problems_report("The command line is wrong", [lone])) == (
        "The command line is wrong.\n  --scenarios and --profiles contradict each other\n    Give one.\n"
    )


def test_values_from_files_carry_no_control_codes_and_are_cut(render: Render) -> None:
    hostile = Problem("a\x1b.csv", "is wrong.", "", 1, "c\x07", "\x1b[2J" + "y" * 100)
    text = render(problems_report("Wrong", [hostile]))
    assert "\x1b" not in text
    assert "\x07" not in text
    assert "\u2026" in text
