"""Shared neutrals: both hots on one leg, three hots, in-phase supplies, and what nobody checked."""

import pytest

from balancer.panel import Leg, Load, Pole, PowerFactor, Role, Supply, SupplySystem
from balancer.rules import Severity
from balancer.rules.shared_neutrals import neutral_current_a

ONE_LEG = "shared-neutral-one-leg"
THREE_HOTS = "shared-neutral-three-hots"
IN_PHASE = "shared-neutral-in-phase"
NOT_CHECKED = "shared-neutral-not-checked"


def pair(circuit, first, second, **cells):
    return [
        circuit("red", first, amps=15.0, shared_neutral="n", **cells),
        circuit("black", second, amps=5.0, shared_neutral="n", **cells),
    ]


# Common practice: spaces 1..12 are on A A B B A A B B A A B B; 15 and 5 A leave 10 A on opposite legs, 20 A on one.
@pytest.mark.parametrize(("first", "second"), [("1", "5"), ("1", "2"), ("12a", "12b"), ("7", "7"), ("3", "8")])
def test_both_hots_on_one_leg_is_an_error_that_names_both_sums(circuit, look, first, second):
    [finding] = look(ONE_LEG, *pair(circuit, first, second))
    assert finding.severity is Severity.ERROR
    assert set(finding.circuits) == {"red", "black"}
    assert "the neutral carries the sum, 20.0 A at full load" in finding.message
    assert "On opposite legs it carries 10.0 A" in finding.message
    assert "NEC 2023, 210.4" in finding.citation


@pytest.mark.parametrize(("first", "second"), [("1", "3"), ("1", "4"), ("12b", "10a"), ("6", "12a")])
def test_hots_on_opposite_legs_are_no_error(circuit, look, first, second):
    assert look(ONE_LEG, *pair(circuit, first, second)) == []


def test_pair_with_one_hot_not_landed_is_no_error_yet(circuit, look):
    assert look(ONE_LEG, *pair(circuit, "1", "")) == []


def test_pair_labels_join_whatever_their_case(circuit, look):
    hots = [circuit("red", "1", shared_neutral="N1"), circuit("black", "5", shared_neutral="n1")]
    assert len(look(ONE_LEG, *hots)) == 1


def test_assumed_loads_are_said_to_be_assumed(circuit, look):
    assumed = Load(neutral_a=8.0, is_assumed=True)
    [finding] = look(ONE_LEG, *pair(circuit, "1", "5", load=assumed))
    assert "16.0 A at full load (assumed loads)" in finding.message


def test_two_legs_of_a_wye_cancel_only_partly(circuit, look):
    # Derived: 15 and 5 A on legs 120 degrees apart leave sqrt(15^2 + 5^2 - 15*5) = 13.2 A.
    [finding] = look(ONE_LEG, *pair(circuit, "1", "5"), system="120/208")
    assert "20.0 A" in finding.message
    assert "On opposite legs it carries 13.2 A" in finding.message


# Derived from closed forms: |I_N|^2 = I_A^2 + I_B^2 - 2 I_A I_B cos(difference of the angles), legs 180 degrees apart.
@pytest.mark.parametrize(
    ("first", "second", "neutral_a"),
    [((10.0, 1.0), (10.0, 0.8), 6.3246), ((15.0, 1.0), (10.0, 0.7), 10.7238)],
)
def test_neutral_current_is_a_phasor_sum(circuit, first, second, neutral_a):
    hots = [
        (circuit(label, load=Load(neutral_a=amps, neutral_pf=PowerFactor(pf))), leg)
        for label, (amps, pf), leg in [("red", first, Leg.A), ("black", second, Leg.B)]
    ]
    assert neutral_current_a(Supply(), hots) == pytest.approx(neutral_a, abs=5e-5)


def test_neutral_current_adds_where_the_legs_are_in_phase(circuit):
    # Derived: a 120 V source on both legs, 12 + 9 = 21 A in the neutral.
    hots = [(circuit("red", amps=12.0), Leg.A), (circuit("black", amps=9.0), Leg.B)]
    assert neutral_current_a(Supply(system=SupplySystem.IN_PHASE), hots) == pytest.approx(21.0)


def test_three_hots_on_one_neutral_is_one_error(circuit, look):
    hots = [circuit(label, space, shared_neutral="n") for label, space in [("x", "1"), ("y", "3"), ("z", "5")]]
    [finding] = look(THREE_HOTS, *hots)
    assert finding.severity is Severity.ERROR
    assert finding.circuits == ("x", "y", "z")
    assert "at least two of 3 hots are on the same leg" in finding.message
    # 5 A on A, B and A: 5 - 5 + 5.
    assert "5.0 A with all of them" in finding.message
    assert look(ONE_LEG, *hots) == []


def test_two_hots_are_not_three(circuit, look):
    assert look(THREE_HOTS, *pair(circuit, "1", "3")) == []


@pytest.mark.parametrize(("first", "second"), [("1", "3"), ("1", "5"), ("", "")])
def test_shared_neutral_on_an_in_phase_supply_is_an_error_wherever_it_is_landed(circuit, look, first, second):
    [finding] = look(IN_PHASE, *pair(circuit, first, second), system="120")
    assert finding.severity is Severity.ERROR
    assert "carries the sum, 20.0 A at full load" in finding.message
    assert finding.citation == "NEC 2023, 710.15(C) (from memory)"


def test_in_phase_supply_has_one_finding_for_a_pair(circuit, look):
    assert look(ONE_LEG, *pair(circuit, "1", "5"), system="120") == []
    assert look("shared-neutral-common-disconnect", *pair(circuit, "1", "7"), system="120") == []


def test_shared_neutral_on_legs_180_degrees_apart_is_not_the_in_phase_error(circuit, look):
    assert look(IN_PHASE, *pair(circuit, "1", "3")) == []


def test_circuits_with_their_own_neutrals_are_fine_on_an_in_phase_supply(circuit, look):
    assert look(IN_PHASE, circuit("x", "1"), circuit("y", "3"), system="120") == []


def test_blank_shared_neutral_is_one_notice_with_every_circuit(circuit, look):
    circuits = [circuit("x", "3", is_neutral_checked=False), circuit("y", "1", is_neutral_checked=False)]
    [finding] = look(NOT_CHECKED, *circuits)
    assert finding.severity is Severity.NOTICE
    assert finding.circuits == ("y", "x")
    assert "y (space 1) and x (space 3)" in finding.message
    assert "0 A says that the neutral is its own" in finding.message


def test_nothing_to_check_where_the_neutral_is_known_or_cannot_be_shared(circuit, look):
    unchecked = {"is_neutral_checked": False}
    line = Load(line_a=10.0, neutral_a=2.0, neutral_pole=Pole.FIRST)
    circuits = [
        circuit("own", "1"),
        circuit("spare", "2", role=Role.SPARE, **unchecked),
        circuit("heater", "5-7", "240", **unchecked),
        circuit("range", "6-8", "120/240", load=line, **unchecked),
        *pair(circuit, "9", "11", **unchecked),
    ]
    assert look(NOT_CHECKED, *circuits) == []
