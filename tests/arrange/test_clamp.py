import pytest

from balancer.arrange.clamp import clamp_check
from balancer.panel import Load, PowerFactor, Role


def test_readings_of_two_loads_on_opposite_legs_and_one_from_leg_to_leg(installation, circuit):
    # Common practice: 15 and 5 A leave 10 A in the neutral, and a pure 240 V load adds nothing to it.
    wall = installation(circuit("K", "1", amps=15.0), circuit("L", "3", amps=5.0), circuit("W", "5-7", "240", 20.0))
    readings = clamp_check(wall, wall.as_found)
    assert [r.circuits_on for r in readings] == [("K",), ("K", "L"), ("K", "L", "W")]
    assert [(r.leg_a_a, r.leg_b_a, r.neutral_a) for r in readings] == [
        pytest.approx((15.0, 0.0, 15.0)),
        pytest.approx((15.0, 5.0, 10.0)),
        pytest.approx((35.0, 25.0, 10.0)),
    ]
    assert [r.switch_on for r in readings] == ["K", "L", "W"]
    assert "falls to the difference" in readings[1].text
    assert "neutral stays" in readings[2].text


def test_the_tolerance_is_half_an_amp_or_how_badly_the_loads_are_known(installation, circuit):
    wall = installation(
        circuit("K", "1", amps=8.0),
        circuit("L", "3", load=Load(neutral_a=10.0, is_assumed=True)),
        circuit("M", "5", amps=4),
    )
    alone, both = clamp_check(wall, wall.as_found)[:2]
    assert (alone.tolerance_a, alone.is_assumed) == (0.5, False)  # 5 % of 8 A is less than the meter's 0.5 A
    assert both.tolerance_a == pytest.approx(0.05 * 8.0 + 0.20 * 10.0)
    assert both.is_assumed


@pytest.mark.parametrize(
    "better",
    [
        pytest.param({"use": "lighting"}, id="a steady load before a refrigerator"),
        pytest.param({}, id="no thermostat that anybody knows of"),
    ],
)
def test_loads_that_start_by_themselves_come_last(installation, circuit, better):
    wall = installation(circuit("F", "1", amps=9.0, use="Refrigeration"), circuit("L", "5", amps=5.0, **better))
    assert clamp_check(wall, wall.as_found)[0].switch_on == "L"


def test_a_motor_is_taken_where_there_is_nothing_else(installation, circuit):
    wall = installation(circuit("F", "1", amps=9.0, start_a=40.0))
    assert [r.circuits_on for r in clamp_check(wall, wall.as_found)] == [("F",)]


def test_a_circuit_that_was_moved_comes_before_one_that_stayed(installation, circuit, moved):
    wall = installation(circuit("X", "1", amps=6.0), circuit("Y", "5", amps=12.0), circuit("Z", "3", amps=12.0))
    first, second, *_ = clamp_check(wall, moved(wall, X="7"))
    assert (first.switch_on, second.switch_on) == ("X", "Y")


def test_known_amps_come_before_assumed_ones(installation, circuit):
    wall = installation(circuit("G", "1", load=Load(neutral_a=12.0, is_assumed=True)), circuit("K", "5", amps=6.0))
    assert clamp_check(wall, wall.as_found)[0].switch_on == "K"


def test_loads_that_never_run_together_are_not_switched_on_together(installation, circuit):
    wall = installation(
        circuit("H", "1", amps=10.0, not_with="climate"), circuit("C", "3", amps=9.0, not_with="Climate")
    )
    assert [r.circuits_on for r in clamp_check(wall, wall.as_found)] == [("H",)]


@pytest.mark.parametrize(
    "cells",
    [
        pytest.param({"role": Role.SPARE, "amps": 0.0}, id="spare"),
        pytest.param({"amps": 0.4}, id="too small to tell"),
        pytest.param({"volts": "240", "space": "1-3", "role": Role.FEEDER}, id="feeder"),
        pytest.param({"volts": "240", "space": "1-3", "role": Role.BACKFED}, id="backfed"),
    ],
)
def test_what_is_no_single_load_is_left_out(installation, circuit, cells):
    wall = installation(circuit("X", **({"space": "1"} | cells)))
    assert clamp_check(wall, wall.as_found) == ()


def test_a_range_with_a_120_v_part_is_left_out(installation, circuit):
    wall = installation(circuit("R", "1-3", "120/240", load=Load(line_a=20.0, neutral_a=2.0)))
    assert clamp_check(wall, wall.as_found) == ()


def test_readings_are_phasor_sums(installation, circuit):
    # Derived: 10 A at unity power factor against 10 A at 0.8 lagging leaves 6.3246 A, not 0.
    lagging = Load(neutral_a=10.0, neutral_pf=PowerFactor(0.8))
    wall = installation(circuit("K", "1", amps=10.0), circuit("L", "3", load=lagging))
    both = clamp_check(wall, wall.as_found)[1]
    assert both.neutral_a == pytest.approx(6.3246, abs=5e-5)
    assert both.text == "Switch on L as well: the neutral falls."


def test_legs_in_phase_add_up_in_the_neutral(installation, circuit):
    # Derived: 12 and 9 A on two legs in phase leave 21 A.
    wall = installation(
        circuit("K", "1", amps=12.0), circuit("L", "3", amps=9.0), circuit("W", "5-7", "240", 20.0), system="120"
    )
    readings = clamp_check(wall, wall.as_found)
    assert [r.neutral_a for r in readings] == pytest.approx([12.0, 21.0])
    assert readings[1].text.endswith("the neutral rises.")


def test_a_rotation_not_known_widens_the_reading_to_hold_both(installation, circuit):
    # Derived: |15 A at pf 0.8 + 5 A| across 120 degrees is 10.6 or 16.4 A as one leg or the other leads.
    lagging = Load(neutral_a=15.0, neutral_pf=PowerFactor(0.8))
    wall = installation(circuit("P", "1", load=lagging), circuit("Q", "3", amps=5.0), system="120/208")
    both = clamp_check(wall, wall.as_found)[1]
    for neutral_a in (10.586, 16.369):
        assert abs(both.neutral_a - neutral_a) <= both.tolerance_a
    assert both.tolerance_a < 4.0
