"""The spaces of a panel file: laid out by their count, or each with its own column, row and leg."""

from __future__ import annotations

from collections.abc import Sequence

from balancer.files.toml_table import TomlTable
from balancer.panel import MAX_SPACES, Leg, Space, ordinary_spaces

SPACE_LIST = "space"
SPACE_KEYS = ("number", "column", "row", "leg")
ONLY_TWO_LEGS = "panels with three phases or a high leg are not taken: only panels with two hot legs are"

_LEAST_SPACES = 2
_COLUMNS = {"left": 0, "right": 1, "0": 0, "1": 1}


def read_spaces(table: TomlTable) -> tuple[Space, ...] | None:
    """Read the spaces of the table [panel]; None where what is wrong leaves them in doubt."""
    return _listed_spaces(table) if SPACE_LIST in table else _counted_spaces(table)


def _counted_spaces(table: TomlTable) -> tuple[Space, ...] | None:
    count = table.integer("spaces", _LEAST_SPACES, MAX_SPACES)
    if "spaces" not in table:
        table.report("spaces", "the number of spaces is missing", "write, say, spaces = 40")
    numbering = table.word("numbering", ("across", "down"))
    legs = None if count is None else _row_legs(table, (count + 1) // 2)
    if count is None or legs is None or (numbering is None and "numbering" in table):
        return None
    return ordinary_spaces(count, legs, numbered_down=numbering == "down")


def _row_legs(table: TomlTable, rows: int) -> str | None:
    """Legs of the rows from the top: a letter for each, or a pattern that repeats; "" for the ordinary ones."""
    if "row_legs" not in table:
        return ""
    text = table.text("row_legs")
    if text is None:
        return None
    text = text.upper().replace(" ", "")
    if "C" in text and set(text) <= set("ABC"):
        table.report("row_legs", "has a third leg", ONLY_TWO_LEGS)
    elif set(text) != set("AB"):
        table.report("row_legs", "is not a column of legs", "write A and B from the top, such as ABAB")
    elif len(text) > rows or (len(text) > len("AB") and rows % len(text)):
        remedy = "write a letter for every row, or a pattern that repeats evenly"
        table.report("row_legs", f"has {len(text)} letters for {rows} rows", remedy)
    else:
        return text
    return None


def _listed_spaces(table: TomlTable) -> tuple[Space, ...] | None:
    for key in ("row_legs", "numbering"):
        if key in table:
            table.report(key, "stands beside [[panel.space]], which says it already", "keep one of the two")
    entries = table.tables(SPACE_LIST)
    if entries is None:
        return None
    spaces = sorted(filter(None, map(_one_space, entries)), key=lambda space: space.number)
    stated = table.integer("spaces", 1, MAX_SPACES)
    if stated is not None and stated != len(entries):
        table.report("spaces", f"but [[panel.space]] stands {len(entries)} times", "correct it, or leave it out")
    is_sound = len(spaces) == len(entries) and _check_map(table, spaces)
    return tuple(spaces) if is_sound else None


def _one_space(table: TomlTable) -> Space | None:
    table.refuse_unknown(SPACE_KEYS)
    for key in SPACE_KEYS:
        if key not in table:
            table.report(key, "is missing", f"every space needs {', '.join(SPACE_KEYS)}")
    number, row = table.integer("number", 1, MAX_SPACES), table.integer("row", 1, MAX_SPACES)
    column, leg = _column(table), _leg(table)
    if number is None or row is None or column is None or leg is None:
        return None
    return Space(number, column, row, leg)


def _column(table: TomlTable) -> int | None:
    value = table.raw("column")
    if value is None:
        return None
    column = None if isinstance(value, bool) else _COLUMNS.get(str(value).casefold())
    if column is None:
        table.report("column", "is not a column", 'write "left" or "right"')
    return column


def _leg(table: TomlTable) -> Leg | None:
    if str(table.raw("leg")).strip().upper() == "C":
        table.report("leg", "is a third leg", ONLY_TWO_LEGS)
        return None
    word = table.word("leg", tuple(Leg))
    return None if word is None else Leg(word)


def _check_map(table: TomlTable, spaces: Sequence[Space]) -> bool:
    """Report spaces that no panel can have; gives whether there are none."""
    if not spaces:
        table.report(SPACE_LIST, "lists no space", "write [[panel.space]] before every space")
    elif len({space.number for space in spaces}) < len(spaces):
        table.report(SPACE_LIST, "two spaces have the same number", "give every space its own")
    elif len({(space.column, space.row) for space in spaces}) < len(spaces):
        table.report(SPACE_LIST, "two spaces are in the same column and row", "give every space its own place")
    elif {space.leg for space in spaces} != set(Leg):
        table.report(SPACE_LIST, "all spaces are on one leg", "write the leg of every space, A or B")
    else:
        return True
    return False
