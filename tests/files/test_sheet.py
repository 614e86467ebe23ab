import io
import sys
from pathlib import Path

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from balancer.errors import InputError
from balancer.files.sheet import BLANKS, FORMULA_STARTS, Sheet, clean, guard
from balancer.files.sheet_file import read_sheet


def sheet_of(tmp_path: Path, data: str | bytes) -> Sheet:
    path = tmp_path / "sheet.csv"
    path.write_bytes(data if isinstance(data, bytes) else data.encode())
    return read_sheet(path)


def cells_of(sheet: Sheet) -> list[tuple[str, ...]]:
    return [row.cells for row in sheet.rows]


@pytest.mark.parametrize(
    "data",
    [
        pytest.param("circuit,volts\nfan,120\n", id="plain"),
        pytest.param("\ufeffcircuit,volts\nfan,120\n", id="byte order mark"),
        pytest.param("circuit,volts\r\nfan,120\r\n", id="CRLF"),
        pytest.param("circuit,volts\rfan,120\r", id="CR alone"),
        pytest.param("circuit;volts\nfan;120\n", id="semicolons"),
        pytest.param("circuit\tvolts\nfan\t120\n", id="tabs"),
        pytest.param("sep=;\ncircuit;volts\nfan;120\n", id="announced separator"),
        pytest.param("circuit,volts\nfan,120\n,\n,\n\n", id="trailing blank rows"),
        pytest.param("# by hand, in May\ncircuit,volts\n  # the fan:\nfan,120\n", id="comment lines"),
        pytest.param('"# one, quoted",\ncircuit,volts\nfan,120\n', id="comment quoted and padded by a spreadsheet"),
        pytest.param('# it said "on\ncircuit,volts\nfan,120\n# and "off\n', id="quotation marks in comments"),
        pytest.param(' circuit , "volts"\nfan\u00a0,120\n', id="blanks around cells"),
        pytest.param("circuit\tvolts\nfan\t120\n".encode("utf-16"), id="UTF-16 with byte order mark"),
    ],
)
def test_spreadsheets_and_editors_write_the_same_rows_in_many_ways(tmp_path: Path, data: str | bytes) -> None:
    assert cells_of(sheet_of(tmp_path, data)) == [("circuit", "volts"), ("fan", "120")]


def test_windows_1252_is_read_where_it_is_not_utf_8(tmp_path: Path) -> None:
    assert cells_of(sheet_of(tmp_path, "Küche;ñ\n".encode("cp1252"))) == [("Küche", "ñ")]


def test_line_numbers_count_quoted_line_breaks_comments_and_blank_lines(tmp_path: Path) -> None:
    sheet = sheet_of(tmp_path, 'circuit,notes\n\n# comment\nfan,"two\nlines"\npump,one\n')
    assert [(row.line, row.cells) for row in sheet.rows] == [
        (1, ("circuit", "notes")),
        (4, ("fan", "two\nlines")),
        (6, ("pump", "one")),
    ]


def test_hash_inside_a_quoted_cell_begins_no_comment(tmp_path: Path) -> None:
    assert cells_of(sheet_of(tmp_path, 'a,b\nfan,"first\n# second"\n'))[1] == ("fan", "first\n# second")


def test_separator_is_the_one_outside_quotation_marks(tmp_path: Path) -> None:
    sheet = sheet_of(tmp_path, '"a, b, c, d";volts\n1;2\n')
    assert cells_of(sheet)[0] == ("a, b, c, d", "volts")
    assert sheet.has_decimal_comma


def test_comma_separated_file_has_no_decimal_commas(tmp_path: Path) -> None:
    assert not sheet_of(tmp_path, "a,b\n1,2\n").has_decimal_comma


@pytest.mark.parametrize(
    ("data", "problem", "line"),
    [
        pytest.param(b"", "is empty", None, id="empty"),
        pytest.param(b" \n\n", "is empty", None, id="blank"),
        pytest.param(b"\x89PNG\r\n\x1a\n\0\0\0\rIHDR", "is not a text file", None, id="picture"),
        pytest.param(b"\xff\xfe\x00", "is not a text file", None, id="half a character of UTF-16"),
        pytest.param(b"a,b\n\x81,2\n", "is not a text file", None, id="neither UTF-8 nor Windows-1252"),
        pytest.param(b"\xd0\xcf\x11\xe0rest", "is a workbook of the old .xls kind", None, id="old workbook"),
        pytest.param(b"PK\x03\x04rest", "is not a workbook that can be read", None, id="damaged workbook"),
        pytest.param(b'a,b\nfan,"open\n1,2\n', "never closed", 2, id="open quotation mark"),
        pytest.param(b'a,b\n"fan" old,2\n', "text follows a closing quotation mark", 2, id="text after quotation"),
        pytest.param(b"a,b\n" + b"x" * 200_000 + b",2\n", "cannot be read as CSV", 2, id="endless cell"),
    ],
)
def test_file_that_is_no_sheet_gives_one_clear_problem(
    tmp_path: Path, data: bytes, problem: str, line: int | None
) -> None:
    with pytest.raises(InputError) as caught:
        sheet_of(tmp_path, data)
    (only,) = caught.value.problems
    assert problem in only.problem
    assert only.line == line
    assert only.file.endswith("sheet.csv")
    assert only.remedy


def test_missing_file_is_one_problem(tmp_path: Path) -> None:
    with pytest.raises(InputError) as caught:
        read_sheet(tmp_path / "nowhere.csv")
    assert [problem.problem for problem in caught.value.problems] == ["there is no such file"]


def test_directory_is_one_problem(tmp_path: Path) -> None:
    with pytest.raises(InputError) as caught:
        read_sheet(tmp_path)
    assert "directory" in caught.value.problems[0].problem + caught.value.problems[0].remedy


def test_name_that_no_system_takes_is_one_problem() -> None:
    with pytest.raises(InputError) as caught:
        read_sheet("a\0b")
    assert caught.value.problems[0].problem.startswith("cannot be read")


def test_dash_reads_standard_input(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(b"a,b\n1,2\n")))
    sheet = read_sheet("-")
    assert (sheet.file, cells_of(sheet)) == ("standard input", [("a", "b"), ("1", "2")])


def outer_blanks_off(text: str) -> str:
    return text.strip(BLANKS)


@given(st.text().map(outer_blanks_off), st.booleans())
@example("=cmd|'/c calc'!A1", False)
@example("'=x", False)
@example("''", True)
@example("#1", True)
def test_guarded_text_is_read_back_and_never_run(text: str, is_first_cell: bool) -> None:
    guarded = guard(text, is_first_cell=is_first_cell)
    assert clean(guarded) == text
    assert not guarded.startswith(FORMULA_STARTS)
    assert not (is_first_cell and guarded.startswith("#"))


def test_apostrophe_before_ordinary_text_is_text() -> None:
    assert clean("'tis the pump") == "'tis the pump"


@given(st.one_of(st.binary(max_size=300), st.text(max_size=300).map(lambda text: text.encode("utf-8", "replace"))))
@example(b"sep=;")
@example(b"#")
@example(b"\xef\xbb\xbf")
def test_any_bytes_are_a_sheet_or_an_input_error(tmp_path_factory: pytest.TempPathFactory, data: bytes) -> None:
    path = tmp_path_factory.getbasetemp() / "any.csv"
    path.write_bytes(data)
    assert all(rows_or_problems(path))


def rows_or_problems(path: Path) -> list[bool]:
    """Whether each row holds something, or whether each problem is told in full; there is at most one problem."""
    try:
        return [any(row.cells) for row in read_sheet(path).rows]
    except InputError as error:
        (problem,) = error.problems
        return [bool(problem.problem), bool(problem.remedy)]
