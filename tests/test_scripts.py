"""The scripts that set everything up: what they say when they cannot, and when they leave things alone."""

import ast
import importlib.util
import os
import sys
from pathlib import Path
from types import ModuleType

import pytest

import balancer

ROOT = Path(balancer.__file__).parent.parent
SCRIPTS = ROOT / "scripts"


@pytest.fixture
def environment(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> ModuleType:
    """The set-up module, with a checkout of its own."""
    spec = importlib.util.spec_from_file_location("environment_under_test", SCRIPTS / "environment.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    (tmp_path / "pyproject.toml").write_text("[project]\n", encoding="utf-8")
    (tmp_path / ".venv").mkdir()
    monkeypatch.setattr(module, "ROOT", tmp_path)
    monkeypatch.setattr(module, "VENV", tmp_path / ".venv")
    monkeypatch.setattr(module, "STAMP", tmp_path / ".venv" / "stamp.txt")
    return module


@pytest.fixture
def installs(environment: ModuleType, monkeypatch: pytest.MonkeyPatch) -> list[tuple[str, ...]]:
    """What was installed, without installing anything."""
    done: list[tuple[str, ...]] = []
    monkeypatch.setattr(environment, "is_working", lambda venv: True)
    monkeypatch.setattr(environment, "install", lambda venv, *requirements: done.append(requirements))
    return done


@pytest.mark.parametrize("name", ["environment.py", "demo.py", "test.py"])
def test_script_can_be_parsed_by_an_old_python(name: str) -> None:
    ast.parse((SCRIPTS / name).read_text(encoding="utf-8"), feature_version=(3, 6))


@pytest.mark.parametrize("name", ["environment.py", "demo.py", "test.py"])
def test_script_needs_the_standard_library_alone(name: str) -> None:
    tree = ast.parse((SCRIPTS / name).read_text(encoding="utf-8"))
    imported = {alias.name for node in ast.walk(tree) if isinstance(node, ast.Import) for alias in node.names}
    imported |= {str(node.module) for node in ast.walk(tree) if isinstance(node, ast.ImportFrom)}
    assert imported <= set(sys.stdlib_module_names) | {"environment", "demo"}


def test_old_python_gets_one_line(environment: ModuleType, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(environment.sys, "version_info", (3, 8, 18))
    monkeypatch.setattr(environment.sys, "version", "3.8.18 (default)")
    with pytest.raises(SystemExit, match=r"^This is Python 3\.8\.18; balancer needs 3\.11 or newer\. [^\n]*$"):
        environment.require_python()


def test_second_run_installs_nothing(environment: ModuleType, installs: list[tuple[str, ...]]) -> None:
    environment.prepare(["xlsx"])
    environment.prepare(["xlsx"])
    assert installs == [("--editable", ".[xlsx]")]


def test_changed_project_file_installs_again(environment: ModuleType, installs: list[tuple[str, ...]]) -> None:
    environment.prepare(["xlsx"])
    (environment.ROOT / "pyproject.toml").write_text("[project]\nname = 'other'\n", encoding="utf-8")
    environment.prepare(["xlsx"])
    assert len(installs) == 2


def test_demo_after_tests_installs_nothing_but_tests_after_demo_do(
    environment: ModuleType, installs: list[tuple[str, ...]]
) -> None:
    environment.prepare(["xlsx"])
    environment.prepare(["test", "xlsx"])
    environment.prepare(["xlsx"])
    assert installs == [("--editable", ".[xlsx]"), ("--editable", ".[test,xlsx]")]


def test_failed_installation_leaves_no_stamp(environment: ModuleType, monkeypatch: pytest.MonkeyPatch) -> None:
    def fail(venv: Path, *requirements: str) -> None:
        raise environment.SetupError

    monkeypatch.setattr(environment, "is_working", lambda venv: True)
    monkeypatch.setattr(environment, "install", fail)
    with pytest.raises(environment.SetupError):
        environment.prepare(["xlsx"])
    assert not environment.STAMP.exists()


def test_a_missing_interpreter_is_not_working(environment: ModuleType) -> None:
    assert not environment.is_working(environment.VENV)


@pytest.mark.parametrize(("system", "place"), [("nt", "Scripts/python.exe"), ("posix", "bin/python")])
def test_interpreter_is_found_on_every_system(
    environment: ModuleType, monkeypatch: pytest.MonkeyPatch, system: str, place: str
) -> None:
    venv = environment.VENV
    monkeypatch.setattr(os, "name", system)
    found = environment.python_in(venv)
    monkeypatch.undo()
    assert found == venv / place


def run_python(environment: ModuleType, code: str) -> str:
    return environment.run_quietly([sys.executable, "-c", code], "Trying", environment.ROOT)


def test_offline_is_one_line(environment: ModuleType) -> None:
    code = "print('x\\n' * 50 + 'Failed to establish a new connection: [Errno -2]'); raise SystemExit(1)"
    with pytest.raises(environment.SetupError, match=r"^Trying: no connection to the package index\. [^\n]*$"):
        run_python(environment, code)


def test_other_failures_show_the_end_of_the_output(environment: ModuleType) -> None:
    code = "print(*range(100), sep='\\n'); raise SystemExit(1)"
    with pytest.raises(environment.SetupError, match=r"^Trying failed:\n85\n86\n") as caught:
        run_python(environment, code)
    assert str(caught.value).endswith("\n99")


def test_success_is_quiet(environment: ModuleType, capfd: pytest.CaptureFixture[str]) -> None:
    assert run_python(environment, "print('noise')").strip() == "noise"
    assert capfd.readouterr() == ("", "")
