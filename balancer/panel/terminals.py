"""Terminals: where a hot conductor is landed, as a space and, on a half-width breaker, its half."""

from __future__ import annotations

import re
from dataclasses import dataclass

MAX_SPACES = 84
"""Largest panel the tool takes: twice the 42 of a common large panel."""

_TERMINAL = re.compile(r"([1-9][0-9]{0,2})([aAbB]?)")


@dataclass(frozen=True, order=True)
class Terminal:
    """One landing place: a space number and "" (full-width breaker), "a" or "b" (upper and lower half)."""

    space: int
    half: str = ""

    def __str__(self) -> str:
        """Print as the inventory writes it: ``7`` or ``12a``."""
        return f"{self.space}{self.half}"

    @property
    def parts(self) -> tuple[tuple[int, str], ...]:
        """The halves of the space that a breaker on this terminal fills; a full-width one fills both."""
        if self.half:
            return ((self.space, self.half),)
        return ((self.space, "a"), (self.space, "b"))


Landing = tuple[Terminal, ...]
"""The terminals of one circuit, first conductor first; empty while it is not landed."""

Arrangement = dict[str, Landing]
"""A landing for every circuit, by label."""


def parse_landing(text: str) -> Landing:
    """Read ``7``, ``5-7``, ``7-5`` (turned), ``12a`` or ``12b-14a``.

    Raises
    ------
    ValueError
        When the text is none of these; the message says what is allowed.
    """
    parts = [part.strip() for part in re.split(r"[-\u2013/,]", text.strip())]
    matches = [_TERMINAL.fullmatch(part) for part in parts]
    if not 1 <= len(parts) <= 2 or None in matches:
        message = "is not a space: write 7, 5-7 for two poles, 12a or 12b for a half, 12b-14a for quad poles"
        raise ValueError(message)
    return tuple(Terminal(int(m[1]), m[2].lower()) for m in matches if m)


def format_landing(landing: Landing) -> str:
    """Print a landing as the inventory writes it; an empty one as ""."""
    return "-".join(str(terminal) for terminal in landing)
