"""CSV as spreadsheets and editors write it: any separator, line ending and comment, with the line of every row."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator

from balancer.errors import InputError
from balancer.files.problems import one_problem
from balancer.files.sheet import BLANKS, COMMENT, Sheet, SheetRow, is_comment, sheet_row

DELIMITERS = (",", ";", "\t")


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


def parse_csv(file: str, text: str) -> Sheet:
    """Cut a text into rows.

    Raises
    ------
    InputError
        When its quotation marks make no sense.
    """
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


def _quotation_error(file: str, line: int, error: csv.Error) -> InputError:
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
    if announced.startswith("sep=") and first.strip("\r\n")[4:5] in DELIMITERS:
        # A comment in its place keeps the line numbers right.
        return COMMENT + text, first[4]
    for line in io.StringIO(text, newline=""):
        if line.strip(BLANKS) and not is_comment(line):
            outside_quotes = "".join(line.split('"')[::2])
            return text, max(DELIMITERS, key=outside_quotes.count)
    return text, DELIMITERS[0]
