"""Leg and neutral currents of a panel by a general-purpose power-flow program.

The service is ideal: one stiff source a leg, and reactors of next to no impedance that stand for the clamp meter.
"""

from collections.abc import Sequence
from dataclasses import dataclass

from dss import DSS

from balancer.panel import Installation, Leg, Pole, PowerFactor, Supply

NODE = {Leg.A: 1, Leg.B: 2}


@dataclass(frozen=True)
class Service:
    """A supply, the angle of its leg B and its voltage from leg to leg; None where there is none."""

    supply: Supply
    leg_b_deg: float
    line_kv: float | None


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
