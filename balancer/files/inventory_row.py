"""One row of the inventory: its cells read column by column, its problems collected."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar, cast

from balancer.files.columns import CIRCUIT, COLUMNS, Column
from balancer.files.problems import Place, ProblemList
from balancer.files.quantities import Cell, CellError
from balancer.files.table import Table, TableRow, header_key

Value = TypeVar("Value")


class InventoryRow:
    """Typed values of one row.

    Every cell is read once when the row is made; one that cannot be read is reported and from then on counts as faulty,
    so that no check that rests on it reports the same mistake again.
    """

    def __init__(self, table: Table, row: TableRow, problems: ProblemList) -> None:
        self.line = row.line
        self.cells = dict(row.cells)
        self._problems = problems
        self._headers = {header_key(name): name for name in table.columns if name}
        self._faulty: set[str] = set()
        self._values: dict[str, Any] = {}
        for column in COLUMNS:
            self._read(column, has_decimal_comma=table.has_decimal_comma)

    def _read(self, column: Column[Any], *, has_decimal_comma: bool) -> None:
        text = self.text(column)
        if not text:
            if column.is_required:
                self.report(column, "is blank", f"write the {column.meaning}")
            return
        try:
            self._values[column.name] = column.read(Cell(text, has_decimal_comma))
        except CellError as error:
            self.report(column, error.problem, error.remedy)

    @property
    def label(self) -> str:
        """Label of the circuit; "" where the cell is blank."""
        return self.text(CIRCUIT)

    def text(self, column: Column[Any]) -> str:
        """Text of a cell; "" where it is blank or the column is missing."""
        return self.cells.get(self._header(column), "")

    def get(self, column: Column[Value]) -> Value | None:
        """Value of a cell; None where it is blank or cannot be read."""
        return cast("Value | None", self._values.get(column.name))

    def required(self, column: Column[Value]) -> Value:
        """Value of a cell that every row has, once no problem was found."""
        return cast("Value", self._values[column.name])

    def has(self, *columns: Column[Any]) -> bool:
        """Whether any of the cells is filled, readable or not."""
        return any(self.text(column) for column in columns)

    def is_faulty(self, *columns: Column[Any]) -> bool:
        """Whether any of the cells has been reported."""
        return any(column.name in self._faulty for column in columns)

    def report(self, column: Column[Any], problem: str, remedy: str) -> None:
        """Note what is wrong with a cell."""
        self._faulty.add(column.name)
        place = Place(self.line, self._header(column), self.text(column) or None)
        self._problems.add(place, problem, remedy)

    def refuse_beside(self, column: Column[Any], others: tuple[Column[Any], ...], why: Callable[[str], str]) -> None:
        """Report a filled cell for each filled one that it contradicts; `why` gets the other column's name."""
        if not self.has(column):
            return
        for other in others:
            if self.has(other):
                self.report(column, why(other.name), "keep one of the two and clear the other")

    def _header(self, column: Column[Any]) -> str:
        return self._headers.get(header_key(column.name), column.name)
