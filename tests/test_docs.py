"""README.md and DEVELOPERS.md say what the program does, and stay true."""

import importlib.util
import re
import sys
from pathlib import Path
from types import ModuleType

import click
import pytest

import balancer
from balancer.commands import cli
from balancer.files.columns import COLUMNS
from balancer.files.panel_file import PANEL_KEYS
from balancer.files.supply_table import SUPPLY_KEYS
from balancer.rules import RULES

ROOT = Path(balancer.__file__).parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
TOP_LEVEL = {"pyproject.toml", "README.md", "DEVELOPERS.md", "balancer", "data", "tests", "scripts"}
LEFT_BY_TOOLS = {"build", "dist", "balancer.egg-info", "__pycache__"}
TEXT_SUFFIXES = {".py", ".md", ".toml", ".csv", ".json", ".txt", ".yml"}


@pytest.fixture(scope="module")
def writer() -> ModuleType:
    """The script that writes the README's blocks, loaded from where it lies beside its neighbours."""
    scripts = str(ROOT / "scripts")
    spec = importlib.util.spec_from_file_location("refresh_readme", f"{scripts}/refresh_readme.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.path.insert(0, scripts)
    try:
        spec.loader.exec_module(module)
    finally:
        sys.path.remove(scripts)
    return module


@pytest.mark.parametrize("name", ["commands", "options", "columns", "uses", "screen"])
def test_readme_block_is_what_the_program_says_today(name: str, writer: ModuleType) -> None:
    written = writer.block_in(README, name)
    assert written == writer.BLOCKS[name](), "run scripts/refresh_readme.py"


def test_every_block_is_tested(writer: ModuleType) -> None:
    assert list(writer.BLOCKS) == ["commands", "options", "columns", "uses", "screen"]


@pytest.mark.parametrize("command", cli.commands.values(), ids=list(cli.commands))
def test_readme_names_every_command_and_option(command: click.Command) -> None:
    assert f"`balancer {command.name} " in README
    for param in command.params:
        if isinstance(param, click.Option):
            assert max(param.opts, key=len) in README


@pytest.mark.parametrize("code", ["0", "1", "2", "3", "4", "130"])
def test_readme_explains_every_exit_code(code: str) -> None:
    assert re.search(rf"^\| {code} \| \S", README, re.MULTILINE)


@pytest.mark.parametrize("column", COLUMNS, ids=lambda column: column.name)
def test_readme_lists_every_inventory_column(column) -> None:
    assert f"| `{column.name}` |" in README


@pytest.mark.parametrize("key", [*PANEL_KEYS, *SUPPLY_KEYS])
def test_readme_lists_every_key_of_the_panel_file(key: str) -> None:
    shown = f"[[panel.{key}]]" if key == "space" else key
    assert f"`{shown}`" in README


def test_readme_gives_the_two_commands_and_the_plain_install() -> None:
    for command in ("python3 scripts/demo.py", "python3 scripts/test.py", "pip install ."):
        assert f"\n{command}\n" in README


def test_readme_says_that_a_licensed_electrician_decides() -> None:
    assert "authority having jurisdiction" in README
    assert "licensed electrician" in README


@pytest.mark.parametrize(("name", "text"), [("README.md", README), ("DEVELOPERS.md", DEVELOPERS)])
def test_links_lead_somewhere(name: str, text: str) -> None:
    targets = [target for target in re.findall(r"\]\(([^)]+)\)", text) if "://" not in target]
    assert targets, f"{name} has no relative link"
    headings = {_anchor(line) for line in text.splitlines() if line.startswith("#")}
    for target in targets:
        path, _, anchor = target.partition("#")
        assert (ROOT / path).exists(), target
        assert path or anchor in headings, target


def _anchor(heading: str) -> str:
    return re.sub(r"[^\w\- ]", "", heading.lstrip("# ").lower()).replace(" ", "-")


def test_developers_guide_names_every_room() -> None:
    rooms = [path.name for path in (ROOT / "balancer").iterdir() if (path / "__init__.py").exists()]
    assert rooms
    for room in rooms:
        assert f"`{room}/`" in DEVELOPERS


def test_every_rule_cites_where_it_is_written() -> None:
    for rule in RULES:
        assert re.search(r"\d|common practice", rule.citation), rule.name


def tracked_texts() -> list[Path]:
    """Every text file of the checkout that somebody wrote."""
    roots = [ROOT / name for name in sorted(TOP_LEVEL)]
    files = [path for root in roots for path in ([root] if root.is_file() else sorted(root.rglob("*")))]
    return [path for path in files if path.suffix in TEXT_SUFFIXES and "__pycache__" not in path.parts]


def test_no_file_names_a_place_on_somebodys_machine() -> None:
    places = re.compile(r"(?<![\w.])/(?:work|tmp|home|root|Users|opt)/\w")
    found = [str(path) for path in tracked_texts() if places.search(path.read_text(encoding="utf-8", errors="replace"))]
    assert found == []


def test_top_level_holds_what_belongs_there() -> None:
    present = {path.name for path in ROOT.iterdir() if not path.name.startswith(".")}
    assert present >= TOP_LEVEL
    assert present <= TOP_LEVEL | LEFT_BY_TOOLS
