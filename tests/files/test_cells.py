import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from balancer.electrical.defaults import known_uses
from balancer.files import cells
from balancer.files.columns import COLUMNS, EFFORT, KWH_DAY, LOAD_A, LOAD_VA, LOAD_W, PF, SLACK_IN, START_A, Column
from balancer.files.quantities import Cell, CellError
from balancer.panel import PowerFactor, Role, Volts, Wire, format_landing


def error_of(column: Column[float], text: str, *, has_decimal_comma: bool = False) -> CellError:
    with pytest.raises(CellError) as caught:
        column.read(Cell(text, has_decimal_comma))
    return caught.value


@pytest.mark.parametrize(
    ("column", "text", "value"),
    [
        (LOAD_A, "15", 15.0),
        (LOAD_A, "15.0", 15.0),
        (LOAD_A, ".5", 0.5),
        (LOAD_A, "15 A", 15.0),
        (LOAD_A, "15amps", 15.0),
        (LOAD_W, "1.5 kW", 1500.0),
        (LOAD_W, "1500 W", 1500.0),
        (LOAD_VA, "1.2 kVA", 1200.0),
        (KWH_DAY, "12 kWh", 12.0),
        (SLACK_IN, '6"', 6.0),
        (SLACK_IN, "6 in", 6.0),
        (SLACK_IN, "short", 0.0),
        (SLACK_IN, "OK", math.inf),
        (EFFORT, "1.5", 1.5),
    ],
)
def test_numbers_are_read_with_the_unit_of_their_column(column: Column[float], text: str, value: float) -> None:
    assert column.read(Cell(text)) == value


def test_decimal_comma_counts_where_the_separator_leaves_it_free() -> None:
    assert LOAD_A.read(Cell("15,5", has_decimal_comma=True)) == 15.5
    assert "comma" in error_of(LOAD_A, "15,5").problem


def test_comma_that_may_be_of_thousands_is_asked_about() -> None:
    assert error_of(LOAD_W, "1,500", has_decimal_comma=True).remedy == "write 1500 or 1,5"


@pytest.mark.parametrize(
    "text", ["nan", "inf", "-inf", "1_200", "\uff11\uff15", "1e3", "0x10", "1 500", "1.2.3", "", "A"]
)
def test_texts_that_python_might_take_for_numbers_are_refused(text: str) -> None:
    assert error_of(LOAD_A, text).problem == "is not a number"


@pytest.mark.parametrize(
    ("column", "text", "problem", "remedy"),
    [
        pytest.param(LOAD_A, "-5", "is negative", "0 or more", id="negative"),
        pytest.param(LOAD_A, "1500", "is too high", "load_w", id="watts in an amps column"),
        pytest.param(LOAD_A, "9" * 400, "is too high", "load_w", id="absurd"),
        pytest.param(LOAD_A, "1500 W", "is in watts, and this column holds amps", "load_w", id="watts by name"),
        pytest.param(LOAD_W, "15 A", "is in amps, and this column holds watts", "load_a", id="amps by name"),
        pytest.param(LOAD_A, "15 mA", "is in milliamps", "", id="milliamps"),
        pytest.param(LOAD_A, "15 cats", "is not a number", "amps", id="unit nobody knows"),
        pytest.param(START_A, "1500", "is too high", "amps", id="absurd starting amps"),
        pytest.param(EFFORT, "0", "is zero", "above 0", id="no effort at all"),
    ],
)
def test_number_that_does_not_belong_says_where_it_may(
    column: Column[float], text: str, problem: str, remedy: str
) -> None:
    error = error_of(column, text)
    assert problem in error.problem
    assert remedy in error.remedy


@pytest.mark.parametrize(
    ("text", "power_factor"),
    [
        ("0.95", PowerFactor(0.95)),
        ("1", PowerFactor(1.0)),
        ("0.95 lag", PowerFactor(0.95)),
        ("0.95 lead", PowerFactor(0.95, is_leading=True)),
        (".9 Leading", PowerFactor(0.9, is_leading=True)),
    ],
)
def test_power_factor_lags_unless_said(text: str, power_factor: PowerFactor) -> None:
    assert cells.read_power_factor(Cell(text)) == power_factor


@pytest.mark.parametrize(
    ("text", "remedy"),
    [
        ("0", "above 0"),
        ("1.2", "up to 1"),
        ("-0.9", "0 or more"),
        ("95%", "0.95"),
        ("95", "0.95"),
        ("0.9 late", "0.95 lead"),
    ],
)
def test_impossible_power_factor_is_refused(text: str, remedy: str) -> None:
    with pytest.raises(CellError) as caught:
        cells.read_power_factor(Cell(text))
    assert remedy in caught.value.remedy


@pytest.mark.parametrize("text", ["7", "5-7", "7-5", "12a", "12B", "12b-14a", "12a-14b", "5 - 7"])
def test_spaces_are_read_as_the_inventory_writes_them(text: str) -> None:
    assert format_landing(cells.read_space(Cell(text))) == text.replace(" ", "").lower()


@pytest.mark.parametrize(
    "text",
    [
        "7-May",
        "05-Jul",
        "Jul-05",
        "7. Mai",
        "5-Jul-26",
        "2026-07-05",
        "2026-07-05 00:00:00",
        "7/5/2026",
        "45848",
        "Dec-14",
    ],
)
def test_space_that_a_spreadsheet_made_a_date_of_is_told(text: str) -> None:
    with pytest.raises(CellError) as caught:
        cells.read_space(Cell(text))
    assert "format the column as text" in caught.value.remedy


@pytest.mark.parametrize("text", ["0", "07", "5-7-9", "12c", "left", "85", "-5", "7.5"])
def test_what_is_no_space_is_refused(text: str) -> None:
    with pytest.raises(CellError, match=r"no space|not a space"):
        cells.read_space(Cell(text))


@pytest.mark.parametrize(
    ("text", "volts"),
    [("120", Volts.V120), ("240 V", Volts.V240), ("120/240V", Volts.V120_240), ("120 / 208 volts", Volts.V120_208)],
)
def test_voltages_may_carry_their_unit(text: str, volts: Volts) -> None:
    assert cells.read_volts(Cell(text)) is volts


@pytest.mark.parametrize(("text", "remedy"), [("115", "120"), ("230 V", "240"), ("277", "120/240")])
def test_other_voltages_are_refused_with_the_nominal_one(text: str, remedy: str) -> None:
    with pytest.raises(CellError) as caught:
        cells.read_volts(Cell(text))
    assert remedy in caught.value.remedy


@pytest.mark.parametrize(
    ("text", "wire"),
    [
        ("12 cu", Wire("12", "cu")),
        ("2/0 AL", Wire("2/0", "al")),
        ("#6 AWG copper", Wire("6", "cu")),
        ("250 kcmil aluminum", Wire("250", "al")),
        ("12cu", Wire("12", "cu")),
    ],
)
def test_conductors_are_read_by_size_and_metal(text: str, wire: Wire) -> None:
    assert cells.read_wire(Cell(text)) == wire


@pytest.mark.parametrize("text", ["12", "cu", "12/2 cu", "13 cu", "12 gold"])
def test_what_is_no_conductor_is_refused(text: str) -> None:
    with pytest.raises(CellError, match=r"not a conductor|not a trade size"):
        cells.read_wire(Cell(text))


@pytest.mark.parametrize("word", ["yes", "Y", "true", "1", "x", "X"])
def test_yes_is_written_in_many_ways(word: str) -> None:
    assert cells.read_yes_no(Cell(word)) is True


@pytest.mark.parametrize("word", ["no", "N", "FALSE", "0"])
def test_no_is_written_in_many_ways(word: str) -> None:
    assert cells.read_yes_no(Cell(word)) is False


def test_maybe_is_neither_yes_nor_no() -> None:
    with pytest.raises(CellError, match="neither yes nor no"):
        cells.read_yes_no(Cell("maybe"))


def test_misspelt_words_get_the_nearest_one() -> None:
    assert cells.read_role(Cell(" Feeder".strip())) is Role.FEEDER
    with pytest.raises(CellError) as caught:
        cells.read_role(Cell("feder"))
    assert caught.value.remedy == "did you mean feeder?"
    with pytest.raises(CellError) as caught:
        cells.read_use(Cell("lightning"))
    assert caught.value.remedy == "did you mean lighting?"


def test_word_that_resembles_nothing_gets_the_whole_list() -> None:
    with pytest.raises(CellError) as caught:
        cells.read_role(Cell("qqq"))
    assert caught.value.remedy == "write one of: load, spare, feeder, backfed, interlock, surge"


@pytest.mark.parametrize("use", known_uses())
def test_uses_are_read_whatever_their_case(use: str) -> None:
    assert cells.read_use(Cell(use.upper().replace(" ", "_"))) == use


@pytest.mark.parametrize(("text", "priority"), [("MUST", "must"), ("never", "never"), ("50", "50"), ("0", "0")])
def test_priority_is_a_word_or_a_number(text: str, priority: str) -> None:
    assert cells.read_priority(Cell(text)) == priority


@pytest.mark.parametrize("text", ["101", "high"])
def test_priority_outside_its_range_is_refused(text: str) -> None:
    with pytest.raises(CellError, match=r"too high|not a word"):
        cells.read_priority(Cell(text))


@given(st.sampled_from(COLUMNS), st.text(min_size=1, max_size=30), st.booleans())
def test_any_text_is_read_or_refused_in_words(column: Column[object], text: str, has_decimal_comma: bool) -> None:
    assert all(remarks_on(column, Cell(text, has_decimal_comma)))


def remarks_on(column: Column[object], cell: Cell) -> tuple[str, ...]:
    try:
        column.read(cell)
    except CellError as error:
        return error.problem, error.remedy
    return ()


def test_columns_have_unique_names_and_say_what_they_mean() -> None:
    assert len({column.name for column in COLUMNS}) == len(COLUMNS)
    assert all(column.meaning and column.default for column in COLUMNS)
    assert [column.name for column in COLUMNS if column.is_required] == ["circuit", "volts"]


@pytest.mark.parametrize(
    ("text", "remedy"),
    [
        pytest.param("12.500", "write 12500 or 12.5", id="twelve kilowatts or twelve watts"),
        pytest.param("2.125", "write 2125 or 2.1250", id="no blank decimals to leave out"),
        pytest.param("2,000", "write 2000 or 2", id="no decimals at all"),
    ],
)
def test_what_may_be_thousands_is_asked_about_and_the_answer_is_taken(text: str, remedy: str) -> None:
    assert error_of(LOAD_W, text, has_decimal_comma=True).remedy == remedy
    for answer in remedy.removeprefix("write ").split(" or "):
        assert LOAD_W.read(Cell(answer, has_decimal_comma=True)) > 0


def test_three_decimals_are_taken_where_they_can_mean_nothing_else() -> None:
    assert LOAD_W.read(Cell("12.500")) == 12.5
    assert PF.read(Cell("1.000", has_decimal_comma=True)).value == 1.0
    assert PF.read(Cell("0,950", has_decimal_comma=True)).value == 0.95
