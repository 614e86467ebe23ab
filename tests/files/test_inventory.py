import math
from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st

from balancer.errors import InputError, Problem
from balancer.files import read_inventory
from balancer.files.columns import COLUMNS
from balancer.panel import Circuit, Installation, Load, Pole, PowerFactor, Role, Terminal, Volts, Wire

Read = Callable[..., Installation]
ProblemsOf = Callable[..., tuple[Problem, ...]]

WYE = '[panel]\nspaces = 12\n[supply]\nsystem = "120/208"\n'
IN_PHASE = '[panel]\nspaces = 12\n[supply]\nsystem = "120"\n'


def test_every_column_reaches_its_circuit(read: Read) -> None:
    cells = {
        "circuit": "well",
        "description": "Well pump",
        "space": "7-5",
        "volts": "120/240",
        "role": "feeder",
        "load_a": "10",
        "pf": "0.8 lead",
        "load_120_a": "2",
        "pole_120": "second",
        "breaker_a": "30 A",
        "breaker_type": "GFCI",
        "wire": "10 cu",
        "mca": "12",
        "mop": "30",
        "use": "Pump",
        "continuous": "yes",
        "start_a": "60",
        "shared_neutral": "none",
        "tied": "well house",
        "not_with": "spring",
        "fixed": "x",
        "slack_in": "8",
        "effort": "2",
        "priority": "must",
        "kwh_day": "3.5",
        "notes": "deep",
    }
    text = ",".join(cells) + "\n" + ",".join(cells.values()) + "\n"
    (circuit,) = read(text).circuits
    assert circuit == Circuit(
        label="well",
        description="Well pump",
        landing=(Terminal(7), Terminal(5)),
        volts=Volts.V120_240,
        role=Role.FEEDER,
        load=Load(line_a=10.0, line_pf=PowerFactor(0.8, is_leading=True), neutral_a=2.0, neutral_pole=Pole.SECOND),
        breaker_a=30.0,
        breaker_type="GFCI",
        wire=Wire("10", "cu"),
        mca_a=12.0,
        mop_a=30.0,
        use="pump",
        is_continuous=True,
        start_a=60.0,
        is_neutral_checked=True,
        tied="well house",
        not_with="spring",
        is_fixed=True,
        slack_in=8.0,
        effort=2.0,
        priority="must",
        kwh_day=3.5,
        notes="deep",
        line_number=2,
    )
    assert circuit.cells == cells


def test_blank_cells_mean_what_the_defaults_say(read: Read) -> None:
    header = ",".join(column.name for column in COLUMNS)
    row = ",".join({"circuit": "fan", "volts": "120", "load_a": "4"}.get(column.name, "") for column in COLUMNS)
    (with_columns,) = read(f"{header}\n{row}\n").circuits
    (without_columns,) = read("circuit,volts,load_a\nfan,120,4\n").circuits
    assert (
        with_columns
        == without_columns
        == Circuit(label="fan", volts=Volts.V120, load=Load(neutral_a=4.0), line_number=2)
    )


@pytest.mark.parametrize(
    "text",
    [
        "\ufeffCIRCUIT;Volts;Load A\nfan;120;4,5\n",
        " circuit \tVOLTS\tload_a\nfan\t120 V\t4,5\n\n\n",
        '# fans\ncircuit,"volts",LOAD-A\r\n"fan",120,4.5 A\r\n,,\r\n',
    ],
)
def test_inventory_is_read_as_spreadsheets_write_it(read: Read, text: str) -> None:
    (circuit,) = read(text).circuits
    assert (circuit.label, circuit.volts, circuit.load.neutral_a) == ("fan", Volts.V120, 4.5)


def test_windows_1252_inventory_is_read(read: Read) -> None:
    (circuit,) = read("circuit;volts;load_a\nKüche;120;4,5\n".encode("cp1252")).circuits
    assert circuit.label == "Küche"


def test_slack_is_a_length_or_a_word(read: Read) -> None:
    circuits = read("circuit,volts,load_a,slack_in\na,120,1,short\nb,120,1,ok\nc,120,1,6 in\nd,120,1,\n").circuits
    assert [circuit.slack_in for circuit in circuits] == [0.0, math.inf, 6.0, None]


@pytest.mark.parametrize(("cell", "label", "is_checked"), [("", "", False), ("None", "", True), ("k", "k", True)])
def test_shared_neutral_tells_checked_from_not_checked(read: Read, cell: str, label: str, is_checked: bool) -> None:
    text = f"circuit,volts,load_a,shared_neutral\na,120,1,{cell}\nb,120,1,{cell}\n"
    circuit = read(text).circuits[0]
    assert (circuit.shared_neutral, circuit.is_neutral_checked) == (label, is_checked)


def test_labels_that_join_differ_in_more_than_case(read: Read) -> None:
    text = "circuit,volts,load_a,shared_neutral,tied,not_with\na,120,1,Pair,Tie,Never\nb,120,1,PAIR,tie,never\n"
    first, second = read(text).circuits
    assert (first.shared_neutral, first.tied, first.not_with) == ("Pair", "Tie", "Never")
    assert (second.shared_neutral, second.tied, second.not_with) == ("Pair", "Tie", "Never")


@pytest.mark.parametrize("role", ["backfed", "interlock", "surge"])
def test_devices_stay_where_they_are(read: Read, role: str) -> None:
    (circuit,) = read(f"circuit,space,volts,role\nd,2-4,240,{role}\n").circuits
    assert circuit.is_fixed


def test_three_hots_on_one_neutral_and_a_double_tap_are_no_file_errors(read: Read) -> None:
    text = "circuit,space,volts,load_a,shared_neutral\na,1,120,1,k\nb,1,120,1,k\nc,3,120,1,k\n"
    assert len(read(text).circuits) == 3


def test_unknown_columns_are_carried_and_told(read: Read) -> None:
    house = read("circuit,volts,load_a,brekaer_a,colour\nfan,120,4,20,red\n")
    assert house.circuits[0].cells["colour"] == "red"
    assert house.columns == ("circuit", "volts", "load_a", "brekaer_a", "colour")
    assert any("brekaer_a" in notice and "breaker_a?" in notice for notice in house.notices)
    assert any("colour" in notice and "?" not in notice for notice in house.notices)


def test_label_on_one_circuit_only_is_told(read: Read) -> None:
    notices = read("circuit,volts,load_a,tied\na,120,1,yoke\nb,120,1,yolk\n").notices
    assert [notice for notice in notices if "tied yoke" in notice and "joins nothing" in notice]


def test_circuit_that_turned_into_a_comment_is_told(read: Read) -> None:
    house = read("circuit,volts,load_a\n#1 bedroom,120,4\n# an old fan,120,4\n'#2 bedroom,120,5\n")
    assert [circuit.label for circuit in house.circuits] == ["#2 bedroom"]
    assert [notice[:6] for notice in house.notices if "comment" in notice] == ["Line 2"]


@pytest.mark.parametrize(
    "label",
    [
        pytest.param("[bold]Kitchen[/bold] [/red]", id="markup"),
        pytest.param("\N{ELECTRIC PLUG} Küche", id="emoji"),
        pytest.param("\x1b[31mred\x1b[0m", id="terminal control codes"),
        pytest.param("x" * 300, id="300 characters"),
        pytest.param("'tis Bob's \\ {0} %s", id="marks"),
        pytest.param("\x1fseparator\x1c", id="control characters at the ends"),
    ],
)
def test_labels_are_data_whatever_they_hold(read: Read, label: str) -> None:
    assert read(f"circuit,volts,load_a\n{label},120,4\n").circuits[0].label == label


@pytest.mark.parametrize(
    ("written", "label"), [("'=cmd|x", "=cmd|x"), ("=cmd|x", "=cmd|x"), ("'-5 C freezer", "-5 C freezer")]
)
def test_guard_against_formulas_is_no_part_of_the_label(read: Read, written: str, label: str) -> None:
    assert read(f"circuit,volts,load_a\n{written},120,4\n").circuits[0].label == label


@pytest.mark.parametrize(
    ("text", "problem", "line"),
    [
        pytest.param("circuit,volts\n", "no circuit follows the header", 1, id="header only"),
        pytest.param("# nothing\n\n#here\n", "nothing but comments", None, id="comments only"),
        pytest.param("fan,120,4\npump,240,5\n", "is no header", 1, id="data in the first line"),
        pytest.param("circuit,space\nfan,1\n", "the column volts is missing", 1, id="no volts"),
        pytest.param("volts,space\n120,1\n", "the column circuit is missing", 1, id="no labels"),
        pytest.param("circuit,volts,Volts\nfan,120,120\n", "stands twice", 1, id="duplicate header"),
        pytest.param("circuit,volts\nfan,120,4\n", "3 cells and the header 2", 2, id="first row too long"),
        pytest.param("circuit,volts,load_a\nfan,120\n", "2 cells and the header 3", 2, id="first row too short"),
    ],
)
def test_table_that_is_no_inventory_is_one_problem(
    problems_of: ProblemsOf, text: str, problem: str, line: int | None
) -> None:
    (only,) = problems_of(text)
    assert problem in only.problem
    assert only.line == line
    assert only.remedy


def test_missing_column_with_a_name_like_it_is_asked_about(problems_of: ProblemsOf) -> None:
    (only,) = problems_of("circuit,voltz,load_a\nfan,120,4\n")
    assert only.remedy == "rename voltz to volts"


@pytest.mark.parametrize(
    ("header", "row", "column", "problem"),
    [
        ("role", "lode", "role", "not a word known here"),
        ("use", "xyz", "use", "not a known use"),
        ("volts", "115", "volts", "not a nominal voltage"),
        ("volts", "", "volts", "is blank"),
        ("pf", "1.2", "pf", "not a power factor"),
        ("breaker_a", "0", "breaker_a", "is zero"),
        ("breaker_a", "nan", "breaker_a", "is not a number"),
        ("fixed", "maybe", "fixed", "neither yes nor no"),
        ("wire", "12/2", "wire", "not a conductor"),
        ("space", "5-Jul", "space", "not a space"),
        ("shared_neutral", "alone", "shared_neutral", "no other circuit has this label"),
    ],
)
def test_cell_that_cannot_be_read_is_told_with_its_place(
    problems_of: ProblemsOf, header: str, row: str, column: str, problem: str
) -> None:
    cells = {"circuit": "fan", "volts": "120", "load_a": "4"} | {header: row}
    (only,) = problems_of(",".join(cells) + "\n" + ",".join(cells.values()) + "\n")
    assert (only.line, only.column, only.value) == (2, column, row or None)
    assert problem in only.problem
    assert only.remedy


def test_blank_label_is_told(problems_of: ProblemsOf) -> None:
    (only,) = problems_of("circuit,volts,load_a\n ,120,4\n")
    assert (only.column, only.problem) == ("circuit", "is blank")


def test_label_used_twice_is_told_with_the_first_line(problems_of: ProblemsOf) -> None:
    (only,) = problems_of("circuit,volts,load_a\nFan,120,4\npump,120,4\nfan,120,4\n")
    assert (only.line, only.problem) == (4, "line 2 has this label already")


def test_shared_neutral_on_a_two_pole_circuit_is_told(problems_of: ProblemsOf, read: Read) -> None:
    text = "circuit,volts,load_a,shared_neutral\na,120,1,k\nb,120,1,k\nc,240,1,{}\n"
    (only,) = problems_of(text.format("k"))
    assert (only.line, only.problem) == (4, "a two-pole circuit has its own neutral")
    assert read(text.format("none"))


def test_nameplate_that_contradicts_itself_is_told(problems_of: ProblemsOf) -> None:
    (only,) = problems_of("circuit,volts,load_a,mca,mop\nac,240,10,30,20\n")
    assert "mop 20" in only.problem


@pytest.mark.parametrize(
    ("volts", "panel", "problem"),
    [
        ("208", None, "a 120/240 V supply has no 208 V"),
        ("240", WYE, "a 120/208 V supply has no 240 V"),
        ("120/240", WYE, "a 120/208 V supply has no 120/240 V"),
        ("208", IN_PHASE, "a 120 V supply has no 208 V"),
    ],
)
def test_voltage_that_the_supply_does_not_have_is_told(
    problems_of: ProblemsOf, volts: str, panel: str | None, problem: str
) -> None:
    (only,) = problems_of(f"circuit,volts,load_a\nac,{volts},10\n", panel)
    assert (only.column, only.problem) == ("volts", problem)


@pytest.mark.parametrize(("volts", "panel"), [("208", WYE), ("120/208", WYE), ("240", IN_PHASE), ("240", None)])
def test_voltage_that_can_be_found_on_the_supply_is_taken(read: Read, volts: str, panel: str | None) -> None:
    assert read(f"circuit,volts,load_a\nac,{volts},10\n", panel).circuits[0].volts == volts


def test_all_problems_of_both_files_come_at_once_in_order(problems_of: ProblemsOf) -> None:
    inventory = "circuit,space,volts,load_a,role\nfan,1,120,x,lode\nfan,2,99,4,\npump,5-7,240,10,\nwell,7,120,5,\n"
    problems = problems_of(inventory, "[panel]\nspaces = 40\nmain = 100\nbus_a = -1\n")
    places = [(Path(problem.file).name, problem.line, problem.column) for problem in problems]
    assert places == [
        ("inventory.csv", 2, "role"),
        ("inventory.csv", 2, "load_a"),
        ("inventory.csv", 3, "volts"),
        ("inventory.csv", 3, "circuit"),
        ("inventory.csv", 5, "space"),
        ("panel.toml", 3, "main"),
        ("panel.toml", 4, "bus_a"),
    ]


def test_inventory_is_held_against_what_of_the_panel_file_is_sound(problems_of: ProblemsOf) -> None:
    inventory = "circuit,space,volts,load_a\nfan,43,120,4\n"
    sound = problems_of(inventory, "[panel]\nspaces = 42\nmain_a = -1\n")
    in_doubt = problems_of(inventory, "[panel]\nspaces = 420\n")
    assert [problem.column for problem in sound] == ["space", "main_a"]
    assert [problem.column for problem in in_doubt] == ["spaces"]


def test_missing_files_are_told_together(tmp_path: Path) -> None:
    with pytest.raises(InputError) as caught:
        read_inventory(tmp_path / "none.csv", tmp_path / "none.toml")
    assert [Path(problem.file).name for problem in caught.value.problems] == ["none.csv", "none.toml"]


CELLS = st.one_of(
    st.sampled_from(
        ["120", "240", "120/240", "5-7", "7", "12a", "yes", "none", "spare", "20", "0.9", "short", "", "1500"]
    ),
    st.text(max_size=8),
)


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.lists(st.fixed_dictionaries({column.name: CELLS for column in COLUMNS}), min_size=1, max_size=4))
def test_any_cells_are_an_installation_or_an_input_error(tmp_path: Path, rows: list[dict[str, str]]) -> None:
    quoted = [",".join('"' + cell.replace('"', '""') + '"' for cell in row.values()) for row in rows]
    path = tmp_path / "any.csv"
    path.write_text("\n".join([",".join(rows[0]), *quoted]), encoding="utf-8", errors="replace")
    assert circuits_or_problems(path)


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.binary(max_size=200))
@example(b"circuit,volts,load_a\nfan,120,4\n")
def test_any_bytes_after_a_header_are_an_installation_or_an_input_error(tmp_path: Path, data: bytes) -> None:
    path = tmp_path / "any.csv"
    path.write_bytes(b"circuit,volts,load_a,space\n" + data)
    assert circuits_or_problems(path)


def circuits_or_problems(path: Path) -> tuple[object, ...]:
    try:
        return read_inventory(path).circuits
    except InputError as error:
        return error.problems


def test_a_row_that_does_not_fit_the_header_hides_no_other_problem(read: Read) -> None:
    text = (
        "circuit,space,volts,load_a,shared_neutral\n"
        "fan,1,120,-3,pair\n"
        "pump,3,120,4\n"
        "well,5,120,4,pair,x\n"
        "lamp,6,130,4,none\n"
    )
    with pytest.raises(InputError) as caught:
        read(text)
    told = [(problem.line, problem.column) for problem in caught.value.problems]
    # Nothing is said of the pair: its partner may be in a row that was not read.
    assert told == [(2, "load_a"), (3, None), (4, None), (5, "volts")]
