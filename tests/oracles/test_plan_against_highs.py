"""Plans against the same question put to another solver, HiGHS, as a mixed-integer program written anew."""

import math
from dataclasses import replace

import highspy
import numpy as np
import pytest
from oracles.brute_force import Placing, placings_of_units
from oracles.made_up_panels import (
    plain_installation,
    short_conductors,
    small_installation,
    some_options,
    some_scenarios,
)

from balancer.arrange.plan import plan_arrangement
from balancer.arrange.results import Aim, ObjectiveName, Options
from balancer.electrical.scenarios import Scenarios
from balancer.errors import InfeasibleError
from balancer.panel import Circuit, Installation, Leg, Load, Panel, Pole, PowerFactor, Supply

DIRECTIONS = 64
"""Tangent cuts around the circle: magnitudes are bounded from below within a factor cos(pi / 64), 0.12 %."""
SLACK = math.cos(math.pi / DIRECTIONS)


def lowest_neutral(
    installation: Installation, scenarios: Scenarios, options: Options, directions: int = DIRECTIONS
) -> float | None:
    """Least peak neutral [A] of a 120/240 V panel over the placements of every unit; None where nothing fits."""
    highs = highspy.Highs()
    highs.silent()
    peak = highs.addVariable(lb=0.0)
    by_space: dict[int, list[highspy.highs_var]] = {}
    terms: list[list[tuple[complex, highspy.highs_var]]] = [[] for _ in range(len(scenarios))]
    for unit in placings_of_units(installation, options):
        if not unit:
            return None
        literals = [highs.addBinary() for _ in unit]
        highs.addConstr(sum(literals) == 1)
        for placing, literal in zip(unit, literals, strict=True):
            for space in sorted({t.space for landing in placing.values() for t in landing}):
                by_space.setdefault(space, []).append(literal)
            for row, current in enumerate(_currents(installation, scenarios, placing)):
                terms[row].append((current, literal))
    for literals in by_space.values():
        highs.addConstr(sum(literals) <= 1)
    for parts in terms:
        for step in range(directions):
            turn = np.exp(-2j * math.pi * step / directions)
            effects = [((current * turn).real, literal) for current, literal in parts]
            highs.addConstr(sum(effect * literal for effect, literal in effects if abs(effect) > 1e-8) <= peak)
    highs.setOptionValue("mip_rel_gap", 1e-9)
    highs.setOptionValue("mip_abs_gap", 1e-7)
    highs.minimize(peak)
    if highs.getModelStatus() == highspy.HighsModelStatus.kInfeasible:
        return None
    assert highs.getModelStatus() == highspy.HighsModelStatus.kOptimal
    return float(highs.getInfo().objective_function_value)


def _currents(installation: Installation, scenarios: Scenarios, placing: Placing) -> list[complex]:
    """Neutral current that a placed unit adds in every scenario: towards the panel from leg A, from it to leg B."""
    total = np.zeros(len(scenarios), dtype=complex)
    for column, circuit in enumerate(installation.circuits):
        landing = placing.get(circuit.label)
        if landing and circuit.load.neutral_a:
            pole = 1 if circuit.load.neutral_pole is Pole.SECOND else 0
            sign = 1 if installation.panel.by_number[landing[pole].space].leg is Leg.A else -1
            total += sign * scenarios.neutral_a[:, column] * _turn(circuit.load.neutral_pf)
    return total.tolist()


def _turn(factor: PowerFactor) -> complex:
    return complex(factor.value, math.sqrt(1 - factor.value**2) * (1 if factor.is_leading else -1))


def split_phase(installation: Installation, *, unity: bool) -> Installation:
    """The same panel on 120/240 V, every pole known and no limit that this program does not have."""
    panel = Panel(
        spaces=installation.panel.spaces,
        tandem_spaces=installation.panel.tandem_spaces,
        reserved=installation.panel.reserved,
        bolt_on=installation.panel.bolt_on,
        supply=Supply(),
    )
    circuits = tuple(_with_known_pole(circuit, unity=unity) for circuit in installation.circuits)
    return Installation(panel=panel, circuits=circuits)


def _with_known_pole(circuit: Circuit, *, unity: bool) -> Circuit:
    load = circuit.load
    pole = (load.neutral_pole or Pole.SECOND) if circuit.poles == 2 else None
    factor = PowerFactor() if unity else load.neutral_pf
    known = Load(neutral_a=load.neutral_a, neutral_pf=factor, neutral_pole=pole, line_a=load.line_a)
    return replace(circuit, load=known)


def planned_neutral(installation: Installation, scenarios: Scenarios, options: Options) -> tuple[float, float] | None:
    """Proven peak neutral and bound of the planner, None where it says that nothing fits."""
    try:
        plan = plan_arrangement(installation, scenarios, options)
    except InfeasibleError:
        return None
    first = plan.objectives[0]
    assert first.name is ObjectiveName.NEUTRAL
    assert first.is_proven
    return first.value, first.bound


def options_of(seed: int) -> Options:
    return replace(some_options(seed), aim=Aim.NEUTRAL, max_landings=None)


@pytest.mark.parametrize("seed", [*range(500, 530)])
def test_unity_power_factor_gives_the_same_neutral_to_a_milliampere(seed: int) -> None:
    installation, options = split_phase(small_installation(seed), unity=True), options_of(seed)
    scenarios = some_scenarios(seed, installation)
    expected = lowest_neutral(installation, scenarios, options, directions=2)
    found = planned_neutral(installation, scenarios, options)
    assert (found is None) == (expected is None)
    if found is not None:
        assert found[0] == pytest.approx(expected, abs=1e-3)


@pytest.mark.parametrize("seed", [*range(600, 612)])
def test_mixed_power_factors_agree_within_what_the_cuts_leave_open(seed: int) -> None:
    installation, options = split_phase(small_installation(seed), unity=False), options_of(seed)
    scenarios = some_scenarios(seed, installation)
    lower = lowest_neutral(installation, scenarios, options)
    found = planned_neutral(installation, scenarios, options)
    assert (found is None) == (lower is None)
    if found is not None and lower is not None:
        assert lower <= found[0] + 1e-4
        assert found[1] <= lower / SLACK + 1e-4


@pytest.mark.parametrize(
    "installation",
    [
        pytest.param(plain_installation(0, 10), id="ten free breakers and a pair"),
        pytest.param(short_conductors(3, 14), id="conductors that reach one row"),
    ],
)
def test_larger_panels_give_the_same_neutral(installation: Installation) -> None:
    installation, options = split_phase(installation, unity=True), Options(within_a=0.0)
    scenarios = some_scenarios(1, installation, count=2)
    found = planned_neutral(installation, scenarios, options)
    assert found is not None
    assert found[0] == pytest.approx(lowest_neutral(installation, scenarios, options, directions=2), abs=1e-3)
