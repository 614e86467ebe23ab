"""Readers for files written on the spot."""

from collections.abc import Callable
from pathlib import Path

import pytest

from balancer.errors import InputError, Problem
from balancer.files import read_inventory
from balancer.panel import Installation

Read = Callable[..., Installation]
ProblemsOf = Callable[..., tuple[Problem, ...]]


@pytest.fixture
def read(tmp_path: Path) -> Read:
    """Read an inventory, given as text or bytes, and a panel file, given as text."""

    def read(inventory: str | bytes, panel: str | None = None) -> Installation:
        path = tmp_path / "inventory.csv"
        path.write_bytes(inventory if isinstance(inventory, bytes) else inventory.encode())
        if panel is None:
            return read_inventory(path)
        (tmp_path / "panel.toml").write_text(panel, encoding="utf-8")
        return read_inventory(path, tmp_path / "panel.toml")

    return read


@pytest.fixture
def problems_of(read: Read) -> ProblemsOf:
    """The problems of files that cannot be read."""

    def problems_of(inventory: str | bytes, panel: str | None = None) -> tuple[Problem, ...]:
        with pytest.raises(InputError) as caught:
            read(inventory, panel)
        return caught.value.problems

    return problems_of
