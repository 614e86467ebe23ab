import pytest

from balancer.arrange.steps import build_work
from balancer.arrange.work import PartKind
from balancer.panel import Wire


@pytest.fixture
def parts(installation, moved):
    def parts(*circuits, panel=None, **landings):
        wall = installation(*circuits, **(panel or {}))
        return build_work(wall, moved(wall, **landings)).parts

    return parts


def test_a_space_left_open_needs_a_filler_plate(parts, circuit):
    (part,) = parts(circuit("X", "1"), circuit("Y", "3"), X="5", Y="7")
    assert (part.kind, part.quantity) == (PartKind.FILLER, 2)
    assert part.text == "filler plates for spaces 1, 3, left open (plates that come off 5, 7 may fit)"


def test_nothing_is_needed_where_circuits_only_change_places(parts, circuit):
    assert parts(circuit("X", "1"), circuit("Y", "3"), X="3", Y="1") == ()


def test_a_pair_mended_on_two_single_breakers_needs_a_handle_tie(parts, circuit):
    pair = [circuit("P", "1", shared_neutral="n"), circuit("Q", "5", shared_neutral="n")]
    tie, filler = parts(*pair, Q="3")
    assert (tie.kind, tie.circuits) == (PartKind.HANDLE_TIE, ("P", "Q"))
    assert "210.4(B)" in tie.text
    assert filler.kind is PartKind.FILLER


def test_a_pair_that_was_tied_needs_no_second_tie(parts, circuit):
    pair = [circuit("P", "1", shared_neutral="n"), circuit("Q", "3", shared_neutral="n")]
    assert [part.kind for part in parts(*pair, P="5", Q="7")] == [PartKind.FILLER]


def test_a_pair_out_of_a_tandem_needs_one_two_pole_breaker(parts, circuit):
    pair = [circuit("P", "2a", shared_neutral="n"), circuit("Q", "2b", shared_neutral="n")]
    breaker = parts(*pair, P="5", Q="7")[0]
    assert (breaker.kind, breaker.quantity, breaker.circuits) == (PartKind.BREAKER, 1, ("P", "Q"))
    assert breaker.text.startswith("20 A two-pole breaker, or two single-pole ones with a listed handle tie")


def test_a_new_circuit_needs_its_breaker(parts, circuit):
    known, blank = parts(circuit("N"), circuit("M", breaker_a=None, breaker_type=""), N="1", M="3")
    assert known.text == "20 A standard breaker for N at space 1"
    assert blank.text == "breaker for M at space 3; size it to its conductor and load"


def test_a_new_two_pole_circuit_on_bolted_spaces_needs_a_bolt_on_breaker(parts, circuit):
    (part,) = parts(circuit("N", "", "240"), panel={"bolt_on": frozenset({5, 7})}, N="5-7")
    assert part.text == "bolt-on 20 A standard two-pole breaker for N at spaces 5-7"


def test_a_conductor_too_short_needs_a_connector_and_a_length(parts, circuit):
    splice = parts(circuit("X", "1", slack_in=2.5, wire=Wire("12", "cu")), X="2")[0]
    assert (splice.kind, splice.quantity, splice.is_certain) == (PartKind.SPLICE, 1, True)
    assert "of 12 cu, at least 10 in" in splice.text  # 12 in to the other column less 2.5 in, rounded up
    maybe = parts(circuit("X", "1"), X="2")[0]
    assert not maybe.is_certain
    assert "up to 12 in" in maybe.text
