"""The first sheet of an .xlsx workbook, turned into the same rows of text as a CSV file."""

from __future__ import annotations

import datetime
import io
import warnings
from decimal import Decimal
from typing import Any

from balancer.files.problems import Place, ProblemList, one_problem
from balancer.files.sheet import BLANKS, Sheet, is_comment, sheet_row

_EXCEL_DIGITS = 15


def read_workbook(file: str, data: bytes) -> Sheet:
    """Read the first sheet; of formulas the values that the spreadsheet last computed.

    Raises
    ------
    InputError
        When the bytes are no workbook, openpyxl is not installed, or formulas were never computed.
    """
    values = _first_sheet(file, data, shows_values=True)
    formulas = _first_sheet(file, data, shows_values=False)
    problems = ProblemList(file)
    rows, comments = [], []
    for line, (row, source) in enumerate(zip(values, formulas, strict=True), 1):
        _report_unusable(problems, line, row, source)
        texts = [cell_text(value) for value in row]
        if texts and is_comment(texts[0]):
            comments.append(sheet_row(line, texts))
        elif any(text.strip(BLANKS) for text in texts):
            rows.append(sheet_row(line, texts))
    problems.raise_if_any()
    return Sheet(file, tuple(rows), comments=tuple(comments))


def _first_sheet(file: str, data: bytes, *, shows_values: bool) -> list[tuple[Any, ...]]:
    try:
        import openpyxl
    except ImportError:
        remedy = "install it with: pip install 'balancer[xlsx]', or save the sheet as CSV"
        raise one_problem(file, "reading .xlsx needs the package openpyxl", remedy) from None
    with warnings.catch_warnings():
        # It warns of drawings and validations that it leaves out; only the cells count here.
        warnings.simplefilter("ignore")
        try:
            workbook = openpyxl.load_workbook(io.BytesIO(data), data_only=shows_values, read_only=True)
            return [tuple(row) for row in workbook.worksheets[0].iter_rows(values_only=True)]
        # A damaged archive surfaces as almost any exception of zip, XML or openpyxl.
        except Exception:
            remedy = "open it in a spreadsheet and save it as .xlsx or CSV"
            raise one_problem(file, "is not a workbook that can be read", remedy) from None


def _report_unusable(problems: ProblemList, line: int, row: tuple[Any, ...], source: tuple[Any, ...]) -> None:
    for column, (value, formula) in enumerate(zip(row, source, strict=True), 1):
        is_formula = not isinstance(formula, str | int | float | None) or str(formula).startswith("=")
        if value is None and formula is not None and is_formula:
            place = Place(line, f"column {column}", str(formula))
            problems.add(place, "holds a formula that was never computed", "open and save it in a spreadsheet")


def cell_text(value: Any) -> str:
    """Give a workbook's cell as one would type it: no ``15.0``, no exponents, dates as year-month-day."""
    if value is None:
        return ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float):
        return _plain_number(value)
    if isinstance(value, datetime.datetime) and value.time() == datetime.time():
        return value.date().isoformat()
    return str(value)


def _plain_number(value: float) -> str:
    """Print a number as the spreadsheet shows it, without the noise beyond its 15 digits."""
    return format(Decimal(f"{value:.{_EXCEL_DIGITS}g}"), "f")
