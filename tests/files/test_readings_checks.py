"""Logs that would mislead are refused, and odd ones that would not are taken."""

from collections.abc import Callable
from pathlib import Path

import pytest

from balancer.errors import InputError, Problem
from balancer.files import read_readings
from balancer.panel import Installation

INVENTORY = """\
circuit,space,volts,load_w,breaker_a
heater,1,120,1500,20
kettle,3,120,1200,15
water,5-7,240,4500,30
lamp,2,120,60,
"""

Check = Callable[..., tuple[Problem, ...]]


@pytest.fixture
def check(tmp_path: Path, read: Callable[..., Installation]) -> Check:
    """What is wrong with a log of hourly columns; nothing where it is taken."""
    house = read(INVENTORY)

    def check(**columns: list[float | str]) -> tuple[Problem, ...]:
        count = len(next(iter(columns.values())))
        rows = [
            f"2023-01-{1 + i // 24:02d} {i % 24:02d}:00," + ",".join(str(c[i]) for c in columns.values())
            for i in range(count)
        ]
        path = tmp_path / "log.csv"
        path.write_text("\n".join([",".join(["time", *columns]), *rows]), encoding="utf-8")
        try:
            read_readings(path, house)
        except InputError as error:
            return error.problems
        return ()

    return check


def test_half_missing_is_taken_and_more_is_not(check: Check) -> None:
    assert check(heater_a=[1, 2, "", ""], kettle_a=[1, 2, "", ""]) == ()
    (found,) = check(heater_a=[1, 2, "", "", ""], kettle_a=[1, 2, "", "", ""])
    assert found.problem == "60% of the readings are missing, most in heater_a, kettle_a"


def test_one_column_with_most_missing_is_named(check: Check) -> None:
    (found,) = check(heater_a=[1, 2, 3, 4, 5], kettle_a=[1, "", "", "", 2], lamp_a=[0, 0, 0, 0, ""])
    assert found.problem == "80% of the intervals lack a reading, most in kettle_a, lamp_a"


def test_one_reading_up_to_four_times_the_breaker_is_taken(check: Check) -> None:
    assert check(heater_a=[80, 0, 0]) == ()
    (found,) = check(heater_a=[80.1, 0, 0])
    assert (found.column, found.line) == ("heater_a", 1)
    assert found.problem == "reaches 80.1 A on a 20 A breaker"
    assert "_w" in found.remedy


def test_two_and_a_half_times_the_breaker_is_taken_now_and_then(check: Check) -> None:
    assert check(heater_a=[51, 51, 50, 0]) == ()
    (found,) = check(heater_a=[51, 51, 51, 0])
    assert found.problem == "is above 50 A in 3 intervals, on a 20 A breaker"


def test_often_is_a_share_of_a_long_log(check: Check) -> None:
    # 28 days of hours: three intervals are over one in a thousand of 672.
    assert len(check(kettle_a=[38.0] * 3 + [0.0] * 669)) == 1


def test_watts_named_as_amps_are_refused_without_a_breaker_too(check: Check) -> None:
    (found,) = check(lamp_a=[300, 0])
    assert found.problem == "reaches 300 A on a circuit without a breaker rating"


def test_watts_far_above_the_breaker_are_refused(check: Check) -> None:
    (found,) = check(kettle_w=[7201, 0])
    assert found.problem == "reaches 60.01 A on a 15 A breaker"
    assert "check that these are watts" in found.remedy


def test_amps_and_kilowatts_named_as_watts_are_refused(check: Check) -> None:
    amps = check(heater_w=[12.4, 0], kettle_w=[9.9, 0], water_w=[18.6, 0])
    assert [found.column for found in amps] == ["heater_w", "kettle_w", "water_w"]
    assert amps[0].problem == "reaches only 12.4 W where the inventory has 1500 W: these look like amps"
    kilowatts = check(heater_w=[1.5, 0], kettle_w=[1.2, 0], water_w=[4.4, 0])
    assert {found.remedy for found in kilowatts} == {"multiply by 1000"}


def test_a_load_that_hardly_ran_is_no_slip_among_others_that_did(check: Check) -> None:
    assert check(heater_w=[12.0, 0], kettle_w=[1180, 0], water_w=[4400, 0]) == ()


def test_a_small_load_and_a_dead_one_tell_nothing(check: Check) -> None:
    assert check(lamp_w=[0.5, 0], heater_w=[0, 0], kettle_w=[1180, 0]) == ()


def test_everything_wrong_is_said_at_once(check: Check) -> None:
    found = check(heater_a=[1400, 0], kettle_a=[900, 0])
    assert [problem.column for problem in found] == ["heater_a", "kettle_a"]
