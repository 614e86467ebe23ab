import math

import pytest

from balancer.electrical.impedances import centre_tapped_ohm, conductor_ohm, service_impedances
from balancer.electrical.shipped_tables import read_table
from balancer.errors import OptionError
from balancer.panel import Supply, SupplySystem, Wire


@pytest.mark.parametrize(
    ("wire", "ohm_per_kft"),
    [
        # NEC Chapter 9 Table 8, stranded uncoated at 75 degrees C, and Table 9 reactance in PVC conduit
        (Wire("12", "cu"), 1.98 + 0.054j),
        (Wire("2/0", "cu"), 0.0967 + 0.043j),
        (Wire("4/0", "al"), 0.100 + 0.041j),
        # from memory: Table 8 has 0.0515 and 0.0847
        (Wire("250", "cu"), 0.0515 + 0.041j),
    ],
)
def test_conductors_are_those_of_chapter_9(wire, ohm_per_kft):
    assert conductor_ohm(wire, 1000) == pytest.approx(ohm_per_kft)
    assert conductor_ohm(wire, 100) == pytest.approx(ohm_per_kft / 10)


def test_every_conductor_agrees_with_its_area():
    # d = 5 x 92^((36-n)/39) mil; R20 = 10371 / d^2 ohm per 1000 ft, x 1.02 for stranding (NBS Handbook 100, 1966);
    # to 75 degrees C with 0.00393, aluminum over 0.61 with 0.00403.
    numbers = {"1/0": 0, "2/0": -1, "3/0": -2, "4/0": -3}
    at_75 = {"cu": 1 + 0.00393 * 55, "al": (1 + 0.00403 * 55) / 0.61}
    for _, row in read_table("conductor_resistance.csv"):
        size = row["size"]
        is_gauge = size in numbers or int(size) < 20
        mils_squared = (
            (5 * 92 ** ((36 - numbers.get(size, -1 if "/" in size or not is_gauge else int(size))) / 39)) ** 2
            if is_gauge
            else float(size) * 1000
        )
        expected = 10371 / mils_squared * 1.02 * at_75[row["metal"]]
        assert float(row["resistance_ohm_per_kft"]) == pytest.approx(expected, rel=0.006), row


def test_every_row_names_its_source_and_mark():
    assert all(row["source"] and row["mark"] for _, row in read_table("conductor_resistance.csv"))


def test_an_unknown_size_is_refused_with_the_known_ones():
    with pytest.raises(OptionError, match="no resistance is known for the wire 7 cu") as caught:
        conductor_ohm(Wire("7", "cu"), 10)
    assert "4/0" in caught.value.problems[0].remedy


def test_a_balanced_load_sees_the_whole_transformer():
    # R + jX of the 240 V winding: 0.011 + j0.018 per unit of 240^2 / 50 kVA
    primary, half = centre_tapped_ohm(50, 0.011 + 0.018j)
    assert 4 * primary + 2 * half == pytest.approx((0.011 + 0.018j) * 240**2 / 50_000)


class TestService:
    wire = Wire("2/0", "cu")

    def test_nothing_given_gives_nothing(self):
        assert service_impedances(Supply()) is None
        assert service_impedances(Supply(transformer_kva=25)) is None
        assert service_impedances(Supply(service_wire=self.wire)) is None

    @pytest.mark.parametrize("system", [SupplySystem.WYE, SupplySystem.IN_PHASE])
    def test_only_a_three_wire_120_240_volt_service_is_solved(self, system):
        assert service_impedances(Supply(system=system, service_wire=self.wire, length_ft=60)) is None

    def test_conductors_alone(self):
        found = service_impedances(Supply(service_wire=self.wire, length_ft=60))
        assert (found.common_ohm, found.leg_ohm) == (0, pytest.approx(conductor_ohm(self.wire, 60)))
        assert found.neutral_ohm == found.leg_ohm

    def test_a_smaller_neutral(self):
        neutral = Wire("1", "cu")
        found = service_impedances(Supply(service_wire=self.wire, neutral_wire=neutral, length_ft=60))
        assert found.neutral_ohm == conductor_ohm(neutral, 60)

    def test_a_transformer_alone_keeps_its_percent_impedance(self):
        found = service_impedances(Supply(transformer_kva=25, impedance_pct=2.0))
        assert found.neutral_ohm == 0
        whole = 4 * found.common_ohm + 2 * found.leg_ohm
        assert abs(whole) == pytest.approx(0.02 * 240**2 / 25_000)
        # Kersting Example 11.1: 0.011 + j0.018 per unit
        assert math.tan(math.atan2(whole.imag, whole.real)) == pytest.approx(18 / 11)
