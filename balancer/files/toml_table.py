"""Typed values out of one TOML table; what is wrong goes to the problems, with the line of its key."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Any

from balancer.files.problems import Place, ProblemList
from balancer.files.toml_source import KeyPath, TomlSource
from balancer.files.words import did_you_mean


class TomlTable:
    """One table of a TOML file.

    Every method gives None for a key that is missing or wrong; a wrong one has been reported.
    """

    def __init__(self, source: TomlSource, path: KeyPath, content: Mapping[str, Any], problems: ProblemList) -> None:
        self.path = path
        self._source = source
        self._content = content
        self._problems = problems

    @classmethod
    def root(cls, source: TomlSource, problems: ProblemList) -> TomlTable:
        """Give the whole file as one table."""
        return cls(source, (), source.content, problems)

    def table(self, key: str) -> TomlTable | None:
        """Open the table under a key."""
        content = self._content.get(key)
        if content is None:
            return None
        if not isinstance(content, dict):
            self.report(key, "is not a table", f"write [{key}] on a line of its own and its keys below")
            return None
        return TomlTable(self._source, (*self.path, key), content, self._problems)

    def tables(self, key: str) -> list[TomlTable] | None:
        """Open the list of tables under a key."""
        contents = self._content.get(key)
        if not isinstance(contents, list) or not all(isinstance(content, dict) for content in contents):
            self.report(
                key, "is not a list of tables", f"write [[{'.'.join((*map(str, self.path), key))}]] before each"
            )
            return None
        return [
            TomlTable(self._source, (*self.path, key, index), content, self._problems)
            for index, content in enumerate(contents)
        ]

    def __contains__(self, key: str) -> bool:
        return key in self._content

    def raw(self, key: str) -> Any:
        """Value of a key as TOML has it; None where it is missing."""
        return self._content.get(key)

    def report(self, key: str, problem: str, remedy: str) -> None:
        """Note what is wrong with a key."""
        value = self._content.get(key)
        shown = value if isinstance(value, str) else None if value is None else _toml_text(value)
        self._problems.add(Place(self._source.line_of((*self.path, key)), key, shown), problem, remedy)

    def refuse_unknown(self, known: Sequence[str]) -> None:
        """Report every key that means nothing here."""
        for key in self._content:
            if key not in known:
                self.report(key, f"means nothing in {self.name}", did_you_mean(key, known))

    @property
    def name(self) -> str:
        """Name of the table in messages."""
        if not self.path:
            return "a panel file"
        return f"[{'.'.join(part for part in self.path if isinstance(part, str))}]"

    def number(self, key: str, most: float, *, is_zero_allowed: bool = False) -> float | None:
        """Read a number above 0, up to `most`."""
        value = self._content.get(key)
        if value is None:
            return None
        remedy = f"write a plain number up to {most:g}, without quotation marks"
        is_number = isinstance(value, int | float) and not isinstance(value, bool)
        if not is_number or (isinstance(value, float) and not math.isfinite(value)):
            self.report(key, "is not a number", remedy)
        elif value < 0 or (value == 0 and not is_zero_allowed):
            self.report(key, "is not above 0", remedy)
        elif value > most:
            self.report(key, "is too high", remedy)
        else:
            return float(value)
        return None

    def integer(self, key: str, least: int, most: int) -> int | None:
        """Read a whole number."""
        value = self._content.get(key)
        if value is None:
            return None
        if isinstance(value, bool) or not isinstance(value, int) or not least <= value <= most:
            self.report(key, "is not a number that fits here", f"write a whole number from {least} to {most}")
            return None
        return value

    def text(self, key: str) -> str | None:
        """Read a text."""
        value = self._content.get(key)
        if value is None or isinstance(value, str):
            return value
        self.report(key, "is not a text", "put it into quotation marks")
        return None

    def word(self, key: str, words: Sequence[str]) -> str | None:
        """Read one of a few words, whatever its case."""
        text = self.text(key)
        if text is None:
            return None
        folded = " ".join(text.casefold().split())
        found = next((word for word in words if word.casefold() == folded), None)
        if found is None:
            self.report(key, "is not a word known here", did_you_mean(text, words))
        return found

    def spaces(self, key: str, existing: Sequence[int]) -> frozenset[int] | None:
        """Read a list of space numbers; true means all of them, false none."""
        value = self._content.get(key)
        if value is None:
            return None
        if isinstance(value, bool):
            return frozenset(existing) if value else frozenset()
        if not isinstance(value, list) or any(isinstance(n, bool) or not isinstance(n, int) for n in value):
            self.report(key, "is not a list of spaces", "write numbers such as [1, 2], or true for all")
            return None
        missing = [number for number in value if number not in existing]
        if missing:
            problem = f"the panel has no space {', '.join(map(str, missing))}"
            self.report(key, problem, f"write spaces from {min(existing)} to {max(existing)}")
            return None
        return frozenset(value)


def _toml_text(value: object) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    try:
        return str(value)
    # A hexadecimal number may be longer than Python cares to write out.
    except ValueError:
        return "a number too long to show"
