"""Rows of cells as a spreadsheet wrote them, each with its line, before anybody asks what they mean."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from balancer.files.problems import one_problem
from balancer.files.source import FilePath, decode, file_name, read_bytes

BLANKS = " \t\r\n\f\v\u00a0\u202f\u3000\ufeff"
"""What counts as blank around a cell; other control characters are data."""

FORMULA_STARTS = ("=", "+", "-", "@", "\uff1d", "\uff0b", "\uff0d", "\uff20")
"""A cell that begins with one of these is run as a formula by some spreadsheet."""

COMMENT = "#"
_GUARD = "'"
_GUARDED_STARTS = (*FORMULA_STARTS, COMMENT, _GUARD)
_DELIMITERS = (",", ";", "\t")
_ZIP_START = b"PK\x03\x04"
_OLD_WORKBOOK_START = b"\xd0\xcf\x11\xe0"


@dataclass(frozen=True)
class SheetRow:
    """Cells of one row, cleaned, and the line on which it begins."""

    line: int
    cells: tuple[str, ...]


@dataclass(frozen=True)
class Sheet:
    """All rows that are neither blank nor comments."""

    file: str
    rows: tuple[SheetRow, ...]
    has_decimal_comma: bool = False
    """The separator leaves the comma free, so ``15,5`` may be a number."""
    comments: tuple[SheetRow, ...] = ()


def clean(cell: str) -> str:
    """Strip outer blanks and the one apostrophe that guards a text from being run as a formula or read as a comment."""
    text = cell.strip(BLANKS)
    if text.startswith(_GUARD) and text[1:].startswith(_GUARDED_STARTS):
        return text[1:].strip(BLANKS)
    return text


def guard(text: str, *, is_first_cell: bool = False) -> str:
    """Put an apostrophe before a text that a spreadsheet would run or this reader would take for something else.

    `clean` takes it off again: ``clean(guard(text)) == text`` for every text without outer blanks.
    """
    is_formula = text.startswith(FORMULA_STARTS)
    is_comment = is_first_cell and text.startswith(COMMENT)
    looks_guarded = text.startswith(_GUARD) and text[1:].startswith(_GUARDED_STARTS)
    return _GUARD + text if is_formula or is_comment or looks_guarded else text


def is_comment(first_cell: str) -> bool:
    """Whether a row is a comment: its first cell, as it stands in the file, begins with ``#``."""
    return first_cell.lstrip(BLANKS).startswith(COMMENT)


def sheet_row(line: int, cells: Iterable[str]) -> SheetRow:
    """Clean the cells of a row."""
    return SheetRow(line, tuple(clean(cell) for cell in cells))


def read_sheet(path: FilePath) -> Sheet:
    """Read a CSV file or the first sheet of an .xlsx workbook.

    Raises
    ------
    InputError
        When it is neither.
    """
    data = read_bytes(path)
    if data.startswith(_ZIP_START):
        from balancer.files.workbook import read_workbook

        return read_workbook(file_name(path), data)
    if data.startswith(_OLD_WORKBOOK_START):
        raise one_problem(file_name(path), "is a workbook of the old .xls kind", "save it as .xlsx or as CSV")
    return _parse_text(file_name(path), decode(path, data))


class _Lines:
    """Lines of a file, with a comment line blanked where a row would begin with it."""

    def __init__(self, text: str, delimiter: str) -> None:
        self._lines = iter(io.StringIO(text, newline=""))
        self._delimiter = delimiter
        self.number = 0
        self.is_row_start = True
        self.comments: list[SheetRow] = []

    def __iter__(self) -> Iterator[str]:
        return self

    def __next__(self) -> str:
        line = next(self._lines)
        self.number += 1
        if self.is_row_start and is_comment(line):
            self.comments.append(sheet_row(self.number, line.split(self._delimiter)))
            return "\n"
        self.is_row_start = False
        return line


def _parse_text(file: str, text: str) -> Sheet:
    text, delimiter = _split_off_delimiter(text)
    lines = _Lines(text, delimiter)
    reader = csv.reader(lines, delimiter=delimiter, skipinitialspace=True, strict=True)
    rows: list[SheetRow] = []
    while True:
        lines.is_row_start = True
        first_line = lines.number + 1
        try:
            cells = next(reader)
        except StopIteration:
            return Sheet(file, tuple(rows), delimiter != ",", tuple(lines.comments))
        except csv.Error as error:
            raise _quotation_error(file, first_line, error) from None
        row = sheet_row(first_line, cells)
        if cells and is_comment(cells[0]):
            lines.comments.append(row)
        elif any(row.cells):
            rows.append(row)


def _quotation_error(file: str, line: int, error: csv.Error) -> Exception:
    if "unexpected end" in str(error):
        problem = "a quotation mark is opened in this row and never closed"
        return one_problem(file, problem, "close it, or double it where it belongs to the text", line)
    if "expected after" in str(error):
        problem = "text follows a closing quotation mark"
        return one_problem(file, problem, "double a quotation mark that belongs to the text", line)
    return one_problem(file, f"cannot be read as CSV: {error}", "save it again as CSV", line)


def _split_off_delimiter(text: str) -> tuple[str, str]:
    """Take the separator from a first line ``sep=;``, else the one that cuts the header into most cells."""
    first, _, _ = text.partition("\n")
    announced = first.strip().casefold()
    if announced.startswith("sep=") and first.strip("\r\n")[4:5] in _DELIMITERS:
        # A comment in its place keeps the line numbers right.
        return COMMENT + text, first[4]
    for line in io.StringIO(text, newline=""):
        if line.strip(BLANKS) and not is_comment(line):
            outside_quotes = "".join(line.split('"')[::2])
            return text, max(_DELIMITERS, key=outside_quotes.count)
    return text, _DELIMITERS[0]
