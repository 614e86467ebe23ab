import builtins
import datetime
import io
from pathlib import Path
from typing import Any

import pytest

from balancer.errors import InputError
from balancer.files import read_inventory
from balancer.files.sheet_file import read_sheet
from balancer.files.workbook import cell_text

openpyxl = pytest.importorskip("openpyxl")


def workbook_of(tmp_path: Path, *rows: tuple[Any, ...]) -> Path:
    workbook = openpyxl.Workbook()
    for row in rows:
        workbook.active.append(row)
    workbook.create_sheet("second").append(["not", "this"])
    path = tmp_path / "inventory.xlsx"
    workbook.save(path)
    return path


@pytest.mark.parametrize(
    ("value", "text"),
    [
        pytest.param(15.0, "15", id="no 15.0"),
        pytest.param(15, "15", id="whole number"),
        pytest.param(0.1 + 0.2, "0.3", id="no noise beyond what the sheet shows"),
        pytest.param(0.00001, "0.00001", id="no exponent"),
        pytest.param(1e16, "10000000000000000", id="no exponent in large numbers"),
        pytest.param(True, "yes", id="truth value"),
        pytest.param(None, "", id="blank"),
        pytest.param("007", "007", id="text stays text"),
        pytest.param(datetime.datetime(2026, 7, 5), "2026-07-05", id="date"),
    ],
)
def test_workbook_cells_read_as_one_would_type_them(value: object, text: str) -> None:
    assert cell_text(value) == text


def test_first_sheet_of_a_workbook_is_an_inventory(tmp_path: Path) -> None:
    header = ("circuit", "space", "volts", "load_a", "fixed", None)
    path = workbook_of(tmp_path, ("# made by hand",), header, ("fan", 7, 120, 4.5, True, None), (None,), (None, None))
    (fan,) = read_inventory(path).circuits
    assert (fan.label, str(fan.landing[0]), fan.load.neutral_a, fan.is_fixed) == ("fan", "7", 4.5, True)
    assert fan.line_number == 3


def test_space_that_became_a_date_is_told_with_the_remedy(tmp_path: Path) -> None:
    day = datetime.datetime(2026, 7, 5)
    path = workbook_of(tmp_path, ("circuit", "space", "volts", "load_a"), ("range", day, 240, 30))
    with pytest.raises(InputError) as caught:
        read_inventory(path)
    (problem,) = caught.value.problems
    assert (problem.line, problem.column, problem.value) == (2, "space", "2026-07-05")
    assert "format the column as text" in problem.remedy


def test_formula_never_computed_is_told_and_not_taken_for_blank(tmp_path: Path) -> None:
    path = workbook_of(tmp_path, ("circuit", "volts", "load_a"), ("fan", 120, "=2+3"))
    with pytest.raises(InputError) as caught:
        read_sheet(path)
    (problem,) = caught.value.problems
    assert (problem.line, problem.value) == (2, "=2+3")
    assert "formula" in problem.problem


def test_missing_openpyxl_is_one_problem_with_the_remedy(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = workbook_of(tmp_path, ("circuit", "volts"), ("fan", 120))
    real_import = builtins.__import__

    def without_openpyxl(name: str, *args: Any, **kwargs: Any) -> Any:
        if name == "openpyxl":
            raise ImportError(name)
        return real_import(name, *args, **kwargs)

    monkeypatch.setattr(builtins, "__import__", without_openpyxl)
    with pytest.raises(InputError) as caught:
        read_sheet(path)
    (problem,) = caught.value.problems
    assert "openpyxl" in problem.problem
    assert "balancer[xlsx]" in problem.remedy


def test_archive_that_is_no_workbook_is_one_problem(tmp_path: Path) -> None:
    import zipfile

    data = io.BytesIO()
    with zipfile.ZipFile(data, "w") as archive:
        archive.writestr("mimetype", "application/vnd.oasis.opendocument.spreadsheet")
    path = tmp_path / "inventory.ods"
    path.write_bytes(data.getvalue())
    with pytest.raises(InputError) as caught:
        read_sheet(path)
    assert [problem.problem for problem in caught.value.problems] == ["is not a workbook that can be read"]
