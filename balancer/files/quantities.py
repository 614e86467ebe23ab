"""Numbers in cells: strict, finite, with the unit of their column and within sensible limits."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import NoReturn

_NUMBER = r"(?:[0-9]+(?:[.,][0-9]*)?|[.,][0-9]+)"
_QUANTITY = re.compile(rf"({_NUMBER})\s*([^\d\s.,][^\d]*)?", re.ASCII)
_NEGATIVE = re.compile(rf"[-\u2212]\s*({_NUMBER}).*", re.ASCII)
_THOUSANDS = re.compile(r"[1-9][0-9]{0,2}[.,][0-9]{3}", re.ASCII)
"""Where the comma is for decimals the point may be for thousands, and the other way round."""
_ONE = "1.000"
"""A power factor or a share with three decimals; a load of a thousand watts taken for one is told by its size."""


@dataclass(frozen=True)
class Cell:
    """Text of one cell; `has_decimal_comma` where the file's separator leaves the comma free for decimals."""

    text: str
    has_decimal_comma: bool = False


class CellError(Exception):
    """A cell that cannot be read: what is wrong with it and what would be right."""

    def __init__(self, problem: str, remedy: str) -> None:
        self.problem = problem
        self.remedy = remedy
        super().__init__(problem)


def refuse(problem: str, remedy: str) -> NoReturn:
    """Raise a `CellError`."""
    raise CellError(problem, remedy)


@dataclass(frozen=True)
class Unit:
    """What a column's numbers count, and how many of it one of each written unit is."""

    name: str
    written: Mapping[str, float]


AMPS = Unit("amps", {"a": 1, "amp": 1, "amps": 1, "ampere": 1, "amperes": 1})
WATTS = Unit("watts", {"w": 1, "watt": 1, "watts": 1, "kw": 1000, "kilowatt": 1000, "kilowatts": 1000})
VOLT_AMPS = Unit("volt-amperes", {"va": 1, "kva": 1000})
INCHES = Unit("inches", {"in": 1, "in.": 1, "inch": 1, "inches": 1, '"': 1})
KILOWATT_HOURS = Unit("kilowatt-hours", {"kwh": 1, "kwh/day": 1, "kwh/d": 1})
NO_UNIT = Unit("a plain number", {})
_OTHER = (
    Unit("volts", {"v": 1, "volt": 1, "volts": 1}),
    Unit("milliamps", {"ma": 1}),
    Unit("horsepower", {"hp": 1}),
    Unit("feet", {"ft": 1, "feet": 1}),
    Unit("percent", {"%": 1, "percent": 1}),
)
_ALL_UNITS = (AMPS, WATTS, VOLT_AMPS, INCHES, KILOWATT_HOURS, *_OTHER)


def _unit_of(word: str) -> Unit | None:
    return next((unit for unit in _ALL_UNITS if word in unit.written), None)


def read_number(cell: Cell) -> tuple[float, str]:
    """Split a cell into a number and the unit behind it, lower case, "" where none is written.

    Raises
    ------
    CellError
        When it is no plain number of 0 or more.
    """
    text = cell.text
    if _NEGATIVE.fullmatch(text):
        refuse("is negative", "write a number of 0 or more")
    match = _QUANTITY.fullmatch(text)
    if match is None:
        refuse("is not a number", "write digits with a decimal point, such as 12.5")
    digits, unit = match[1], (match[2] or "").strip().casefold()
    if "," in digits and not cell.has_decimal_comma:
        refuse("has a comma in its number", "write a decimal point and no thousands separator, such as 1500 or 12.5")
    if cell.has_decimal_comma and digits != _ONE and _THOUSANDS.fullmatch(digits):
        refuse("may mean thousands or decimals", f"write {re.sub('[.,]', '', digits)} or {_as_decimals(digits)}")
    return float(digits.replace(",", ".")), unit


def _as_decimals(digits: str) -> str:
    """Write a number so that nobody takes its decimals for thousands: with fewer of them or with one more."""
    shorter = digits.rstrip("0").rstrip(".,")
    return f"{digits}0" if shorter == digits else shorter


@dataclass(frozen=True)
class Quantity:
    """Reads a number of one unit, from 0 to `most`."""

    unit: Unit
    most: float
    is_zero_allowed: bool = True
    if_other: str = ""
    """Where a number that is too high, or in another unit, more likely belongs."""

    def __call__(self, cell: Cell) -> float:
        """Read a cell.

        Raises
        ------
        CellError
            When the cell holds no such number.
        """
        number, word = read_number(cell)
        value = number * self._factor(word)
        if value > self.most:
            refuse(f"is too high: at most {self.most:g} is taken here", self._remedy())
        if value == 0.0 and not self.is_zero_allowed:
            refuse("is zero", f"write {self.unit.name} above 0, or leave the cell blank")
        return value

    def _factor(self, word: str) -> float:
        if not word:
            return 1.0
        if word in self.unit.written:
            return self.unit.written[word]
        other = _unit_of(word)
        if other is None:
            refuse("is not a number", f"write {self._example()}")
        refuse(f"is in {other.name}, and this column holds {self.unit.name}", self._remedy())

    def _example(self) -> str:
        return "a plain number" if self.unit is NO_UNIT else f"{self.unit.name} as a plain number, such as 12.5"

    def _remedy(self) -> str:
        return self.if_other or f"write {self._example()}"
