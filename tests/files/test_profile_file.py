from pathlib import Path

import pytest

from balancer.electrical.profiles import PROFILE_COLUMNS, Season, UseProfiles, shipped_profiles
from balancer.errors import InputError, Problem
from balancer.files import read_profiles

HEADER = ",".join(PROFILE_COLUMNS)
SHARES = ",".join(["0.5"] * 24)


def profiles_of(tmp_path: Path, text: str) -> UseProfiles:
    path = tmp_path / "profiles.csv"
    path.write_text(text, encoding="utf-8")
    return read_profiles(path)


def problems_of(tmp_path: Path, text: str) -> tuple[Problem, ...]:
    with pytest.raises(InputError) as caught:
        profiles_of(tmp_path, text)
    return caught.value.problems


def test_own_profile_takes_the_place_of_the_shipped_one(tmp_path: Path) -> None:
    profiles = profiles_of(tmp_path, f"{HEADER}\nLighting,Winter,{SHARES}\n")
    shipped = shipped_profiles()
    assert profiles.share("lighting", Season.WINTER, 3) == 0.5
    assert profiles.share("lighting", Season.SUMMER, 3) == shipped.share("lighting", Season.SUMMER, 3)


def test_hours_are_known_as_spreadsheets_rewrite_them(tmp_path: Path) -> None:
    header = HEADER.replace("07:00", "7:00").replace("08:00", "8:00:00").replace(",", ";")
    row = f"heating;winter;{';'.join(['0,25'] * 24)}"
    assert profiles_of(tmp_path, f"{header}\n{row}\n").share("heating", Season.WINTER, 8) == 0.25


@pytest.mark.parametrize(
    ("text", "line", "problem"),
    [
        (f"{HEADER}\n", 1, "no profile follows the header"),
        (f"{HEADER.replace('03:00,', '')}\nheating,winter,{SHARES[4:]}\n", 1, "the column 03:00 is missing"),
        ("# nothing\n", None, "nothing but comments"),
        (f"{HEADER}\nheating,autumn,{SHARES}\n", 2, "not a season"),
        (f"{HEADER}\nheating,winter,1.5{SHARES[3:]}\n", 2, "not a share"),
        (f"{HEADER}\nheating,winter,0.5\n", 2, "cells and the header"),
    ],
)
def test_profile_file_that_is_wrong_is_one_problem(tmp_path: Path, text: str, line: int | None, problem: str) -> None:
    (only,) = problems_of(tmp_path, text)
    assert only.line == line
    assert problem in only.problem
