import pytest

from balancer.errors import InputError
from balancer.files.problems import ProblemList
from balancer.files.sheet import Sheet, SheetRow
from balancer.files.table import Table, build_table, header_key

HEADER = ("circuit", "volts", "notes")


def table_of(*rows: tuple[str, ...], first_line: int = 1) -> tuple[Table, ProblemList]:
    problems = ProblemList("inventory.csv")
    numbered = tuple(SheetRow(line, cells) for line, cells in enumerate(rows, first_line))
    return build_table(Sheet("inventory.csv", numbered), problems), problems


def described(problems: ProblemList) -> list[tuple[int | None, str]]:
    return [(problem.line, problem.problem) for problem in problems.in_line_order]


@pytest.mark.parametrize("name", ["load_a", "Load A", " LOAD_A ", "load-a", "LoadA"])
def test_header_names_differ_in_more_than_case_and_blanks(name: str) -> None:
    assert header_key(name) == header_key("load_a")


def test_cells_stand_under_the_header_as_written() -> None:
    table, problems = table_of(("Circuit", "VOLTS"), ("fan", "120"))
    assert dict(table.rows[0].cells) == {"Circuit": "fan", "VOLTS": "120"}
    assert described(problems) == []


def test_first_row_with_a_cell_too_many_is_told_with_its_line() -> None:
    _, problems = table_of(HEADER, ("fan", "old", "120", "x"))
    assert described(problems) == [(2, "this row has 4 cells and the header 3")]


def test_first_row_with_a_cell_too_few_is_told_with_its_line() -> None:
    _, problems = table_of(HEADER, ("fan", "120"))
    assert described(problems) == [(2, "this row has 2 cells and the header 3")]


def test_blank_cells_too_many_are_nothing() -> None:
    table, problems = table_of((*HEADER, "", ""), ("fan", "120", "x", "", ""))
    assert described(problems) == []
    assert table.columns == HEADER


def test_rows_whose_blank_ends_a_spreadsheet_dropped_are_taken() -> None:
    table, problems = table_of(HEADER, ("fan", "120"), ("pump", "240"), first_line=16)
    assert described(problems) == []
    assert table.rows[1].cells["notes"] == ""


def test_one_short_row_far_down_is_told() -> None:
    _, problems = table_of(HEADER, ("fan", "120", "x"), ("pump", "240"), ("well", "240", "y"), first_line=30)
    assert [line for line, _ in described(problems)] == [32]


def test_duplicate_and_unnamed_columns_are_told() -> None:
    _, problems = table_of(("load_a", "Load A", "", "volts"))
    assert described(problems) == [(1, "this column stands twice (also as load_a)"), (1, "column 3 has no name")]


def test_problems_of_a_list_are_raised_together() -> None:
    _, problems = table_of(HEADER, ("fan", "120"), ("pump",))
    with pytest.raises(InputError, match="2 problems") as caught:
        problems.raise_if_any()
    assert [problem.line for problem in caught.value.problems] == [2, 3]
