"""Voltages at the panel in a scenario: with a sound neutral, and with the neutral lost."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from balancer.electrical.impedances import service_impedances
from balancer.electrical.phasors import PanelCurrents, neutral_leg
from balancer.electrical.scenarios import Scenarios
from balancer.electrical.three_wire import LEG_V, LoadModel, NominalLoads, ServiceVoltages, solve_three_wire
from balancer.panel import Installation, Landing, Leg, SupplySystem

LOST_NEUTRAL_CAUTION = (
    "Balancing does not make a lost neutral safe: one small load opposite a large one sees nearly full line voltage."
)

_LINE_V_OVER_LEG_V = {SupplySystem.SPLIT: 2.0, SupplySystem.WYE: math.sqrt(3.0)}


@dataclass(frozen=True)
class LostNeutral:
    """Voltages [V] from leg to neutral when the neutral is open, and the highest that any 120 V load sees."""

    leg_a_v: float
    leg_b_v: float
    highest_on_load_v: float


def service_voltages(
    installation: Installation,
    scenarios: Scenarios,
    arrangement: Mapping[str, Landing],
    scenario: int,
    model: LoadModel = LoadModel.CURRENT,
) -> ServiceVoltages | None:
    """Voltages at the panel in one scenario; None where the panel file gives no impedances.

    Where a 120 V part's pole is not known, the pole that leaves the lower leg voltage counts.

    Raises
    ------
    InfeasibleError
        When the service cannot carry the scenario at any steady voltage.
    OptionError
        When a wire of the panel file has no known resistance.
    """
    impedances = service_impedances(installation.panel.supply)
    if impedances is None:
        return None
    solutions = [
        solve_three_wire(impedances, {model: loads})
        for loads in _nominal_loads(installation, scenarios, arrangement, scenario)
    ]
    return min(solutions, key=lambda each: min(each.leg_a_v, each.leg_b_v))


def lost_neutral(
    installation: Installation, scenarios: Scenarios, arrangement: Mapping[str, Landing], scenario: int
) -> LostNeutral | None:
    """Voltages of one scenario's 120 V loads with the neutral lost; None where there are none to be hurt.

    Where a 120 V part's pole is not known, the pole that gives some load the higher voltage counts.
    """
    line_per_leg = _LINE_V_OVER_LEG_V.get(installation.panel.supply.system)
    if line_per_leg is None:
        return None
    found = [
        _divided(loads, line_per_leg * LEG_V)
        for loads in _nominal_loads(installation, scenarios, arrangement, scenario)
        if loads.leg_a_phasor_a + loads.leg_b_phasor_a != 0
    ]
    return max(found, key=lambda each: each.highest_on_load_v, default=None)


def _divided(loads: NominalLoads, line_v: float) -> LostNeutral:
    """Divide the line voltage over both legs' loads in series.

    Notes
    -----
    V_A = V_AB Z_A / (Z_A + Z_B), constant impedances; with Z = 120 V / i this is V_AB i_B / (i_A + i_B), which holds
    for a leg without load too.
    """
    leg_a, leg_b = loads.leg_a_phasor_a, loads.leg_b_phasor_a
    leg_a_v, leg_b_v = (abs(line_v * opposite / (leg_a + leg_b)) for opposite in (leg_b, leg_a))
    return LostNeutral(leg_a_v, leg_b_v, max(leg_a_v if leg_a else 0.0, leg_b_v if leg_b else 0.0))


def _nominal_loads(
    installation: Installation, scenarios: Scenarios, arrangement: Mapping[str, Landing], scenario: int
) -> Iterator[NominalLoads]:
    """Sum the loads of a scenario by leg, once for each leg that parts of unknown pole may be on."""
    currents = PanelCurrents(installation, scenarios.subset([scenario]))
    neutral, line = currents.neutral_phasors()[0], currents.line_phasors()[0]
    columns = [(i, c) for i, c in enumerate(installation.circuits) if arrangement.get(c.label)]
    legs = {i: neutral_leg(installation.panel, c, arrangement[c.label]) for i, c in columns}
    is_known = all(leg is not None or neutral[i] == 0 for i, leg in legs.items())
    for unknown_on in (Leg.A,) if is_known else (Leg.A, Leg.B):
        on_leg = {each: sum(neutral[i] for i, leg in legs.items() if (leg or unknown_on) is each) for each in Leg}
        yield NominalLoads(
            leg_a_phasor_a=complex(on_leg[Leg.A]),
            leg_b_phasor_a=complex(on_leg[Leg.B]),
            line_phasor_a=complex(sum(line[i] for i in legs)),
        )
