"""Amps of both parts of a circuit from what a log gives: closed forms, and legs against the poles that were read."""

import math
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from balancer.electrical.phasors import PanelCurrents
from balancer.errors import InputError
from balancer.files import ReadingsLog, read_readings
from balancer.panel import Installation, Pole

INVENTORY = """\
circuit,space,volts,role,load_a,load_w,pf,load_120_a,pole_120,amps_first,amps_second,breaker_a
pump,1,120,,8,,0.8,,,,,20
water,5-7,240,,,4500,0.9,,,,,30
range,2-4,120/240,,20,,1,5,second,,,50
shop,6-8,120/240,feeder,,,0.8,,,12,20,60
loft,9-11,120/240,feeder,30,,0.9,,,,,60
"""
WYE = '[panel]\nspaces = 12\n[supply]\nsystem = "120/208"\nrotation = "A leads"\n'
IN_PHASE = '[panel]\nspaces = 12\n[supply]\nsystem = "120"\n'

ReadColumns = Callable[..., ReadingsLog]


@pytest.fixture
def read_columns(tmp_path: Path, read: Callable[..., Installation]) -> ReadColumns:
    """Read a log of the given columns, a figure an interval each."""

    def read_columns(columns: dict[str, list[float]], panel: str | None = None) -> ReadingsLog:
        volts = "120/208" if panel == WYE else "120/240"
        inventory = INVENTORY.replace("120/240", volts).replace(",240,", ",208," if panel == WYE else ",240,")
        house = read(inventory if panel != IN_PHASE else "circuit,space,volts,load_a\nflat,1-3,120/240,10\n", panel)
        count = len(next(iter(columns.values())))
        lines = [
            f"2023-01-14 {hour:02d}:00,{','.join(str(c[hour]) for c in columns.values())}" for hour in range(count)
        ]
        path = tmp_path / "log.csv"
        path.write_text("\n".join([f"time,{','.join(columns)}", *lines]), encoding="utf-8")
        return read_readings(path, house)

    return read_columns


def parts(log: ReadingsLog, label: str) -> tuple[list[float], list[float]]:
    column = [circuit.label for circuit in log.installation.circuits].index(label)
    return log.scenarios.neutral_a[:, column].tolist(), log.scenarios.line_a[:, column].tolist()


def poles_clamped(log: ReadingsLog, label: str) -> tuple[np.ndarray, np.ndarray]:
    """What a clamp meter reads on the two legs with only this circuit landed; leg A feeds the first pole."""
    landing = log.installation.as_found[label]
    currents = PanelCurrents(log.installation, log.scenarios).currents({label: landing})
    first_on_a = str(log.installation.panel.leg(landing[0].space)) == "A"
    return (currents.leg_a, currents.leg_b) if first_on_a else (currents.leg_b, currents.leg_a)


@pytest.mark.parametrize(
    ("column", "reading", "neutral_a", "line_a"),
    [
        pytest.param("pump_a", 7.5, 7.5, 0.0, id="120 V amps"),
        pytest.param("pump_w", 480.0, 480 / (120 * 0.8), 0.0, id="120 V watts: P/(120 pf)"),
        pytest.param("water_a", 15.0, 0.0, 15.0, id="240 V amps"),
        pytest.param("water_w", 3240.0, 0.0, 3240 / (240 * 0.9), id="240 V watts: P/(240 pf)"),
        # Full load: 20 A + 5 A on the heavier pole, 240 x 20 + 120 x 5 = 5400 W.
        pytest.param("range_a", 12.5, 2.5, 10.0, id="amps of the heavier pole scale both parts"),
        pytest.param("range_w", 1350.0, 1.25, 5.0, id="total watts scale both parts"),
        # 12 A and 8 A at pf 0.8: 0.8 (240 x 12 + 120 x 8) = 3072 W.
        pytest.param("shop_w", 1536.0, 4.0, 6.0, id="feeder watts"),
        pytest.param("loft_a", 9.0, 0.0, 9.0, id="no 120 V part known"),
    ],
)
def test_one_column_gives_both_parts(
    read_columns: ReadColumns, column: str, reading: float, neutral_a: float, line_a: float
) -> None:
    log = read_columns({column: [reading, 0.0]})
    neutral, line = parts(log, column.rpartition("_")[0])
    assert neutral == pytest.approx([neutral_a, 0.0], rel=1e-6)
    assert line == pytest.approx([line_a, 0.0], rel=1e-6)


@pytest.mark.parametrize("label", ["range", "shop", "loft"])
@pytest.mark.parametrize("unit", ["a", "w"])
def test_two_columns_give_back_both_poles_whichever_is_heavier(
    read_columns: ReadColumns, label: str, unit: str
) -> None:
    first, second = [12.0, 3.0, 7.0, 0.0], [4.0, 9.0, 7.0, 5.0]
    pf = {"range": 1.0, "shop": 0.8, "loft": 0.9}[label]
    scale = 1.0 if unit == "a" else 120.0 * pf
    columns = {
        f"{label}_first_{unit}": [scale * x for x in first],
        f"{label}_second_{unit}": [scale * x for x in second],
    }
    log = read_columns(columns)
    on_first, on_second = poles_clamped(log, label)
    np.testing.assert_allclose(on_first, first, rtol=1e-5)
    np.testing.assert_allclose(on_second, second, rtol=1e-5)
    landing = log.installation.as_found[label]
    neutral = PanelCurrents(log.installation, log.scenarios).currents({label: landing}).neutral
    np.testing.assert_allclose(neutral, np.abs(np.subtract(first, second)), atol=1e-5)


def test_the_pole_of_the_inventory_is_the_reference_and_the_first_where_it_has_none(read_columns: ReadColumns) -> None:
    log = read_columns(
        {"range_first_a": [4, 6], "range_second_a": [9, 1], "loft_first_a": [5, 2], "loft_second_a": [3, 3]}
    )
    assert parts(log, "range") == ([5.0, -5.0], [4.0, 6.0])
    assert parts(log, "loft") == ([2.0, -1.0], [3.0, 3.0])
    assert log.installation.by_label["range"].load.neutral_pole is Pole.SECOND
    loft = log.installation.by_label["loft"].load
    assert (loft.neutral_pole, loft.neutral_pf) == (Pole.FIRST, loft.line_pf)


def test_two_columns_of_a_circuit_without_neutral_are_one_current(read_columns: ReadColumns) -> None:
    log = read_columns({"water_first_a": [10.0, 0.0], "water_second_a": [10.5, 0.0]})
    assert parts(log, "water") == ([0.0, 0.0], [10.25, 0.0])


def test_two_poles_on_a_wye_are_read_as_the_phasors_they_are(read_columns: ReadColumns) -> None:
    # 10 A along the line and 5 A in phase with the leg, 30 degrees apart.
    heavier = math.sqrt(10**2 + 5**2 + 2 * 10 * 5 * math.cos(math.radians(30)))
    log = read_columns({"loft_first_a": [10.0, 3.0], "loft_second_a": [heavier, 4.0]}, WYE)
    neutral, line = parts(log, "loft")
    assert (neutral[0], line[0]) == (pytest.approx(5.0, rel=1e-5), 10.0)
    assert log.installation.by_label["loft"].load.neutral_pole is Pole.SECOND
    assert log.report.turned == ()


def test_a_heavier_pole_that_changes_on_a_wye_is_told(read_columns: ReadColumns) -> None:
    log = read_columns({"loft_first_a": [10.0, 3.0], "loft_second_a": [2.0, 4.0]}, WYE)
    assert log.report.turned == ("loft",)
    assert any("heavier pole of loft changes" in line for line in log.report.lines())


def test_two_poles_on_legs_in_phase_are_refused(read_columns: ReadColumns) -> None:
    with pytest.raises(InputError) as caught:
        read_columns({"flat_first_a": [1, 2], "flat_second_a": [1, 2]}, IN_PHASE)
    assert "one 120 V row for each pole" in caught.value.problems[0].remedy
