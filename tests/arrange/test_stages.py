"""What may be called proven when the seat assignment ended before it was sure."""

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest

from balancer.arrange import seating
from balancer.arrange.plan import plan_arrangement
from balancer.arrange.results import Aim, ObjectiveName, ObjectiveResult, Options, Plan
from balancer.arrange.seating import Seater, Seating
from balancer.arrange.solve import Solved, SolveStatus
from balancer.electrical.scenario_sets import connected_scenarios, share_scenarios
from balancer.errors import NoAnswerInTime
from balancer.panel import Circuit, Installation, Load

Build = Callable[..., Installation]
Make = Callable[..., Circuit]
EXACT = Options(within_a=0.0)


def full_panel(installation: Build, circuit: Make) -> Installation:
    """No vacant space: whatever changes legs changes places with something, so that seats take a solver."""
    amps = {1: 9.0, 2: 7.0, 3: 1.0, 4: 2.0, 5: 6.0, 6: 5.0, 7: 4.0, 8: 3.0}
    return installation(*(circuit(f"c{n}", str(n), amps=a) for n, a in amps.items()), spaces=8)


def result(plan: Plan, name: ObjectiveName) -> ObjectiveResult:
    return next(each for each in plan.objectives if each.name is name)


def end_seat_solver_as(monkeypatch: pytest.MonkeyPatch, status: SolveStatus) -> None:
    """Leave every seating but the panel as found to the solver, and let it end with a status."""
    honest, easy = seating.solve, Seater._each_at_its_best

    def solve(*args: Any, **kwargs: Any) -> Solved:
        solved = honest(*args, **kwargs)
        return replace(solved, status=status, values=solved.values if status.has_answer else ())

    def easily(seater: Seater, signs: tuple[tuple[int, ...], ...]) -> Seating | None:
        found = easy(seater, signs)
        return found if found is not None and found.effort == 0 else None

    monkeypatch.setattr(seating, "solve", solve)
    monkeypatch.setattr(Seater, "_each_at_its_best", easily)


def test_search_proves_the_effort_where_every_seating_is_the_least(installation: Build, circuit: Make) -> None:
    panel = full_panel(installation, circuit)
    plan = plan_arrangement(panel, connected_scenarios(panel), EXACT)
    assert result(plan, ObjectiveName.EFFORT).proved_by == "search"
    assert result(plan, ObjectiveName.MEAN_NEUTRAL).is_proven


def test_seats_that_may_not_be_the_least_leave_the_proof_to_the_solver(
    installation: Build, circuit: Make, monkeypatch: pytest.MonkeyPatch
) -> None:
    panel = full_panel(installation, circuit)
    end_seat_solver_as(monkeypatch, SolveStatus.FEASIBLE)
    plan = plan_arrangement(panel, connected_scenarios(panel), EXACT)
    assert result(plan, ObjectiveName.NEUTRAL).proved_by in ("arithmetic", "search")
    assert result(plan, ObjectiveName.EFFORT).proved_by == "solver"
    assert not result(plan, ObjectiveName.MEAN_NEUTRAL).is_proven


def test_undecided_seats_disprove_nothing(installation: Build, circuit: Make, monkeypatch: pytest.MonkeyPatch) -> None:
    panel = full_panel(installation, circuit)
    end_seat_solver_as(monkeypatch, SolveStatus.UNKNOWN)
    plan = plan_arrangement(panel, connected_scenarios(panel), EXACT)
    assert plan.landings_changed == 0
    assert not plan.is_proven
    assert plan.bound_peak_neutral_a <= 1.0
    assert not result(plan, ObjectiveName.MEAN_NEUTRAL).is_proven


def test_undecided_seats_are_no_refusal(installation: Build, circuit: Make, monkeypatch: pytest.MonkeyPatch) -> None:
    pair = [circuit("red", "1", shared_neutral="n"), circuit("black", "2", shared_neutral="n")]
    panel = installation(*pair, circuit("other", "3"), circuit("last", "4"), spaces=6)
    end_seat_solver_as(monkeypatch, SolveStatus.UNKNOWN)
    with pytest.raises(NoAnswerInTime):
        plan_arrangement(panel, connected_scenarios(panel), EXACT)


def test_neutral_of_a_plan_for_the_legs_is_held_against_the_lowest_of_all(installation: Build, circuit: Make) -> None:
    """The leg that is heaviest decides where the small loads go; the neutral alone would have them elsewhere."""
    line = circuit("line", "1-3", volts="240", load=Load(line_a=10.0))
    small = [circuit(f"c{n}", str(n), amps=a) for n, a in ((2, 5.0), (4, 4.0), (6, 3.0))]
    panel = installation(line, *small, spaces=8)
    scenarios = share_scenarios(panel, ["all", "few"], [[1.0, 1.0, 1.0, 0.5], [0.0, 1.0, 0.2, 1.0]])
    neutral, legs = (plan_arrangement(panel, scenarios, replace(EXACT, aim=aim)) for aim in (Aim.NEUTRAL, Aim.LEGS))
    assert legs.optimum_peak_neutral_a == pytest.approx(neutral.optimum_peak_neutral_a, abs=1e-3)
    assert legs.bound_peak_neutral_a <= neutral.optimum_peak_neutral_a <= legs.peaks_as_left.neutral.value_a + 1e-3
