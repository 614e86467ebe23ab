"""Small panels to plan work on."""

from collections.abc import Callable

import pytest

from balancer.panel import (
    Arrangement,
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


def build_circuit(label: str, space: str = "", volts: str = "120", amps: float = 5.0, **cells: object) -> Circuit:
    is_line_to_neutral = Volts(volts) is Volts.V120
    cells.setdefault("load", Load(neutral_a=amps) if is_line_to_neutral else Load(line_a=amps))
    cells.setdefault("breaker_a", 20.0)
    cells.setdefault("breaker_type", "standard")
    cells.setdefault("is_neutral_checked", True)
    return Circuit(label=label, landing=parse_landing(space) if space else (), volts=Volts(volts), **cells)


def build_installation(*circuits: Circuit, system: str = "120/240", spaces: int = 12, **panel: object) -> Installation:
    supply = Supply(system=SupplySystem(system))
    return Installation(panel=Panel(spaces=ordinary_spaces(spaces), supply=supply, **panel), circuits=circuits)


def rearrange(installation: Installation, **landings: str) -> Arrangement:
    """Give the as-found arrangement with some circuits elsewhere; "" takes one out."""
    changed = {label: parse_landing(text) if text else () for label, text in landings.items()}
    return {label: landing for label, landing in (installation.as_found | changed).items() if landing}


@pytest.fixture
def circuit() -> Callable[..., Circuit]:
    return build_circuit


@pytest.fixture
def installation() -> Callable[..., Installation]:
    return build_installation


@pytest.fixture
def moved() -> Callable[..., Arrangement]:
    return rearrange
