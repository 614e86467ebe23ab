"""What stands on the wall: circuits, terminals, spaces and the panel."""

from balancer.panel.circuit import Circuit, Load, Pole, PowerFactor, Role, Volts, Wire
from balancer.panel.panel import (
    Installation,
    Leg,
    Panel,
    Space,
    Supply,
    SupplySystem,
    ordinary_spaces,
)
from balancer.panel.terminals import (
    MAX_SPACES,
    Arrangement,
    Landing,
    Terminal,
    format_landing,
    parse_landing,
)

__all__ = [
    "MAX_SPACES",
    "Arrangement",
    "Circuit",
    "Installation",
    "Landing",
    "Leg",
    "Load",
    "Panel",
    "Pole",
    "PowerFactor",
    "Role",
    "Space",
    "Supply",
    "SupplySystem",
    "Terminal",
    "Volts",
    "Wire",
    "format_landing",
    "ordinary_spaces",
    "parse_landing",
]
