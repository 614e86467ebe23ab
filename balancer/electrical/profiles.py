"""Use profiles: which share of its full load a circuit draws on average, hour by hour, in summer and in winter."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from enum import StrEnum
from functools import cache

from balancer.electrical.defaults import GENERAL_USE, known_uses, normal_use
from balancer.electrical.shipped_tables import TableRow, read_table
from balancer.errors import InputError, Problem

HOURS = tuple(range(24))
HOUR_COLUMNS = tuple(f"{hour:02d}:00" for hour in HOURS)
PROFILE_COLUMNS = ("use", "season", *HOUR_COLUMNS)
"""Header of a profile file."""

_SHARE = re.compile(r"(?:0|1)(?:[.,][0-9]*)?", re.ASCII)


class Season(StrEnum):
    """The two halves of the year that the profiles tell apart."""

    SUMMER = "summer"
    WINTER = "winter"


@dataclass(frozen=True, eq=False)
class UseProfiles:
    """Hourly shares of full load, 24 of each use and season; each between 0 and 1."""

    shares: Mapping[tuple[str, Season], tuple[float, ...]]

    def share(self, use: str, season: Season, hour: int) -> float:
        """Share of full load in the hour that begins at `hour`; a use without a profile counts as `general`."""
        name = normal_use(use) or GENERAL_USE
        return self.shares[name, season][hour]


def profiles_from_rows(rows: Iterable[TableRow], file: str, base: UseProfiles | None = None) -> UseProfiles:
    """Build profiles from the rows of a table with the columns `PROFILE_COLUMNS`.

    Parameters
    ----------
    rows
        Line number and cells by header, as text.
    file
        Name of the file, for messages.
    base
        Profiles of the uses and seasons that the rows leave out; None takes the shipped ones.

    Raises
    ------
    InputError
        With every cell that is wrong: an unknown use or season, a row given twice, a share that is no number from 0
        to 1.
    """
    problems: list[Problem] = []
    found: dict[tuple[str, Season], tuple[float, ...]] = {}
    for line, cells in rows:
        row = _ProfileRow(file, line, cells, problems)
        key, shares = row.use_and_season(), row.shares()
        if key is None:
            continue
        if key in found:
            row.complain("use", f"{key[0]} in {key[1]} has a row already", "keep one of the two rows")
        found[key] = shares
    if problems:
        raise InputError(problems)
    shipped = base if base is not None else shipped_profiles()
    return UseProfiles({**shipped.shares, **found})


@cache
def shipped_profiles() -> UseProfiles:
    """Give the profiles that come with the tool: planning assumptions for every known use."""
    return profiles_from_rows(read_table("use_profiles.csv"), "use_profiles.csv", UseProfiles({}))


@dataclass(frozen=True)
class _ProfileRow:
    """One row being read; what is wrong with it goes to `problems`."""

    file: str
    line: int
    cells: Mapping[str, str]
    problems: list[Problem]

    def complain(self, column: str, problem: str, remedy: str) -> None:
        value = self.cells.get(column)
        self.problems.append(Problem(self.file, problem, remedy, line=self.line, column=column, value=value))

    def use_and_season(self) -> tuple[str, Season] | None:
        use_text, season_text = (self.cells.get(column, "").strip() for column in ("use", "season"))
        use = normal_use(use_text) if use_text else None
        if use is None:
            self.complain("use", "is not a known use", f"write one of: {', '.join(known_uses())}")
        if season_text.casefold() not in tuple(Season):
            self.complain("season", "is not a season of the profiles", "write summer or winter")
            return None
        return None if use is None else (use, Season(season_text.casefold()))

    def shares(self) -> tuple[float, ...]:
        return tuple(self._share(column) for column in HOUR_COLUMNS)

    def _share(self, column: str) -> float:
        text = self.cells.get(column, "").strip()
        value = float(text.replace(",", ".")) if _SHARE.fullmatch(text) else None
        if value is None or value > 1.0:
            self.complain(column, "is not a share of full load", "write a number from 0 to 1, such as 0.25")
            return 0.0
        return value
