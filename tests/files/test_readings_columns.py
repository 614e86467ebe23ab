"""Headers and mapping files: which column is which circuit."""

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from balancer.errors import InputError, Problem
from balancer.files.readings_columns import LogColumn, MatchedColumns, ReadingUnit, match_columns
from balancer.files.readings_text import LogText
from balancer.panel import Installation, Pole

INVENTORY = """\
circuit,space,volts,role,load_a,load_120_a
heater,1,120,,12,
bath-1,3,120,,6,
lights_a,9,120,,2,
range,5-7,120/240,,18,2
spare,6,120,spare,,
"""
AMPS, WATTS = ReadingUnit.AMPS, ReadingUnit.WATTS

Match = Callable[..., MatchedColumns]
ProblemsOfHeader = Callable[..., tuple[Problem, ...]]


@pytest.fixture
def match(tmp_path: Path, read: Callable[..., Installation]) -> Match:
    house = read(INVENTORY)

    def match(*names: str, unit: ReadingUnit | None = None, mapping: str | None = None) -> MatchedColumns:
        log = LogText("log.csv", ("time", *names), 1, b"", np.empty(0, dtype=np.int64), ",", ".")
        path = tmp_path / "mapping.csv"
        if mapping is None:
            return match_columns(log, house, unit, None)
        path.write_text(mapping, encoding="utf-8")
        return match_columns(log, house, unit, path)

    return match


@pytest.fixture
def problems_of_header(match: Match) -> ProblemsOfHeader:
    def problems_of_header(*names: str, **options: object) -> tuple[Problem, ...]:
        with pytest.raises(InputError) as caught:
            match(*names, **options)
        return caught.value.problems

    return problems_of_header


@pytest.mark.parametrize(
    ("name", "unit"),
    [
        ("heater_a", AMPS),
        ("Heater_W", WATTS),
        ("HEATER (A)", AMPS),
        ("heater [w]", WATTS),
        ("heater(W)", WATTS),
    ],
)
def test_units_stand_at_the_end_of_a_name(match: Match, name: str, unit: ReadingUnit) -> None:
    assert match(name).columns == (LogColumn(1, name, 0, unit, None),)


def test_one_unit_may_hold_for_all_and_a_name_goes_before_it(match: Match) -> None:
    columns = match("heater", "bath-1_w", unit=AMPS).columns
    assert [column.unit for column in columns] == [AMPS, WATTS]


def test_blanks_and_dashes_between_words_do_not_matter(match: Match) -> None:
    assert match("Bath 1_a").columns[0].circuit == 1


def test_a_label_that_ends_like_a_unit_is_that_label(match: Match) -> None:
    assert match("lights_a_w").columns == (LogColumn(1, "lights_a_w", 2, WATTS, None),)
    assert match("lights_a", unit=WATTS).columns[0].unit is WATTS


@pytest.mark.parametrize("pattern", ["range_{}_a", "RANGE_{}_A", "range {} (A)"])
def test_two_columns_are_two_poles(match: Match, pattern: str) -> None:
    columns = match(pattern.format("second"), pattern.format("first")).columns
    assert [(column.index, column.pole) for column in columns] == [(2, Pole.FIRST), (1, Pole.SECOND)]


def test_what_is_left_over_is_listed(match: Match) -> None:
    matched = match("heater_a", "heeter_a", "volts", "spare_a", "")
    assert matched.strangers == (("heeter_a", "heater"), ("volts", None))
    assert matched.devices == ("spare_a",)
    assert matched.absent == ("bath-1", "lights_a", "range")


@pytest.mark.parametrize(
    ("names", "problem"),
    [
        pytest.param(["heater"], "does not say whether it is amps or watts", id="no unit"),
        pytest.param(["lights_a"], "does not say whether it is amps or watts", id="the unit belongs to the label"),
        pytest.param(["heater_a", "heater_w"], "heater has these columns: heater_a, heater_w", id="two claims"),
        pytest.param(["range_first_a"], "only one pole of range has a column", id="one pole"),
        pytest.param(["range_first_a", "range_second_w"], "are in different units", id="two units"),
        pytest.param(["range_a", "range_first_a", "range_second_a"], "range has these columns", id="whole and poles"),
        pytest.param(["heater_first_a", "heater_second_a"], "is a 120 V circuit with one pole", id="one-pole circuit"),
        pytest.param(["spare_a"], "no column belongs to a load", id="spare only"),
    ],
)
def test_headers_that_cannot_be_meant_are_refused(
    problems_of_header: ProblemsOfHeader, names: list[str], problem: str
) -> None:
    (found,) = problems_of_header(*names)
    assert problem in found.problem
    assert found.line == 1
    assert found.remedy


def test_a_mapping_file_names_other_headers(match: Match) -> None:
    mapping = "column,circuit,unit\nCT 1,heater,W\nct 2,range_first,a\nCT 3,range_second,A\nheater_a,,\n"
    matched = match("CT 1", "CT 2", "CT 3", "heater_a", "bath-1_a", mapping=mapping)
    assert [(column.index, column.circuit, column.unit, column.pole) for column in matched.columns] == [
        (1, 0, WATTS, None),
        (5, 1, AMPS, None),
        (2, 3, AMPS, Pole.FIRST),
        (3, 3, AMPS, Pole.SECOND),
    ]
    assert matched.strangers == ()


def test_without_a_unit_in_the_mapping_file_the_header_says_it(match: Match) -> None:
    mapping = "column,circuit\nCT 1 (W),heater\nCT 2,bath-1\n"
    assert [c.unit for c in match("CT 1 (W)", "CT 2", unit=AMPS, mapping=mapping).columns] == [WATTS, AMPS]


@pytest.mark.parametrize(
    ("mapping", "line", "problem"),
    [
        pytest.param("# nothing\n", None, "nothing but comments", id="empty"),
        pytest.param("column,label\nCT 1,heater\n", 1, "the column circuit is missing", id="no circuit column"),
        pytest.param("column,circuit\nCT 9,heater\n", 2, "no column of the log has this name", id="unknown column"),
        pytest.param("column,circuit\nCT 1,heeter\n", 2, "no circuit of the inventory has this", id="unknown circuit"),
        pytest.param("column,circuit\nCT 1,heater\nCT 1,bath-1\n", 3, "stands twice", id="twice"),
        pytest.param("column,circuit,unit\nCT 1,heater,kW\n", 2, "is no unit taken here", id="other unit"),
    ],
)
def test_mapping_files_that_cannot_be_meant_are_refused(
    problems_of_header: ProblemsOfHeader, mapping: str, line: int | None, problem: str
) -> None:
    (found,) = problems_of_header("CT 1", mapping=mapping)
    assert (found.line, problem in found.problem) == (line, True)
    assert found.file.endswith("mapping.csv")
