"""Published ampacities, small-conductor limits and standard sizes."""

import pytest

from balancer.panel import Circuit, Volts, Wire
from balancer.rules import conductor_limit_a
from balancer.rules.ampacity import STANDARD_SIZES_A, ampacity_a, largest_breaker_a, next_standard_size_a

# NEC 2011 to 2017 Table 310.15(B)(16), carried unchanged as Table 310.16 in 2020 and 2023, seen in a reprint:
# size, copper at 60 and 75 degC, aluminum at 60 and 75 degC.
TABLE_310_16 = """
14   15  20   -   -
12   20  25  15  20
10   30  35  25  30
8    40  50  35  40
6    55  65  40  50
4    70  85  55  65
3    85 100  65  75
2    95 115  75  90
1   110 130  85 100
1/0 125 150 100 120
2/0 145 175 115 135
3/0 165 200 130 155
4/0 195 230 150 180
"""
CELLS = [
    (Wire(size, metal), column_c, cell)
    for size, *cells in (line.split() for line in TABLE_310_16.strip().splitlines())
    for (metal, column_c), cell in zip([("cu", 60), ("cu", 75), ("al", 60), ("al", 75)], cells, strict=True)
]


@pytest.mark.parametrize(("wire", "column_c", "cell"), CELLS)
def test_ampacity_is_the_cell_of_table_310_16_nec_2023(wire, column_c, cell):
    assert ampacity_a(wire, column_c) == (None if cell == "-" else float(cell))


@pytest.mark.parametrize(
    ("wire", "limit_a"),
    [
        # NEC 2023, 240.4(D), seen in print.
        (Wire("14", "cu"), 15),
        (Wire("12", "cu"), 20),
        (Wire("10", "cu"), 30),
        (Wire("12", "al"), 15),
        (Wire("10", "al"), 25),
        # The same section, from memory.
        (Wire("18", "cu"), 7),
        (Wire("16", "cu"), 10),
    ],
)
def test_small_conductors_keep_the_limits_of_240_4_d_nec_2023(wire, limit_a):
    assert largest_breaker_a(wire) == limit_a
    assert largest_breaker_a(wire, column_c=60) == limit_a


# NEC 2023, 240.6(A), from memory.
@pytest.mark.parametrize("size_a", [10, 15, 20, 25, 30, 35, 40, 45, 50, 60, 70, 80, 90, 100, 110, 125, 150, 175, 200])
def test_standard_size_of_240_6_a_nec_2023_is_its_own_next(size_a):
    assert next_standard_size_a(size_a) == size_a


@pytest.mark.parametrize("size_a", [55, 65, 75, 85, 95])
def test_size_outside_240_6_a_nec_2023_is_not_standard(size_a):
    assert size_a not in STANDARD_SIZES_A
    assert next_standard_size_a(size_a) == size_a + 5


@pytest.mark.parametrize(
    ("wire", "column_c", "limit_a"),
    [
        pytest.param(Wire("6", "cu"), 75, 70, id="65 A, next standard size 70"),
        pytest.param(Wire("6", "cu"), 60, 60, id="55 A, next standard size 60"),
        pytest.param(Wire("3", "cu"), 75, 100, id="100 A is a standard size itself"),
        pytest.param(Wire("4/0", "al"), 75, 200, id="180 A, next standard size 200"),
    ],
)
def test_larger_conductor_takes_the_next_standard_size(wire, column_c, limit_a):
    assert largest_breaker_a(wire, column_c) == limit_a


def test_unknown_conductor_has_no_limit():
    assert largest_breaker_a(Wire("14", "al")) is None


def limit_of(**cells):
    return conductor_limit_a(Circuit(label="C", volts=Volts.V120, **cells))


def test_conductor_limit_is_the_nameplate_maximum_where_given():
    assert limit_of(wire=Wire("12", "cu"), mca_a=18.7, mop_a=30.0) == 30.0


def test_conductor_limit_is_not_known_from_a_minimum_ampacity_alone():
    assert limit_of(wire=Wire("12", "cu"), mca_a=18.7) is None


def test_conductor_limit_follows_the_wire():
    assert limit_of(wire=Wire("12", "cu")) == 20.0
    assert limit_of(wire=Wire("6", "al")) == 50.0


def test_conductor_limit_is_not_known_without_a_wire():
    assert limit_of() is None
