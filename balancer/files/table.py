"""A sheet with a header: rows of cells by column name, with every column and cell accounted for."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass

from balancer.files.problems import Place, ProblemList
from balancer.files.sheet import Sheet, SheetRow

HeaderKey = Callable[[str], str]

_TRIMMED_FROM_LINE = 17
"""Spreadsheets may drop the blank ends of rows in blocks, never in the first sixteen lines (from memory)."""


@dataclass(frozen=True)
class TableRow:
    """Cells of one row by the header's names as written."""

    line: int
    cells: Mapping[str, str]


@dataclass(frozen=True)
class Table:
    """A header and its rows."""

    file: str
    header_line: int
    columns: tuple[str, ...]
    """Header as written, in order."""
    rows: tuple[TableRow, ...]
    has_decimal_comma: bool
    comments: tuple[SheetRow, ...]
    misfits: frozenset[int] = frozenset()
    """Lines of the rows that have been reported for having more or fewer cells than the header."""

    has_sound_header: bool = True
    """Every column has a name of its own."""

    @property
    def fitting_rows(self) -> tuple[TableRow, ...]:
        """Rows whose cells stand under the right names."""
        return tuple(row for row in self.rows if row.line not in self.misfits)


def header_key(name: str) -> str:
    """Fold a column's name: case, spaces, underscores and hyphens tell no two columns apart."""
    return re.sub(r"[\s_-]+", "", name.casefold())


def build_table(sheet: Sheet, problems: ProblemList, key: HeaderKey = header_key) -> Table:
    """Put names to the cells of a sheet; what does not fit goes to `problems`.

    The sheet has at least one row: the header.
    """
    header, *body = sheet.rows
    width = _width(header)
    names = header.cells[:width]
    has_sound_header = _is_sound(problems, header.line, names, key)
    shapes = [_Shape(row, width) for row in body]
    rows, misfits = [], []
    for index, shape in enumerate(shapes):
        neighbours = shapes[max(0, index - 1) : index] + shapes[index + 1 : index + 2]
        if not _fits(problems, shape, neighbours):
            misfits.append(shape.row.line)
        padded = shape.row.cells + ("",) * width
        rows.append(TableRow(shape.row.line, dict(zip(names, padded, strict=False))))
    return Table(
        file=sheet.file,
        header_line=header.line,
        columns=names,
        rows=tuple(rows),
        has_decimal_comma=sheet.has_decimal_comma,
        comments=sheet.comments,
        misfits=frozenset(misfits),
        has_sound_header=has_sound_header,
    )


def _width(header: SheetRow) -> int:
    """Count the header's cells without the blank ones at its end."""
    filled = [index for index, cell in enumerate(header.cells, 1) if cell]
    return filled[-1]


def _is_sound(problems: ProblemList, line: int, names: tuple[str, ...], key: HeaderKey) -> bool:
    """Report columns without a name of their own; gives whether there are none."""
    seen: dict[str, str] = {}
    for number, name in enumerate(names, 1):
        if not name:
            problems.add(Place(line), f"column {number} has no name", "name it, or delete the column")
        elif key(name) in seen:
            remedy = "keep one of the two columns, or rename one"
            problems.add(Place(line, name), f"this column stands twice (also as {seen[key(name)]})", remedy)
        else:
            seen[key(name)] = name
    return len(seen) == len(names)


@dataclass(frozen=True)
class _Shape:
    """How far a row's cells fit the header."""

    row: SheetRow
    width: int

    @property
    def surplus(self) -> Iterator[str]:
        return (cell for cell in self.row.cells[self.width :] if cell)

    @property
    def lacking(self) -> int:
        return max(0, self.width - len(self.row.cells))


def _fits(problems: ProblemList, shape: _Shape, neighbours: list[_Shape]) -> bool:
    """Report a row with more or fewer cells than the header; gives whether it has as many."""
    cells = f"this row has {len(shape.row.cells)} cells and the header {shape.width}"
    extra = next(shape.surplus, None)
    if extra is not None:
        remedy = "look for a separator too many; put a text that holds one into quotation marks"
        problems.add(Place(shape.row.line, value=extra), cells, remedy)
        return False
    is_trimmed = shape.row.line >= _TRIMMED_FROM_LINE and any(n.lacking == shape.lacking for n in neighbours)
    if shape.lacking and not is_trimmed:
        problems.add(Place(shape.row.line), cells, "look for a missing separator; write one for every blank cell too")
        return False
    return True
