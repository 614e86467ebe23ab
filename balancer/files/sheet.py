"""Rows of cells, each with its line, and what stands around a cell's text in a file."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

BLANKS = " \t\r\n\f\v\u00a0\u202f\u3000\ufeff"
"""What counts as blank around a cell; other control characters are data."""

FORMULA_STARTS = ("=", "+", "-", "@", "\uff1d", "\uff0b", "\uff0d", "\uff20")
"""A cell that begins with one of these is run as a formula by some spreadsheet."""

COMMENT = "#"
_GUARD = "'"
_GUARDED_STARTS = (*FORMULA_STARTS, COMMENT, _GUARD)


@dataclass(frozen=True)
class SheetRow:
    """Cells of one row, cleaned, and the line on which it begins."""

    line: int
    cells: tuple[str, ...]


@dataclass(frozen=True)
class Sheet:
    """All rows that are neither blank nor comments."""

    file: str
    rows: tuple[SheetRow, ...]
    has_decimal_comma: bool = False
    """The separator leaves the comma free, so ``15,5`` may be a number."""
    comments: tuple[SheetRow, ...] = ()


def clean(cell: str) -> str:
    """Strip outer blanks and the one apostrophe that guards a text from being run as a formula or read as a comment."""
    text = cell.strip(BLANKS)
    if text.startswith(_GUARD) and text[1:].startswith(_GUARDED_STARTS):
        return text[1:].strip(BLANKS)
    return text


def guard(text: str, *, is_first_cell: bool = False) -> str:
    """Put an apostrophe before a text that a spreadsheet would run or this reader would take for something else.

    `clean` takes it off again: ``clean(guard(text)) == text`` for every text without outer blanks.
    """
    is_formula = text.startswith(FORMULA_STARTS)
    is_comment = is_first_cell and text.startswith(COMMENT)
    looks_guarded = text.startswith(_GUARD) and text[1:].startswith(_GUARDED_STARTS)
    return _GUARD + text if is_formula or is_comment or looks_guarded else text


def is_comment(first_cell: str) -> bool:
    """Whether a row is a comment: its first cell, as it stands in the file, begins with ``#``."""
    return first_cell.lstrip(BLANKS).startswith(COMMENT)


def sheet_row(line: int, cells: Iterable[str]) -> SheetRow:
    """Clean the cells of a row."""
    return SheetRow(line, tuple(clean(cell) for cell in cells))
