"""Writes the as-left inventory as CSV that the tool reads back and a spreadsheet does not run."""

from __future__ import annotations

import contextlib
import os
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from typing import NoReturn

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
    target = check_target(path, (installation.inventory_file,), force=force)
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


def check_target(path: FilePath, inputs: Sequence[str], *, force: bool = False) -> Path:
    """Find the file that a name stands for, or say why nothing can be saved there.

    Raises
    ------
    OptionError
        When the file may not be written, or cannot be.
    """
    name = os.fspath(path)
    if name in ("", STANDARD_INPUT) or Path(name).suffix.casefold() in _WORKBOOKS:
        _refuse(f"{name or 'no name at all'} is no name for a CSV file", "give a file name that ends in .csv")
    try:
        # A link is written through, not replaced.
        target = Path(os.path.realpath(name))
        _check_free(target, name, inputs, force=force)
    except (OSError, ValueError) as error:
        _refuse(f"{name} cannot be written: {getattr(error, 'strerror', None) or error}", _OTHER_NAME)
    return target


def _check_free(target: Path, name: str, inputs: Sequence[str], *, force: bool) -> None:
    for each in inputs:
        if each != STANDARD_INPUT and (target == Path(os.path.realpath(each)) or _is_same_file(target, each)):
            _refuse(f"{name} is one of the files read, which are never overwritten", _OTHER_NAME)
    if target.exists() and not target.is_file():
        _refuse(f"{name} is no file", _OTHER_NAME)
    if target.exists() and not force:
        _refuse(f"{name} exists already", f"{_OTHER_NAME}, or add --force to replace it")
    if not target.parent.is_dir():
        _refuse(f"{name} cannot be written: there is no such directory", "name a directory that exists")
    if not os.access(target.parent, os.W_OK):
        _refuse(f"{name} cannot be written: the directory may not be written to", "name another directory")


def _refuse(problem: str, remedy: str) -> NoReturn:
    raise OptionError(problem, remedy)


def _is_same_file(target: Path, other: str) -> bool:
    with contextlib.suppress(OSError, ValueError):
        return target.samefile(other)
    return False
