"""Files to begin with are read by the tool once they are filled in."""

from collections.abc import Callable

from balancer.errors import Problem
from balancer.files import blank_inventory_text, blank_panel_text
from balancer.files.columns import COLUMNS
from balancer.files.panel_file import PANEL_KEYS
from balancer.files.panel_spaces import SPACE_KEYS, SPACE_LIST
from balancer.files.supply_table import SUPPLY_KEYS
from balancer.panel import Installation, Panel, ordinary_spaces

Read = Callable[..., Installation]
ProblemsOf = Callable[..., tuple[Problem, ...]]


def test_blank_inventory_has_every_column_and_no_circuit(problems_of: ProblemsOf) -> None:
    header = blank_inventory_text().splitlines()[-1]
    assert header.split(",") == [column.name for column in COLUMNS]
    (only,) = problems_of(blank_inventory_text(), blank_panel_text())
    assert only.problem == "no circuit follows the header"


def test_examples_of_the_blank_inventory_are_circuits_once_they_are_no_comments(read: Read) -> None:
    *comments, header = blank_inventory_text().splitlines()
    examples = [comment.removeprefix("# ") for comment in comments if comment.count(",") == header.count(",")]
    house = read("\n".join([header, *examples]) + "\n", blank_panel_text())
    assert len(house.circuits) == 2


def test_filled_blank_inventory_raises_no_notice(read: Read) -> None:
    cells = {"circuit": "fan", "volts": "120", "load_a": "4"}
    row = ",".join(cells.get(column.name, "") for column in COLUMNS)
    assert read(f"{blank_inventory_text()}{row}\n", blank_panel_text()).notices == ()


def test_blank_panel_is_an_ordinary_one(read: Read) -> None:
    assert read("circuit,volts,load_a\nfan,120,4\n", blank_panel_text()).panel == Panel(spaces=ordinary_spaces(40))


def test_blank_panel_explains_every_key() -> None:
    lines = [line.lstrip("#").strip() for line in blank_panel_text().splitlines()]
    explained = [line.split(" = ")[0] for line in lines if " = " in line]
    wanted = [key for key in (*PANEL_KEYS, *SPACE_KEYS, *SUPPLY_KEYS) if key != SPACE_LIST]
    assert sorted(explained) == sorted(wanted)


def test_keys_of_the_blank_panel_are_read_once_they_are_no_comments(read: Read) -> None:
    head, _, rest = blank_panel_text().partition("# Where the spaces are laid out")
    _, _, tail = rest.partition("[supply]")
    text = uncommented(f"{head}[supply]{tail}").replace('"120/240" ', '"120/208" ')
    house = read("circuit,volts,load_a\nfan,120,4\n", text)
    assert house.panel.name == "Garage wall"
    assert house.panel.supply.length_ft == 70.0


def uncommented(text: str) -> str:
    return "\n".join(
        line.removeprefix("#") if line.startswith("#") and " = " in line else line for line in text.splitlines()
    )
