"""The scenario file: states of the panel as shares of every circuit's full load."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from balancer.electrical.scenario_sets import share_scenarios
from balancer.electrical.scenarios import FloatArray, Scenarios
from balancer.files.problems import Place, ProblemList
from balancer.files.quantities import Cell, CellError, read_number, refuse
from balancer.files.sheet_file import read_sheet
from balancer.files.source import FilePath
from balancer.files.table import Table, TableRow, build_table
from balancer.files.words import nearest_word
from balancer.panel import Installation

SCENARIO_COLUMN = "scenario"
MOST_SHARE = 1.5
"""Highest share of full load taken for meant."""


def read_scenarios(path: FilePath, installation: Installation) -> Scenarios:
    """Read a scenario file (CSV, .xlsx, or ``-`` for standard input).

    Raises
    ------
    InputError
        With everything that is wrong in it.
    """
    sheet = read_sheet(path)
    problems = ProblemList(sheet.file)
    if not sheet.rows:
        problems.add(Place(), "holds nothing but comments and blank lines", "write a header line and scenarios below")
    problems.raise_if_any()
    table = build_table(sheet, problems, key=str.casefold)
    headers = _match_columns(table, installation, problems)
    if any(problem.line == table.header_line for problem in problems.in_line_order):
        problems.raise_if_any()
    reader = _ShareReader(table, installation, headers, problems)
    names, shares = reader.names(), reader.shares()
    problems.raise_if_any()
    scenarios = share_scenarios(installation, names, shares)
    return replace(scenarios, notes=(*scenarios.notes, *_never_together_notes(installation, names, shares)))


def _match_columns(table: Table, installation: Installation, problems: ProblemList) -> dict[str, str]:
    """Give the header's name for every circuit that has a column; report what is missing or unknown."""
    by_folded = {name.casefold(): name for name in table.columns if name}
    place = Place(table.header_line)
    if SCENARIO_COLUMN not in by_folded:
        problems.add(place, "the column scenario is missing", "add a column scenario with a name for every line")
    labels = [circuit.label for circuit in installation.circuits]
    folded_labels = [SCENARIO_COLUMN, *(label.casefold() for label in labels)]
    for folded, name in by_folded.items():
        if folded not in folded_labels:
            nearest = nearest_word(name, [SCENARIO_COLUMN, *labels])
            remedy = (
                f"did you mean {nearest}?" if nearest else "write a label as the inventory does, or delete the column"
            )
            problems.add(Place(table.header_line, name), "no circuit of the inventory has this label", remedy)
    for circuit in installation.circuits:
        if circuit.label.casefold() == SCENARIO_COLUMN:
            problem = f"the circuit {circuit.label} is called like the column of the scenarios' names"
            problems.add(place, problem, "give the circuit another label in the inventory")
        elif circuit.carries_load and circuit.label.casefold() not in by_folded:
            remedy = "add a column for it, with 0 where it does not run"
            problems.add(place, f"the circuit {circuit.label} has no column", remedy)
    return {label: by_folded[label.casefold()] for label in labels if label.casefold() in by_folded}


@dataclass(frozen=True)
class _ShareReader:
    """Reads names and shares row by row; what is wrong goes to `problems`."""

    table: Table
    installation: Installation
    headers: dict[str, str]
    problems: ProblemList

    def names(self) -> tuple[str, ...]:
        header = next(name for name in self.table.columns if name.casefold() == SCENARIO_COLUMN)
        first_lines: dict[str, int] = {}
        if not self.table.rows:
            remedy = "write a line for every scenario"
            self.problems.add(Place(self.table.header_line), "no scenario follows the header", remedy)
        for row in self.table.fitting_rows:
            name = row.cells[header]
            line = first_lines.setdefault(name.casefold(), row.line)
            if not name:
                self.problems.add(Place(row.line, header), "is blank", "give the scenario a name")
            elif line != row.line:
                remedy = "give every scenario a name of its own"
                self.problems.add(Place(row.line, header, name), f"line {line} has this name already", remedy)
        return tuple(row.cells[header] for row in self.table.fitting_rows)

    def shares(self) -> FloatArray:
        shares = [
            [self._share(row, circuit.label) for circuit in self.installation.circuits]
            for row in self.table.fitting_rows
        ]
        return np.array(shares, dtype=float).reshape(len(shares), len(self.installation.circuits))

    def _share(self, row: TableRow, label: str) -> float:
        """Share of a circuit; 0 where it carries no load or has been reported."""
        if label not in self.headers or not self.installation.by_label[label].carries_load:
            return 0.0
        header = self.headers[label]
        text = row.cells[header]
        try:
            return read_share(Cell(text, self.table.has_decimal_comma))
        except CellError as error:
            self.problems.add(Place(row.line, header, text or None), error.problem, error.remedy)
            return 0.0


def read_share(cell: Cell) -> float:
    """Read a share of full load: ``0.5`` or ``50%``.

    Raises
    ------
    CellError
        When it is blank, no number, or above `MOST_SHARE`.
    """
    if not cell.text:
        refuse("is blank", "write 0 where the circuit does not run")
    number, unit = read_number(cell)
    if unit not in ("", "%"):
        refuse("is not a share of full load", "write a share such as 0.5, or 50%")
    share = number / 100.0 if unit else number
    if share > MOST_SHARE:
        remedy = f"write a share of full load up to {MOST_SHARE:g}: a percentage needs its % sign, amps are not taken"
        refuse("is too high for a share of full load", remedy)
    return share


def _never_together_notes(installation: Installation, names: Sequence[str], shares: FloatArray) -> tuple[str, ...]:
    """Say where a scenario runs loads together that the inventory says never do."""
    groups: dict[str, list[int]] = {}
    for column, circuit in enumerate(installation.circuits):
        if circuit.not_with and circuit.carries_load:
            groups.setdefault(circuit.not_with.casefold(), []).append(column)
    notes = []
    for row, name in enumerate(names):
        for columns in groups.values():
            running = [installation.circuits[column].label for column in columns if shares[row, column] > 0.0]
            if len(running) > 1:
                notes.append(f"The scenario {name} runs {' and '.join(running)} together, which not_with rules out.")
    return tuple(notes)
