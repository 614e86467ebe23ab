"""Reads a circuit inventory, and the panel file beside it, into an installation."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from balancer.errors import InputError
from balancer.files.cells import read_volts
from balancer.files.circuit_row import CircuitBuilder, check_row, read_row_load
from balancer.files.columns import COLUMNS, SPACE, VOLTS
from balancer.files.group_checks import check_shared_neutrals, check_unique_labels, lone_label_notices
from balancer.files.inventory_row import InventoryRow
from balancer.files.landing_checks import check_collisions, check_place
from balancer.files.loads import LOAD_COLUMNS
from balancer.files.panel_file import ordinary_panel, panel_with_problems
from balancer.files.problems import Place, ProblemList
from balancer.files.quantities import Cell, CellError
from balancer.files.sheet import COMMENT, Sheet
from balancer.files.sheet_file import read_sheet
from balancer.files.source import FilePath, file_name
from balancer.files.table import Table, build_table, header_key
from balancer.files.words import did_you_mean, nearest_word
from balancer.panel import Circuit, Installation, Panel

_BY_KEY = {header_key(column.name): column for column in COLUMNS}


def read_inventory(path: FilePath, panel_path: FilePath | None = None) -> Installation:
    """Read an inventory (CSV, .xlsx, or ``-`` for standard input) and, where given, its panel file.

    Raises
    ------
    InputError
        With every problem of both files.
    """
    panel, panel_problems = (None, ()) if panel_path is None else panel_with_problems(panel_path)
    try:
        inventory = _read_rows(path)
        panel = panel if panel is not None or panel_path is not None else _assumed_panel(inventory.rows)
        _check_rows(inventory.rows, panel)
        check_shared_neutrals(inventory.rows, are_all=not inventory.table.misfits)
        loads = [read_row_load(row, panel) for row in inventory.rows]
        inventory.problems.raise_if_any()
    except InputError as error:
        raise InputError((*error.problems, *panel_problems)) from None
    if panel is None or panel_problems:
        raise InputError(panel_problems)
    builder = CircuitBuilder(inventory.rows)
    circuits = tuple(builder.build(row, load) for row, load in zip(inventory.rows, loads, strict=True))
    return Installation(
        panel=panel,
        circuits=circuits,
        inventory_file=file_name(path),
        columns=tuple(name for name in inventory.table.columns if name),
        notices=(*_notices(inventory, panel), *_load_notices(inventory.rows, circuits)),
    )


@dataclass(frozen=True)
class _Inventory:
    """The table with its rows read, before anybody has looked at them together."""

    table: Table
    rows: tuple[InventoryRow, ...]
    problems: ProblemList


def _read_rows(path: FilePath) -> _Inventory:
    sheet = read_sheet(path)
    problems = ProblemList(sheet.file)
    _check_header(sheet, problems)
    problems.raise_if_any()
    table = build_table(sheet, problems)
    if not table.has_sound_header:
        problems.raise_if_any()
    if not table.rows:
        problems.add(Place(table.header_line), "no circuit follows the header", "write a line for every circuit")
    return _Inventory(table, tuple(InventoryRow(table, row, problems) for row in table.fitting_rows), problems)


def _check_header(sheet: Sheet, problems: ProblemList) -> None:
    if not sheet.rows:
        problems.add(Place(), "holds nothing but comments and blank lines", "write a header line and circuits below")
        return
    header = sheet.rows[0]
    keys = [header_key(name) for name in header.cells]
    if not any(key in _BY_KEY for key in keys):
        remedy = "begin with a line of column names: circuit, space, volts, load_a, breaker_a, ..."
        problems.add(Place(header.line), "the first line is no header: it names no known column", remedy)
        return
    for column in COLUMNS:
        if column.is_required and header_key(column.name) not in keys:
            unknown = [name for name in header.cells if name and header_key(name) not in _BY_KEY]
            nearest = nearest_word(column.name, unknown)
            remedy = (
                f"rename {nearest} to {column.name}" if nearest else f"add a column {column.name}: {column.meaning}"
            )
            problems.add(Place(header.line), f"the column {column.name} is missing", remedy)


def _assumed_panel(rows: Sequence[InventoryRow]) -> Panel:
    spaces = [terminal.space for row in rows for terminal in row.get(SPACE) or ()]
    poles = sum(volts.poles for row in rows if (volts := row.get(VOLTS)) is not None)
    return ordinary_panel(max(spaces, default=0), poles)


def _check_rows(rows: Sequence[InventoryRow], panel: Panel | None) -> None:
    check_unique_labels(rows)
    for row in rows:
        check_row(row, panel)
        if panel is not None:
            check_place(row, panel)
    check_collisions(rows)


def _notices(inventory: _Inventory, panel: Panel) -> tuple[str, ...]:
    size = len(panel.spaces)
    panel_notice = f"No panel file: taken to be a 120/240 V panel of {size} spaces whose rows alternate legs."
    return (
        *_unknown_column_notices(inventory.table),
        *_left_out_notices(inventory.table),
        *lone_label_notices(inventory.rows),
        *((panel_notice,) if panel.is_assumed else ()),
    )


def _unknown_column_notices(table: Table) -> tuple[str, ...]:
    known = [column.name for column in COLUMNS]
    notices = []
    for name in table.columns:
        if not name or header_key(name) in _BY_KEY:
            continue
        hint = f" {did_you_mean(name, known).capitalize()}" if nearest_word(name, known) else ""
        notices.append(f"The column {name} is unknown and only carried along.{hint}")
    return tuple(notices)


def _left_out_notices(table: Table) -> tuple[str, ...]:
    """Tell of comments that may be circuits: a label such as #1 at the start of a line makes the line a comment."""
    index = next(i for i, name in enumerate(table.columns) if header_key(name) == header_key(VOLTS.name))
    notices = []
    for comment in table.comments:
        text = comment.cells[0]
        if (
            len(comment.cells) <= index
            or text[1:2].strip(f" {COMMENT}") == ""
            or not _reads_as_volts(comment.cells[index])
        ):
            continue
        notices.append(
            f"Line {comment.line} begins with # and is left out as a comment, though it reads like a circuit ({text}). "
            "Put an apostrophe before the # to keep it."
        )
    return tuple(notices)


def _reads_as_volts(text: str) -> bool:
    try:
        read_volts(Cell(text))
    except CellError:
        return False
    return True


def _load_notices(rows: Sequence[InventoryRow], circuits: Sequence[Circuit]) -> tuple[str, ...]:
    assumed = [circuit.label for circuit in circuits if circuit.load.is_assumed]
    pairs = zip(rows, circuits, strict=True)
    idle = [circuit.label for row, circuit in pairs if not circuit.carries_load and row.has(*LOAD_COLUMNS)]
    notices = []
    if assumed:
        notices.append(f"Loads assumed by use and breaker, none being given: {', '.join(assumed)}.")
    if idle:
        notices.append(f"Loads left aside, since spares and devices carry none when planning: {', '.join(idle)}.")
    return tuple(notices)
