"""The cells of an interval log as arrays: timestamps as text, readings as 32-bit floats."""

from __future__ import annotations

import io
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from balancer.files.problems import Place, ProblemList, one_problem
from balancer.files.readings_text import LogText

RowListener = Callable[[int], None]

_CHUNK_ROWS = 65_536
_MOST_SHOWN = 5
_MISSING = ("", "-", "--", "NA", "N/A", "n/a", "NaN", "nan", "null", "NULL", "None", "none", "#N/A")
_FIGURES = "write plain figures such as 12.5, and leave a missing reading blank"


@dataclass(frozen=True, eq=False)
class LogCells:
    """Timestamps as ASCII text, shape (rows,), and readings, (rows, columns read); NaN where one is missing."""

    stamps: NDArray[np.bytes_]
    values: NDArray[np.float32]
    lines: NDArray[np.int64]


def read_cells(log: LogText, columns: Sequence[int], listener: RowListener | None = None) -> LogCells:
    """Read the timestamps and the given columns; rows without any cell are left out.

    Raises
    ------
    InputError
        When a cell of these columns holds a text, or the rows cannot be told apart.
    """
    values = np.empty((len(log.lines), len(columns)), dtype=np.float32)
    stamps: list[NDArray[np.bytes_]] = []
    row = 0
    try:
        for chunk in _chunks(log, columns, np.float32):
            part = values[row : row + len(chunk)]
            for place, column in enumerate(columns):
                part[:, place] = chunk[column].to_numpy()
            stamps.append(_ascii(chunk[0]))
            row += len(chunk)
            if listener is not None:
                listener(row)
    # The parser speaks of its own lines and columns, so what it could not read is looked for again.
    except ValueError:
        _raise_texts(log, columns)
    if row != len(log.lines):
        raise one_problem(log.file, "has rows that span several lines", "look for a quotation mark that is not closed")
    return _without_empty(log, np.concatenate(stamps) if stamps else np.empty(0, dtype="S1"), values)


def _chunks(log: LogText, columns: Sequence[int], dtype: Any) -> Iterator[Any]:
    import pandas

    if not len(log.lines):
        return
    with pandas.read_csv(
        io.BytesIO(log.body),
        sep=log.delimiter,
        decimal=log.decimal,
        header=None,
        names=range(len(log.header)),
        index_col=False,
        usecols=[0, *columns],
        dtype={0: str} | dict.fromkeys(columns, dtype),
        keep_default_na=False,
        na_values=dict.fromkeys(columns, _MISSING),
        skipinitialspace=True,
        chunksize=_CHUNK_ROWS,
        encoding="utf-8",
    ) as chunks:
        yield from chunks


def _ascii(stamps: Any) -> NDArray[np.bytes_]:
    texts = stamps.fillna("").to_numpy(dtype=object)
    try:
        return texts.astype("S") if len(texts) else np.empty(0, dtype="S1")
    except UnicodeEncodeError:
        # Narrow blanks before AM and PM are the one thing beyond ASCII that timestamps are written with.
        plain = [text.replace("\u202f", " ").replace("\xa0", " ").encode("ascii", "replace") for text in texts]
        return np.array(plain, dtype="S")


def _without_empty(log: LogText, stamps: NDArray[np.bytes_], values: NDArray[np.float32]) -> LogCells:
    """Leave out the rows of nothing but separators that spreadsheets append; report infinite readings."""
    is_empty = stamps == b""
    if is_empty.any():
        is_empty &= np.isnan(values).all(axis=1)
    if np.isinf(values).any():
        rows = np.flatnonzero(np.isinf(values).any(axis=1))
        raise one_problem(log.file, "holds an infinite reading", _FIGURES, int(log.lines[rows[0]]))
    if not is_empty.any():
        return LogCells(stamps, values, log.lines)
    return LogCells(stamps[~is_empty], values[~is_empty], log.lines[~is_empty])


def _raise_texts(log: LogText, columns: Sequence[int]) -> None:
    """Find the cells that hold texts, the first of every column."""
    import pandas

    problems = ProblemList(log.file)
    counts = dict.fromkeys(columns, 0)
    row = 0
    try:
        for chunk in _chunks(log, columns, str):
            for column in columns:
                texts = chunk[column]
                figures = texts.str.replace(log.decimal, ".") if log.decimal != "." else texts
                wrong = np.flatnonzero(texts.notna() & pandas.to_numeric(figures, errors="coerce").isna())
                for index in wrong[: max(0, _MOST_SHOWN - counts[column])]:
                    place = Place(int(log.lines[row + index]), log.header[column], str(texts.iloc[index]))
                    problems.add(place, "is not a number", _FIGURES)
                counts[column] += len(wrong)
            row += len(chunk)
    # Quotation marks that make no sense end the parser; what was found up to there is still worth saying.
    except (ValueError, IndexError):
        problems.add(Place(), "has rows that cannot be told apart", "look for a quotation mark that is not closed")
    for column, count in counts.items():
        if count > _MOST_SHOWN:
            remedy = "correct them alike, or leave the column out"
            problems.add(Place(column=log.header[column]), f"{count} cells are not numbers", remedy)
    problems.raise_if_any()
    raise one_problem(log.file, "holds readings that cannot be read", _FIGURES)
