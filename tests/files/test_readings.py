"""Logs read whole: what becomes of every row, and what is said about it."""

import bz2
import gzip
import lzma
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st

import balancer
from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenarios import ScenarioKind, split_scenarios
from balancer.errors import InputError, Problem
from balancer.files import ReadingsLog, read_inventory, read_readings
from balancer.panel import Installation

DATA = Path(balancer.__file__).parent.parent / "data"
INVENTORY = """\
circuit,space,volts,role,load_a,breaker_a
heater,1,120,,12,20
fridge,3,120,,6,20
water,5-7,240,,18,30
surge,2-4,240,surge,,20
spare,6,120,spare,,20
"""
LOG = """\
time,heater_a,fridge_a,water_a
2023-01-14 18:00,1,2,0
2023-01-14 18:15,3,4,5.5
2023-01-14 18:30,0,2.5,0
"""

ReadLog = Callable[..., ReadingsLog]
ProblemsOfLog = Callable[..., tuple[Problem, ...]]


@pytest.fixture
def house(read: Callable[..., Installation]) -> Installation:
    return read(INVENTORY)


@pytest.fixture
def read_log(tmp_path: Path, house: Installation) -> ReadLog:
    def read_log(log: str | bytes, name: str = "log.csv", **options: object) -> ReadingsLog:
        path = tmp_path / name
        path.write_bytes(log if isinstance(log, bytes) else log.encode())
        return read_readings(path, house, **options)

    return read_log


@pytest.fixture
def problems_of_log(read_log: ReadLog) -> ProblemsOfLog:
    def problems_of_log(log: str | bytes, **options: object) -> tuple[Problem, ...]:
        with pytest.raises(InputError) as caught:
            read_log(log, **options)
        return caught.value.problems

    return problems_of_log


def said(log: ReadingsLog, words: str) -> str:
    """The one line of the report with these words in it."""
    (line,) = [line for line in log.report.lines() if words in line]
    return line


def test_every_interval_is_a_scenario(read_log: ReadLog) -> None:
    scenarios = read_log(LOG).scenarios
    assert scenarios.kind is ScenarioKind.READINGS
    assert list(scenarios.names) == ["2023-01-14 18:00", "2023-01-14 18:15", "2023-01-14 18:30"]
    np.testing.assert_array_equal(scenarios.neutral_a, [[1, 2, 0, 0, 0], [3, 4, 0, 0, 0], [0, 2.5, 0, 0, 0]])
    np.testing.assert_array_equal(scenarios.line_a, [[0, 0, 0, 0, 0], [0, 0, 5.5, 0, 0], [0, 0, 0, 0, 0]])
    assert scenarios.neutral_a.dtype == scenarios.line_a.dtype == np.float32
    assert scenarios.times is not None
    assert scenarios.times[1] == np.datetime64("2023-01-14T18:15:00")
    assert scenarios.interval_s == 900.0
    assert scenarios.are_averages
    assert scenarios.notes == ("Every reading is an average over 15 min: moments within it were higher.",)


def test_a_log_with_nothing_wrong_says_only_what_it_covers(read_log: ReadLog) -> None:
    assert read_log(LOG).report.lines() == (
        "Readings from 2023-01-14 18:00 to 2023-01-14 18:30, an interval every 15 min, each an average over it.",
        "3 of 3 rows used: 45 min, 0.00856 % of a year.",
    )


def test_names_are_made_when_asked_for(read_log: ReadLog) -> None:
    names = read_log(LOG).scenarios.names
    assert names[-1] == "2023-01-14 18:30"
    assert list(names[1:]) == ["2023-01-14 18:15", "2023-01-14 18:30"]


def test_readings_part_at_a_date(read_log: ReadLog) -> None:
    scenarios = read_log(LOG).scenarios
    before, after = split_scenarios(scenarios, np.datetime64("2023-01-14T18:15"))
    assert (list(before.names), list(after.names)) == (
        ["2023-01-14 18:00"],
        ["2023-01-14 18:15", "2023-01-14 18:30"],
    )
    assert np.shares_memory(after.neutral_a, scenarios.neutral_a)
    before, after = split_scenarios(scenarios, np.datetime64("2024-01-01"))
    assert (len(before), len(after)) == (3, 0)
    with pytest.raises(ValueError, match="only readings"):
        split_scenarios(replace(scenarios, times=None), np.datetime64("2024-01-01"))


@pytest.mark.parametrize("pack", [gzip.compress, lzma.compress, bz2.compress], ids=["gzip", "xz", "bzip2"])
def test_packed_logs_are_known_by_what_they_hold(read_log: ReadLog, pack: Callable[[bytes], bytes]) -> None:
    np.testing.assert_array_equal(
        read_log(pack(LOG.encode()), "log.bin").scenarios.neutral_a, read_log(LOG).scenarios.neutral_a
    )


@pytest.mark.parametrize(
    "text",
    [
        pytest.param("\ufeff" + LOG, id="byte order mark"),
        pytest.param(LOG.replace("\n", "\r\n"), id="CRLF"),
        pytest.param(LOG.replace(",", "\t"), id="tabs"),
        pytest.param(LOG.replace(",", ";").replace(".", ","), id="semicolons and decimal commas"),
        pytest.param(LOG.replace(",", ";"), id="semicolons and decimal points"),
        pytest.param("sep=;\n" + LOG.replace(",", ";"), id="separator announced"),
        pytest.param("# from the meter\n\n" + LOG + "# end\n\n,,,\n", id="comments and blank rows"),
        pytest.param(LOG.replace("2.5", '"2.5"').replace("time", '"time, local"'), id="quotation marks"),
        pytest.param(LOG.replace("\n", ",\n"), id="a separator at the end of every line"),
        pytest.param(LOG.rstrip("\n"), id="no end of the last line"),
    ],
)
def test_spreadsheets_may_write_it_their_way(read_log: ReadLog, text: str) -> None:
    np.testing.assert_array_equal(read_log(text).scenarios.neutral_a, read_log(LOG).scenarios.neutral_a)
    np.testing.assert_array_equal(read_log(text).scenarios.line_a, read_log(LOG).scenarios.line_a)


def test_windows_1252_and_utf_16_are_read(read_log: ReadLog) -> None:
    text = LOG.replace("water_a", "water_a,pumpe für brunnen")
    assert len(read_log(text.encode("cp1252")).scenarios) == 3
    assert read_log(text.encode("utf-16")).report.strangers == (("pumpe für brunnen", None),)


def test_an_interval_with_a_missing_reading_is_left_out(read_log: ReadLog) -> None:
    log = read_log(LOG + "2023-01-14 18:45,,1,1\n2023-01-14 19:00,1,NA,\n")
    assert len(log.scenarios) == 3
    assert said(log, "missing") == "3 readings missing, and a missing reading is not zero: 2 intervals left out."


def test_a_row_cut_short_counts_as_missing(read_log: ReadLog) -> None:
    assert read_log(LOG + "2023-01-14 18:45,1\n").report.missing_cells == 2


def test_a_column_without_readings_counts_as_zero_and_is_warned_of(read_log: ReadLog) -> None:
    log = read_log("time,heater_a,fridge_a,water_a\n2023-01-14 18:00,1,2,\n2023-01-14 18:15,3,4,\n")
    assert len(log.scenarios) == 2
    warning = "Columns without a single reading, counted with 0 A: water_a."
    assert warning in log.scenarios.notes
    assert warning in log.report.lines()
    assert log.report.missing_cells == 0


def test_circuits_without_a_column_and_columns_without_a_circuit_are_told(read_log: ReadLog) -> None:
    log = read_log("time,heater_a,frigde_a,volts,surge_a\n2023-01-14 18:00,1,2,120,0\n2023-01-14 18:15,3,4,121,0\n")
    assert "Circuits without a column, counted with 0 A: fridge, water." in log.scenarios.notes
    assert said(log, "without a circuit") == (
        "Columns without a circuit, not used: frigde_a (did you mean fridge?), volts."
    )
    assert "surge_a" in said(log, "spares and devices")


def test_columns_that_never_change_are_told(read_log: ReadLog) -> None:
    log = read_log("time,heater_a,fridge_a,water_a\n2023-01-14 18:00,0,2,1\n2023-01-14 18:15,0,2,3\n")
    assert said(log, "anything but 0").endswith(": heater_a.")
    assert said(log, "one figure").startswith("Columns that show one figure throughout: fridge_a (2).")


def test_readings_just_below_zero_are_noise_and_more_is_kept(read_log: ReadLog) -> None:
    log = read_log(
        "time,heater_a,fridge_w\n2023-01-14 18:00,-0.1,-12\n2023-01-14 18:15,-0.11,-13\n2023-01-14 18:30,1,240\n"
    )
    np.testing.assert_allclose(log.scenarios.neutral_a[:, :2], [[0, 0], [-0.11, -13 / 120], [1, 2]], rtol=1e-6)
    assert said(log, "just below zero").startswith("2 readings")
    assert said(log, "heater_a is negative").startswith("heater_a is negative in 1 interval, down to -0.11:")


def test_the_listener_hears_of_rows(read_log: ReadLog) -> None:
    heard: list[int] = []
    read_log(LOG, listener=heard.append)
    assert heard == [3]


@pytest.mark.parametrize(
    ("text", "line", "column", "problem"),
    [
        pytest.param("", None, None, "empty", id="empty"),
        pytest.param("# nothing\n", None, None, "nothing but comments", id="comments only"),
        pytest.param("time,heater_a\n", None, None, "fewer than two rows", id="header only"),
        pytest.param("time,heater_a\n2023-01-14,1\n", None, None, "fewer than two rows", id="one row"),
        pytest.param("time,heater_a\n2023-01-14,1\n2023-01-14,2\n", None, None, "one and the same", id="one timestamp"),
        pytest.param("time\n2023-01-14\n", 1, None, "no column belongs to a load", id="no column"),
        pytest.param("time,pump_a\n2023-01-14,1\n", 1, None, "no column belongs to a load", id="no known column"),
        pytest.param("time,heater_a,,fridge_a\n", 1, None, "column 3 has no name", id="nameless"),
        pytest.param("time,heater_a,Heater_A\n", 1, "Heater_A", "stands twice", id="twice"),
        pytest.param("\ntime,heater_a\n2023-01-14,1,5\n", 3, None, "has 3 cells and the header 2", id="shifted"),
        pytest.param(
            "time,heater_a\n# c\n2023-01-14,1\n\n2023-01-15,off\n", 5, "heater_a", "is not a number", id="text"
        ),
        pytest.param("time,heater_a\n2023-01-14,1\n2023-01-15,inf\n", 3, None, "infinite", id="infinite"),
        pytest.param('time,heater_a\n2023-01-14,1\n2023-01-15,"2\n', None, None, "quotation|told apart", id="quote"),
        pytest.param("time,heater_a\n2023-01-14,\n2023-01-15,\n", None, None, "not a single reading", id="all missing"),
        pytest.param(b"PK\x03\x04rest", None, None, "workbook", id="workbook"),
        pytest.param(b"\x1f\x8bno", None, None, "cannot be unpacked", id="damaged"),
        pytest.param(b"\xfd7zXZ\x00no", None, None, "cannot be unpacked", id="damaged xz"),
        pytest.param(b"time\0,heater_a\n", None, None, "not a text file", id="binary"),
    ],
)
def test_what_cannot_be_read_says_where(
    problems_of_log: ProblemsOfLog, text: str | bytes, line: int | None, column: str | None, problem: str
) -> None:
    (found,) = problems_of_log(text)
    assert (found.line, found.column) == (line, column)
    assert any(words in f"{found.problem} {found.remedy}" for words in problem.split("|"))


def test_many_texts_are_counted_and_the_first_listed(problems_of_log: ProblemsOfLog) -> None:
    rows = "".join(f"2023-01-{day:02d},off\n" for day in range(1, 10))
    total, *first = problems_of_log(f"time,heater_a\n{rows}")
    assert total.problem == "9 cells are not numbers"
    assert [(found.line, found.value) for found in first] == [(line, "off") for line in range(2, 7)]


def test_four_weeks_in_the_demo_are_read_whole() -> None:
    house = read_inventory(str(DATA / "readings_house.csv"), str(DATA / "readings_house.toml"))
    log = read_readings(DATA / "readings_28d_15min.csv", house)
    assert (log.report.intervals_used, log.report.interval_s, log.report.gaps.count) == (28 * 96, 900.0, 0)
    assert log.report.absent == log.report.strangers == log.report.empty == ()
    assert sum(circuit.poles == 2 for circuit in house.circuits) == 3
    # Spaces that would have balanced it are there: the lopsided peak is the arrangement's, not the loads'.
    assert PanelCurrents(log.installation, log.scenarios).peaks(house.as_found).neutral.value_a > 25.0


cells = st.sampled_from(
    ["", "1", "2.5", "-3", "x", '"', "1,5", "1e400", "2023-01-14 18:30", "14/1/23", "#", "\u00e9", "0"]
)
logs = st.lists(st.lists(cells, max_size=5).map(",".join), max_size=6).map("\n".join)


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@example(b'time,heater_a\n"2023-01-14\n18:00",1\n2023-01-15,2\n')
@example(b"time,heater_a\n2023-01-14 18:00,1\x00\n")
@given(st.one_of(st.binary(max_size=120), logs.map(str.encode)).map(lambda data: b"time,heater_a,fridge_w\n" + data))
def test_any_bytes_are_readings_or_an_input_error(read_log: ReadLog, data: bytes) -> None:
    log = readings_or_none(read_log, data)
    assert log is None or np.isfinite(log.scenarios.neutral_a).all()
    assert log is None or log.report.lines()


def readings_or_none(read_log: ReadLog, data: bytes) -> ReadingsLog | None:
    try:
        return read_log(data)
    except InputError as error:
        return None if error.problems else pytest.fail("an error without problems")
