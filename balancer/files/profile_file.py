"""A file of the user's own use profiles, in place of the shipped ones."""

from __future__ import annotations

import re

from balancer.electrical.profiles import PROFILE_COLUMNS, UseProfiles, profiles_from_rows
from balancer.files.problems import Place, ProblemList
from balancer.files.sheet_file import read_sheet
from balancer.files.source import FilePath
from balancer.files.table import Table, build_table

_CLOCK = re.compile(r"([0-9]{1,2}):00(?::00)?", re.ASCII)


def read_profiles(path: FilePath) -> UseProfiles:
    """Read hourly shares by use and season; uses that the file leaves out keep the shipped profile.

    Raises
    ------
    InputError
        With everything that is wrong in it.
    """
    sheet = read_sheet(path)
    problems = ProblemList(sheet.file)
    if not sheet.rows:
        problems.add(Place(), "holds nothing but comments and blank lines", "write a header line and profiles below")
    problems.raise_if_any()
    table = build_table(sheet, problems, key=profile_column)
    _check_columns(table, problems)
    problems.raise_if_any()
    rows = [(row.line, {profile_column(name): cell for name, cell in row.cells.items()}) for row in table.rows]
    return profiles_from_rows(rows, sheet.file)


def profile_column(name: str) -> str:
    """Give a column's name as the tool writes it: spreadsheets turn 07:00 into 7:00 or 07:00:00."""
    folded = name.strip().casefold()
    clock = _CLOCK.fullmatch(folded)
    return f"{int(clock[1]):02d}:00" if clock else folded


def _check_columns(table: Table, problems: ProblemList) -> None:
    found = [profile_column(name) for name in table.columns]
    place = Place(table.header_line)
    for column in PROFILE_COLUMNS:
        if column not in found:
            problems.add(
                place, f"the column {column} is missing", "write use, season and a column an hour: 00:00 to 23:00"
            )
    if not table.rows:
        problems.add(place, "no profile follows the header", "write a line for a use and a season")
