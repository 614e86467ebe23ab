"""Breakers against wires and nameplates."""

import pytest

from balancer.panel import Role, Wire
from balancer.rules import Severity

ABOVE = "breaker-above-conductor"
ABOVE_60C = "breaker-above-60c-column"
ABOVE_PLATE = "breaker-above-nameplate"
BELOW_PLATE = "wire-below-nameplate"
NO_MOP = "nameplate-limit-missing"
NOT_STANDARD = "breaker-size-not-standard"


def wire(text):
    return Wire(*text.split())


# Limits of NEC 2023, 240.4(D), and of Table 310.16 at 75 degC with the next standard size of 240.4(B).
@pytest.mark.parametrize(
    ("size", "breaker_a", "limit"),
    [
        ("14 cu", 20, "15 A"),
        ("12 cu", 25, "20 A"),
        ("10 cu", 40, "30 A"),
        ("12 al", 20, "15 A"),
        ("10 al", 30, "25 A"),
        ("8 cu", 60, "50 A"),
        ("6 cu", 80, "70 A"),
    ],
)
def test_breaker_above_its_conductor_is_an_error(circuit, look, size, breaker_a, limit):
    [finding] = look(ABOVE, circuit("x", "1", breaker_a=breaker_a, wire=wire(size)))
    assert finding.severity is Severity.ERROR
    assert f"a {breaker_a} A breaker on {size} wire, whose limit is {limit}" in finding.message
    assert "240.4(B) (from memory) and (D)" in finding.citation


@pytest.mark.parametrize(
    ("size", "breaker_a"), [("14 cu", 15), ("12 cu", 20), ("10 cu", 30), ("12 al", 15), ("10 al", 25), ("6 cu", 70)]
)
def test_breaker_at_its_conductors_limit_is_fine(circuit, look, size, breaker_a):
    assert look(ABOVE, circuit("x", "1", breaker_a=breaker_a, wire=wire(size))) == []


def test_nothing_is_said_where_breaker_or_wire_is_not_known(circuit, look):
    circuits = [
        circuit("x", "1", breaker_a=60),
        circuit("y", "3", wire=wire("14 cu")),
        circuit("z", "5", breaker_a=60, wire=wire("14 al")),
    ]
    assert look(ABOVE, *circuits) == []


@pytest.mark.parametrize("cells", [{"use": "motor"}, {"use": "Cooling"}, {"start_a": 40.0}])
def test_motor_circuit_without_nameplate_figures_is_in_doubt(circuit, look, cells):
    [finding] = look(ABOVE, circuit("x", "1", breaker_a=30, wire=wire("12 cu"), **cells))
    assert finding.severity is Severity.WARNING
    assert "enter mca and mop from the nameplate" in finding.message


@pytest.mark.parametrize(
    ("role", "severity"), [(Role.FEEDER, Severity.WARNING), (Role.LOAD, Severity.ERROR)], ids=["feeder", "load"]
)
def test_feeder_that_may_carry_a_whole_dwelling_is_in_doubt(circuit, look, role, severity):
    # NEC 2020 and 2023, Table 310.12: 2 AWG aluminum for 100 A, 90 A at 75 degC.
    [finding] = look(ABOVE, circuit("x", "1-3", "120/240", breaker_a=100, wire=wire("2 al"), role=role))
    assert finding.severity is severity
    assert ("whole load of a dwelling" in finding.message) == (role is Role.FEEDER)


def test_feeder_far_above_its_conductor_is_an_error(circuit, look):
    [finding] = look(ABOVE, circuit("x", "1-3", "120/240", breaker_a=125, wire=wire("2 al"), role=Role.FEEDER))
    assert finding.severity is Severity.ERROR


def test_breaker_between_the_columns_is_a_warning(circuit, look):
    [finding] = look(ABOVE_60C, circuit("x", "1-3", "240", breaker_a=50, wire=wire("8 cu")))
    assert finding.severity is Severity.WARNING
    assert "At 60 \N{DEGREE SIGN}C (nonmetallic cable always) the limit is 40 A" in finding.message


@pytest.mark.parametrize(
    ("size", "breaker_a"),
    [
        pytest.param("8 cu", 40, id="at the 60 degC limit"),
        pytest.param("12 cu", 20, id="a small conductor has one limit"),
        pytest.param("8 cu", 60, id="above both columns the graver rule speaks"),
        pytest.param("2/0 cu", 175, id="above 100 A the 75 degC column holds"),
    ],
)
def test_no_60c_warning_where_it_makes_no_difference(circuit, look, size, breaker_a):
    assert look(ABOVE_60C, circuit("x", "1-3", "240", breaker_a=breaker_a, wire=wire(size))) == []


def air_conditioner(circuit, **cells):
    return circuit("ac", "1-3", "240", use="cooling", **{"wire": wire("12 cu"), "mca_a": 18.7, "mop_a": 30.0} | cells)


def test_nameplate_figures_replace_the_small_conductor_check(circuit, look):
    unit = air_conditioner(circuit, breaker_a=30)
    for rule in (ABOVE, ABOVE_60C, ABOVE_PLATE, BELOW_PLATE, NO_MOP):
        assert look(rule, unit) == []


def test_breaker_above_the_nameplate_maximum_is_an_error(circuit, look):
    [finding] = look(ABOVE_PLATE, air_conditioner(circuit, breaker_a=35))
    assert finding.severity is Severity.ERROR
    assert "a 35 A breaker, but the nameplate allows at most 30 A (mop)" in finding.message


@pytest.mark.parametrize(("mca_a", "severity"), [(26.0, Severity.ERROR), (22.0, Severity.WARNING)])
def test_wire_below_the_nameplate_minimum(circuit, look, mca_a, severity):
    # NEC 2023, Table 310.16: 12 AWG copper carries 20 A at 60 degC and 25 A at 75 degC.
    [finding] = look(BELOW_PLATE, air_conditioner(circuit, mca_a=mca_a))
    assert finding.severity is severity
    assert f"the nameplate asks for {mca_a:g} A of wire (mca), 12 cu carries 20 A" in finding.message


def test_minimum_ampacity_without_a_maximum_breaker_is_a_notice(circuit, look):
    unit = air_conditioner(circuit, mop_a=None, breaker_a=30)
    [finding] = look(NO_MOP, unit)
    assert finding.severity is Severity.NOTICE
    assert "mop is blank" in finding.message
    assert look(ABOVE, unit) == []


def test_minimum_ampacity_alone_is_enough_within_the_wires_own_limit(circuit, look):
    assert look(NO_MOP, air_conditioner(circuit, mop_a=None, breaker_a=20)) == []


def test_odd_breaker_size_is_a_notice(circuit, look):
    [finding] = look(NOT_STANDARD, circuit("x", "1", breaker_a=55))
    assert finding.severity is Severity.NOTICE
    assert "55 A is not a standard breaker size" in finding.message


@pytest.mark.parametrize("breaker_a", [None, 15, 60])
def test_standard_or_unknown_breaker_size_is_fine(circuit, look, breaker_a):
    assert look(NOT_STANDARD, circuit("x", "1", breaker_a=breaker_a)) == []
