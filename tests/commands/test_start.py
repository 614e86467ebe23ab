import json
from collections.abc import Callable
from pathlib import Path

import pytest
from click.testing import Result

Run = Callable[..., Result]


def test_blank_files_are_written_once(run: Run, tmp_path: Path) -> None:
    house = tmp_path / "new" / "house"
    assert run("start", house).exit_code == 0
    assert sorted(path.name for path in house.iterdir()) == ["inventory.csv", "panel.toml"]
    (house / "inventory.csv").write_text("mine", encoding="utf-8")
    again = run("start", house)
    assert again.exit_code == 2
    assert "--force" in again.stderr
    assert (house / "inventory.csv").read_text(encoding="utf-8") == "mine"
    assert run("start", house, "--force").exit_code == 0
    assert (house / "inventory.csv").read_text(encoding="utf-8") != "mine"


def test_nothing_is_written_where_one_file_exists(run: Run, tmp_path: Path) -> None:
    (tmp_path / "panel.toml").write_text("mine", encoding="utf-8")
    assert run("start", tmp_path).exit_code == 2
    assert [path.name for path in tmp_path.iterdir()] == ["panel.toml"]


def test_the_example_can_be_used_at_once(run: Run, tmp_path: Path) -> None:
    result = run("start", tmp_path, "--example")
    assert result.exit_code == 0
    assert "balancer plan" in result.stdout
    paths = [tmp_path / name for name in ("inventory.csv", "panel.toml", "scenarios.csv")]
    shown = run("asfound", paths[0], "--panel", paths[1], "--scenarios", paths[2], "--json")
    assert shown.exit_code == 0
    assert json.loads(shown.stdout)["as_found"]["peak_neutral"] > 20


def test_a_place_that_cannot_be_written_is_said(run: Run, tmp_path: Path) -> None:
    (tmp_path / "file").write_text("", encoding="utf-8")
    result = run("start", tmp_path / "file" / "below")
    assert result.exit_code == 2
    assert "cannot be written" in " ".join(result.stderr.split())


def test_a_directory_without_a_name_is_none(run: Run, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    assert run("start", "").exit_code == 2
    assert list(tmp_path.iterdir()) == []
    assert run("start", ".").exit_code == 0
