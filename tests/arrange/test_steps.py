import pytest

from balancer.arrange.steps import build_work
from balancer.arrange.work import How, Splice
from balancer.panel import Role, Wire


@pytest.fixture
def work(installation, moved):
    def work(*circuits, removed=(), panel=None, **landings):
        wall = installation(*circuits, **(panel or {}))
        return build_work(wall, moved(wall, **dict.fromkeys(removed, ""), **landings), removed)

    return work


@pytest.fixture
def steps(work):
    def steps(*circuits, **changes):
        return {step.circuit: step for step in work(*circuits, **changes).steps}

    return steps


def test_equal_breakers_stay_and_their_conductors_change_places(work, circuit):
    plan = work(circuit("X", "1"), circuit("Y", "3"), X="3", Y="1")
    assert [(s.circuit, s.from_text, s.to_text, s.how) for s in plan.steps] == [
        ("Y", "3", "1", How.EXCHANGE),
        ("X", "1", "3", How.EXCHANGE),
    ]
    assert plan.steps[0].lift_first == ("X",)
    assert plan.steps[1].was_lifted
    assert not any(step.with_breaker for step in plan.steps)
    assert plan.max_loose == 1


@pytest.mark.parametrize(
    "other",
    [
        pytest.param({"breaker_a": 15.0}, id="another rating"),
        pytest.param({"breaker_type": "gfci"}, id="another type"),
        pytest.param({"breaker_a": None}, id="a rating not known matches nothing"),
        pytest.param({"breaker_type": ""}, id="a type not known matches nothing"),
    ],
)
def test_unlike_breakers_go_with_their_circuits(steps, circuit, other):
    found = steps(circuit("X", "1"), circuit("Y", "3", **other), X="3", Y="1")
    assert {step.how for step in found.values()} == {How.MOVE_BREAKER}
    assert all(step.with_breaker for step in found.values())


def test_two_breakers_not_known_are_not_equal(steps, circuit):
    blank = {"breaker_a": None, "breaker_type": ""}
    found = steps(circuit("X", "1", **blank), circuit("Y", "3", **blank), X="3", Y="1")
    assert {step.how for step in found.values()} == {How.MOVE_BREAKER}


def test_types_are_equal_in_any_case(steps, circuit):
    found = steps(circuit("X", "1", breaker_type="AFCI"), circuit("Y", "3", breaker_type="afci"), X="3", Y="1")
    assert {step.how for step in found.values()} == {How.EXCHANGE}


def test_in_a_chain_to_a_vacant_space_every_breaker_goes_along_from_the_vacant_end(work, circuit):
    plan = work(circuit("X", "1"), circuit("Y", "3"), X="3", Y="5")
    assert [(step.circuit, step.how) for step in plan.steps] == [("Y", How.MOVE_BREAKER), ("X", How.MOVE_BREAKER)]
    assert plan.max_loose == 0


def test_one_unlike_breaker_in_a_round_makes_all_of_the_round_move(steps, circuit):
    wall = [circuit("X", "1"), circuit("Y", "3"), circuit("Z", "5", breaker_a=15.0)]
    found = steps(*wall, X="3", Y="5", Z="1")
    assert {step.how for step in found.values()} == {How.MOVE_BREAKER}


def test_a_tied_pair_takes_its_breakers_to_single_ones(work, circuit):
    pair = [circuit("P", "1", shared_neutral="n"), circuit("Q", "3", shared_neutral="n")]
    plan = work(*pair, circuit("X", "5"), circuit("Y", "7"), P="5", Q="7", X="1", Y="3")
    assert {step.how for step in plan.steps} == {How.MOVE_BREAKER}
    assert plan.max_loose == 2


def test_two_like_pairs_exchange_conductors(work, circuit):
    pairs = [
        circuit(label, space, shared_neutral=neutral)
        for label, space, neutral in [("P", "1", "n"), ("Q", "3", "n"), ("R", "5", "m"), ("S", "7", "m")]
    ]
    plan = work(*pairs, P="5", Q="7", R="1", S="3")
    assert {step.how for step in plan.steps} == {How.EXCHANGE}
    assert plan.max_loose == 1


def test_a_pair_turned_over_and_a_turned_range_are_turns(steps, circuit):
    pair = [circuit("P", "1", shared_neutral="n"), circuit("Q", "3", shared_neutral="n")]
    found = steps(*pair, circuit("R", "5-7", "120/240"), P="3", Q="1", R="7-5")
    assert {label: step.how for label, step in found.items()} == dict.fromkeys("PQR", How.TURN)
    assert found["R"].action == (
        "Exchange its two conductors on the breaker: the one on 5 goes to 7, the one on 7 to 5."
    )
    assert (found["R"].from_text, found["R"].to_text) == ("5-7", "7-5")


def test_a_tandem_body_moves_whole(steps, circuit):
    halves = [circuit("X", "2a"), circuit("Y", "2b", breaker_a=15.0)]
    found = steps(*halves, circuit("Z", "4"), X="4a", Y="4b", Z="2")
    assert all(step.how is How.MOVE_BREAKER and step.with_breaker for step in found.values())
    assert found["X"].goes_along[0] == "Y, on the same breaker body, goes along."
    assert found["Y"].action == "It went along with X: its conductor stays on the same breaker."
    assert found["Y"].goes_along == ("CT on it, if any: now leg B.",)


def test_a_pair_taken_out_of_a_tandem_lands_on_new_breakers(steps, circuit):
    pair = [circuit("P", "2a", shared_neutral="n"), circuit("Q", "2b", shared_neutral="n")]
    found = steps(*pair, P="5", Q="7")
    assert all(step.is_new_breaker for step in found.values())
    assert "Its partner on the shared neutral, Q, goes later to space 7." in found["P"].goes_along
    assert "Its partner on the shared neutral, P, is now on space 5. Tie their handles." in found["Q"].goes_along


def test_a_partner_that_stays_is_tied_at_once(steps, circuit):
    pair = [circuit("P", "1", shared_neutral="n"), circuit("Q", "5", shared_neutral="n")]
    along = steps(*pair, Q="3")["Q"].goes_along
    assert "Its partner on the shared neutral, P, stays on space 1. Tie their handles." in along


def test_a_conductor_does_not_move_onto_a_breaker_above_its_limit(steps, circuit):
    # NEC 2023, 240.4(D): 14 AWG copper takes 15 A at most.
    found = steps(circuit("X", "1", wire=Wire("14", "cu")), circuit("Y", "3"), X="3", Y="1")
    assert found["X"].is_new_breaker
    assert found["X"].breaker_a == 15.0
    assert "limit of 15 A" in found["X"].goes_along[0]


def test_a_spare_makes_room_first(work, circuit):
    spare = circuit("S", "3", role=Role.SPARE, breaker_a=15.0)
    plan = work(circuit("X", "1"), spare, removed=("S",), X="3")
    assert [(step.circuit, step.how, step.to_text) for step in plan.steps] == [
        ("S", How.TAKE_OUT, ""),
        ("X", How.MOVE_BREAKER, "3"),
    ]
    assert plan.steps[0].how.document_word == "move breaker"


def test_a_new_circuit_lands_on_the_equal_breaker_of_a_spare_that_gives_way(work, circuit):
    plan = work(circuit("N"), circuit("S", "3", role=Role.SPARE), removed=("S",), N="3")
    assert [(step.circuit, step.how, step.is_new_breaker) for step in plan.steps] == [("N", How.NEW, False)]


def test_two_single_breakers_are_no_two_pole_breaker(work, circuit):
    singles = [circuit("X", "1"), circuit("S", "3", role=Role.SPARE), circuit("T", "5", role=Role.SPARE)]
    plan = work(*singles, circuit("N", volts="240"), removed=("S", "T"), X="5", N="1-3")
    step = {step.circuit: step for step in plan.steps}["N"]
    assert step.is_new_breaker
    assert step.action.startswith("Fit a 20 A standard two-pole breaker")
    assert any(part.circuits == ("N",) for part in plan.parts)


def test_a_single_circuit_does_not_take_one_pole_of_a_two_pole_breaker(work, circuit):
    plan = work(circuit("S", "1-3", "240", role=Role.SPARE), circuit("N"), removed=("S",), N="1")
    assert {step.circuit: step.is_new_breaker for step in plan.steps}["N"]


def test_a_spare_that_changes_places_with_an_equal_breaker_moves_nothing(work, circuit):
    plan = work(circuit("X", "1"), circuit("S", "3", role=Role.SPARE), X="3", S="1")
    by_label = {step.circuit: step for step in plan.steps}
    assert by_label["S"].action.startswith("Move nothing")
    assert by_label["X"].how is How.EXCHANGE
    assert plan.max_loose == 0


def test_a_new_circuit_needs_a_breaker_and_hangs_nobody_loose(work, circuit):
    plan = work(circuit("N", breaker_a=None, breaker_type=""), N="9")
    assert (plan.steps[0].how, plan.steps[0].is_new_breaker, plan.max_loose) == (How.NEW, True, 0)
    assert plan.steps[0].action == "Fit a breaker at space 9 and land the new conductor on it."
    assert plan.steps[0].goes_along == ("Land its neutral and equipment ground on the bars.",)


def test_a_new_circuit_brings_its_neutral_and_ground(steps, circuit):
    found = steps(circuit("G", breaker_type="gfci"), circuit("W", volts="240"), G="1", W="5-7")
    assert found["G"].goes_along == (
        "Its load neutral goes on the breaker too; its own neutral (pigtail or clip) goes on the neutral bar.",
        "Land its equipment ground on the bar.",
    )
    assert found["W"].goes_along == ("Land its equipment ground on the bar.",)


@pytest.mark.parametrize(
    ("slack_in", "to", "splice", "text"),
    [
        pytest.param(None, "11", Splice.NONE, "", id="5 in down the column, slack blank"),
        pytest.param(
            None, "2", Splice.MAY_BE_NEEDED, "A splice may be needed: reach 12 in, slack not measured.", id="12"
        ),
        pytest.param(None, "13", Splice.NONE, "", id="6 in, slack blank"),
        pytest.param(
            None, "15", Splice.MAY_BE_NEEDED, "A splice may be needed: reach 7 in, slack not measured.", id="7"
        ),
        pytest.param(4.0, "11", Splice.NEEDED, "Splice: reach 5 in, slack 4 in.", id="beyond the slack"),
        pytest.param(5.0, "11", Splice.NONE, "", id="just within the slack"),
        pytest.param(float("inf"), "2", Splice.NONE, "", id="ok"),
    ],
)
def test_a_step_says_when_the_conductor_may_be_short(steps, circuit, slack_in, to, splice, text):
    step = steps(circuit("X", "1", slack_in=slack_in), panel={"spaces": 20}, X=to)["X"]
    assert (step.splice, step.splice_text) == (splice, text)


def test_the_load_neutral_of_a_gfci_goes_along_with_its_conductor(steps, circuit):
    gfci = {"breaker_type": "gfci"}
    exchanged = steps(circuit("X", "1", **gfci), circuit("Y", "3", **gfci), X="3", Y="1")
    assert "Its load neutral goes along, onto the breaker at space 3." in exchanged["X"].goes_along
    along = steps(circuit("X", "1", **gfci), X="5")["X"].goes_along
    own = "its own neutral (pigtail or clip) goes back on the neutral bar"
    assert along == (f"Its load neutral stays on the breaker; {own}.",)


def test_a_metering_coil_is_named_only_where_the_leg_changes(steps, circuit):
    # Spaces 1 and 5 are on leg A, 3 on leg B (common practice).
    assert steps(circuit("X", "1"), X="5")["X"].goes_along == ()
    assert steps(circuit("X", "1"), X="3")["X"].goes_along == ("CT on it, if any: now leg B.",)


def test_a_bolted_breaker_gets_its_screw(steps, circuit):
    panel = {"bolt_on": frozenset({1, 5})}
    assert steps(circuit("X", "1"), panel=panel, X="5")["X"].goes_along[-1].startswith("Bolt-on breaker")


@pytest.mark.parametrize(
    ("cells", "is_tested"),
    [
        pytest.param({"is_neutral_checked": False}, True, id="blank"),
        pytest.param({"is_neutral_checked": True}, False, id="none: its own neutral"),
        pytest.param({"is_neutral_checked": False, "shared_neutral": "n"}, False, id="known to be shared"),
        pytest.param({"is_neutral_checked": False, "role": Role.SPARE}, False, id="a spare has no neutral"),
    ],
)
def test_a_moved_circuit_is_tested_before_where_nobody_checked_its_neutral(work, circuit, cells, is_tested):
    tests = work(circuit("X", "1", **cells), X="5").pre_moves
    assert [(test.circuit, test.text) for test in tests] == ([("X", "X, space 1")] if is_tested else [])


def test_what_stays_needs_neither_step_nor_test(work, circuit):
    plan = work(circuit("X", "1", is_neutral_checked=False))
    assert (plan.steps, plan.parts, plan.pre_moves, plan.max_loose) == ((), (), (), 0)


def test_two_conductors_under_one_breaker_stay_together(work, circuit):
    plan = work(circuit("X", "1", tied="t"), circuit("Y", "1", tied="t"), X="5", Y="5")
    assert [(step.circuit, step.with_breaker) for step in plan.steps] == [("X", True), ("Y", True)]
    assert plan.steps[0].goes_along == ("Y, on the same breaker body, goes along.",)
    assert plan.steps[1].action.startswith("It went along with X")
    assert plan.steps[1].goes_along == ()


def test_names_from_the_file_are_carried_as_they_are(steps, circuit):
    name = "[red]\x1b[31m=cmd"
    assert steps(circuit(name, "1"), **{name: "5"})[name].circuit == name


def test_a_new_two_pole_circuit_brings_two_new_conductors(work, circuit):
    plan = work(circuit("N", volts="240", breaker_a=None, breaker_type=""), N="9-11")
    assert plan.steps[0].action == "Fit a two-pole breaker at spaces 9-11 and land the two new conductors on it."
