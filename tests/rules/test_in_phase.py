"""Two-pole circuits on a supply whose legs are in phase."""

import pytest

from balancer.panel import Role
from balancer.rules import Severity

RULE = "no-voltage-between-legs"


@pytest.mark.parametrize("volts", ["240", "120/240"])
@pytest.mark.parametrize("space", ["1-3", ""])
def test_two_pole_load_on_an_in_phase_supply_is_an_error(circuit, look, volts, space):
    [finding] = look(RULE, circuit("x", space, volts), system="120")
    assert finding.severity is Severity.ERROR
    assert "There is no voltage between the legs" in finding.message


def test_feeder_may_have_120_v_loads_alone(circuit, look):
    [finding] = look(RULE, circuit("x", "1-3", "120/240", role=Role.FEEDER), system="120")
    assert finding.severity is Severity.WARNING


def test_120_v_loads_and_devices_are_fine_on_an_in_phase_supply(circuit, look):
    circuits = [circuit("x", "1"), circuit("inlet", "2-4", "120/240", role=Role.BACKFED)]
    assert look(RULE, *circuits, system="120") == []


@pytest.mark.parametrize(("system", "volts"), [("120/240", "240"), ("120/208", "208")])
def test_two_pole_load_is_fine_where_the_legs_are_apart(circuit, look, system, volts):
    assert look(RULE, circuit("x", "1-3", volts), system=system) == []
