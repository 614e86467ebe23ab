"""Reads the tables that are shipped inside this package."""

from __future__ import annotations

import csv
from importlib import resources

TableRow = tuple[int, dict[str, str]]
"""Line number in the file, counted from 1, and the cells by header."""


def read_table(name: str) -> tuple[TableRow, ...]:
    """Read a shipped table, leaving out its comment lines."""
    text = resources.files("balancer.electrical").joinpath("tables", name).read_text(encoding="utf-8")
    numbered = [(number, line) for number, line in enumerate(text.splitlines(), 1) if not line.startswith("#")]
    reader = csv.DictReader(line for _, line in numbered)
    return tuple((number, row) for (number, _), row in zip(numbered[1:], reader, strict=True))
