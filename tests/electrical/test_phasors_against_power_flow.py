"""Leg and neutral currents of random panels against a general-purpose power-flow program, to a milliampere.

The service is ideal: one stiff source a leg, and reactors of next to no impedance that stand for the clamp meter.
"""

import random
from collections.abc import Sequence
from dataclasses import dataclass, replace

import pytest
from dss import DSS

from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenario_sets import connected_scenarios
from balancer.panel import (
    Circuit,
    Installation,
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
NODE = {Leg.A: 1, Leg.B: 2}


@dataclass(frozen=True)
class Service:
    """A supply, the angle of its leg B and its voltage from leg to leg; None where there is none."""

    supply: Supply
    leg_b_deg: float
    line_kv: float | None


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


def load_command(name: str, nodes: str, kv: float, amps: float, pf: PowerFactor) -> str:
    reactive = (1.0 - pf.value**2) ** 0.5 * (-1.0 if pf.is_leading else 1.0)
    kva = kv * amps
    power = f"kw={kva * pf.value!r} kvar={kva * reactive!r}"
    return f"new load.{name} phases=1 bus1=panel.{nodes} kv={kv!r} model=1 vminpu=0.5 vmaxpu=1.5 {power}"


def service_commands(service: Service) -> list[str]:
    stiff = "basekv=0.12 phases=1 pu=1 r1=1e-9 x1=1e-9 r0=1e-9 x0=1e-9"
    return [
        "clear",
        f"new circuit.service bus1=source.1.0 angle=0 {stiff}",
        f"new vsource.second bus1=source.2.0 angle={service.leg_b_deg} {stiff}",
        "new reactor.leg_a phases=1 bus1=source.1 bus2=panel.1 r=1e-7 x=0",
        "new reactor.leg_b phases=1 bus1=source.2 bus2=panel.2 r=1e-7 x=0",
        "new reactor.neutral phases=1 bus1=panel.3 bus2=source.0 r=1e-7 x=0",
    ]


def circuit_commands(installation: Installation, line_kv: float | None) -> list[str]:
    commands = []
    for circuit in installation.circuits:
        nodes = [NODE[installation.panel.leg(terminal.space)] for terminal in circuit.landing]
        load = circuit.load
        if load.neutral_a:
            hot = nodes[1] if load.neutral_pole is Pole.SECOND else nodes[0]
            commands.append(load_command(f"{circuit.label}_n", f"{hot}.3", 0.12, load.neutral_a, load.neutral_pf))
        if load.line_a:
            assert line_kv is not None
            commands.append(load_command(f"{circuit.label}_l", "1.2", line_kv, load.line_a, load.line_pf))
    return commands


def power_flow(commands: Sequence[str]) -> list[float]:
    """Magnitudes [A] through the three reactors."""
    for command in (*commands, "set tolerance=1e-10 maxiterations=500", "solve"):
        DSS.Text.Command = command
    circuit = DSS.ActiveCircuit
    assert circuit.Solution.Converged
    magnitudes = []
    for name in ("leg_a", "leg_b", "neutral"):
        circuit.SetActiveElement(f"reactor.{name}")
        real, imaginary, *_ = circuit.ActiveCktElement.Currents
        magnitudes.append(abs(complex(real, imaginary)))
    return magnitudes


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
