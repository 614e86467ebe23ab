import pytest

from balancer.electrical.defaults import known_uses
from balancer.electrical.profiles import (
    HOUR_COLUMNS,
    HOURS,
    PROFILE_COLUMNS,
    Season,
    profiles_from_rows,
    shipped_profiles,
)
from balancer.errors import InputError


def row(use: str, season: str, share: str = "0.5", **hours: str) -> dict[str, str]:
    return {"use": use, "season": season} | dict.fromkeys(HOUR_COLUMNS, share) | hours


def problems_of(*rows: dict[str, str]):
    with pytest.raises(InputError) as caught:
        profiles_from_rows(list(enumerate(rows, 2)), "mine.csv")
    return caught.value.problems


def test_every_known_use_has_a_shipped_profile_for_both_seasons():
    assert sorted(shipped_profiles().shares) == sorted((use, season) for use in known_uses() for season in Season)
    assert all(len(shares) == 24 for shares in shipped_profiles().shares.values())


@pytest.mark.parametrize(("use", "season"), [("heating", Season.SUMMER), ("cooling", Season.WINTER)])
def test_heating_and_cooling_rest_out_of_season(use, season):
    profiles = shipped_profiles()
    other = Season.WINTER if season is Season.SUMMER else Season.SUMMER
    assert [profiles.share(use, season, hour) for hour in HOURS] == [0] * 24
    assert all(profiles.share(use, other, hour) > 0 for hour in HOURS)


def test_lights_burn_longer_on_winter_evenings():
    profiles = shipped_profiles()
    assert profiles.share("lighting", Season.WINTER, 18) > profiles.share("lighting", Season.SUMMER, 18)
    assert profiles.share("lighting", Season.WINTER, 20) > profiles.share("lighting", Season.WINTER, 3)


def test_a_blank_use_takes_the_general_profile():
    profiles = shipped_profiles()
    assert profiles.share("", Season.WINTER, 18) == profiles.share("general", Season.WINTER, 18)


def test_own_rows_replace_the_shipped_ones_and_leave_the_rest():
    rows = [(2, row("EV_Charging", "Winter", "0,25", **{"23:00": "1"}))]
    mine = profiles_from_rows(rows, "mine.csv")
    assert mine.share("EV charging", Season.WINTER, 5) == 0.25
    assert mine.share("EV charging", Season.WINTER, 23) == 1
    untouched = [("EV charging", Season.SUMMER, 5), ("lighting", Season.WINTER, 5)]
    for use, season, hour in untouched:
        assert mine.share(use, season, hour) == shipped_profiles().share(use, season, hour)


def test_all_that_is_wrong_is_told_at_once_with_its_place():
    problems = problems_of(row("saunna", "winter"), row("lighting", "autumn"), row("", "winter", **{"07:00": "70"}))
    assert [(p.line, p.column, p.value) for p in problems] == [
        (2, "use", "saunna"),
        (3, "season", "autumn"),
        (4, "use", ""),
        (4, "07:00", "70"),
    ]
    assert all(p.file == "mine.csv" and p.remedy for p in problems)


@pytest.mark.parametrize("text", ["", "1.2", "-0.1", "nan", "inf", "50%", "1_0", "\u0661", "0x1", "1e-1", ".5"])
def test_only_shares_from_0_to_1_are_taken(text):
    (problem,) = problems_of(row("lighting", "winter", **{"07:00": text}))
    assert (problem.line, problem.column) == (2, "07:00")


def test_a_row_given_twice_is_refused():
    (problem,) = problems_of(row("lighting", "winter"), row("Lighting", "WINTER"))
    assert (problem.line, problem.column) == (3, "use")


def test_a_missing_cell_is_refused():
    cells = row("lighting", "winter")
    del cells["05:00"]
    (problem,) = problems_of(cells)
    assert (problem.column, problem.value) == ("05:00", None)


def test_the_header_is_use_season_and_24_hours():
    assert PROFILE_COLUMNS[:3] == ("use", "season", "00:00")
    assert PROFILE_COLUMNS[-1] == "23:00"
    assert len(PROFILE_COLUMNS) == 26
