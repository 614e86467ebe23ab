"""Which column of a log is which circuit, in which unit, and on which of its poles."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from enum import StrEnum

from balancer.files.problems import Place, ProblemList
from balancer.files.readings_text import LogText
from balancer.files.sheet_file import read_sheet
from balancer.files.source import FilePath
from balancer.files.table import TableRow, build_table, header_key
from balancer.files.words import did_you_mean, nearest_word
from balancer.panel import Circuit, Installation, Pole, SupplySystem


class ReadingUnit(StrEnum):
    """What a column's figures count."""

    AMPS = "A"
    WATTS = "W"


@dataclass(frozen=True)
class LogColumn:
    """A column with a circuit's readings; `pole` None: of the whole circuit."""

    index: int
    name: str
    circuit: int
    unit: ReadingUnit
    pole: Pole | None


@dataclass(frozen=True)
class MatchedColumns:
    """The columns to read, by circuit, and the names of those that are not.

    `strangers` come with the label that was perhaps meant; `devices` belong to spares and devices, which carry no load
    when planning.
    """

    columns: tuple[LogColumn, ...]
    strangers: tuple[tuple[str, str | None], ...]
    devices: tuple[str, ...]
    absent: tuple[str, ...]
    """Labels of loads without a column."""


@dataclass(frozen=True)
class _Meant:
    """What a header says: a label, perhaps a unit, perhaps a pole."""

    label: str
    unit: ReadingUnit | None
    pole: Pole | None


_UNIT_SUFFIX = re.compile(r"(?P<label>.+?)(?:_(?P<bare>[aw])|\s*[(\[]\s*(?P<boxed>[aw])\s*[)\]])", re.IGNORECASE)
_POLE_SUFFIX = re.compile(r"(?P<label>.+?)[_\s](?P<pole>first|second)", re.IGNORECASE)
_NO_UNIT = "end its name with _a or _w, or say --unit A or --unit W for all columns"


def match_columns(
    log: LogText, installation: Installation, unit: ReadingUnit | None, mapping: FilePath | None
) -> MatchedColumns:
    """Find the circuit of every column behind the timestamps.

    Raises
    ------
    InputError
        When a unit is missing, two columns claim one circuit, or no column belongs to a load.
    """
    problems = ProblemList(log.file)
    matcher = _Matcher(installation, unit, {} if mapping is None else _read_mapping(mapping, log, installation))
    columns, strangers, devices = [], [], []
    for index, name in enumerate(log.header[1:], 1):
        meant = matcher.meaning(name)
        circuit = matcher.circuit(meant.label) if meant else None
        if meant is None or circuit is None:
            strangers += [(name, matcher.nearest(name))] if name and not matcher.is_left_out(name) else []
        elif not installation.circuits[circuit].carries_load:
            devices.append(name)
        elif meant.unit is None:
            problems.add(Place(log.header_line, name), "does not say whether it is amps or watts", _NO_UNIT)
        else:
            columns.append(LogColumn(index, name, circuit, meant.unit, meant.pole))
    _report_shares(problems, log, installation, columns)
    problems.raise_if_any()
    loads = {index: each.label for index, each in enumerate(installation.circuits) if each.carries_load}
    if not columns:
        remedy = f"name columns after circuits, such as {next(iter(loads.values()), 'heater')}_a, or map them"
        problems.add(Place(log.header_line), "no column belongs to a load of the inventory", remedy)
    problems.raise_if_any()
    columns.sort(key=lambda column: (column.circuit, column.pole or ""))
    used = {column.circuit for column in columns}
    absent = tuple(label for index, label in loads.items() if index not in used)
    return MatchedColumns(tuple(columns), tuple(strangers), tuple(devices), absent)


@dataclass(frozen=True)
class _Matcher:
    installation: Installation
    unit: ReadingUnit | None
    mapped: Mapping[str, _Meant | None]

    def circuit(self, label: str) -> int | None:
        """Find a circuit by its label, whatever the case; failing that, whatever stands between its words."""
        labels = [circuit.label for circuit in self.installation.circuits]
        for key in (str.casefold, header_key):
            found = [index for index, each in enumerate(labels) if key(each) == key(label)]
            if len(found) == 1:
                return found[0]
        return None

    def meaning(self, name: str) -> _Meant | None:
        """Read a header; a label that itself ends like a unit or a pole goes before the suffix."""
        if name.casefold() in self.mapped:
            meant = self.mapped[name.casefold()]
            return meant and _Meant(meant.label, meant.unit or self._unit_of(name), meant.pole)
        return next((meant for meant in self._readings_of(name) if self.circuit(meant.label) is not None), None)

    def is_left_out(self, name: str) -> bool:
        """Whether the mapping file says that the column is none of a circuit's."""
        return name.casefold() in self.mapped

    def nearest(self, name: str) -> str | None:
        bare = _UNIT_SUFFIX.fullmatch(name)
        return nearest_word(bare["label"] if bare else name, [circuit.label for circuit in self.installation.circuits])

    def _unit_of(self, name: str) -> ReadingUnit | None:
        match = _UNIT_SUFFIX.fullmatch(name)
        return ReadingUnit((match["bare"] or match["boxed"]).upper()) if match else self.unit

    def _readings_of(self, name: str) -> list[_Meant]:
        readings = [_Meant(name, self.unit, None)]
        match = _UNIT_SUFFIX.fullmatch(name)
        if match:
            readings.append(_Meant(match["label"], self._unit_of(name), None))
        for whole in tuple(readings):
            pole = _POLE_SUFFIX.fullmatch(whole.label)
            if pole:
                readings.append(_Meant(pole["label"], whole.unit, Pole(pole["pole"].casefold())))
        return readings


def _report_shares(
    problems: ProblemList, log: LogText, installation: Installation, columns: Sequence[LogColumn]
) -> None:
    """Report circuits that two columns claim, and poles that stand alone."""
    by_circuit: dict[int, list[LogColumn]] = {}
    for column in columns:
        by_circuit.setdefault(column.circuit, []).append(column)
    for index, claims in by_circuit.items():
        circuit, place = installation.circuits[index], Place(log.header_line, claims[-1].name)
        poles = sorted(column.pole or "" for column in claims)
        if any(poles) and circuit.poles == 1:
            problems.add(place, f"{circuit.label} is a 120 V circuit with one pole", "leave out _first and _second")
        elif any(poles) and installation.panel.supply.system is SupplySystem.IN_PHASE:
            remedy = "write one 120 V row for each pole, with one label under tied"
            problems.add(place, "legs in phase have no voltage between them, so its poles are two circuits", remedy)
        elif poles not in ([""], [Pole.FIRST, Pole.SECOND]):
            problems.add(place, _claim(circuit, claims), "give one column, or one each for _first and _second")
        elif len({column.unit for column in claims}) > 1:
            problems.add(place, f"the two poles of {circuit.label} are in different units", "give both in one unit")


def _claim(circuit: Circuit, claims: Sequence[LogColumn]) -> str:
    if len(claims) == 1:
        return f"only one pole of {circuit.label} has a column"
    return f"{circuit.label} has these columns: {', '.join(column.name for column in claims)}"


def _read_mapping(path: FilePath, log: LogText, installation: Installation) -> dict[str, _Meant | None]:
    """Read the mapping file: ``column,circuit`` and perhaps ``unit``; a blank circuit leaves the column out."""
    sheet = read_sheet(path)
    problems = ProblemList(sheet.file)
    if not sheet.rows:
        problems.add(Place(), "holds nothing but comments and blank lines", "write column,circuit and lines below")
    problems.raise_if_any()
    table = build_table(sheet, problems, key=str.casefold)
    names = {name.casefold(): name for name in table.columns}
    for needed in ("column", "circuit"):
        if needed not in names:
            problems.add(Place(table.header_line), f"the column {needed} is missing", "write column,circuit on top")
    problems.raise_if_any()
    reader = _MappingReader(problems, names, _Matcher(installation, None, {}))
    headers = {name.casefold() for name in log.header[1:]}
    found: dict[str, _Meant | None] = {}
    for row in table.rows:
        header = row.cells[names["column"]]
        place = Place(row.line, names["column"], header)
        if header.casefold() not in headers:
            problems.add(place, "no column of the log has this name", "copy it from the log")
        elif header.casefold() in found:
            problems.add(place, "stands twice", "keep one of the two lines")
        found[header.casefold()] = reader.meaning(row)
    problems.raise_if_any()
    return found


@dataclass(frozen=True)
class _MappingReader:
    """Reads what the lines of a mapping file say; `names` are its columns as written, by their folded names."""

    problems: ProblemList
    names: Mapping[str, str]
    matcher: _Matcher

    def meaning(self, row: TableRow) -> _Meant | None:
        label, unit = row.cells[self.names["circuit"]], self._unit(row)
        if not label:
            return None
        meant = self.matcher.meaning(label)
        if meant is None:
            labels = [circuit.label for circuit in self.matcher.installation.circuits]
            place = Place(row.line, self.names["circuit"], label)
            self.problems.add(place, "no circuit of the inventory has this label", did_you_mean(label, labels))
            return None
        return _Meant(meant.label, unit or meant.unit, meant.pole)

    def _unit(self, row: TableRow) -> ReadingUnit | None:
        text = row.cells[self.names["unit"]] if "unit" in self.names else ""
        if text and text.upper() not in tuple(ReadingUnit):
            self.problems.add(Place(row.line, self.names["unit"], text), "is no unit taken here", "write A or W")
            return None
        return ReadingUnit(text.upper()) if text else None
