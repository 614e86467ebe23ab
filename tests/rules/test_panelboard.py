"""What the panelboard's spaces, stabs, bus and main are made for."""

import pytest

from balancer.panel import Role, parse_landing
from balancer.rules import Severity, check_installation

TANDEM = "tandem-not-allowed"
STAB = "stab-limit"
HOLDS = "more-poles-than-the-panel-holds"
MAIN = "main-above-bus"
SOURCES = "sources-on-the-bus"
PLUG_ON = "plug-on-neutral-away-from-bar"


def test_half_breakers_where_the_panel_takes_none_are_one_error_a_space(circuit, look):
    circuits = [circuit("x", "11a"), circuit("y", "11b"), circuit("z", "12a")]
    [finding] = look(TANDEM, *circuits, tandem_spaces=frozenset({12}))
    assert finding.severity is Severity.ERROR
    assert finding.circuits == ("x", "y")
    assert "space 11: half-width breakers (x (space 11a) and y (space 11b))" in finding.message
    assert "408.54" in finding.citation


def test_half_breakers_are_not_judged_where_nobody_said_what_fits(circuit, look):
    assert look(TANDEM, circuit("x", "11a")) == []


def test_full_size_breaker_fits_a_space_without_tandems(circuit, look):
    assert look(TANDEM, circuit("x", "11"), tandem_spaces=frozenset()) == []


def test_handle_ratings_of_a_row_above_the_stab_limit_are_an_error(circuit, look):
    circuits = [circuit("x", "1", breaker_a=70), circuit("y", "2", breaker_a=80), circuit("z", "3", breaker_a=100)]
    [finding] = look(STAB, *circuits, stab_a=140.0)
    assert finding.severity is Severity.ERROR
    assert finding.circuits == ("x", "y")
    assert "spaces 1 and 2: the handle ratings of" in finding.message
    assert "add up to 150 A on one stab; the panel's maker allows 140 A" in finding.message


def test_handle_ratings_at_the_stab_limit_are_fine(circuit, look):
    assert look(STAB, circuit("x", "1", breaker_a=70), circuit("y", "2", breaker_a=70), stab_a=140.0) == []


def test_two_pole_breaker_counts_in_both_its_rows(circuit, look):
    range_, heater = circuit("range", "1-3", "240", breaker_a=100), circuit("heater", "2-4", "240", breaker_a=60)
    findings = look(STAB, range_, heater, stab_a=140.0)
    assert [finding.message[:14] for finding in findings] == ["spaces 1 and 2", "spaces 3 and 4"]


def test_two_circuits_under_one_breaker_have_one_handle(circuit, look):
    circuits = [circuit("x", "1", breaker_a=80), circuit("y", "1", breaker_a=80), circuit("z", "2", breaker_a=50)]
    assert look(STAB, *circuits, stab_a=140.0) == []


def test_both_halves_of_a_tandem_count(circuit, look):
    circuits = [circuit("x", "1a", breaker_a=50), circuit("y", "1b", breaker_a=50), circuit("z", "2", breaker_a=50)]
    assert len(look(STAB, *circuits, stab_a=140.0)) == 1


# NEC 2023, 408.54: a two-pole breaker counts as two overcurrent devices.
def test_two_pole_breaker_counts_as_two_devices(circuit, look):
    circuits = [circuit("x", "1-3", "240"), circuit("y", "", "240"), circuit("z")]
    [finding] = look(HOLDS, *circuits, spaces=4, tandem_spaces=frozenset())
    assert finding.severity is Severity.ERROR
    assert finding.circuits == ("y", "z")
    assert "5 poles, but the panel holds 4" in finding.message
    assert finding.citation == "NEC 2023, 408.54"


def test_as_many_poles_as_spaces_fit(circuit, look):
    circuits = [circuit("x", "1-3", "240"), circuit("y", "2"), circuit("z")]
    assert look(HOLDS, *circuits, spaces=4, tandem_spaces=frozenset()) == []


def test_space_that_takes_a_tandem_holds_two_and_a_reserved_one_none(circuit, look):
    circuits = [circuit("x", "1-3", "240"), circuit("y"), circuit("z"), circuit("w")]
    assert look(HOLDS, *circuits, spaces=4, tandem_spaces=frozenset({2})) == []
    assert len(look(HOLDS, *circuits, spaces=4, tandem_spaces=frozenset({2}), reserved=frozenset({4}))) == 1


def test_spare_breaker_makes_room(circuit, look):
    circuits = [circuit("x", "1"), circuit("spare", "2", role=Role.SPARE), circuit("y")]
    assert look(HOLDS, *circuits, spaces=2, tandem_spaces=frozenset()) == []


def test_too_many_poles_is_a_warning_where_nobody_said_which_spaces_take_tandems(circuit, look):
    [finding] = look(HOLDS, circuit("x"), circuit("y"), circuit("z"), spaces=2)
    assert finding.severity is Severity.WARNING


def test_circuit_taken_out_by_an_arrangement_needs_no_place(circuit, installation):
    house = installation(
        circuit("x", "1-3", "240"), circuit("y", "2-4", "240"), circuit("z"), spaces=4, tandem_spaces=frozenset()
    )
    as_left = {"x": parse_landing("1-3"), "z": parse_landing("2")}
    assert HOLDS in [finding.rule for finding in check_installation(house)]
    assert HOLDS not in [finding.rule for finding in check_installation(house, as_left)]


def test_main_above_the_bus_is_an_error(look):
    [finding] = look(MAIN, main_a=200.0, bus_a=125.0)
    assert finding.severity is Severity.ERROR
    assert finding.circuits == ()
    assert "the main breaker (main_a) is 200 A on a bus of 125 A" in finding.message
    assert "408.36" in finding.citation


@pytest.mark.parametrize("ratings", [{"main_a": 200.0, "bus_a": 200.0}, {"main_a": 200.0}, {"bus_a": 100.0}, {}])
def test_main_within_the_bus_or_not_known_is_fine(look, ratings):
    assert look(MAIN, **ratings) == []


def test_backfed_breaker_above_the_bus_may_be_the_main(circuit, look):
    main = circuit("main", "1-3", "120/240", role=Role.BACKFED, breaker_a=125)
    [finding] = look(MAIN, main, bus_a=100.0)
    assert finding.severity is Severity.NOTICE
    assert "If it is the main, it does not protect the bus" in finding.message
    assert look(MAIN, main, bus_a=125.0) == []


def solar(circuit, breaker_a):
    return circuit("solar", "1-3", "240", role=Role.BACKFED, breaker_a=breaker_a)


def test_source_beside_the_main_is_a_notice_with_the_120_percent_sum(circuit, look):
    # NEC 2023, 705.12 (worked, derived): a 200 A bus allows 240 A of main and source breakers at opposite ends.
    [finding] = look(SOURCES, solar(circuit, 40), main_a=200.0, bus_a=200.0)
    assert finding.severity is Severity.NOTICE
    assert "add up to 240 A on a bus of 200 A" in finding.message
    assert "up to 240 A is allowed" in finding.message


def test_source_is_not_noticed_where_the_bus_carries_both(circuit, look):
    assert look(SOURCES, solar(circuit, 40), main_a=160.0, bus_a=200.0) == []


def test_source_behind_an_interlock_or_the_main_itself_is_not_noticed(circuit, look):
    interlock = circuit("slide", "5-7", "240", role=Role.INTERLOCK)
    assert look(SOURCES, solar(circuit, 40), interlock, main_a=200.0, bus_a=200.0) == []
    assert look(SOURCES, solar(circuit, 200), main_a=200.0, bus_a=200.0) == []


def test_plug_on_breaker_away_from_the_bar_is_a_warning(circuit, look):
    circuits = [circuit(label, label, breaker_type="AFCI plug-on neutral") for label in ("1", "3")]
    [finding] = look(PLUG_ON, *circuits, plug_on_neutral=frozenset({1, 2}))
    assert finding.circuits == ("3",)
    assert finding.severity is Severity.WARNING
    assert "its neutral clip hangs free" in finding.message


def test_other_breakers_and_panels_without_a_bar_are_fine(circuit, look):
    assert look(PLUG_ON, circuit("x", "3", breaker_type="afci"), plug_on_neutral=frozenset({1})) == []
    assert look(PLUG_ON, circuit("x", "3", breaker_type="afci plug-on neutral")) == []
