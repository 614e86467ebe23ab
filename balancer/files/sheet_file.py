"""Opens a file as a sheet, CSV or workbook, by what it holds and not by its name."""

from __future__ import annotations

from balancer.files.csv_text import parse_csv
from balancer.files.problems import one_problem
from balancer.files.sheet import Sheet
from balancer.files.source import FilePath, decode, file_name, read_bytes
from balancer.files.workbook import read_workbook

_ZIP_START = b"PK\x03\x04"
_OLD_WORKBOOK_START = b"\xd0\xcf\x11\xe0"


def read_sheet(path: FilePath) -> Sheet:
    """Read a CSV file or the first sheet of an .xlsx workbook.

    Raises
    ------
    InputError
        When it is neither.
    """
    data = read_bytes(path)
    if data.startswith(_ZIP_START):
        return read_workbook(file_name(path), data)
    if data.startswith(_OLD_WORKBOOK_START):
        raise one_problem(file_name(path), "is a workbook of the old .xls kind", "save it as .xlsx or as CSV")
    return parse_csv(file_name(path), decode(path, data))
