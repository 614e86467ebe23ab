"""The panel file: what stands on the wall and what feeds it, in TOML."""

from __future__ import annotations

from dataclasses import replace

from balancer.errors import InputError, Problem
from balancer.files.panel_spaces import SPACE_LIST, read_spaces
from balancer.files.problems import ProblemList
from balancer.files.source import FilePath
from balancer.files.supply_table import read_supply
from balancer.files.toml_source import read_toml
from balancer.files.toml_table import TomlTable
from balancer.panel import MAX_SPACES, Panel, Supply, ordinary_spaces

PANEL_KEYS = (
    *("name", "spaces", "main_a", "bus_a", "feed", "tandem_spaces", "plug_on_neutral", "bolt_on", "reserved"),
    *("row_legs", "numbering", "crossing_in", "stab_a", SPACE_LIST),
)

_MOST_A = 2000.0
_MOST_CROSSING_IN = 120.0

_COMMON_SIZES = (2, 4, 6, 8, 12, 16, 20, 24, 30, 32, 40, 42, 54, 60, 66, 72, MAX_SPACES)
"""Numbers of spaces that panels are made with (common practice, from memory)."""

_SPACES_TO_CHOOSE = 4


def read_panel_file(path: FilePath) -> Panel:
    """Read a panel file.

    Raises
    ------
    InputError
        With everything that is wrong in it.
    """
    panel, problems = panel_with_problems(path)
    if problems or panel is None:
        raise InputError(problems)
    return panel


def panel_with_problems(path: FilePath) -> tuple[Panel | None, tuple[Problem, ...]]:
    """Read a panel file as far as it goes, so that the inventory can be held against it all the same.

    The panel is None where its spaces or its supply are in doubt; then there are problems.
    """
    try:
        source = read_toml(path)
    except InputError as error:
        return None, error.problems
    problems = ProblemList(source.file)
    panel = _read_panel(TomlTable.root(source, problems))
    return panel, problems.in_line_order


def ordinary_panel(highest_space: int, poles: int) -> Panel:
    """Make up the panel of an inventory without a panel file: 120/240 V, numbered across, rows alternating.

    It ends with the row of the highest space used; where nothing is landed it is the smallest common size that holds
    all poles and leaves a choice: a row to spare on each leg.
    """
    count = highest_space + highest_space % 2
    if not count:
        count = next((size for size in _COMMON_SIZES if size >= poles + _SPACES_TO_CHOOSE), MAX_SPACES)
    return Panel(spaces=ordinary_spaces(count), is_assumed=True)


def _read_panel(root: TomlTable) -> Panel | None:
    root.refuse_unknown(("panel", "supply"))
    if "panel" not in root:
        root.report("panel", "the table [panel] is missing", "begin with a line [panel] and, say, spaces = 40 below it")
    panel_table, supply_table = root.table("panel"), root.table("supply")
    panel = None if panel_table is None else _read_panel_table(panel_table)
    supply = Supply() if supply_table is None else read_supply(supply_table)
    return None if panel is None or supply is None else replace(panel, supply=supply)


def _read_panel_table(table: TomlTable) -> Panel | None:
    table.refuse_unknown(PANEL_KEYS)
    spaces = read_spaces(table)
    numbers = range(1, MAX_SPACES + 1) if spaces is None else [space.number for space in spaces]
    crossing_in = table.number("crossing_in", _MOST_CROSSING_IN, is_zero_allowed=True)
    panel = Panel(
        spaces=spaces or (),
        name=table.text("name") or "",
        main_a=table.number("main_a", _MOST_A),
        bus_a=table.number("bus_a", _MOST_A),
        feed=table.word("feed", ("top", "bottom")) or "top",
        tandem_spaces=table.spaces("tandem_spaces", numbers),
        plug_on_neutral=table.spaces("plug_on_neutral", numbers) or frozenset(),
        bolt_on=table.spaces("bolt_on", numbers) or frozenset(),
        reserved=table.spaces("reserved", numbers) or frozenset(),
        crossing_in=Panel.crossing_in if crossing_in is None else crossing_in,
        stab_a=table.number("stab_a", _MOST_A),
    )
    return None if spaces is None else panel
