import csv
import io
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from balancer.errors import OptionError
from balancer.files import ordinary_panel, read_inventory, save_inventory
from balancer.files.export import inventory_text
from balancer.files.sheet import FORMULA_STARTS
from balancer.panel import Circuit, Installation, Load, Pole, PowerFactor, Role, Terminal, Volts, Wire, parse_landing

Read = Callable[..., Installation]

TINY = "circuit,space,volts,load_a\nfan,1,120,4\nrange,5-7,240,30\n"


def test_landings_as_left_are_written_and_everything_else_is_carried(read: Read) -> None:
    house = read("Circuit;Space;VOLTS;Load A;colour;breaker_a\nfan;1;120 V;4,5;a,b;20 A\nrange;5-7;240;;;50\n")
    text = inventory_text(house, {"fan": parse_landing("3"), "range": parse_landing("7-5")})
    assert text == ('Circuit,Space,VOLTS,Load A,colour,breaker_a\nfan,3,120 V,4.5,"a,b",20 A\nrange,7-5,240,,,50\n')


def test_space_column_is_added_where_the_inventory_had_none(read: Read) -> None:
    house = read("circuit,volts,load_a\nfan,120,4\n")
    assert inventory_text(house, {"fan": parse_landing("1")}) == "circuit,volts,load_a,space\nfan,120,4,1\n"


def test_circuit_without_a_place_is_left_to_be_placed(read: Read) -> None:
    assert "fan,,120,4" in inventory_text(read(TINY), {"range": parse_landing("5-7")})


def test_spares_taken_out_are_left_out_and_named_in_a_comment(read: Read, tmp_path: Path) -> None:
    house = read("circuit,space,volts,role,load_a\nfan,1,120,,4\n\x1bspare;=1,3,120,spare,\n")
    label = house.circuits[1].label
    save_inventory(tmp_path / "left.csv", house, {"fan": parse_landing("1")}, [label])
    again = read_inventory(tmp_path / "left.csv")
    assert [circuit.label for circuit in again.circuits] == ["fan"]
    last = (tmp_path / "left.csv").read_text().splitlines()[-1]
    assert last == '"# Spare breakers taken out of the panel:  spare;=1"'


def test_spreadsheet_runs_nothing(read: Read) -> None:
    hostile = ["=cmd|' /C calc'!A0", "+1", "-1", "@SUM(1)", "\uff1d1", "'=1", '"=1"', "=1\n=2"]
    rows = "\n".join(
        ",".join(['"' + f"{text}{number}".replace('"', '""') + '"', "120", "1", '"' + text.replace('"', '""') + '"'])
        for number, text in enumerate(hostile)
    )
    text = inventory_text(read(f"circuit,volts,load_a,=evil\n{rows}\n"), {})
    cells = [cell for row in csv.reader(io.StringIO(text, newline="")) for cell in row]
    assert len(cells) == 5 * (len(hostile) + 1)
    assert not [cell for cell in cells if cell.startswith((*FORMULA_STARTS, "\t", "\r"))]


def without_lines(installation: Installation) -> list[Circuit]:
    return [replace(circuit, line_number=0) for circuit in installation.circuits]


def quoted(text: str) -> str:
    return '"' + text.replace('"', '""') + '"'


TEXTS = st.text(st.characters(codec="utf-8", exclude_characters="\0"), max_size=12)
COLUMN_ORDERS = (
    ["circuit", "volts", "load_a", "space", "notes"],
    ["notes", "space", "circuit", "colour", "load_a", "volts"],
)
SPACES = ("1", "2", "3", "4a", "4b", "")


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)
@given(
    st.lists(st.tuples(TEXTS, TEXTS), min_size=1, max_size=len(SPACES)),
    st.sampled_from(COLUMN_ORDERS),
    st.permutations(SPACES),
    st.permutations(SPACES),
)
def test_saved_inventory_reads_back_as_the_same_circuits_landed_as_left(
    tmp_path: Path, texts: list[tuple[str, str]], columns: list[str], found: list[str], left: list[str]
) -> None:
    lines = [",".join(columns)]
    for number, (label, notes) in enumerate(texts):
        cells = {"circuit": f"{label}{number}", "volts": "120", "load_a": "4.5", "space": found[number], "notes": notes}
        lines.append(",".join(quoted(cells.get(column, notes)) for column in columns))
    path = tmp_path / "found.csv"
    # A first cell that begins with # would make the line a comment.
    path.write_text("\n".join(lines).replace('\n"#', "\n\"'#"), encoding="utf-8", newline="")
    house = read_inventory(path)
    places = {circuit.label: left[number] for number, circuit in enumerate(house.circuits)}
    as_left = {label: parse_landing(place) for label, place in places.items() if place}
    save_inventory(tmp_path / "left.csv", house, as_left, force=True)
    expected = [replace(circuit, landing=as_left.get(circuit.label, ())) for circuit in without_lines(house)]
    again = read_inventory(tmp_path / "left.csv")
    assert without_lines(again) == expected
    assert [circuit.cells.get("colour") for circuit in again.circuits] == [
        c.cells.get("colour") for c in house.circuits
    ]


FULL = (
    Circuit(label="fan", landing=(Terminal(1),), volts=Volts.V120, load=Load(neutral_a=0.1 + 0.2), effort=1.5),
    Circuit(
        label="shop",
        landing=(Terminal(7), Terminal(5)),
        volts=Volts.V120_240,
        role=Role.FEEDER,
        load=Load(
            line_a=9.5,
            line_pf=PowerFactor(0.9),
            neutral_a=6.5,
            neutral_pf=PowerFactor(0.9),
            neutral_pole=Pole.SECOND,
        ),
        breaker_a=60.0,
        breaker_type="standard",
        wire=Wire("2/0", "al"),
        is_neutral_checked=True,
    ),
    Circuit(
        label="range",
        volts=Volts.V120_240,
        load=Load(line_a=30.0, line_pf=PowerFactor(0.95, is_leading=True), neutral_a=2.5),
        slack_in=float("inf"),
        priority="must",
        use="cooking",
    ),
    Circuit(label="inlet", landing=(Terminal(2), Terminal(4)), volts=Volts.V240, role=Role.BACKFED, is_fixed=True),
    Circuit(
        label="fridge",
        volts=Volts.V120,
        use="refrigeration",
        breaker_a=20.0,
        load=Load(neutral_a=5.0, neutral_pf=PowerFactor(0.9), is_assumed=True, is_pf_assumed=True),
    ),
)


def test_circuits_that_came_from_no_file_are_written_in_full(tmp_path: Path) -> None:
    house = Installation(panel=ordinary_panel(8, 0), circuits=FULL)
    save_inventory(tmp_path / "left.csv", house, house.as_found)
    assert without_lines(read_inventory(tmp_path / "left.csv")) == list(FULL)


def test_plain_text_is_ascii_and_other_text_has_a_byte_order_mark(read: Read, tmp_path: Path) -> None:
    save_inventory(tmp_path / "plain.csv", read(TINY), {})
    save_inventory(tmp_path / "other.csv", read(TINY.replace("fan", "Küche")), {})
    assert (tmp_path / "plain.csv").read_bytes().startswith(b"circuit,")
    assert (tmp_path / "other.csv").read_bytes().startswith(b"\xef\xbb\xbfcircuit,")


def test_existing_file_is_replaced_only_by_force(read: Read, tmp_path: Path) -> None:
    target = tmp_path / "left.csv"
    target.write_text("mine")
    with pytest.raises(OptionError, match="exists already"):
        save_inventory(target, read(TINY), {})
    assert target.read_text() == "mine"
    save_inventory(target, read(TINY), {}, force=True)
    assert target.read_text().startswith("circuit,")


@pytest.mark.parametrize("name", ["inventory.csv", "./link.csv", "hard.csv"])
def test_inventory_itself_is_never_overwritten(read: Read, tmp_path: Path, name: str) -> None:
    house = read(TINY)
    (tmp_path / "link.csv").symlink_to(tmp_path / "inventory.csv")
    (tmp_path / "hard.csv").hardlink_to(tmp_path / "inventory.csv")
    with pytest.raises(OptionError, match="is one of the files read, which are never overwritten"):
        save_inventory(tmp_path / name, house, {}, force=True)
    assert (tmp_path / "inventory.csv").read_text() == TINY


@pytest.mark.parametrize("name", ["-", "left.xlsx", "LEFT.ODS"])
def test_what_is_no_csv_name_is_refused(read: Read, name: str) -> None:
    with pytest.raises(OptionError, match="no name for a CSV file"):
        save_inventory(name, read(TINY), {})


def test_directory_is_refused(read: Read, tmp_path: Path) -> None:
    with pytest.raises(OptionError, match="is no file"):
        save_inventory(tmp_path, read(TINY), {}, force=True)


def test_missing_directory_is_told(read: Read, tmp_path: Path) -> None:
    with pytest.raises(OptionError, match="cannot be written"):
        save_inventory(tmp_path / "nowhere" / "left.csv", read(TINY), {})


def test_failure_leaves_the_old_file_and_nothing_else(
    read: Read, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    house = read(TINY)
    target = tmp_path / "left.csv"
    target.write_text("mine")
    before = sorted(tmp_path.iterdir())

    def fail(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(Path, "replace", fail)
    with pytest.raises(OptionError, match="No space left on device"):
        save_inventory(target, house, {}, force=True)
    assert sorted(tmp_path.iterdir()) == before
    assert target.read_text() == "mine"


def test_link_is_written_through(read: Read, tmp_path: Path) -> None:
    (tmp_path / "real.csv").write_text("old")
    (tmp_path / "link.csv").symlink_to(tmp_path / "real.csv")
    save_inventory(tmp_path / "link.csv", read(TINY), {}, force=True)
    assert (tmp_path / "link.csv").is_symlink()
    assert (tmp_path / "real.csv").read_text().startswith("circuit,")
