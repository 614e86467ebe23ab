"""What every test stands on: no test depends on the shell that runs it."""

import os

import pytest

SHELL_SETTINGS = ("NO_COLOR", "FORCE_COLOR", "COLUMNS", "LINES", "TERM")


@pytest.fixture(autouse=True)
def clean_environment(monkeypatch: pytest.MonkeyPatch) -> None:
    for name in [*SHELL_SETTINGS, *(name for name in os.environ if name.startswith("BALANCER_"))]:
        monkeypatch.delenv(name, raising=False)
