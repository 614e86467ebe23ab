"""A small house in files, and a way to run the command line on it."""

from collections.abc import Callable
from pathlib import Path

import pytest
from click.testing import CliRunner, Result

from balancer.commands import cli

HOUSE = """\
circuit,description,space,volts,load_a,breaker_a,shared_neutral,use
range,Range,1-3,240,20,50,,
kitchen,Kitchen counter,2,120,10,20,none,
bath,Bath,5,120,9,20,none,
hall,Hall,6,120,8,20,none,
lights,Lights,9,120,3,15,none,
desk,Desk,4,120,2,15,none,
"""

SCENARIOS = """\
scenario,range,kitchen,bath,hall,lights,desk
morning,0.5,1,1,0.5,1,0
evening,1,1,0,1,1,1
"""


@pytest.fixture
def house(tmp_path: Path) -> Path:
    path = tmp_path / "house.csv"
    path.write_text(HOUSE, encoding="utf-8")
    return path


@pytest.fixture
def scenario_file(tmp_path: Path) -> Path:
    path = tmp_path / "scenarios.csv"
    path.write_text(SCENARIOS, encoding="utf-8")
    return path


@pytest.fixture
def run() -> Callable[..., Result]:
    """Run the command line; stdout and stderr come apart, exceptions of ours never come through."""

    def ran(*arguments: object, **settings: object) -> Result:
        return CliRunner().invoke(cli, [str(each) for each in arguments], prog_name="balancer", **settings)  # type: ignore[arg-type]

    return ran
