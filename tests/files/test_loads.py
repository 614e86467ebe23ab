"""Loads: amps from watts and volt-amperes, the parts of two-pole circuits, defaults, and slips of unit."""

import math
from collections.abc import Callable

import pytest
from hypothesis import given
from hypothesis import strategies as st

from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenario_sets import connected_scenarios
from balancer.errors import Problem
from balancer.files.loads import _PoleAmps
from balancer.panel import Installation, Load, Pole, PowerFactor

Read = Callable[..., Installation]
ProblemsOf = Callable[..., tuple[Problem, ...]]


def load_of(read: Read, panel: str | None = None, **cells: str) -> Load:
    return read(inventory(**cells), panel).circuits[0].load


def inventory(**cells: str) -> str:
    cells = {"circuit": "c1", "volts": "120"} | cells
    return ",".join(cells) + "\n" + ",".join(cells.values()) + "\n"


def test_120_v_load_is_amps_to_neutral(read: Read) -> None:
    load = load_of(read, load_a="12.5", pf="0.9")
    assert load == Load(neutral_a=12.5, neutral_pf=PowerFactor(0.9))


def test_watts_become_amps_at_nominal_volts_and_power_factor(read: Read) -> None:
    # I = P/(V cos phi): 1200 W at 120 V and 0.8 are 12.5 A.
    assert load_of(read, load_w="1200", pf="0.8").neutral_a == pytest.approx(12.5)


def test_volt_amperes_become_amps_whatever_the_power_factor(read: Read) -> None:
    assert load_of(read, load_va="1200", pf="0.8").neutral_a == pytest.approx(10.0)


def test_240_v_load_flows_from_leg_to_leg(read: Read) -> None:
    load = load_of(read, volts="240", load_w="4800", pf="1")
    assert load == Load(line_a=20.0)


def test_208_v_load_is_taken_at_208_v(read: Read) -> None:
    wye = '[panel]\nspaces = 8\n[supply]\nsystem = "120/208"\n'
    assert load_of(read, wye, volts="208", load_w="4160").line_a == pytest.approx(20.0)


def test_120_240_v_load_has_both_parts_the_smaller_at_unity(read: Read) -> None:
    load = load_of(read, volts="120/240", load_w="4800", pf="0.8", load_120_w="300", pole_120="second")
    assert load.line_a == pytest.approx(25.0)
    assert load.line_pf == PowerFactor(0.8)
    assert (load.neutral_a, load.neutral_pf, load.neutral_pole) == (2.5, PowerFactor(1.0), Pole.SECOND)


def test_pole_left_blank_is_not_known(read: Read) -> None:
    assert load_of(read, volts="120/240", load_a="20", load_120_a="2").neutral_pole is None


@pytest.mark.parametrize(("first", "second", "pole"), [("9.5", "16", Pole.SECOND), ("16", "9.5", Pole.FIRST)])
def test_measured_amps_split_into_the_smaller_and_the_rest(read: Read, first: str, second: str, pole: Pole) -> None:
    load = load_of(read, volts="120/240", amps_first=first, amps_second=second, pf="0.9")
    assert (load.line_a, load.neutral_a, load.neutral_pole) == (9.5, 6.5, pole)
    assert load.line_pf == load.neutral_pf == PowerFactor(0.9)


def test_measured_amps_alike_have_no_120_v_part(read: Read) -> None:
    assert load_of(read, volts="120/240", amps_first="10", amps_second="10") == Load(line_a=10.0)


@pytest.mark.parametrize("rotation", ["A leads", "B leads"])
@pytest.mark.parametrize(("first", "second"), [("16", "9.5"), ("9.5", "16"), ("12", "0")])
def test_measured_amps_on_a_wye_are_what_the_poles_carry(read: Read, rotation: str, first: str, second: str) -> None:
    panel = f'[panel]\nspaces = 8\n[supply]\nsystem = "120/208"\nrotation = "{rotation}"\n'
    text = inventory(volts="120/208", space="1-3", amps_first=first, amps_second=second, pf="0.9")
    house = read(text, panel)
    currents = PanelCurrents(house, connected_scenarios(house)).currents(house.as_found)
    assert currents.leg_a[0] == pytest.approx(float(first))
    assert currents.leg_b[0] == pytest.approx(float(second))


@given(st.floats(0.0, 50.0), st.floats(0.0, 50.0))
def test_parts_of_a_wye_add_up_to_the_larger_reading(first: float, second: float) -> None:
    amps = _PoleAmps(first, second)
    neutral_a = amps.neutral_part_a(is_wye=True)
    total = abs(amps.smaller_a + neutral_a * complex(math.cos(math.pi / 6), math.sin(math.pi / 6)))
    assert neutral_a >= -1e-9
    assert total == pytest.approx(max(first, second), abs=1e-9)


def test_measured_240_v_circuit_takes_the_mean_of_two_like_readings(read: Read) -> None:
    assert load_of(read, volts="240", amps_first="10", amps_second="10.4") == Load(line_a=10.2)


def test_blank_load_is_assumed_and_marked(read: Read) -> None:
    # Common practice: a refrigerator runs near 5 A on a 20 A breaker.
    house = read("circuit,volts,breaker_a,use\nfridge,120,20,refrigeration\n")
    load = house.circuits[0].load
    assert load.neutral_a == pytest.approx(5.0)
    assert load.is_assumed
    assert load.is_pf_assumed
    assert any("fridge" in notice and "assumed" in notice for notice in house.notices)


def test_given_power_factor_is_not_marked_assumed(read: Read) -> None:
    load = load_of(read, breaker_a="20", use="refrigeration", pf="0.8")
    assert (load.neutral_pf, load.is_pf_assumed) == (PowerFactor(0.8), False)


@pytest.mark.parametrize("role", ["spare", "backfed", "interlock", "surge"])
def test_spares_and_devices_carry_no_load(read: Read, role: str) -> None:
    house = read(inventory(volts="240", role=role, space="1-3", load_a="30"))
    assert house.circuits[0].load == Load()
    assert any("c1" in notice and "left aside" in notice for notice in house.notices)


def test_load_of_zero_is_a_load(read: Read) -> None:
    assert load_of(read, load_a="0", breaker_a="20") == Load()


@pytest.mark.parametrize(
    ("cells", "column", "problem"),
    [
        pytest.param({}, "load_a", "nothing to assume it from", id="nothing to go by"),
        pytest.param({"load_a": "5", "load_w": "600"}, "load_w", "given already in load_a", id="two loads"),
        pytest.param({"load_w": "600", "load_va": "600"}, "load_va", "given already in load_w", id="two other loads"),
        pytest.param({"load_w": "0.12"}, "load_w", "too little", id="kilowatts in watts"),
        pytest.param({"load_w": "0.12 W", "breaker_a": "20"}, "load_w", "too little", id="the same with its unit"),
        pytest.param({"load_va": "1.5"}, "load_va", "too little", id="kilovolt-amperes"),
        pytest.param({"volts": "240", "load_w": "4.5"}, "load_w", "too little", id="kilowatts on two poles"),
        pytest.param({"load_a": "150", "breaker_a": "20"}, "load_a", "on a 20 A breaker", id="watts in amps"),
        pytest.param({"load_w": "15000", "breaker_a": "20"}, "load_w", "on a 20 A breaker", id="a nought too many"),
        pytest.param({"load_120_a": "5", "load_a": "1"}, "load_120_a", "120 V part", id="part of a 120 V circuit"),
        pytest.param(
            {"volts": "240", "load_a": "9", "load_120_w": "100"}, "load_120_w", "no 120 V part", id="no neutral"
        ),
        pytest.param({"volts": "120/240", "load_a": "9", "pole_120": "first"}, "pole_120", "no 120 V part", id="pole"),
        pytest.param(
            {"volts": "120/240", "load_a": "9", "load_120_a": "1", "load_120_w": "120"},
            "load_120_w",
            "given already in load_120_a",
            id="two parts",
        ),
        pytest.param({"volts": "120/240", "amps_first": "9"}, "amps_second", "is blank", id="one pole measured"),
        pytest.param({"amps_first": "9", "amps_second": "8"}, "amps_first", "two-pole", id="120 V circuit measured"),
        pytest.param(
            {"volts": "240", "amps_first": "9", "amps_second": "8"},
            "amps_second",
            "differs",
            id="poles that cannot differ",
        ),
        pytest.param({"load_a": "x", "breaker_a": "20"}, "load_a", "is not a number", id="told once only"),
    ],
)
def test_load_that_cannot_be_meant_is_one_problem(
    problems_of: ProblemsOf, cells: dict[str, str], column: str, problem: str
) -> None:
    (only,) = problems_of(inventory(**cells))
    assert (only.line, only.column) == (2, column)
    assert problem in only.problem
    assert only.remedy


def test_tiny_watts_are_told_beside_a_power_factor_that_cannot_be(problems_of: ProblemsOf) -> None:
    problems = problems_of(inventory(load_w="0.12", pf="1.2"))
    assert [problem.column for problem in problems] == ["pf", "load_w"]


def test_measured_amps_beside_loads_contradict_them(problems_of: ProblemsOf) -> None:
    problems = problems_of(inventory(volts="120/240", amps_first="9", amps_second="8", load_a="5"))
    assert {problem.problem for problem in problems} == {"measured amps stand beside load_a"}


def test_measured_amps_on_legs_in_phase_have_no_part_from_leg_to_leg(problems_of: ProblemsOf) -> None:
    panel = '[panel]\nspaces = 8\n[supply]\nsystem = "120"\n'
    (only,) = problems_of(inventory(volts="120/240", amps_first="9", amps_second="8"), panel)
    assert "in phase" in only.problem


def test_four_times_the_breaker_is_still_believed(read: Read) -> None:
    assert load_of(read, load_a="80", breaker_a="20").neutral_a == 80.0


def test_starting_amps_may_be_far_above_the_breaker(read: Read) -> None:
    house = read(inventory(load_a="10", breaker_a="20", start_a="120"))
    assert house.circuits[0].start_a == 120.0


def test_unit_slips_name_the_column_that_was_meant(problems_of: ProblemsOf) -> None:
    (amps,) = problems_of(inventory(load_a="1500"))
    (watts,) = problems_of(inventory(load_w="0.12"))
    assert "load_w" in amps.remedy
    assert "load_a" in watts.remedy
    assert "120" in watts.remedy
