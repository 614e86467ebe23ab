"""Small panels to try one rule at a time."""

from collections.abc import Callable

import pytest

from balancer.panel import (
    Circuit,
    Installation,
    Load,
    Panel,
    Supply,
    SupplySystem,
    Volts,
    ordinary_spaces,
    parse_landing,
)
from balancer.rules import Finding, check_installation


def build_circuit(label: str, space: str = "", volts: str = "120", amps: float = 5.0, **cells: object) -> Circuit:
    is_line_to_neutral = Volts(volts) is Volts.V120
    cells.setdefault("load", Load(neutral_a=amps) if is_line_to_neutral else Load(line_a=amps))
    # Quiet where a rule has nothing to do with the neutral or the directory.
    cells.setdefault("is_neutral_checked", True)
    cells.setdefault("description", f"what {label} feeds")
    return Circuit(label=label, landing=parse_landing(space) if space else (), volts=Volts(volts), **cells)


def build_installation(*circuits: Circuit, system: str = "120/240", spaces: int = 12, **panel: object) -> Installation:
    supply = Supply(system=SupplySystem(system))
    return Installation(panel=Panel(spaces=ordinary_spaces(spaces), supply=supply, **panel), circuits=circuits)


@pytest.fixture
def circuit() -> Callable[..., Circuit]:
    return build_circuit


@pytest.fixture
def installation() -> Callable[..., Installation]:
    return build_installation


@pytest.fixture
def look() -> Callable[..., list[Finding]]:
    """Give the findings of one rule on the panel as found."""

    def look(rule: str, *circuits: Circuit, **panel: object) -> list[Finding]:
        return [f for f in check_installation(build_installation(*circuits, **panel)) if f.rule == rule]

    return look
