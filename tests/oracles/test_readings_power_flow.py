"""Neutral and legs of a plan on readings, interval by interval, against a general-purpose power-flow program."""

from dataclasses import replace

import numpy as np
import pytest
from electrical.power_flow import Service, circuit_commands, power_flow, service_commands
from oracles.readings_logs import four_weeks, metered_house

from balancer.arrange.plan import plan_arrangement
from balancer.arrange.results import Options, Plan
from balancer.electrical.phasors import PanelCurrents
from balancer.panel import Installation, Supply

SAMPLED = 20
SERVICE = Service(Supply(), 180.0, 0.24)


@pytest.fixture(scope="module")
def plan() -> Plan:
    installation = metered_house()
    return plan_arrangement(installation, four_weeks(installation), Options(within_a=0.0))


def as_left_in(plan: Plan, row: int) -> Installation:
    """Give the panel as left with every load at what it drew in an interval."""
    circuits = []
    for column, circuit in enumerate(plan.installation.circuits):
        neutral_a, line_a = (float(a[row, column]) for a in (plan.scenarios.neutral_a, plan.scenarios.line_a))
        load = replace(circuit.load, neutral_a=neutral_a, line_a=line_a)
        circuits.append(replace(circuit, load=load, landing=plan.as_left[circuit.label]))
    return replace(plan.installation, circuits=tuple(circuits))


def test_sampled_intervals_equal_the_power_flow(plan: Plan) -> None:
    readings = PanelCurrents(plan.installation, plan.scenarios).currents(plan.as_left)
    chance = np.random.default_rng(1)
    heaviest = np.argsort(-readings.neutral)[: SAMPLED // 2]
    for row in [*heaviest.tolist(), *chance.integers(len(plan.scenarios), size=SAMPLED // 2).tolist()]:
        commands = [*service_commands(SERVICE), *circuit_commands(as_left_in(plan, row), SERVICE.line_kv)]
        ours = [readings.leg_a[row], readings.leg_b[row], readings.neutral[row]]
        assert ours == pytest.approx(power_flow(commands), abs=0.001), plan.scenarios.names[row]


def test_the_interval_of_the_peak_has_the_peak(plan: Plan) -> None:
    peak = plan.peaks_as_left.neutral
    commands = [*service_commands(SERVICE), *circuit_commands(as_left_in(plan, peak.scenario), SERVICE.line_kv)]
    assert power_flow(commands)[2] == pytest.approx(peak.value_a, abs=0.001)
    assert peak.value_a == pytest.approx(plan.optimum_peak_neutral_a, abs=0.001)
