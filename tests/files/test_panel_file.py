from pathlib import Path

import pytest
from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st

from balancer.errors import InputError, Problem
from balancer.files import ordinary_panel, read_panel_file
from balancer.files.panel_file import PANEL_KEYS
from balancer.files.supply_table import SUPPLY_KEYS
from balancer.panel import Leg, Panel, Supply, SupplySystem, Wire, ordinary_spaces


def panel_of(tmp_path: Path, text: str | bytes) -> Panel:
    path = tmp_path / "panel.toml"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return read_panel_file(path)


def problems_of(tmp_path: Path, text: str | bytes) -> tuple[Problem, ...]:
    with pytest.raises(InputError) as caught:
        panel_of(tmp_path, text)
    return caught.value.problems


FULL = """\
[panel]
name = "Garage [wall]"
spaces = 12
main_a = 200
bus_a = 225.5
feed = "Bottom"
tandem_spaces = [11, 12]
plug_on_neutral = true
bolt_on = false
reserved = [1]
row_legs = "BA"
numbering = "down"
crossing_in = 0
stab_a = 140

[supply]
system = "120/208"
rotation = "b leads"
source = "generator"
transformer_kva = 25
impedance_pct = 1.8
service_wire = "2/0 al"
neutral_wire = "2 al"
length_ft = 70
"""


def test_every_key_reaches_the_panel(tmp_path: Path) -> None:
    assert panel_of(tmp_path, FULL) == Panel(
        name="Garage [wall]",
        spaces=ordinary_spaces(12, "BA", numbered_down=True),
        main_a=200.0,
        bus_a=225.5,
        feed="bottom",
        tandem_spaces=frozenset({11, 12}),
        plug_on_neutral=frozenset(range(1, 13)),
        reserved=frozenset({1}),
        crossing_in=0.0,
        stab_a=140.0,
        supply=Supply(
            system=SupplySystem.WYE,
            leading_leg=Leg.B,
            is_trip_per_leg=True,
            transformer_kva=25.0,
            impedance_pct=1.8,
            service_wire=Wire("2/0", "al"),
            neutral_wire=Wire("2", "al"),
            length_ft=70.0,
        ),
    )


def test_full_example_names_every_key() -> None:
    keys = [line.split(" = ")[0] for line in FULL.splitlines() if " = " in line]
    assert sorted([*keys, "space"]) == sorted([*PANEL_KEYS, *SUPPLY_KEYS])


def test_number_of_spaces_is_enough(tmp_path: Path) -> None:
    assert panel_of(tmp_path, "[panel]\nspaces = 40\n") == Panel(spaces=ordinary_spaces(40))


@pytest.mark.parametrize(
    "data", [b"\xef\xbb\xbf[panel]\r\nspaces = 2\r\n", "[panel]\nspaces = 2\n# Küche".encode("cp1252")]
)
def test_panel_file_is_read_as_editors_write_it(tmp_path: Path, data: bytes) -> None:
    assert len(panel_of(tmp_path, data).spaces) == 2


def test_tandem_spaces_not_said_differ_from_none(tmp_path: Path) -> None:
    assert panel_of(tmp_path, "[panel]\nspaces = 2\n").tandem_spaces is None
    assert panel_of(tmp_path, "[panel]\nspaces = 2\ntandem_spaces = []\n").tandem_spaces == frozenset()
    assert panel_of(tmp_path, "[panel]\nspaces = 2\ntandem_spaces = true\n").tandem_spaces == frozenset({1, 2})


@pytest.mark.parametrize(("source", "is_trip_per_leg"), [("utility", False), ("inverter", True), ("generator", True)])
def test_inverters_and_generators_trip_per_leg(tmp_path: Path, source: str, is_trip_per_leg: bool) -> None:
    panel = panel_of(tmp_path, f'[panel]\nspaces = 2\n[supply]\nsource = "{source}"\n')
    assert panel.supply.is_trip_per_leg is is_trip_per_leg


def test_main_above_the_bus_is_no_file_error(tmp_path: Path) -> None:
    assert panel_of(tmp_path, "[panel]\nspaces = 2\nmain_a = 200\nbus_a = 100\n").main_a == 200.0


def space_tables(*spaces: tuple[int, str, int, str]) -> str:
    return "[panel]\n" + "".join(
        f'[[panel.space]]\nnumber = {number}\ncolumn = {column}\nrow = {row}\nleg = "{leg}"\n'
        for number, column, row, leg in spaces
    )


def test_spaces_may_be_placed_one_by_one(tmp_path: Path) -> None:
    panel = panel_of(tmp_path, space_tables((2, '"right"', 1, "b"), (1, '"left"', 1, "A"), (3, "0", 2, "B")))
    assert [(space.number, space.column, space.row, space.leg) for space in panel.spaces] == [
        (1, 0, 1, Leg.A),
        (2, 1, 1, Leg.B),
        (3, 0, 2, Leg.B),
    ]


PLACED = space_tables((1, '"left"', 1, "A"), (2, '"left"', 2, "B"))


@pytest.mark.parametrize(
    ("text", "column", "line", "problem"),
    [
        pytest.param("", None, None, "is empty", id="empty"),
        pytest.param("[supply]\n", "panel", None, "[panel] is missing", id="no panel"),
        pytest.param("panel = 3\n", "panel", 1, "is not a table", id="panel is no table"),
        pytest.param("[panel]\nspaces = = 2\n", None, 2, "is not a panel file in TOML", id="not TOML"),
        pytest.param("circuit,volts\nfan,120\n", None, 1, "is not a panel file in TOML", id="an inventory"),
        pytest.param("[panel]\nspaces = 2\nspaces = 4\n", None, 3, "Cannot overwrite", id="key twice"),
        pytest.param("a = " + "[" * 5000, None, None, "is not a panel file in TOML", id="deep nesting"),
        pytest.param(
            "[panel]\nspaces = 1" + "0" * 5000, None, None, "is not a panel file in TOML", id="endless number"
        ),
        pytest.param(f"[panel]\nspaces = 0x{'f' * 5000}\n", "spaces", 2, "fits here", id="endless hexadecimal number"),
        pytest.param(f"[panel]\nspaces = 2\nmain_a = 1{'0' * 400}\n", "main_a", 3, "too high", id="beyond all floats"),
        pytest.param('[panel]\nname = "x"\n', "spaces", 1, "missing", id="no spaces"),
        pytest.param("[panel]\nspaces = 1\n", "spaces", 2, "fits here", id="too few spaces"),
        pytest.param("[panel]\nspaces = 85\n", "spaces", 2, "fits here", id="too many spaces"),
        pytest.param("[panel]\nspaces = 40.5\n", "spaces", 2, "fits here", id="half a space"),
        pytest.param("[panel]\nspaces = true\n", "spaces", 2, "fits here", id="spaces true"),
        pytest.param("[panel]\nspaces = 2\nmain_a = nan\n", "main_a", 3, "is not a number", id="not a number"),
        pytest.param("[panel]\nspaces = 2\nmain_a = inf\n", "main_a", 3, "is not a number", id="infinite"),
        pytest.param('[panel]\nspaces = 2\nmain_a = "200"\n', "main_a", 3, "is not a number", id="text for a number"),
        pytest.param("[panel]\nspaces = 2\nmain_a = 0\n", "main_a", 3, "not above 0", id="zero"),
        pytest.param("[panel]\nspaces = 2\nstab_a = 99999\n", "stab_a", 3, "too high", id="absurd"),
        pytest.param("[panel]\nspaces = 2\nfeed = 3\n", "feed", 3, "is not a text", id="number for a text"),
        pytest.param('[panel]\nspaces = 2\nfeed = "left"\n', "feed", 3, "not a word", id="unknown word"),
        pytest.param("[panel]\nspaces = 2\nreserved = [3]\n", "reserved", 3, "no space 3", id="space beyond"),
        pytest.param('[panel]\nspaces = 2\nreserved = ["1"]\n', "reserved", 3, "list of spaces", id="texts as spaces"),
        pytest.param("[panel]\nspaces = 2\ntandem_spaces = 2\n", "tandem_spaces", 3, "list of spaces", id="no list"),
        pytest.param('[panel]\nspaces = 4\nrow_legs = "AX"\n', "row_legs", 3, "not a column of legs", id="odd legs"),
        pytest.param('[panel]\nspaces = 4\nrow_legs = "AA"\n', "row_legs", 3, "not a column of legs", id="one leg"),
        pytest.param('[panel]\nspaces = 4\nrow_legs = "ABA"\n', "row_legs", 3, "3 letters for 2 rows", id="long"),
        pytest.param('[panel]\nspaces = 8\nrow_legs = "ABA"\n', "row_legs", 3, "3 letters for 4 rows", id="uneven"),
        pytest.param('[panel]\nspaces = 6\nrow_legs = "ABC"\n', "row_legs", 3, "third leg", id="three phases"),
        pytest.param("[panel]\nspaces = 2\nsapces = 2\n", "sapces", 3, "means nothing in [panel]", id="unknown key"),
        pytest.param("[panel]\nspaces = 2\n[suply]\n", "suply", 3, "means nothing", id="unknown table"),
        pytest.param('[panel]\nspaces = 2\n[supply]\nsystem = "240"\n', "system", 4, "not a supply known", id="supply"),
        pytest.param(
            '[panel]\nspaces = 2\n[supply]\nrotation = "A leads"\n', "rotation", 4, "two legs of a wye", id="rotation"
        ),
        pytest.param(
            '[panel]\nspaces = 2\n[supply]\nservice_wire = "big"\n', "service_wire", 4, "not a conductor", id="wire"
        ),
        pytest.param(
            PLACED + '[[panel.space]]\nnumber = 3\nrow = 1\nleg = "A"\n', "column", 12, "missing", id="no column"
        ),
        pytest.param(PLACED.replace('"left"', '"top"', 1), "column", 4, "is not a column", id="odd column"),
        pytest.param(PLACED.replace('"B"', '"C"'), "leg", 11, "third leg", id="third leg of a space"),
        pytest.param(PLACED.replace('"B"', '"A"'), "space", 2, "on one leg", id="all on one leg"),
        pytest.param(PLACED.replace("number = 2", "number = 1"), "space", 2, "same number", id="number twice"),
        pytest.param(PLACED.replace("row = 2", "row = 1"), "space", 2, "same column and row", id="place twice"),
        pytest.param(PLACED.replace("row = 2", "row = 0"), "row", 10, "fits here", id="row nought"),
        pytest.param(PLACED.replace("row = 2", "rwo = 2\nrow = 2"), "rwo", 10, "means nothing", id="unknown space key"),
        pytest.param("[panel]\nspaces = 3\n" + PLACED[8:], "spaces", 2, "stands 2 times", id="count contradicts"),
        pytest.param('[panel]\nrow_legs = "AB"\n' + PLACED[8:], "row_legs", 2, "stands beside", id="map twice"),
        pytest.param("[panel]\nspace = 3\n", "space", 2, "is not a list of tables", id="space is no list"),
    ],
)
def test_panel_file_that_is_wrong_is_one_problem(
    tmp_path: Path, text: str, column: str | None, line: int | None, problem: str
) -> None:
    (only,) = problems_of(tmp_path, text)
    assert problem in only.problem
    assert (only.column, only.line) == (column, line)
    assert only.remedy


@pytest.mark.parametrize(
    "system", ["three-phase", "3ph", "120/208/240", "240 delta", "high-leg", "277/480", "208Y/120/3-phase"]
)
def test_three_phase_and_high_leg_panels_are_refused_in_words(tmp_path: Path, system: str) -> None:
    (only,) = problems_of(tmp_path, f'[panel]\nspaces = 2\n[supply]\nsystem = "{system}"\n')
    assert "three phases or a high leg" in only.remedy


@pytest.mark.parametrize(("written", "system"), [('"120"', "120"), ("120", "120"), ('"120/240 V"', "120/240")])
def test_supply_systems_are_read_as_one_writes_them(tmp_path: Path, written: str, system: str) -> None:
    panel = panel_of(tmp_path, f"[panel]\nspaces = 2\n[supply]\nsystem = {written}\n")
    assert panel.supply.system == system


def test_misspelt_keys_get_the_nearest_one(tmp_path: Path) -> None:
    remedies = [problem.remedy for problem in problems_of(tmp_path, "[panel]\nspaces = 2\nmian_a = 2\nxyzzy = 1\n")]
    assert remedies[0] == "did you mean main_a?"
    assert remedies[1].startswith("write one of: name, spaces")


def test_all_problems_come_at_once_by_line(tmp_path: Path) -> None:
    text = '[panel]\nspaces = 2\nmain_a = -1\n[supply]\nsystem = "x"\nrotation = "C leads"\nlength_ft = "far"\n'
    assert [problem.line for problem in problems_of(tmp_path, text)] == [3, 5, 6, 7]


def test_line_of_a_dotted_key_is_found(tmp_path: Path) -> None:
    (only,) = problems_of(tmp_path, 'panel.spaces = 2\n\npanel.feed = "side"\n')
    assert only.line == 3


@pytest.mark.parametrize(
    ("highest_space", "poles", "spaces"),
    [(1, 1, 2), (7, 1, 8), (8, 30, 8), (0, 1, 6), (0, 12, 16), (0, 13, 20), (0, 84, 84), (0, 100, 84), (84, 1, 84)],
)
def test_panel_made_up_without_a_file(highest_space: int, poles: int, spaces: int) -> None:
    panel = ordinary_panel(highest_space, poles)
    assert panel.spaces == ordinary_spaces(spaces)
    assert panel.is_assumed


KEYS = st.sampled_from([*PANEL_KEYS, *SUPPLY_KEYS, "panel", "supply", "number", "column", "row", "leg"])
VALUES = st.one_of(
    st.sampled_from(
        ["40", "-1", "1.5", "nan", "true", '"A leads"', '"120"', "[1, 2]", '["x"]', "{a = 1}", "1979-05-27"]
    ),
    st.integers().map(str),
    st.floats().map(repr),
)
LINES = st.one_of(
    st.builds("{} = {}".format, KEYS, VALUES),
    st.sampled_from(["[panel]", "[supply]", "[[panel.space]]", "[x]"]),
    st.text(),
)


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    st.one_of(st.lists(LINES, max_size=8).map("\n".join).map(lambda text: text.encode(errors="replace")), st.binary())
)
@example(b"[panel]\nspaces = 40")
def test_any_bytes_are_a_panel_or_an_input_error(tmp_path: Path, data: bytes) -> None:
    path = tmp_path / "any.toml"
    path.write_bytes(data)
    assert spaces_or_problems(path)


def spaces_or_problems(path: Path) -> tuple[object, ...]:
    try:
        return read_panel_file(path).spaces
    except InputError as error:
        return error.problems


def test_a_table_of_another_kind_means_nothing_in_a_panel_file(tmp_path: Path) -> None:
    (only,) = problems_of(tmp_path, "[panel]\nspaces = 2\n\n[other]\n")
    assert (only.line, only.problem) == (4, "means nothing in a panel file")
