from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from balancer.electrical.scenarios import ScenarioKind, Scenarios
from balancer.errors import InputError, Problem
from balancer.files import read_scenarios
from balancer.files.quantities import Cell, CellError
from balancer.files.scenario_file import read_share
from balancer.panel import Installation

Read = Callable[..., Installation]

INVENTORY = """\
circuit,space,volts,role,load_a,load_120_a,not_with
heater,1,120,,12,,den
cooler,3,120,,10,,den
range,5-7,120/240,,20,4,
spare,2,120,spare,,,
"""


@pytest.fixture
def house(read: Read) -> Installation:
    return read(INVENTORY)


def scenarios_of(tmp_path: Path, house: Installation, text: str) -> Scenarios:
    path = tmp_path / "scenarios.csv"
    path.write_text(text, encoding="utf-8")
    return read_scenarios(path, house)


def problems_of(tmp_path: Path, house: Installation, text: str) -> tuple[Problem, ...]:
    with pytest.raises(InputError) as caught:
        scenarios_of(tmp_path, house, text)
    return caught.value.problems


def test_shares_scale_both_parts_of_a_circuit(tmp_path: Path, house: Installation) -> None:
    text = "Scenario,RANGE,heater,cooler\nwinter,0.5,1,0\nsummer,25%,0,100 %\n"
    scenarios = scenarios_of(tmp_path, house, text)
    assert scenarios.kind is ScenarioKind.SCENARIOS
    assert tuple(scenarios.names) == ("winter", "summer")
    np.testing.assert_allclose(scenarios.neutral_a, [[12, 0, 2, 0], [0, 10, 1, 0]])
    np.testing.assert_allclose(scenarios.line_a, [[0, 0, 10, 0], [0, 0, 5, 0]])
    assert not scenarios.notes


def test_decimal_commas_are_read(tmp_path: Path, house: Installation) -> None:
    scenarios = scenarios_of(tmp_path, house, "scenario;heater;cooler;range\nwinter;0,5;0;0\n")
    assert scenarios.neutral_a[0, 0] == 6.0


def test_spare_may_have_a_column_and_carries_nothing(tmp_path: Path, house: Installation) -> None:
    scenarios = scenarios_of(tmp_path, house, "scenario,heater,cooler,range,spare\nwinter,1,0,0,\n")
    assert scenarios.neutral_a[0, 3] == 0.0


def test_loads_that_never_run_together_are_noted(tmp_path: Path, house: Installation) -> None:
    scenarios = scenarios_of(tmp_path, house, "scenario,heater,cooler,range\nboth,1,0.1,0\none,1,0,0\n")
    assert scenarios.notes == ("The scenario both runs heater and cooler together, which not_with rules out.",)


@pytest.mark.parametrize(
    ("text", "line", "column", "problem"),
    [
        pytest.param("# only this\n", None, None, "nothing but comments", id="comments only"),
        pytest.param("scenario,heater,cooler,range\n", 1, None, "no scenario follows", id="header only"),
        pytest.param("heater,cooler,range\n1,1,1\n", 1, None, "column scenario is missing", id="no names"),
        pytest.param("scenario,heater,cooler\na,1,0\n", 1, None, "the circuit range has no column", id="load missing"),
        pytest.param(
            "scenario,heater,cooler,range,heatr\na,1,0,0,0\n", 1, "heatr", "no circuit", id="circuit nobody knows"
        ),
        pytest.param("scenario,heater,cooler,range\n,1,0,0\n", 2, "scenario", "is blank", id="no name"),
        pytest.param("scenario,heater,cooler,range\na,1,0,0\nA,0,0,0\n", 3, "scenario", "line 2 has", id="name twice"),
        pytest.param("scenario,heater,cooler,range\na,,0,0\n", 2, "heater", "is blank", id="blank share"),
        pytest.param("scenario,heater,cooler,range\na,-1,0,0\n", 2, "heater", "is negative", id="negative"),
        pytest.param("scenario,heater,cooler,range\na,50,0,0\n", 2, "heater", "too high", id="percent without a sign"),
        pytest.param("scenario,heater,cooler,range\na,12 A,0,0\n", 2, "heater", "not a share", id="amps"),
        pytest.param("scenario,heater,cooler,range\na,nan,0,0\n", 2, "heater", "not a number", id="not a number"),
        pytest.param("scenario,heater,cooler,range\na,1,0\n", 2, None, "3 cells and the header 4", id="short row"),
        pytest.param("scenario,heater,cooler,range,range\na,1,0,0,0\n", 1, "range", "stands twice", id="column twice"),
    ],
)
def test_scenario_file_that_is_wrong_is_one_problem(
    tmp_path: Path, house: Installation, text: str, line: int | None, column: str | None, problem: str
) -> None:
    (only,) = problems_of(tmp_path, house, text)
    assert (only.line, only.column) == (line, column)
    assert problem in only.problem
    assert only.remedy


def test_misspelt_circuit_gets_the_nearest_label(tmp_path: Path, house: Installation) -> None:
    problems = problems_of(tmp_path, house, "scenario,heatr,cooler,range\na,1,0,0\n")
    assert [(problem.problem, problem.remedy) for problem in problems] == [
        ("no circuit of the inventory has this label", "did you mean heater?"),
        ("the circuit heater has no column", "add a column for it, with 0 where it does not run"),
    ]


@pytest.mark.parametrize(("text", "share"), [("0", 0.0), ("1.5", 1.5), ("150%", 1.5), ("12.5 %", 0.125)])
def test_shares_go_up_to_one_and_a_half(text: str, share: float) -> None:
    assert read_share(Cell(text)) == share


def test_share_beyond_is_refused_with_what_it_may_be() -> None:
    with pytest.raises(CellError, match="too high") as caught:
        read_share(Cell("1.51"))
    assert "%" in caught.value.remedy
    assert "amps" in caught.value.remedy


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.binary(max_size=200))
def test_any_bytes_after_a_header_are_scenarios_or_an_input_error(
    tmp_path: Path, house: Installation, data: bytes
) -> None:
    path = tmp_path / "any.csv"
    path.write_bytes(b"scenario,heater,cooler,range\n" + data)
    assert names_or_problems(path, house)


def names_or_problems(path: Path, house: Installation) -> tuple[object, ...]:
    try:
        return tuple(read_scenarios(path, house).names)
    except InputError as error:
        return error.problems


def test_a_row_that_does_not_fit_the_header_hides_no_other_problem(tmp_path: Path, house: Installation) -> None:
    problems = problems_of(tmp_path, house, "scenario,heater,cooler,range\na,1,0\nb,1,2,1\n")
    assert [(problem.line, problem.column) for problem in problems] == [(2, None), (3, "cooler")]


def test_circuit_called_like_the_column_of_names_is_told(read: Read, tmp_path: Path) -> None:
    house = read("circuit,space,volts,load_a\nScenario,1,120,5\nfan,3,120,4\n")
    (only,) = problems_of(tmp_path, house, "scenario,fan\nall,1\n")
    assert "another label" in only.remedy
