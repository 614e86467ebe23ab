"""Reads TOML and remembers on which line each key stands, which the standard library's reader does not tell."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from balancer.files.problems import one_problem
from balancer.files.source import FilePath, decode, file_name, read_bytes

KeyPath = tuple[str | int, ...]
"""Where a key stands: tables, the index of one in a list, then the key, such as ("panel", "space", 2, "row")."""

_TABLE = re.compile(r"\s*(\[\[?)\s*([^\]]+?)\s*\]")
_KEY = re.compile(r"\s*([A-Za-z0-9_.\s\"'-]+?)\s*=")
_ERROR_PLACE = re.compile(r"(.*?) \(at (?:line (\d+), column \d+|end of document)\)", re.DOTALL)


@dataclass(frozen=True)
class TomlSource:
    """What a TOML file says, and where it says it."""

    file: str
    content: Mapping[str, Any]
    lines: Mapping[KeyPath, int]

    def line_of(self, path: KeyPath) -> int | None:
        """Line of a key, of the table around it where the key's own line is not plain to see, or None."""
        while path:
            if path in self.lines:
                return self.lines[path]
            path = path[:-1]
        return None


def read_toml(path: FilePath) -> TomlSource:
    """Read a TOML file.

    Raises
    ------
    InputError
        When it cannot be read as TOML.
    """
    file = file_name(path)
    text = decode(path, read_bytes(path))
    try:
        content = tomllib.loads(text)
    # Besides its own error it lets through those of absurdly long numbers and deep nesting.
    except (ValueError, RecursionError) as error:
        match = _ERROR_PLACE.fullmatch(str(error))
        reason, line = (match[1], match[2]) if match else (str(error), None)
        problem = f"is not a panel file in TOML: {reason}"
        raise one_problem(
            file, problem, "write key = value, texts in quotation marks", int(line) if line else None
        ) from None
    return TomlSource(file, content, _key_lines(text))


def _key_lines(text: str) -> dict[KeyPath, int]:
    lines: dict[KeyPath, int] = {}
    counts: dict[KeyPath, int] = {}
    table: KeyPath = ()
    for number, line in enumerate(text.splitlines(), 1):
        if header := _TABLE.match(line):
            table = _names(header[2])
            lines.setdefault(table, number)
            if header[1] == "[[":
                counts[table] = counts.get(table, -1) + 1
                table = (*table, counts[table])
            lines.setdefault(table, number)
        elif key := _KEY.match(line):
            lines.setdefault((*table, *_names(key[1])), number)
    return lines


def _names(dotted: str) -> KeyPath:
    return tuple(part.strip().strip("\"'") for part in dotted.split("."))
