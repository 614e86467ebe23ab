import pytest

from balancer.errors import (
    BalancerError,
    InfeasibleError,
    InputError,
    NoAnswerInTime,
    OptionError,
    Problem,
    SelfCheckError,
)


@pytest.mark.parametrize(
    ("error", "exit_code"),
    [
        (InputError([]), 2),
        (OptionError("x"), 2),
        (InfeasibleError(["x"]), 1),
        (NoAnswerInTime("x"), 3),
        (SelfCheckError(["x"]), 4),
        (BalancerError("x"), 4),
    ],
)
def test_exit_codes(error, exit_code):
    assert error.exit_code == exit_code
    assert isinstance(error, BalancerError)


def test_an_input_error_carries_every_problem():
    problems = (
        Problem("a.csv", "is wrong", "put it right", line=3, column="volts", value="12"),
        Problem("a.csv", "x", "y"),
    )
    error = InputError(problems)
    assert error.problems == problems
    assert str(error) == "2 problems in the input"
    assert str(InputError(problems[:1])) == "1 problem in the input"


def test_an_option_error_is_one_problem():
    error = OptionError("--landings is below 0", "give 0 or more")
    assert error.problems == (Problem("", "--landings is below 0", "give 0 or more"),)


def test_remedies_stand_beside_the_first_reasons():
    error = InfeasibleError(["space 4 is taken", "space 6 is reserved"], ["free space 4"])
    assert [(p.problem, p.remedy) for p in error.problems] == [
        ("space 4 is taken", "free space 4"),
        ("space 6 is reserved", ""),
    ]
    assert str(error) == "space 4 is taken; space 6 is reserved"


def test_other_errors_speak_for_themselves():
    (problem,) = NoAnswerInTime("nothing found in 5 s").problems
    assert problem.problem == "nothing found in 5 s"
