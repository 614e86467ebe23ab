"""The leg problem's arrays against the phasor sums, and its counts of spaces."""

import itertools
from collections.abc import Callable

import numpy as np
import pytest

from balancer.arrange.legs import LegProblem, build_leg_problem, mirror_choice
from balancer.arrange.results import Options
from balancer.arrange.seats import build_units
from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenario_sets import connected_scenarios, share_scenarios
from balancer.panel import Circuit, Installation, Load, Pole, PowerFactor

Build = Callable[..., Installation]
Make = Callable[..., Circuit]


def problem_of(installation: Installation, options: Options | None = None) -> LegProblem:
    shares = np.random.default_rng(2).integers(1, 5, (4, len(installation.circuits))) / 4
    scenarios = share_scenarios(installation, list("abcd"), shares)
    return build_leg_problem(installation, scenarios, build_units(installation, options or Options()))


def mixed(installation: Build, circuit: Make, system: str, pole: Pole | None) -> Installation:
    circuits = [
        circuit("a", "1", load=Load(neutral_a=9.0, neutral_pf=PowerFactor(0.8))),
        circuit("b", "2", amps=4.0),
        circuit("red", "6", amps=6.0, shared_neutral="n"),
        circuit("black", "8", amps=2.5, shared_neutral="n"),
        circuit("range", "5-7", volts="120/240", load=Load(line_a=20.0, neutral_a=3.0, neutral_pole=pole)),
    ]
    return installation(*circuits, system=system)


@pytest.mark.parametrize("pole", [Pole.FIRST, None])
@pytest.mark.parametrize("system", ["120/240", "120/208", "120"])
def test_rows_are_the_phasor_sums_of_the_arrangement(
    installation: Build, circuit: Make, system: str, pole: Pole | None
) -> None:
    problem = problem_of(mixed(installation, circuit, system, pole), Options(turn_240=True))
    scenarios = share_scenarios(problem.installation, list("abcd"), np.random.default_rng(2).integers(1, 5, (4, 5)) / 4)
    currents = PanelCurrents(problem.installation, scenarios)
    for taken in itertools.product((0, 1), repeat=len(problem.choices)):
        answer = np.array(taken, dtype=np.int8)
        if any(answer[list(group)].sum() > 1 for group in problem.groups):
            continue
        signs = problem.signs(answer)
        seats = [
            next(p for p in unit.placements if p.signs == wanted)
            for unit, wanted in zip(problem.units, signs, strict=True)
        ]
        arrangement = {label: landing for seat in seats for label, landing in seat.landings}
        expected = currents.currents(arrangement)
        assert problem.neutral.peak(answer) == pytest.approx(expected.neutral.max())
        assert problem.heavy_leg.peak(answer) == pytest.approx(expected.heavy_leg.max())
        assert problem.imbalance.peak(answer) >= expected.imbalance.max() - 1e-9
        assert problem.mean_neutral(answer) == pytest.approx(expected.neutral.mean())
        assert (problem.answer_of(signs) == answer).all()


def test_spaces_are_counted_on_each_leg(installation: Build, circuit: Make) -> None:
    problem = problem_of(installation(*(circuit(str(n), str(n)) for n in (1, 2, 3)), spaces=4))
    for taken in itertools.product((0, 1), repeat=3):
        answer = np.array(taken, dtype=np.int8)
        on_a = sum(signs == (1,) for signs in problem.signs(answer))
        is_counted_in = all(counter.value(answer) <= counter.cap for counter in problem.counters)
        assert is_counted_in == (on_a <= 2 and 3 - on_a <= 2)


def test_no_count_where_spaces_abound(installation: Build, circuit: Make) -> None:
    assert problem_of(installation(circuit("a", "1"), circuit("b", "2"), spaces=12)).counters == ()


def test_landings_and_effort_are_those_of_the_cheapest_seats(installation: Build, circuit: Make) -> None:
    gfci = circuit("b", "2", breaker_type="gfci", effort=2.0)
    problem = problem_of(installation(circuit("a", "1"), gfci, spaces=8))
    both = np.ones(2, dtype=np.int8)
    assert problem.landings.value(both) == 2
    assert problem.effort.value(both) == 1000 + 2000 + 500  # the breaker's neutral takes half a landing more


def test_mirror_is_broken_only_where_nothing_tells_the_legs_apart(installation: Build, circuit: Make) -> None:
    free = [circuit(str(n), str(n), amps=float(n)) for n in (1, 2, 3, 4)]
    alike = problem_of(installation(*free, spaces=4))
    assert mirror_choice(alike, [alike.neutral, alike.heavy_leg], alike.counters) is not None
    fixed = problem_of(installation(*free, circuit("fixed", "5", is_fixed=True), spaces=8))
    assert mirror_choice(fixed, [fixed.neutral], fixed.counters) is None
    uneven = problem_of(installation(*free, spaces=6, reserved=frozenset({5})))  # three spaces on A, two on B
    assert mirror_choice(uneven, [uneven.neutral], uneven.counters) is None


def test_mirror_is_never_broken_on_a_wye(installation: Build, circuit: Make) -> None:
    problem = problem_of(installation(*(circuit(str(n), str(n)) for n in (1, 2, 3)), system="120/208", spaces=4))
    assert mirror_choice(problem, [problem.neutral], problem.counters) is None


@pytest.mark.parametrize(("factor", "repeats"), [(1.0, True), (0.8, False)])
def test_imbalance_repeats_the_neutral_at_equal_power_factors(
    installation: Build, circuit: Make, factor: float, repeats: bool
) -> None:
    motor = circuit("motor", "1", load=Load(neutral_a=8.0, neutral_pf=PowerFactor(factor)))
    assert problem_of(installation(motor, circuit("b", "2"))).does_imbalance_repeat_neutral is repeats


def test_imbalance_does_not_repeat_the_neutral_where_export_cancels_the_sum(installation: Build, circuit: Make) -> None:
    """5 A drawn and 5 A fed in: nothing in the neutral as found, 10 A once one of them changes legs, and no sum."""
    panel = installation(circuit("load", "1"), circuit("roof", "2"))
    shares = np.array([[1.0, -1.0]])
    problem = build_leg_problem(panel, share_scenarios(panel, ["noon"], shares), build_units(panel, Options()))
    assert not problem.does_imbalance_repeat_neutral


def test_everything_on_is_one_row(installation: Build, circuit: Make) -> None:
    panel = installation(circuit("a", "1"), circuit("b", "2"))
    problem = build_leg_problem(panel, connected_scenarios(panel), build_units(panel, Options()))
    assert problem.neutral.offset.shape == (1,)
    assert problem.heavy_leg.offset.shape == (2,)
