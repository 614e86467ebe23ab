"""One 120 V source on both legs: there is no voltage between them."""

from __future__ import annotations

from collections.abc import Iterator

from balancer.panel import Role, SupplySystem
from balancer.rules.findings import Severity
from balancer.rules.landed import LandedPanel
from balancer.rules.rule import Observation, Rule


def _no_voltage(landed: LandedPanel) -> Iterator[Observation]:
    if landed.panel.supply.system is not SupplySystem.IN_PHASE:
        return
    for circuit in landed.loads:
        if circuit.poles == 1:
            continue
        message = (
            f"{landed.name(circuit)}: {circuit.volts} V on a 120 V supply that feeds both legs in phase. There is no "
            "voltage between the legs, so nothing that needs both of them works: leave it off this panel."
        )
        # A subpanel may have 120 V loads alone; what is in it is not known here.
        is_in_doubt = circuit.role is Role.FEEDER and circuit.volts.has_neutral
        yield Observation((circuit,), message, Severity.WARNING if is_in_doubt else None)


IN_PHASE_RULES = (Rule("no-voltage-between-legs", Severity.ERROR, "NEC 2023, 710.15(C) (from memory)", _no_voltage),)
