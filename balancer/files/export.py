"""Writes the as-left inventory as CSV that the tool reads back and a spreadsheet does not run."""

from __future__ import annotations

import contextlib
import os
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path

from balancer.errors import OptionError
from balancer.files.circuit_cells import cells_of
from balancer.files.columns import COLUMNS, SPACE
from balancer.files.sheet import BLANKS, COMMENT, guard
from balancer.files.source import STANDARD_INPUT, FilePath
from balancer.files.table import header_key
from balancer.files.whole_file import write_whole
from balancer.panel import Installation, Landing

_WORKBOOKS = (".xlsx", ".xls", ".ods")
_QUOTED = (",", '"', "\r", "\n", ";", "\t")
_OTHER_NAME = "save under another name"


def save_inventory(
    path: FilePath,
    installation: Installation,
    as_left: Mapping[str, Landing],
    removed_spares: Sequence[str] = (),
    *,
    force: bool = False,
) -> None:
    """Write the inventory with its circuits landed as left, columns and cells as they were otherwise.

    Parameters
    ----------
    path
        File to write; it appears whole or not at all.
    installation
        What was read.
    as_left
        Landing of every circuit that has a place.
    removed_spares
        Labels of spare breakers that were taken out: their rows are left out, and a comment says so.
    force
        Replace a file of that name. The inventory itself is never replaced.

    Raises
    ------
    OptionError
        When the file may not be written, or cannot be.
    """
    target = _target(path, installation.inventory_file, force=force)
    # Excel takes text beyond ASCII for UTF-8 only behind a byte order mark; plain ASCII needs none.
    text = inventory_text(installation, as_left, removed_spares)
    data = text.encode("utf-8" if text.isascii() else "utf-8-sig")
    try:
        write_whole(target, data)
    except OSError as error:
        problem = f"{os.fspath(path)} cannot be written: {error.strerror or error}"
        raise OptionError(problem, "choose a directory that can be written to") from None


def inventory_text(
    installation: Installation, as_left: Mapping[str, Landing], removed_spares: Sequence[str] = ()
) -> str:
    """Give the text that `save_inventory` writes."""
    kept = [circuit for circuit in installation.circuits if circuit.label not in removed_spares]
    rows = [cells_of(circuit, as_left.get(circuit.label, ())) for circuit in kept]
    names = _header(installation.columns, rows)
    lines = [_line(names)]
    lines += [_line([row.get(header_key(name), "") for name in names]) for row in rows]
    if removed_spares:
        lines.append(_comment(f"Spare breakers taken out of the panel: {', '.join(removed_spares)}"))
    return "".join(f"{line}\n" for line in lines)


def _header(columns: Sequence[str], rows: Iterable[Mapping[str, str]]) -> list[str]:
    """Header as written, then known columns that the rows fill and it lacks."""
    filled = {key for row in rows for key, text in row.items() if text}
    present = [header_key(name) for name in columns]
    needed = [column.name for column in COLUMNS if column.is_required or column is SPACE]
    wanted = [column.name for column in COLUMNS if header_key(column.name) in filled or column.name in needed]
    return [*columns, *(name for name in wanted if header_key(name) not in present)]


def _line(cells: Sequence[str]) -> str:
    return ",".join(_quoted(guard(cell, is_first_cell=index == 0)) for index, cell in enumerate(cells))


def _quoted(text: str) -> str:
    """Quote a cell that holds a separator of any kind, or blanks that a reader might strip."""
    if any(character in text for character in _QUOTED) or text != text.strip(BLANKS):
        return '"' + text.replace('"', '""') + '"'
    return text


def _comment(text: str) -> str:
    """Write a comment in one cell of one line, whatever control characters a label holds."""
    return _quoted(f"{COMMENT} {''.join(character if character.isprintable() else ' ' for character in text)}")


def _target(path: FilePath, inventory_file: str, *, force: bool) -> Path:
    name = os.fspath(path)
    if name == STANDARD_INPUT or Path(name).suffix.casefold() in _WORKBOOKS:
        problem = f"{name} is no name for a CSV file"
        raise OptionError(problem, "give a file name that ends in .csv")
    # A link is written through, not replaced.
    target = Path(os.path.realpath(name))
    if target == Path(os.path.realpath(inventory_file)) or _is_same_file(target, inventory_file):
        problem = f"{name} is the inventory itself, which is never overwritten"
        raise OptionError(problem, _OTHER_NAME)
    if target.exists() and not target.is_file():
        problem = f"{name} is no file"
        raise OptionError(problem, _OTHER_NAME)
    if target.exists() and not force:
        problem = f"{name} exists already"
        raise OptionError(problem, f"{_OTHER_NAME}, or add --force to replace it")
    return target


def _is_same_file(target: Path, other: str) -> bool:
    with contextlib.suppress(OSError):
        return target.samefile(other)
    return False
