"""The text of an interval log: unpacked, in UTF-8, cut into header and body, with every line accounted for."""

from __future__ import annotations

import bz2
import codecs
import csv
import gzip
import io
import lzma
import re
import zlib
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balancer.files.csv_text import DELIMITERS
from balancer.files.problems import Place, ProblemList, one_problem
from balancer.files.sheet import BLANKS, clean
from balancer.files.source import FilePath, decode, file_name, read_bytes

MOST_BYTES = 1_000_000_000
"""Largest log, unpacked: more text than this and its figures do not fit an ordinary computer's memory."""

_UNPACKERS: tuple[tuple[bytes, Callable[[io.BytesIO], io.BufferedIOBase]], ...] = (
    (b"\x1f\x8b", lambda file: gzip.GzipFile(fileobj=file)),
    (b"\xfd7zXZ\x00", lzma.LZMAFile),
    (b"BZh", bz2.BZ2File),
)
_WORKBOOK_STARTS = (b"PK\x03\x04", b"\xd0\xcf\x11\xe0")
_ANNOUNCED = re.compile(rb"sep=(.)\s*", re.IGNORECASE)
_COMMENT_LINE = re.compile(rb"^ *#[^\n]*", re.MULTILINE)
_BLOCK_BYTES = 1_000_000
_SAMPLE_LINES = 200
_MOST_SHOWN = 5


@dataclass(frozen=True, eq=False)
class LogText:
    """A log ready to be read: the header's names and the lines below it.

    `lines` holds the file's line of every row of `body`, blank lines and comments left out, shape (rows,).
    """

    file: str
    header: tuple[str, ...]
    header_line: int
    body: bytes
    lines: NDArray[np.int64]
    delimiter: str
    decimal: str


def open_log(path: FilePath) -> LogText:
    """Open a log: CSV, plain or packed with gzip, xz or bzip2.

    Raises
    ------
    InputError
        When it is no such file, or its rows do not fit its header.
    """
    file = file_name(path)
    data = _utf_8(path, _unpacked(file, read_bytes(path)))
    data = data.replace(b"\r\n", b"\n").replace(b"\r", b"\n") if b"\r" in data else data
    data = _COMMENT_LINE.sub(b"", data) if b"#" in data else data
    start, announced = _header_start(data)
    if start >= len(data):
        raise one_problem(file, "holds nothing but comments and blank lines", "write a header line and readings below")
    end = data.find(b"\n", start)
    header_text = (data[start:] if end < 0 else data[start:end]).decode()
    delimiter = announced or max(DELIMITERS, key="".join(header_text.split('"')[::2]).count)
    header_line = data.count(b"\n", 0, start) + 1
    body = data[end + 1 :] if end >= 0 else b""
    header = _names(file, header_text, delimiter, header_line)
    counts, is_blank = _separators(body, delimiter)
    lines = np.flatnonzero(~is_blank).astype(np.int64)
    _refuse_wide(file, counts[lines], lines + header_line + 1, len(header))
    decimal = _decimal(body, delimiter)
    body = _padded(body, lines[counts[lines] < len(header) - 1], counts, delimiter.encode(), len(header))
    return LogText(file, header, header_line, body, lines + header_line + 1, delimiter, decimal)


def _unpacked(file: str, data: bytes) -> bytes:
    if data.startswith(_WORKBOOK_STARTS):
        raise one_problem(file, "is a workbook, and readings are taken from text", "save the sheet as CSV UTF-8")
    unpack = next((opener for start, opener in _UNPACKERS if data.startswith(start)), None)
    if unpack is not None:
        try:
            data = unpack(io.BytesIO(data)).read(MOST_BYTES + 1)
        except (OSError, EOFError, lzma.LZMAError, zlib.error):
            raise one_problem(file, "is packed and cannot be unpacked", "copy it again, or unpack it first") from None
    if len(data) > MOST_BYTES:
        raise one_problem(file, f"holds more than {MOST_BYTES // 10**9} GB of text", "use longer intervals, or a part")
    return data


def _utf_8(path: FilePath, data: bytes) -> bytes:
    """Keep plain UTF-8 as it is, which saves a copy; anything else is decoded and encoded again."""
    if not data.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)) and data.isascii() and b"\0" not in data:
        return data
    return decode(path, data).encode()


def _header_start(data: bytes) -> tuple[int, str]:
    """Find the first line that is not blank, after a line such as ``sep=;``; give the separator announced there."""
    start, announced = 0, ""
    while start < len(data):
        end = data.find(b"\n", start)
        end = len(data) if end < 0 else end
        line = data[start:end].decode().strip(BLANKS.replace("\t", ""))
        match = _ANNOUNCED.fullmatch(line.encode()) if not announced else None
        if match and match[1].decode() in DELIMITERS:
            announced = match[1].decode()
        elif line.strip(BLANKS):
            return start, announced
        start = end + 1
    return len(data), announced


def _names(file: str, text: str, delimiter: str, line: int) -> tuple[str, ...]:
    """Read the header; every column needs a name of its own."""
    names = [clean(cell) for cell in next(csv.reader([text], delimiter=delimiter, skipinitialspace=True))]
    problems = ProblemList(file)
    seen: dict[str, str] = {}
    for number, name in enumerate(names, 1):
        # A separator at the end of every line makes a last column without name or readings.
        if not name and number < len(names):
            problems.add(Place(line), f"column {number} has no name", "name it, or delete the column")
        elif name and name.casefold() in seen:
            problems.add(Place(line, name), "this column stands twice", "keep one of the two, or rename one")
        seen[name.casefold()] = name
    problems.raise_if_any()
    return tuple(names)


def _refuse_wide(file: str, counts: NDArray[np.int64], lines: NDArray[np.int64], width: int) -> None:
    """Raise where a row has a cell too many, which would shift the readings of all that follow it."""
    wide = np.flatnonzero(counts >= width)
    problems = ProblemList(file)
    for row in wide[:_MOST_SHOWN]:
        problem = f"this row has {counts[row] + 1} cells and the header {width}"
        remedy = "look for a separator too many, such as a decimal comma between commas"
        problems.add(Place(int(lines[row])), problem, remedy)
    if len(wide) > _MOST_SHOWN:
        remedy = "correct them alike"
        problems.add(Place(), f"{len(wide)} rows have more cells than the header; the first are listed", remedy)
    problems.raise_if_any()


def _padded(body: bytes, short: NDArray[np.int64], counts: NDArray[np.int64], delimiter: bytes, width: int) -> bytes:
    """Fill up rows that were cut short, since the parser asks for every column."""
    if not len(short):
        return body
    lines = body.split(b"\n")
    for line in short:
        lines[line] += delimiter * (width - 1 - int(counts[line]))
    return b"\n".join(lines)


def _separators(body: bytes, delimiter: str) -> tuple[NDArray[np.int64], NDArray[np.bool_]]:
    """Count the separators outside quotation marks in every line, and tell which lines are blank."""
    counts, blanks = [np.empty(0, dtype=np.int64)], [np.empty(0, dtype=bool)]
    start = 0
    while start < len(body):
        # Blocks that fit the processor's cache are several times faster than the whole.
        end = body.find(b"\n", start + _BLOCK_BYTES) + 1 or len(body)
        block = body[start:end]
        found, is_blank = _separators_of_block(block if block.endswith(b"\n") else block + b"\n", delimiter)
        counts.append(found)
        blanks.append(is_blank)
        start = end
    return np.concatenate(counts), np.concatenate(blanks)


def _separators_of_block(block: bytes, delimiter: str) -> tuple[NDArray[np.int64], NDArray[np.bool_]]:
    characters = np.frombuffer(block, dtype=np.uint8)
    is_separator = characters == ord(delimiter)
    if b'"' in block:
        # Counting modulo 256 keeps the parity: odd is inside quotation marks.
        is_separator &= np.cumsum(characters == ord('"'), dtype=np.uint8) % 2 == 0
    is_end = characters == ord("\n")
    marks = np.flatnonzero(is_separator | is_end)
    at_end = is_end[marks]
    counts = np.diff(np.flatnonzero(at_end), prepend=-1) - 1
    ends = marks[at_end]
    starts = np.append(0, ends[:-1] + 1)
    is_blank = starts == ends
    for line in np.flatnonzero(~is_blank & (counts == 0)):
        is_blank[line] = not block[starts[line] : ends[line]].strip()
    return counts, is_blank


def _decimal(body: bytes, delimiter: str) -> str:
    """Take commas for decimal where the separator leaves them free, unless the first lines write decimal points."""
    if delimiter == "," or b"," not in body:
        return "."
    sample = body[:100_000].decode(errors="replace").split("\n")[:_SAMPLE_LINES]
    cells = (cell for line in sample for cell in line.split(delimiter)[1:])
    return "." if any(re.fullmatch(r'\s*"?-?[0-9]*\.[0-9]+"?\s*', cell) for cell in cells) else ","
