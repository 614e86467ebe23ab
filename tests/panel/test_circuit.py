import math

import pytest

from balancer.panel import Circuit, PowerFactor, Role, Terminal, Volts, Wire


@pytest.mark.parametrize(
    ("volts", "poles", "has_neutral"),
    [
        (Volts.V120, 1, True),
        (Volts.V240, 2, False),
        (Volts.V120_240, 2, True),
        (Volts.V208, 2, False),
        (Volts.V120_208, 2, True),
    ],
)
def test_volts_say_poles_and_neutral(volts, poles, has_neutral):
    assert (volts.poles, volts.has_neutral) == (poles, has_neutral)
    assert Circuit(label="x", volts=volts).poles == poles


@pytest.mark.parametrize(
    ("role", "is_device", "carries_load", "hot_conductors"),
    [
        (Role.LOAD, False, True, 2),
        (Role.FEEDER, False, True, 2),
        (Role.SPARE, False, False, 0),
        (Role.BACKFED, True, False, 2),
        (Role.INTERLOCK, True, False, 2),
        (Role.SURGE, True, False, 2),
    ],
)
def test_roles(role, is_device, carries_load, hot_conductors):
    circuit = Circuit(label="x", volts=Volts.V240, role=role)
    assert (role.is_device, circuit.carries_load, circuit.hot_conductors) == (is_device, carries_load, hot_conductors)


def test_a_lagging_current_stands_below_the_axis():
    assert PowerFactor(0.8).unit_phasor == pytest.approx(0.8 - 0.6j)
    assert PowerFactor(0.8, is_leading=True).unit_phasor == pytest.approx(0.8 + 0.6j)
    assert PowerFactor().unit_phasor == 1


@pytest.mark.parametrize("value", [1.0, 0.999999999, 0.7, 0.01])
def test_a_power_factor_keeps_the_magnitude(value):
    assert math.isclose(abs(PowerFactor(value).unit_phasor), 1.0)


def test_a_wire_prints_as_written():
    assert str(Wire("2/0", "al")) == "2/0 al"


def test_a_circuit_without_a_landing_is_not_landed():
    assert not Circuit(label="x", volts=Volts.V120).is_landed
    assert Circuit(label="x", volts=Volts.V120, landing=(Terminal(3),)).is_landed


@pytest.mark.parametrize(
    ("kind", "takes_neutral"),
    [
        ("GFCI", True),
        ("afci", True),
        ("Dual Function AFCI/GFCI", True),
        ("dual function", True),
        ("standard", False),
        ("", False),
    ],
)
def test_breakers_that_take_the_neutral(kind, takes_neutral):
    assert Circuit(label="x", volts=Volts.V120, breaker_type=kind).has_gfci_or_afci is takes_neutral
