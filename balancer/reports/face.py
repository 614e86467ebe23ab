"""The panel's face: its columns as they hang on the wall, one line a breaker."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from dataclasses import dataclass
from itertools import zip_longest

from rich.console import Console, ConsoleOptions, RenderResult
from rich.text import Text

from balancer.panel import Circuit, Installation, Landing, Space
from balancer.reports.text import crop, visible

MARK = "*"
_UPPER, _LOWER = "\u250c", "\u2514"
_BETWEEN = " \u2502 "
_FIXED_CELLS = 14
"""Cells of a line that are not the name: leg, mark, space, bracket, amps and the blanks between."""
_NARROWEST_NAME = 8
_RATING_WIDTH = 3


@dataclass(frozen=True)
class _Line:
    """What one line shows of a breaker: its space, how it joins the next pole, whose it is and its rating [A]."""

    leg: str
    space: str
    name: str
    bracket: str = ""
    amps: str = ""
    is_marked: bool = False

    def format(self, name_width: int) -> str:
        """Lay the line out in fixed columns."""
        mark = MARK if self.is_marked else ""
        return (
            f"{self.leg:<1} {mark:<1} {self.space:>3} {self.bracket:<1} {crop(self.name, name_width)}"
            f" {self.amps:>{_RATING_WIDTH}}"
        )


@dataclass(frozen=True)
class PanelFace:
    """Renders an arrangement as it hangs on the wall; `marked` circuits carry a sign."""

    installation: Installation
    arrangement: Mapping[str, Landing]
    marked: Collection[str] = ()

    def __rich_console__(self, console: Console, options: ConsoleOptions) -> RenderResult:
        """Fit the columns to the width at hand."""
        columns = self.installation.panel.columns
        room = (options.max_width - len(_BETWEEN) * (len(columns) - 1)) // len(columns)
        name_width = max(_NARROWEST_NAME, room - _FIXED_CELLS)
        header = _Line("", "", "circuit", amps="A").format(name_width)
        yield Text(_BETWEEN.join([header] * len(columns)).rstrip(), style="bold", no_wrap=True)
        for row in range(1, self.installation.panel.rows + 1):
            for lines in zip_longest(*(self._lines_at(column, row) for column in columns)):
                yield _joined(lines, name_width)

    def _lines_at(self, column: int, row: int) -> list[_Line]:
        space = self.installation.panel.at(column, row)
        return [] if space is None else self._space_lines(space)

    def _space_lines(self, space: Space) -> list[_Line]:
        occupants = list(self._occupants(space.number))
        if not occupants:
            word = "(reserved)" if space.number in self.installation.panel.reserved else "(vacant)"
            return [_Line(space.leg, str(space.number), word)]
        if not any(landing[pole].half for _, landing, pole in occupants):
            return [self._occupant_line(space, *occupant) for occupant in occupants]
        lines = []
        for half in "ab":
            here = [occupant for occupant in occupants if occupant[1][occupant[2]].half in ("", half)]
            lines += [self._occupant_line(space, *occupant) for occupant in here]
            if not here:
                lines.append(_Line(space.leg, f"{space.number}{half}", "(vacant half)"))
        return lines

    def _occupants(self, number: int) -> Iterator[tuple[Circuit, Landing, int]]:
        for circuit in self.installation.circuits:
            landing = self.arrangement.get(circuit.label, ())
            for pole, terminal in enumerate(landing):
                if terminal.space == number:
                    yield circuit, landing, pole

    def _occupant_line(self, space: Space, circuit: Circuit, landing: Landing, pole: int) -> _Line:
        is_second = pole == 1
        rating = "" if circuit.breaker_a is None or is_second else crop(f"{circuit.breaker_a:g}", _RATING_WIDTH).strip()
        return _Line(
            leg=space.leg,
            space=str(landing[pole]),
            name=f"2nd hot of {visible(circuit.label)}" if is_second else circuit_name(circuit),
            bracket=self._bracket(landing, pole),
            amps=rating,
            is_marked=circuit.label in self.marked,
        )

    def _bracket(self, landing: Landing, pole: int) -> str:
        if len(landing) < 2:
            return ""
        places = [(self.installation.panel.by_number[t.space].row, t.half) for t in landing]
        return _UPPER if places[pole] < places[1 - pole] else _LOWER


def circuit_name(circuit: Circuit) -> str:
    """Name a circuit by its label and, where it says more, its description."""
    label, description = visible(circuit.label), visible(circuit.description)
    return label if description.casefold() in ("", label.casefold()) else f"{label}  {description}"


def _joined(lines: tuple[_Line | None, ...], name_width: int) -> Text:
    empty = _Line("", "", "").format(name_width)
    text = Text(no_wrap=True)
    for index, line in enumerate(lines):
        text.append(_BETWEEN if index else "")
        text.append(empty if line is None else line.format(name_width), "bold" if line and line.is_marked else "")
    text.rstrip()
    return text
