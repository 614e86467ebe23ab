"""Every constraint through the planner: one panel on which it lets a plan be, and one on which it bites."""

import threading
import time
from _thread import interrupt_main
from collections.abc import Callable, Iterator

import numpy as np
import pytest

from balancer.arrange.plan import plan_arrangement
from balancer.arrange.results import Aim, ObjectiveName, Options, Plan, Stop
from balancer.electrical.scenario_sets import connected_scenarios, share_scenarios
from balancer.electrical.scenarios import Scenarios
from balancer.errors import InfeasibleError, NoAnswerInTime
from balancer.panel import Circuit, Installation, Leg, Load, Pole, PowerFactor, Role, format_landing

Build = Callable[..., Installation]
Make = Callable[..., Circuit]
EXACT = Options(within_a=0.0)


def plan(installation: Installation, options: Options = EXACT) -> Plan:
    return plan_arrangement(installation, connected_scenarios(installation), options)


def refusal(installation: Installation, options: Options = EXACT) -> str:
    with pytest.raises(InfeasibleError) as caught:
        plan(installation, options)
    assert all(problem.remedy for problem in caught.value.problems)
    return str(caught.value)


def left(found: Plan, label: str) -> str:
    return format_landing(found.as_left[label])


def leg(found: Plan, label: str) -> Leg:
    return found.installation.panel.leg(found.as_left[label][0].space)


def neutral(found: Plan) -> float:
    return found.peaks_as_left.neutral.value_a


def two_on_leg_a(installation: Build, circuit: Make, panel: dict | None = None, **cells: object) -> Installation:
    """10 A in space 1 and 10 A, with the given cells, in space 2: both on leg A, with room on leg B."""
    first, second = circuit("first", "1", amps=10.0, is_fixed=True), circuit("second", "2", amps=10.0, **cells)
    return installation(first, second, spaces=4, **(panel or {}))


def test_lopsided_panel_is_balanced_in_one_landing(installation: Build, circuit: Make) -> None:
    found = plan(two_on_leg_a(installation, circuit))
    assert (neutral(found), found.landings_changed, found.is_proven) == (0.0, 1, True)
    assert left(found, "second") == "4"


def test_balanced_panel_is_left_alone(installation: Build, circuit: Make) -> None:
    found = plan(installation(circuit("a", "1"), circuit("b", "3")))
    assert (neutral(found), found.landings_changed) == (0.0, 0)
    assert found.as_left == found.as_found


@pytest.mark.parametrize(
    "cells",
    [
        pytest.param({"is_fixed": True}, id="fixed"),
        pytest.param({"slack_in": 0.0}, id="conductor is short"),
        pytest.param({"role": Role.FEEDER, "is_fixed": True}, id="fixed feeder"),
    ],
)
def test_circuit_that_may_not_move_stays(installation: Build, circuit: Make, cells: dict[str, object]) -> None:
    found = plan(two_on_leg_a(installation, circuit, **cells))
    assert (neutral(found), left(found, "second")) == (20.0, "2")


@pytest.mark.parametrize(
    "panel",
    [
        pytest.param({"reserved": frozenset({3, 4})}, id="reserved"),
        pytest.param({"bolt_on": frozenset({1, 2})}, id="bolted spaces"),
        pytest.param({"bolt_on": frozenset({3, 4})}, id="breakers that plug on"),
    ],
)
def test_space_that_may_not_be_used_is_not(installation: Build, circuit: Make, panel: dict[str, object]) -> None:
    assert neutral(plan(two_on_leg_a(installation, circuit, panel))) == 20.0


@pytest.mark.parametrize(
    "panel",
    [
        pytest.param({"reserved": frozenset({3})}, id="one of two reserved"),
        pytest.param({"bolt_on": frozenset({1, 2, 3, 4})}, id="all bolted"),
        pytest.param({"bolt_on": frozenset({1, 3})}, id="other column bolted"),
    ],
)
def test_space_that_may_be_used_is(installation: Build, circuit: Make, panel: dict[str, object]) -> None:
    found = plan(two_on_leg_a(installation, circuit, panel))
    assert (neutral(found), left(found, "second")) == (0.0, "4")


@pytest.mark.parametrize(("slack_in", "amps"), [(0.9, 20.0), (1.0, 0.0)])
def test_conductor_reaches_one_inch_a_row(installation: Build, circuit: Make, slack_in: float, amps: float) -> None:
    assert neutral(plan(two_on_leg_a(installation, circuit, slack_in=slack_in))) == amps


@pytest.mark.parametrize(("slack_in", "amps"), [(12.9, 20.0), (13.0, 0.0)])
def test_changing_columns_takes_the_crossing(installation: Build, circuit: Make, slack_in: float, amps: float) -> None:
    panel = {"reserved": frozenset({4})}
    assert neutral(plan(two_on_leg_a(installation, circuit, panel, slack_in=slack_in))) == amps


def test_splice_lets_a_short_conductor_move(installation: Build, circuit: Make) -> None:
    found = plan(two_on_leg_a(installation, circuit, slack_in=0.0), Options(within_a=0.0, splice=True))
    assert neutral(found) == 0.0


@pytest.mark.parametrize(("kind", "amps"), [("plug-on gfci", 20.0), ("gfci", 20.0), ("gfci pigtail", 0.0)])
def test_plug_on_breaker_stays_at_the_neutral_bar(installation: Build, circuit: Make, kind: str, amps: float) -> None:
    panel = {"plug_on_neutral": frozenset({1, 2})}
    assert neutral(plan(two_on_leg_a(installation, circuit, panel, breaker_type=kind))) == amps


@pytest.mark.parametrize(("stab_a", "amps"), [(40.0, 0.0), (39.0, 20.0)])
def test_row_takes_no_more_than_its_stab_limit(installation: Build, circuit: Make, stab_a: float, amps: float) -> None:
    # The upper row carries 15 + 20 A of handles as found; moved to the lower one, b makes it 20 + 20 A.
    circuits = [
        circuit("a", "1", amps=10.0, breaker_a=15.0, is_fixed=True),
        circuit("b", "2", amps=10.0, breaker_a=20.0),
        circuit("c", "3", amps=0.0, breaker_a=20.0, is_fixed=True),
    ]
    assert neutral(plan(installation(*circuits, spaces=4, stab_a=stab_a))) == amps


def tandem(circuit: Make, space: int) -> list[Circuit]:
    return [circuit(f"half {half}", f"{space}{half}", amps=5.0) for half in "ab"]


@pytest.mark.parametrize(("tandem_spaces", "place"), [(frozenset({2, 4}), "4a"), (frozenset({2}), "2a"), (None, "2a")])
def test_tandem_moves_whole_and_only_where_it_fits(
    installation: Build, circuit: Make, tandem_spaces: frozenset[int] | None, place: str
) -> None:
    other = circuit("other", "1", amps=10.0, is_fixed=True)
    found = plan(installation(other, *tandem(circuit, 2), spaces=4, tandem_spaces=tandem_spaces))
    assert left(found, "half a") == place
    assert found.as_left["half a"][0].space == found.as_left["half b"][0].space


@pytest.mark.parametrize(("most", "amps"), [(0, 30.0), (1, 10.0), (2, 10.0)])
def test_landings_are_capped(installation: Build, circuit: Make, most: int, amps: float) -> None:
    circuits = [circuit(str(space), str(space), amps=10.0) for space in (1, 2, 5)]
    found = plan(installation(*circuits), Options(within_a=0.0, max_landings=most))
    assert neutral(found) == amps
    assert found.landings_changed <= most


def main_of(installation: Build, circuit: Make, main_a: float) -> tuple[Installation, Options]:
    panel = two_on_leg_a(installation, circuit, {"main_a": main_a})
    return panel, Options(within_a=0.0)


@pytest.mark.parametrize("main_a", [10.0, 9.0])
def test_no_leg_may_exceed_the_main(installation: Build, circuit: Make, main_a: float) -> None:
    panel, options = main_of(installation, circuit, main_a)
    scenarios = share_scenarios(panel, ["evening"], np.ones((1, 2)))
    if main_a == 10.0:
        assert plan_arrangement(panel, scenarios, options).peaks_as_left.heavy_leg.value_a == 10.0
    else:
        with pytest.raises(InfeasibleError, match="more than the 9 A main"):
            plan_arrangement(panel, scenarios, options)


def test_leg_that_carries_just_the_main_is_within_it(installation: Build, circuit: Make) -> None:
    # In binary 0.1 + 0.2 comes to a hair more than 0.3.
    circuits = [circuit("a", "1", amps=0.1, is_fixed=True), circuit("b", "2", amps=0.2, is_fixed=True)]
    panel = installation(*circuits, main_a=0.3)
    found = plan_arrangement(panel, share_scenarios(panel, ["evening"], np.ones((1, 2))), EXACT)
    assert found.peaks_as_left.heavy_leg.value_a == pytest.approx(0.3)


def test_leg_above_the_main_by_less_than_the_solver_rounds_is_refused(installation: Build, circuit: Make) -> None:
    circuits = [circuit(str(n), str(n), amps=5.000001, is_fixed=n < 3) for n in (1, 2, 3, 4)]
    panel = installation(*circuits, main_a=10.0)
    with pytest.raises(InfeasibleError, match="10 A main"):
        plan_arrangement(panel, share_scenarios(panel, ["evening"], np.ones((1, 4))), EXACT)


def test_everything_on_is_not_held_against_the_main(installation: Build, circuit: Make) -> None:
    panel, options = main_of(installation, circuit, 9.0)
    found = plan(panel, options)
    assert neutral(found) == 0.0
    assert any("9 A main" in note for note in found.notes)


def test_landing_cap_that_keeps_a_leg_above_the_main_is_named(installation: Build, circuit: Make) -> None:
    panel, _ = main_of(installation, circuit, 10.0)
    scenarios = share_scenarios(panel, ["evening"], np.ones((1, 2)))
    with pytest.raises(InfeasibleError, match="at most 0 landings") as caught:
        plan_arrangement(panel, scenarios, Options(max_landings=0))
    assert "10 A main" in str(caught.value)


def broken_pair(circuit: Make, **cells: object) -> list[Circuit]:
    return [circuit(label, space, shared_neutral="n", **cells) for label, space in (("red", "1"), ("black", "2"))]


def test_pair_with_both_hots_on_one_leg_is_mended(installation: Build, circuit: Make) -> None:
    found = plan(installation(*broken_pair(circuit), spaces=4))
    assert {leg(found, "red"), leg(found, "black")} == {Leg.A, Leg.B}
    assert found.landings_changed == 1


def test_pair_is_mended_even_where_that_is_no_better(installation: Build, circuit: Make) -> None:
    other = circuit("other", "3", amps=10.0, is_fixed=True)
    found = plan(installation(*broken_pair(circuit), other, spaces=4))
    assert neutral(found) == 10.0  # 0 A as found, with both hots on one neutral


@pytest.mark.parametrize(
    ("fill", "options", "words"),
    [
        ({"is_fixed": True}, EXACT, '"c3" is fixed in space 3'),
        ({}, Options(max_landings=0), "at most 0 landings may change"),
    ],
)
def test_pair_that_cannot_be_mended_is_said_to_be(
    installation: Build, circuit: Make, fill: dict[str, object], options: Options, words: str
) -> None:
    others = [circuit(f"c{space}", str(space), **fill) for space in (3, 4)]
    assert words in refusal(installation(*broken_pair(circuit), *others, spaces=4), options)


def test_pair_stays_together_and_turns_over(installation: Build, circuit: Make) -> None:
    pair = [circuit("red", "1", amps=12.0, shared_neutral="n"), circuit("black", "3", amps=2.0, shared_neutral="n")]
    found = plan(installation(*pair, circuit("other", "2", amps=10.0, is_fixed=True), spaces=4))
    assert (left(found, "red"), left(found, "black"), neutral(found)) == ("3", "1", 0.0)
    assert found.landings_changed == 2


def test_pair_needs_no_opposite_legs_in_phase(installation: Build, circuit: Make) -> None:
    found = plan(installation(*broken_pair(circuit), system="120", spaces=4))
    assert found.landings_changed in (0, 1)
    assert neutral(found) == 10.0


def test_more_poles_than_spaces_is_said_in_numbers(installation: Build, circuit: Make) -> None:
    landed = [circuit(str(space), str(space)) for space in (1, 2, 3)]
    assert "need 5 spaces and the panel has 4" in refusal(installation(*landed, circuit("new", volts="240"), spaces=4))


def test_reserved_spaces_are_named_when_they_run_short(installation: Build, circuit: Make) -> None:
    landed = [circuit(str(space), str(space)) for space in (1, 2, 3)]
    words = refusal(installation(*landed, circuit("new"), spaces=4, reserved=frozenset({4})))
    assert "need 4 spaces and the panel has 3" in words
    assert "1 more are reserved" in words


@pytest.mark.parametrize(
    ("cells", "words"),
    [
        ({"is_fixed": True}, '"c4" is fixed in space 4'),
        ({"slack_in": 0.0}, 'the conductor of "c4" reaches 0 in from space 4'),
    ],
)
def test_what_holds_a_two_pole_off_is_named(
    installation: Build, circuit: Make, cells: dict[str, object], words: str
) -> None:
    # One space is free in each column: a two-pole fits once one breaker changes columns.
    landed = [circuit(f"c{space}", str(space), **cells) for space in (1, 4)]
    assert words in refusal(installation(*landed, circuit("new", volts="240"), spaces=4))
    assert (
        "new"
        in plan(installation(circuit("c1", "1"), circuit("c4", "4"), circuit("new", volts="240"), spaces=4)).as_left
    )


def test_plug_on_breakers_without_a_bar_space_are_named(installation: Build, circuit: Make) -> None:
    new = [circuit(label, breaker_type="plug-on gfci") for label in ("x", "y")]
    assert "plug-on-neutral" in refusal(installation(*new, spaces=4, plug_on_neutral=frozenset({1})))
    assert plan(installation(*new, spaces=4, plug_on_neutral=frozenset({1, 2}))).landings_changed == 0


def test_stab_limit_is_named(installation: Build, circuit: Make) -> None:
    new = [circuit(label, breaker_a=30.0) for label in "xyz"]
    assert "add up to 50 A at most (stab_a)" in refusal(installation(*new, spaces=4, stab_a=50.0))
    assert plan(installation(*new, spaces=4, stab_a=60.0)).is_proven


def test_tied_circuits_keep_their_shape(installation: Build, circuit: Make) -> None:
    tied = [circuit("t1", "1", tied="t", amps=10.0), circuit("t2", "2", tied="t", amps=2.0)]
    found = plan(installation(*tied, circuit("other", "5", amps=12.0, is_fixed=True), spaces=6))
    assert neutral(found) == 0.0
    rows = {found.installation.panel.by_number[found.as_left[label][0].space].row for label in ("t1", "t2")}
    assert rows == {2}


def test_new_tied_circuits_sit_one_below_the_other(installation: Build, circuit: Make) -> None:
    found = plan(installation(circuit("t1", tied="t"), circuit("t2", tied="t"), spaces=4))
    spaces = sorted(found.as_left[label][0].space for label in ("t1", "t2"))
    assert spaces in ([1, 3], [2, 4])


def range_of(circuit: Make, amps: float = 4.0) -> Circuit:
    load = Load(line_a=20.0, neutral_a=amps, neutral_pole=Pole.FIRST)
    return circuit("range", "1-3", volts="120/240", load=load)


@pytest.mark.parametrize(("turn_240", "amps", "place"), [(False, 8.0, "1-3"), (True, 0.0, "3-1")])
def test_range_is_turned_only_on_request(
    installation: Build, circuit: Make, turn_240: bool, amps: float, place: str
) -> None:
    panel = installation(range_of(circuit), circuit("light", "2", amps=4.0, is_fixed=True), spaces=4)
    found = plan(panel, Options(within_a=0.0, turn_240=turn_240))
    assert (neutral(found), left(found, "range")) == (amps, place)
    assert found.landings_changed == (2 if turn_240 else 0)


def test_spare_gives_way_to_a_new_circuit(installation: Build, circuit: Make) -> None:
    landed = [circuit(str(space), str(space)) for space in (1, 2, 3)]
    found = plan(installation(*landed, circuit("spare", "4", amps=0.0, role=Role.SPARE), circuit("new"), spaces=4))
    assert found.removed_spares == ("spare",)
    assert sorted(found.as_left) == ["1", "2", "3", "new"]


def test_spare_stays_where_there_is_room(installation: Build, circuit: Make) -> None:
    found = plan(two_on_leg_a(installation, circuit))
    spare = circuit("spare", "4", amps=0.0, role=Role.SPARE)
    circuits = (*two_on_leg_a(installation, circuit).circuits, spare)
    with_spare = plan(installation(*circuits, spaces=4))
    assert with_spare.removed_spares == ()
    assert neutral(with_spare) == neutral(found)


def test_new_layout_places_every_circuit(installation: Build, circuit: Make) -> None:
    new = [circuit(f"n{index}", amps=float(index + 1)) for index in range(5)]
    found = plan(installation(*new, circuit("heater", volts="240"), spaces=8))
    assert sorted(found.as_left) == ["heater", "n0", "n1", "n2", "n3", "n4"]
    assert (neutral(found), found.landings_changed, found.effort) == (1.0, 0, 0.0)  # 15 A split 8 and 7
    assert found.peaks_as_found is None


def test_new_circuit_is_placed_among_the_old(installation: Build, circuit: Make) -> None:
    found = plan(installation(circuit("old", "1", amps=7.0), circuit("new", amps=7.0), spaces=4))
    assert (leg(found, "new"), neutral(found), found.landings_changed) == (Leg.B, 0.0, 0)


def aims(installation: Build, circuit: Make) -> Installation:
    """Lowest neutral and lowest heavy leg ask for different legs: reactive loads against resistive ones."""
    motors = [
        circuit(f"m{n}", str(n), load=Load(neutral_a=a, neutral_pf=PowerFactor(0.5))) for n, a in ((1, 7.0), (2, 8.0))
    ]
    heaters = [circuit(f"h{n}", str(n), amps=a) for n, a in ((3, 11.0), (4, 12.0), (5, 13.0))]
    circuits = [*motors, *heaters]
    return installation(*circuits, spaces=8)


def test_aim_at_legs_puts_the_heavy_leg_first(installation: Build, circuit: Make) -> None:
    panel = aims(installation, circuit)
    by_neutral, by_legs = (plan(panel, Options(within_a=0.0, aim=aim)) for aim in Aim)
    assert by_legs.objectives[0].name is ObjectiveName.HEAVY_LEG
    assert by_neutral.objectives[0].name is ObjectiveName.NEUTRAL
    heavy = (by_legs.peaks_as_left.heavy_leg.value_a, by_neutral.peaks_as_left.heavy_leg.value_a)
    assert heavy[0] < heavy[1] - 0.01
    assert neutral(by_neutral) < neutral(by_legs) - 0.01
    assert by_legs.optimum_peak_neutral_a == pytest.approx(neutral(by_neutral), abs=1e-6)


@pytest.mark.parametrize(("within_a", "landings", "amps"), [(0.0, 2, 0.0), (0.19, 2, 0.0), (0.2, 0, 0.2)])
def test_within_gives_amps_away_for_landings(
    installation: Build, circuit: Make, within_a: float, landings: int, amps: float
) -> None:
    circuits = [circuit(str(s), str(s), amps=a) for s, a in ((1, 10.0), (2, 5.1), (3, 9.9), (4, 5.0))]
    found = plan(installation(*circuits, spaces=4), Options(within_a=within_a))
    assert found.landings_changed == landings
    assert neutral(found) == pytest.approx(amps, abs=1e-9)
    assert found.optimum_peak_neutral_a == pytest.approx(0.0, abs=1e-9)


def test_legs_of_a_wye_cancel_in_part(installation: Build, circuit: Make) -> None:
    circuits = [circuit("a", "1", amps=15.0), circuit("b", "2", amps=15.0)]
    found = plan(installation(*circuits, system="120/208", spaces=4))
    assert neutral(found) == pytest.approx(15.0)  # two equal currents 120 degrees apart add up to one of them
    assert found.landings_changed == 1


def test_legs_in_phase_add_up_wherever_circuits_go(installation: Build, circuit: Make) -> None:
    found = plan(installation(circuit("a", "1", amps=15.0), circuit("b", "2", amps=5.0), system="120", spaces=4))
    assert neutral(found) == 20.0
    assert found.objectives[0].proved_by == "arithmetic"
    assert found.peaks_as_left.heavy_leg.value_a == 15.0


def test_panel_without_anything_to_decide_is_planned(installation: Build, circuit: Make) -> None:
    found = plan(installation(circuit("heater", "1-3", volts="240"), spaces=4))
    assert (neutral(found), found.landings_changed, found.is_proven) == (0.0, 0, True)


def crowded(installation: Build, circuit: Make) -> Installation:
    """Forty breakers of odd amps and power factors: far more than can be proven in a moment."""
    rng = np.random.default_rng(3)
    loads = [
        Load(neutral_a=float(rng.integers(100, 1600)) / 100, neutral_pf=PowerFactor(float(rng.uniform(0.6, 1.0))))
        for _ in range(40)
    ]
    return installation(*(circuit(f"c{n}", str(n + 1), load=load) for n, load in enumerate(loads)), spaces=42)


def busy_scenarios(panel: Installation, count: int = 40) -> Scenarios:
    shares = np.random.default_rng(4).uniform(0.0, 1.0, (count, len(panel.circuits)))
    return share_scenarios(panel, [f"moment {n}" for n in range(count)], shares)


def test_no_time_at_all_leaves_the_panel_as_found(installation: Build, circuit: Make) -> None:
    panel = crowded(installation, circuit)
    found = plan_arrangement(panel, busy_scenarios(panel), Options(time_limit_s=0.0))
    assert (found.stop, found.is_complete, found.is_proven) == (Stop.TIME_LIMIT, False, False)
    assert found.as_left == found.as_found


def test_no_time_for_a_panel_that_must_change_is_no_answer(installation: Build, circuit: Make) -> None:
    with pytest.raises(NoAnswerInTime):
        plan(
            installation(*broken_pair(circuit), circuit("a", "3"), spaces=6), Options(time_limit_s=0.0, max_landings=1)
        )


def test_time_limit_gives_the_best_so_far(installation: Build, circuit: Make) -> None:
    panel = crowded(installation, circuit)
    started = time.monotonic()
    found = plan_arrangement(panel, busy_scenarios(panel), Options(time_limit_s=1.0))
    assert time.monotonic() - started < 15.0
    assert found.stop is Stop.TIME_LIMIT
    assert not found.is_proven
    assert found.bound_peak_neutral_a <= found.optimum_peak_neutral_a
    assert found.peaks_as_found is not None
    assert neutral(found) < found.peaks_as_found.neutral.value_a


@pytest.fixture
def interrupt_soon() -> Iterator[threading.Timer]:
    timer = threading.Timer(1.0, interrupt_main)
    yield timer
    timer.cancel()


def test_ctrl_c_gives_the_best_so_far(installation: Build, circuit: Make, interrupt_soon: threading.Timer) -> None:
    panel, told = crowded(installation, circuit), []
    interrupt_soon.start()
    # The time limit is there only to end the test should Ctrl-C be lost.
    options = Options(time_limit_s=60.0)
    found = plan_arrangement(panel, busy_scenarios(panel), options, on_interrupt=lambda: told.append("interrupted"))
    assert found.stop is Stop.INTERRUPTED
    assert told == ["interrupted"]
    assert not found.is_proven
    assert found.peaks_as_found is not None
    assert neutral(found) < found.peaks_as_found.neutral.value_a
