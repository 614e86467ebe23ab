import numpy as np
import pytest

from balancer.electrical.network import LOST_NEUTRAL_CAUTION, lost_neutral, service_voltages
from balancer.electrical.scenario_sets import connected_scenarios, share_scenarios
from balancer.electrical.three_wire import LoadModel
from balancer.panel import Leg, Pole, Supply, SupplySystem, Wire

# 100 ft of 12 AWG has 0.198 ohm; the closed forms below use it.
FEEDER = Supply(service_wire=Wire("12", "cu"), length_ft=100)
OHM = 0.198 + 0.0054j


def voltages(installation, *arguments):
    return service_voltages(installation, connected_scenarios(installation), installation.as_found, 0, *arguments)


def lost(installation):
    return lost_neutral(installation, connected_scenarios(installation), installation.as_found, 0)


class TestServiceVoltages:
    def test_none_without_impedances(self, build):
        assert voltages(build.legs([16], [4])) is None

    def test_constant_currents_by_the_closed_form(self, build):
        # V_A = E - I_A z - (I_A - I_B) z_n; angles are small, the phasors turn a little with the voltage.
        found = voltages(build.legs([16], [4], FEEDER))
        assert found.leg_a_v == pytest.approx(abs(120 - 16 * OHM - 12 * OHM), abs=0.01)
        assert found.leg_b_v == pytest.approx(abs(120 - 4 * OHM + 12 * OHM), abs=0.01)
        assert found.light_leg_rise_v == pytest.approx(found.leg_b_v - 120)
        assert found.neutral_a == pytest.approx(12, abs=0.01)

    def test_a_240_volt_load_moves_both_legs_alike(self, build):
        found = voltages(build.installation(build.double("heater", 20, (5, 7)), supply=FEEDER))
        assert found.leg_a_v == pytest.approx(found.leg_b_v)
        assert found.neutral_shift_v == pytest.approx(0, abs=1e-9)

    def test_the_scenario_asked_for_is_the_one_solved(self, build):
        installation = build.legs([16], [4], FEEDER)
        scenarios = share_scenarios(installation, ["full", "off"], np.array([[1.0, 1.0], [0.0, 0.0]]))
        found = [service_voltages(installation, scenarios, installation.as_found, row) for row in (0, 1)]
        assert found[0].leg_a_v < 116 < found[1].leg_a_v == pytest.approx(120)

    def test_of_an_unknown_pole_the_lower_voltage_counts(self, build):
        lamp = build.single("lamp", 10, build.leg_a)
        both = [
            voltages(build.installation(lamp, build.mixed("range", 20, 6, (5, 7), pole), supply=FEEDER))
            for pole in (None, Pole.FIRST)
        ]
        assert both[0].leg_a_v == pytest.approx(both[1].leg_a_v)

    def test_constant_power_draws_more_at_a_lower_voltage(self, build):
        installation = build.legs([16], [4], FEEDER)
        neutral = {model: voltages(installation, model).neutral_a for model in LoadModel}
        assert neutral[LoadModel.IMPEDANCE] < neutral[LoadModel.CURRENT] < neutral[LoadModel.POWER]

    def test_circuits_that_are_not_landed_do_not_count(self, build):
        with_it = build.installation(build.single("a", 5, 1), build.single("new", 20), supply=FEEDER)
        without = build.installation(build.single("a", 5, 1), supply=FEEDER)
        assert voltages(with_it).leg_a_v == voltages(without).leg_a_v


class TestLostNeutral:
    def test_published_lamps(self, build, published):
        # 144 and 72 ohm; see tests/data/physics_checks.csv
        found = lost(build.legs([120 / 144], [120 / 72]))
        assert [found.leg_a_v, found.leg_b_v] == pytest.approx(published("P11"))
        assert found.leg_a_v / 144 == pytest.approx(published("P10")[0])

    def test_dryer_and_television(self, build, published):
        # 11.3 and 24 ohm; from memory, see tests/data/physics_checks.csv
        found = lost(build.legs([120 / 11.3], [120 / 24]))
        assert [found.leg_a_v, found.leg_b_v] == pytest.approx(published("P12"), abs=0.005)

    def test_balanced_legs_keep_their_voltage(self, build):
        found = lost(build.legs([12, 3], [15]))
        assert (found.leg_a_v, found.leg_b_v) == pytest.approx((120, 120))

    def test_one_small_load_opposite_a_large_one_sees_nearly_all(self, build):
        found = lost(build.legs([20], [0.2]))
        assert found.leg_b_v > 237
        assert "nearly full line voltage" in LOST_NEUTRAL_CAUTION

    def test_a_240_volt_load_changes_nothing(self, build):
        lamps = (build.single("a", 5, 1), build.single("b", 2, 3, 0.8))
        without = lost(build.installation(*lamps))
        assert lost(build.installation(*lamps, build.double("range", 40, (5, 7)))) == without

    def test_two_legs_of_a_wye_share_208_volts(self, build, published):
        found = lost(build.legs([5], [5], Supply(system=SupplySystem.WYE, leading_leg=Leg.A)))
        assert (found.leg_a_v, found.leg_b_v) == pytest.approx((published("P3")[0] / 2,) * 2, abs=1e-3)

    def test_nothing_to_tell_without_120_volt_loads_or_voltage_between_the_legs(self, build):
        assert lost(build.installation(build.double("heater", 20, (5, 7)))) is None
        assert lost(build.legs([5], [5], Supply(system=SupplySystem.IN_PHASE))) is None

    def test_of_an_unknown_pole_the_higher_voltage_counts(self, build):
        lamp = build.single("lamp", 1, build.leg_a)
        found = lost(build.installation(lamp, build.mixed("range", 20, 5, (5, 7), None)))
        # With the range's part opposite the lamp: 240 x 5/6.
        assert found.leg_a_v == found.highest_on_load_v == pytest.approx(200)

    def test_a_leg_without_load_hurts_nobody(self, build):
        found = lost(build.legs([5], []))
        assert (found.leg_a_v, found.leg_b_v, found.highest_on_load_v) == (0, 240, 0)
