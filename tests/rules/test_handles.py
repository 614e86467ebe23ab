"""Common disconnects, conductors under one breaker, and ties across a gap."""

import pytest

from balancer.panel import Role
from balancer.rules import Severity

DISCONNECT = "shared-neutral-common-disconnect"
DOUBLE_TAP = "conductors-under-one-breaker"
APART = "tied-breakers-apart"


def pair(circuit, first, second, **cells):
    return [circuit(label, space, shared_neutral="n", **cells) for label, space in [("x", first), ("y", second)]]


@pytest.mark.parametrize(
    ("first", "second"),
    [
        pytest.param("1", "7", id="a gap between them"),
        pytest.param("1", "4", id="side by side in two columns"),
        pytest.param("6", "8a", id="full-size beside a half"),
        pytest.param("6a", "8a", id="upper halves of two tandems"),
    ],
)
def test_pair_that_cannot_be_tied_is_a_warning(circuit, look, first, second):
    [finding] = look(DISCONNECT, *pair(circuit, first, second, tied="t"))
    assert finding.severity is Severity.WARNING
    assert "not next to each other" in finding.message
    assert "older work may have been legal" in finding.message
    assert finding.citation == "NEC 2023, 210.4(B)"


@pytest.mark.parametrize(("first", "second"), [("1", "3"), ("3", "1"), ("10b", "12a"), ("10a", "12b")])
def test_adjacent_pair_without_a_declared_tie_is_a_notice(circuit, look, first, second):
    [finding] = look(DISCONNECT, *pair(circuit, first, second))
    assert finding.severity is Severity.NOTICE
    assert "verify that a listed handle tie or a two-pole breaker" in finding.message


@pytest.mark.parametrize("cells", [{"tied": "t"}, {"breaker_type": "Two-Pole"}, {"breaker_type": "2-pole gfci"}])
def test_adjacent_pair_with_a_tie_or_two_pole_breaker_is_fine(circuit, look, cells):
    assert look(DISCONNECT, *pair(circuit, "1", "3", **cells)) == []


def test_two_different_ties_do_not_join_a_pair(circuit, look):
    hots = [circuit("x", "1", shared_neutral="n", tied="s"), circuit("y", "3", shared_neutral="n", tied="t")]
    assert [finding.severity for finding in look(DISCONNECT, *hots)] == [Severity.NOTICE]


def test_pair_on_one_leg_is_left_to_the_graver_rule(circuit, look):
    assert look(DISCONNECT, *pair(circuit, "12a", "12b")) == []


def test_two_conductors_under_one_breaker_is_a_warning(circuit, look):
    [finding] = look(DOUBLE_TAP, circuit("x", "7"), circuit("y", "7"), circuit("z", "9"))
    assert finding.severity is Severity.WARNING
    assert finding.circuits == ("x", "y")
    assert "2 conductors are under one breaker terminal" in finding.message
    assert "110.14(A)" in finding.citation


def test_two_circuits_on_one_two_pole_breaker_are_one_finding(circuit, look):
    [finding] = look(DOUBLE_TAP, circuit("x", "5-7", "240"), circuit("y", "5-7", "240"))
    assert finding.circuits == ("x", "y")


def test_halves_of_a_tandem_and_spares_are_no_double_tap(circuit, look):
    circuits = [
        circuit("x", "12a"),
        circuit("y", "12b"),
        circuit("z", "1"),
        circuit("spare", "1", role=Role.SPARE),
    ]
    assert look(DOUBLE_TAP, *circuits) == []


@pytest.mark.parametrize(("first", "second"), [("1", "5"), ("1", "2")])
def test_tied_breakers_apart_are_a_warning(circuit, look, first, second):
    [finding] = look(APART, circuit("x", first, tied="T"), circuit("y", second, tied="t"))
    assert finding.severity is Severity.WARNING
    assert "do not stand in one line" in finding.message


@pytest.mark.parametrize("spaces", [("1", "3"), ("3", "1"), ("7", "7"), ("12a", "12b"), ("1", "3", "5"), ("1-3", "5")])
def test_tied_breakers_in_line_are_fine(circuit, look, spaces):
    circuits = [
        circuit(f"c{index}", space, "240" if "-" in space else "120", tied="t") for index, space in enumerate(spaces)
    ]
    assert look(APART, *circuits) == []


def test_tied_shared_neutral_apart_is_told_once(circuit, look):
    hots = pair(circuit, "1", "7", tied="t")
    assert look(APART, *hots) == []
    assert len(look(DISCONNECT, *hots)) == 1
