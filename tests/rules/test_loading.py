"""Running loads against their breakers."""

import math

import pytest

from balancer.panel import Load, Pole, PowerFactor, Role, Supply, SupplySystem
from balancer.rules import Severity
from balancer.rules.loading import running_a

CONTINUOUS = "continuous-load-above-80-percent"
ABOVE = "load-above-breaker"


# NEC 2023, 210.20(A): the breaker is at least 125 % of the continuous load, so 12 A on 15 A and 16 A on 20 A.
@pytest.mark.parametrize(("breaker_a", "allowed_a"), [(15, 12.0), (20, 16.0), (30, 24.0)])
def test_continuous_load_may_take_80_percent_of_its_breaker(circuit, look, breaker_a, allowed_a):
    at_limit = circuit("x", "1", amps=allowed_a, breaker_a=breaker_a, is_continuous=True)
    above = circuit("y", "3", amps=allowed_a + 0.1, breaker_a=breaker_a, is_continuous=True)
    [finding] = look(CONTINUOUS, at_limit, above)
    assert finding.circuits == ("y",)
    assert finding.severity is Severity.ERROR
    assert f"which may carry {allowed_a:g} A for three hours or more (80 %)" in finding.message
    assert "210.20(A)" in finding.citation


def test_load_that_is_not_continuous_may_take_the_whole_breaker(circuit, look):
    short = circuit("x", "1", amps=20.0, breaker_a=20)
    assert look(CONTINUOUS, short) == []
    assert look(ABOVE, short) == []


def test_assumed_continuous_load_makes_a_notice_at_most(circuit, look):
    load = Load(neutral_a=18.0, is_assumed=True)
    [finding] = look(CONTINUOUS, circuit("x", "1", load=load, breaker_a=20, is_continuous=True))
    assert finding.severity is Severity.NOTICE
    assert "18.0 A (assumed load)" in finding.message


def test_use_that_counts_as_continuous_is_a_warning(circuit, look):
    # Derived: 4500 W at 240 V is 18.75 A, and 125 % of it 23.4 A, so 25 A at least.
    heater = circuit("tank", "1-3", "240", amps=18.75, breaker_a=20, use="water heating")
    [finding] = look(CONTINUOUS, heater)
    assert finding.severity is Severity.WARNING
    assert "Not marked continuous, but 422.13 (from memory) counts most such loads so" in finding.message
    assert look(CONTINUOUS, circuit("tank", "1-3", "240", amps=18.75, breaker_a=25, use="water heating")) == []


def test_load_above_its_breaker_is_a_warning(circuit, look):
    [finding] = look(ABOVE, circuit("x", "1", amps=21.0, breaker_a=20))
    assert finding.severity is Severity.WARNING
    assert "21.0 A at full use on a 20 A breaker" in finding.message


def test_assumed_load_above_its_breaker_is_a_notice(circuit, look):
    load = Load(neutral_a=21.0, is_assumed=True)
    assert [f.severity for f in look(ABOVE, circuit("x", "1", load=load, breaker_a=20))] == [Severity.NOTICE]


def test_continuous_load_above_its_breaker_is_told_once(circuit, look):
    heavy = circuit("x", "1", amps=21.0, breaker_a=20, is_continuous=True)
    assert len(look(CONTINUOUS, heavy)) == 1
    assert look(ABOVE, heavy) == []


def test_unknown_breakers_and_devices_are_left_aside(circuit, look):
    circuits = [
        circuit("x", "1", amps=99.0, is_continuous=True),
        circuit("solar", "2-4", "240", amps=99.0, breaker_a=20, role=Role.BACKFED, is_continuous=True),
    ]
    assert look(CONTINUOUS, *circuits) == []
    assert look(ABOVE, *circuits) == []


def test_larger_pole_of_a_120_240_circuit_counts(circuit, look):
    load = Load(line_a=20.0, neutral_a=5.0, neutral_pole=Pole.FIRST)
    dryer = circuit("dryer", "1-3", "120/240", load=load, breaker_a=30, is_continuous=True)
    [finding] = look(CONTINUOUS, dryer)
    assert "25.0 A of continuous load on a 30 A breaker, which may carry 24 A" in finding.message


def test_running_amps_add_as_phasors(circuit):
    # 3 - 4j A from leg to leg and 3 A at unity to neutral: |6 - 4j|.
    load = Load(line_a=5.0, line_pf=PowerFactor(0.6), neutral_a=3.0)
    assert running_a(Supply(), circuit("x", "1-3", "120/240", load=load)) == pytest.approx(math.hypot(6.0, 4.0))


def test_running_amps_on_a_wye_take_the_worse_leg(circuit):
    # V_A - V_B leads V_A by 30 degrees: 10 A along it and 10 A along V_A make 20 cos 15 degrees.
    load = Load(line_a=10.0, neutral_a=10.0)
    supply = Supply(system=SupplySystem.WYE)
    expected_a = 20.0 * math.cos(math.radians(15.0))
    assert running_a(supply, circuit("x", "1-3", "120/208", load=load)) == pytest.approx(expected_a)
