"""The shape of the package: who may know whom, and which outside library belongs to which room."""

import ast
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

import balancer

PACKAGE = Path(balancer.__file__).parent

MAY_KNOW = {
    "errors": set(),
    "units": set(),
    "panel": {"errors", "units"},
    "electrical": {"errors", "units", "panel"},
    "rules": {"errors", "units", "panel", "electrical"},
    "arrange": {"errors", "units", "panel", "electrical", "rules"},
    "files": {"errors", "units", "panel", "electrical"},
    "reports": {"errors", "units", "panel", "electrical", "rules", "arrange"},
    "commands": {"errors", "units", "panel", "electrical", "rules", "arrange", "files", "reports"},
    "__main__": {"commands"},
    "__init__": set(),
}
"""Room to the rooms below it; everybody knows itself and the package's version."""

THIRD_PARTY = {
    "panel": {"numpy"},
    "electrical": {"numpy"},
    "rules": {"numpy"},
    "arrange": {"numpy", "ortools"},
    "files": {"numpy", "openpyxl", "pandas"},
    "reports": {"numpy", "rich"},
    "commands": {"click", "rich"},
}
"""Room to the outside libraries that it may import; a room that is not named may import none."""

DRAWERS = {"utils", "util", "helpers", "common", "misc"}


def module_name(path: Path) -> str:
    parts = path.relative_to(PACKAGE.parent).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


MODULES = {module_name(path): path.read_text(encoding="utf-8") for path in sorted(PACKAGE.rglob("*.py"))}


def room_of(module: str) -> str:
    parts = module.split(".")
    return parts[1] if len(parts) > 1 else "__init__"


def imports_in(source: str) -> Iterator[str]:
    """Full names of everything imported, at the top or inside functions; relative imports as they stand."""
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            yield from (f"{'.' * node.level}{node.module or ''}.{alias.name}" for alias in node.names)


def module_imported(name: str, modules: dict[str, str]) -> str:
    """The deepest module of the package in a dotted name: ``a.b.C`` imports ``a.b``."""
    while name and name not in modules:
        name = name.rpartition(".")[0]
    return name


def upward_imports(modules: dict[str, str]) -> list[tuple[str, str]]:
    found = []
    for module, source in modules.items():
        room = room_of(module)
        for name in imports_in(source):
            if not name.startswith("balancer"):
                continue
            target = room_of(module_imported(name, modules))
            if target not in {room, "__init__"} | MAY_KNOW[room]:
                found.append((module, name))
    return found


def strangers(modules: dict[str, str]) -> list[tuple[str, str]]:
    found = []
    for module, source in modules.items():
        allowed = THIRD_PARTY.get(room_of(module), set())
        for name in imports_in(source):
            top = name.split(".")[0]
            if top != "balancer" and top not in sys.stdlib_module_names and top not in allowed:
                found.append((module, name))
    return found


def cycle_in(modules: dict[str, str]) -> list[str]:
    """Modules along one import cycle, or nothing."""
    edges = {
        module: sorted({module_imported(name, modules) for name in imports_in(source)} - {"", "balancer", module})
        for module, source in modules.items()
    }
    done: set[str] = set()

    def visit(module: str, path: list[str]) -> list[str]:
        if module in path:
            return [*path[path.index(module) :], module]
        if module in done:
            return []
        for target in edges[module]:
            if cycle := visit(target, [*path, module]):
                return cycle
        done.add(module)
        return []

    return next((cycle for module in sorted(edges) if (cycle := visit(module, []))), [])


def prints(modules: dict[str, str]) -> list[str]:
    return [
        module
        for module, source in modules.items()
        if room_of(module) != "commands"
        for node in ast.walk(ast.parse(source))
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id == "print"
    ]


def test_no_room_imports_upward() -> None:
    assert upward_imports(MODULES) == []


def test_no_module_imports_in_a_circle() -> None:
    assert cycle_in(MODULES) == []


def test_every_outside_library_stays_in_its_room() -> None:
    assert strangers(MODULES) == []


def test_only_the_commands_print() -> None:
    assert prints(MODULES) == []


def test_every_room_has_its_place_in_the_order() -> None:
    assert {room_of(module) for module in MODULES} <= set(MAY_KNOW)


def test_there_is_no_drawer_for_odds_and_ends() -> None:
    names = {part for module in MODULES for part in module.split(".")}
    assert names & DRAWERS == set()


BAD_PACKAGE = {
    "balancer": "",
    "balancer.panel": "",
    "balancer.panel.low": "def f():\n    from balancer.reports.face import draw\n    import rich.text\n    print(draw)",
    "balancer.panel.one": "import balancer.panel.two",
    "balancer.panel.two": "from balancer.panel.one import x",
    "balancer.reports.face": "",
}


@pytest.mark.parametrize(
    ("check", "expected"),
    [
        pytest.param(
            upward_imports, [("balancer.panel.low", "balancer.reports.face.draw")], id="upward, in a function"
        ),
        pytest.param(strangers, [("balancer.panel.low", "rich.text")], id="a screen library below"),
        pytest.param(prints, ["balancer.panel.low"], id="a print below"),
        pytest.param(cycle_in, ["balancer.panel.one", "balancer.panel.two", "balancer.panel.one"], id="a circle"),
    ],
)
def test_the_checks_see_a_package_that_is_wrong(check, expected) -> None:
    assert check(BAD_PACKAGE) == expected


def modules_loaded_by(statement: str) -> set[str]:
    code = f"{statement}\nimport sys\nprint(*sys.modules)"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    return set(done.stdout.split())


def test_help_loads_no_heavy_library() -> None:
    loaded = modules_loaded_by("import balancer.commands")
    assert "click" in loaded
    assert loaded & {"rich", "numpy", "ortools", "openpyxl", "pandas"} == set()


def test_planning_loads_no_screen() -> None:
    loaded = modules_loaded_by("import balancer.arrange.plan, balancer.rules, balancer.files")
    assert "balancer.arrange.plan" in loaded
    assert loaded & {"rich", "click"} == set()
