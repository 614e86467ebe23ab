"""Files to begin with: a blank inventory and panel file, or an example house."""

from __future__ import annotations

from collections.abc import Mapping
from importlib import resources
from pathlib import Path

from balancer.errors import OptionError
from balancer.files.blank import blank_inventory_text, blank_panel_text
from balancer.files.whole_file import write_whole

INVENTORY, PANEL, SCENARIOS = "inventory.csv", "panel.toml", "scenarios.csv"


def blank_files() -> dict[str, str]:
    """Give the text of every blank file by its name."""
    return {INVENTORY: blank_inventory_text(), PANEL: blank_panel_text()}


def example_files() -> dict[str, str]:
    """Give the text of every file of the example house by its name."""
    folder = resources.files("balancer.files") / "example"
    return {name: (folder / name).read_text(encoding="utf-8") for name in (INVENTORY, PANEL, SCENARIOS)}


def write_files(directory: str, texts: Mapping[str, str], *, force: bool) -> tuple[str, ...]:
    """Write all of the files or none, and give their paths.

    Raises
    ------
    OptionError
        When one of them exists and is not to be replaced, or the directory cannot be written.
    """
    if not directory:
        problem = "no directory is named"
        raise OptionError(problem, "Name one; a dot stands for the one that you are in.")
    paths = {name: Path(directory) / name for name in texts}
    existing = [str(path) for path in paths.values() if path.exists()]
    if existing and not force:
        problem = f"{', '.join(existing)} {'exist' if len(existing) > 1 else 'exists'} already; nothing was written"
        raise OptionError(problem, "Name another directory, or add --force to replace what is there.")
    try:
        Path(directory).mkdir(parents=True, exist_ok=True)
        for name, path in paths.items():
            write_whole(path, texts[name].encode("utf-8"))
    except OSError as error:
        problem = f"{directory} cannot be written: {error.strerror}"
        raise OptionError(problem, "Name a directory that you may write to.") from error
    return tuple(str(path) for path in paths.values())
