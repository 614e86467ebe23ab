"""Gets at the bytes and the text of a file, whatever a spreadsheet or an editor made of it."""

from __future__ import annotations

import codecs
import os
import sys
from pathlib import Path

from balancer.files.problems import one_problem

FilePath = str | os.PathLike[str]

STANDARD_INPUT = "-"
_SAVE_AGAIN = "save it again as CSV UTF-8 or as plain text"


def file_name(path: FilePath) -> str:
    """Name of a file in messages."""
    name = os.fspath(path)
    return "standard input" if name == STANDARD_INPUT else name or "(no name)"


def read_bytes(path: FilePath) -> bytes:
    """Read a whole file, or standard input for ``-``.

    Raises
    ------
    InputError
        When there is nothing to read.
    """
    name = os.fspath(path)
    try:
        data = _read_standard_input() if name == STANDARD_INPUT else _read_file(name)
    except FileNotFoundError:
        raise one_problem(file_name(path), "there is no such file", "check the name and the directory") from None
    except IsADirectoryError:
        raise one_problem(file_name(path), "is a directory", "name the file inside it") from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise one_problem(file_name(path), f"cannot be read: {reason}", "check the name and its permissions") from None
    if not data.strip():
        raise one_problem(file_name(path), "is empty", "check the name, and that it was saved")
    return data


def _read_standard_input() -> bytes:
    # The shell may have closed it.
    return sys.stdin.buffer.read() if sys.stdin is not None else b""


def _read_file(name: str) -> bytes:
    if not name:
        raise FileNotFoundError
    return Path(name).read_bytes()


def decode(path: FilePath, data: bytes) -> str:
    """Turn bytes into text: UTF-8 with or without byte order mark, UTF-16 with one, else Windows-1252.

    Raises
    ------
    InputError
        When the bytes are no text.
    """
    is_utf_16 = data.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE))
    for encoding in ("utf-16",) if is_utf_16 else ("utf-8-sig", "cp1252"):
        try:
            text = data.decode(encoding)
        except UnicodeDecodeError:
            continue
        if "\0" in text:
            break
        return text
    raise one_problem(file_name(path), "is not a text file", _SAVE_AGAIN)
