"""Leg and neutral currents of random panels against a general-purpose power-flow program, to a milliampere."""

import random
from dataclasses import replace

import pytest
from electrical.power_flow import Service, circuit_commands, power_flow, service_commands

from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenario_sets import connected_scenarios
from balancer.panel import (
    Circuit,
    Leg,
    Load,
    Pole,
    PowerFactor,
    Supply,
    SupplySystem,
    Terminal,
    Volts,
)

PANELS_PER_SUPPLY = 12


WYE_KV = 0.12 * 3**0.5
WYE = Supply(system=SupplySystem.WYE, leading_leg=Leg.A)
SERVICES = [
    pytest.param(Service(Supply(), 180.0, 0.24), id="180 degrees"),
    pytest.param(Service(WYE, -120.0, WYE_KV), id="120 degrees, A leads"),
    pytest.param(Service(replace(WYE, leading_leg=Leg.B), 120.0, WYE_KV), id="120 degrees, B leads"),
    pytest.param(Service(Supply(system=SupplySystem.IN_PHASE), 0.0, None), id="in phase"),
]


def random_circuit(chance: random.Random, label: str, row: int, has_line_loads: bool) -> Circuit:
    """A circuit of a random kind across rows `row` and `row + 1` of the left column."""
    upper = 2 * row - 1
    pair = chance.choice([(Terminal(upper), Terminal(upper + 2)), (Terminal(upper + 2), Terminal(upper))])
    pf = [PowerFactor(chance.choice([1.0, 0.95, 0.8, 0.6]), is_leading=chance.random() < 0.3) for _ in range(2)]
    amps = [round(chance.uniform(0.5, 45.0), 3) for _ in range(2)]
    kind = chance.choice([Volts.V120, Volts.V120, Volts.V240, Volts.V120_240]) if has_line_loads else Volts.V120
    if kind is Volts.V120:
        return Circuit(label=label, volts=kind, load=Load(neutral_a=amps[0], neutral_pf=pf[0]), landing=pair[:1])
    if kind is Volts.V240:
        return Circuit(label=label, volts=kind, load=Load(line_a=amps[1], line_pf=pf[1]), landing=pair)
    pole = chance.choice(list(Pole))
    load = Load(neutral_a=amps[0], neutral_pf=pf[0], neutral_pole=pole, line_a=amps[1], line_pf=pf[1])
    return Circuit(label=label, volts=kind, load=load, landing=pair)


@pytest.mark.parametrize("service", SERVICES)
@pytest.mark.parametrize("seed", range(PANELS_PER_SUPPLY))
def test_readings_equal_the_power_flow(build, service, seed):
    chance = random.Random(seed)
    rows = range(1, 2 * chance.randint(2, 15), 2)
    found = [random_circuit(chance, f"c{row}", row, service.line_kv is not None) for row in rows]
    # So that rows start on leg B too.
    installation = build.installation(*found, supply=service.supply, row_legs=chance.choice(["AB", "BA", "ABBA"]))
    readings = PanelCurrents(installation, connected_scenarios(installation)).currents(installation.as_found)
    ours = [readings.leg_a[0], readings.leg_b[0], readings.neutral[0]]
    flow = power_flow([*service_commands(service), *circuit_commands(installation, service.line_kv)])
    assert ours == pytest.approx(flow, abs=0.001)
    assert max(flow) > 1.0
