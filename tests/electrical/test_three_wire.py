"""The three-wire network against published and independently solved cases."""

import cmath
import csv
import json
import math
import re
from functools import cached_property
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from balancer.electrical.impedances import centre_tapped_ohm
from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenario_sets import connected_scenarios
from balancer.electrical.three_wire import LoadModel, NominalLoads, ServiceImpedances, ServiceVoltages, solve_three_wire
from balancer.errors import InfeasibleError
from balancer.panel import PowerFactor

DATA = Path(__file__).parents[1] / "data"
POWER_FLOW = json.loads((DATA / "three_wire_cases.json").read_text(encoding="utf-8"))
MODELS = {"PQ": LoadModel.POWER, "Z": LoadModel.IMPEDANCE, "I": LoadModel.CURRENT}
FEEDER_OHM = 0.193
"""100 ft of 12 AWG solid copper, NEC Chapter 9 Table 8; in all three wires."""

FEEDER = ServiceImpedances(leg_ohm=FEEDER_OHM, neutral_ohm=FEEDER_OHM)


def resistors(leg_a_ohm: float, leg_b_ohm: float) -> dict[LoadModel, NominalLoads]:
    loads = NominalLoads(leg_a_phasor_a=120 / leg_a_ohm, leg_b_phasor_a=120 / leg_b_ohm)
    return {LoadModel.IMPEDANCE: loads}


def amps(leg_a: complex, leg_b: complex) -> dict[LoadModel, NominalLoads]:
    return {LoadModel.CURRENT: NominalLoads(leg_a_phasor_a=leg_a, leg_b_phasor_a=leg_b)}


class TestPublishedFeeder:
    """Sources stand in `tests/data/physics_checks.csv`, row by row."""

    def test_resistive_loads_on_a_sound_neutral(self, published):
        found = solve_three_wire(FEEDER, resistors(7.5, 30))
        ours = [found.leg_a_v, found.leg_b_v, found.neutral_shift_v]
        ours += [abs(found.leg_a_phasor_a), abs(found.leg_b_phasor_a), found.neutral_a]
        assert ours == pytest.approx(published("P13a"), abs=6e-4)

    def test_resistive_loads_on_a_lost_neutral(self, published):
        found = solve_three_wire(FEEDER, resistors(7.5, 30), is_neutral_open=True)
        ours = [found.leg_a_v, found.leg_b_v, found.neutral_shift_v]
        ours += [abs(found.leg_a_phasor_a), abs(found.leg_b_phasor_a), found.neutral_a]
        assert ours == pytest.approx(published("P13d"), abs=6e-4)

    @pytest.mark.parametrize(
        ("row", "leg_a", "leg_b"),
        [pytest.param("P14a", 16, 4, id="lopsided"), pytest.param("P14c", 10, 10, id="balanced")],
    )
    def test_constant_currents(self, published, row, leg_a, leg_b):
        found = solve_three_wire(FEEDER, amps(leg_a, leg_b))
        assert [found.leg_a_v, found.leg_b_v] == pytest.approx(published(row), abs=6e-4)
        # V_A + V_B = 2 E - r (I_A + I_B) whatever the neutral.
        assert found.line_v == pytest.approx(240 - FEEDER_OHM * (leg_a + leg_b))

    def test_the_light_leg_rises(self, published):
        _, light = published("P14a")
        assert solve_three_wire(FEEDER, amps(16, 4)).light_leg_rise_v == pytest.approx(light - 120, abs=6e-4)
        assert solve_three_wire(FEEDER, amps(4, 16)).light_leg_rise_v == pytest.approx(light - 120, abs=6e-4)
        assert solve_three_wire(FEEDER, amps(10, 10)).light_leg_rise_v < 0

    @pytest.mark.parametrize(("row", "leg_a", "leg_b"), [("P20a", 15, 15), ("P20b", 20, 10), ("P20d", 30, 0)])
    def test_loss_in_the_three_wires(self, published, row, leg_a, leg_b):
        (loss_over_r,) = published(row)
        assert solve_three_wire(FEEDER, amps(leg_a, leg_b)).total_loss_w / FEEDER_OHM == pytest.approx(loss_over_r)

    def test_loss_in_the_neutral_alone(self):
        assert solve_three_wire(FEEDER, amps(20, 10)).neutral_loss_w == pytest.approx(FEEDER_OHM * 10**2)

    def test_two_legs_of_a_stiff_source_make_240_volts(self):
        found = solve_three_wire(ServiceImpedances(), amps(0, 0))
        assert (found.leg_a_v, found.leg_b_v, found.line_v) == pytest.approx((120, 120, 240))


def power_flow_loads(case: dict) -> dict[LoadModel, NominalLoads]:
    """The case's loads as nominal currents in each leg's own reference."""
    sums = {model: dict.fromkeys(("A", "B", "AB"), 0j) for model in LoadModel}
    for leg, kind, volts, kw, kvar in case["loads (leg, kind, volts, kW, kvar)"]:
        sums[MODELS[kind]][leg] += complex(kw, -kvar) * 1000 / volts
    return {
        model: NominalLoads(leg_a_phasor_a=each["A"], leg_b_phasor_a=each["B"], line_phasor_a=each["AB"])
        for model, each in sums.items()
    }


def power_flow_service() -> ServiceImpedances:
    """The transformer of the cases: its windings' percentages are those of an interlaced one of 1.2 + j1.7 %."""
    stated = POWER_FLOW["parameters"]
    primary, half, _ = stated["winding_resistance_pct (primary, secondary half 1, half 2)"]
    high_low, high_tertiary, low_tertiary = stated["reactance_pct (XHL, XHT, XLT)"]
    primary_reactance = (high_low + high_tertiary - low_tertiary) / 2
    per_unit = complex(half, primary_reactance / 0.8) / 100
    common_ohm, half_ohm = centre_tapped_ohm(stated["transformer_kva"], per_unit)
    base_ohm = 120**2 / (stated["transformer_kva"] * 1000)
    assert common_ohm == pytest.approx(complex(primary, primary_reactance) / 100 * base_ohm)
    assert half_ohm == pytest.approx(complex(half, high_low - primary_reactance) / 100 * base_ohm)
    return ServiceImpedances(
        common_ohm=common_ohm,
        leg_ohm=half_ohm + complex(*stated["hot_conductor_ohm"]),
        neutral_ohm=complex(*stated["neutral_conductor_ohm"]),
    )


@pytest.mark.parametrize(
    "name", [name for name, case in POWER_FLOW["cases"].items() if "rod_tx" not in case["options"]]
)
def test_solution_equals_the_power_flow(name):
    # A general-purpose power-flow program and an independent nodal solution, which agree to 3e-7; see the file.
    case = POWER_FLOW["cases"][name]
    service = ServiceImpedances() if case["options"].get("ideal") else power_flow_service()
    is_open = bool(case["options"].get("open_neutral"))
    found = solve_three_wire(service, power_flow_loads(case), is_neutral_open=is_open)
    ours = {
        "VAN": found.leg_a_v,
        "VBN": found.leg_b_v,
        "VAB": found.line_v,
        "VN": found.neutral_shift_v,
        "IA": abs(found.leg_a_phasor_a),
        "IB": abs(found.leg_b_phasor_a),
        "IN": found.neutral_a,
    }
    assert ours == pytest.approx({quantity: case[quantity]["mag"] for quantity in ours}, abs=1e-5)


@pytest.mark.parametrize("name", ["1_ideal_equal_kVA_different_pf", "2_ideal_only_240V_plus_one_120V"])
def test_ideal_cases_by_the_plain_phasor_sum(build, name):
    case = POWER_FLOW["cases"][name]
    circuits = []
    for index, (leg, _, volts, kw, kvar) in enumerate(case["loads (leg, kind, volts, kW, kvar)"]):
        kva = math.hypot(kw, kvar)
        current_a, pf = 1000 * kva / volts, kw / kva
        if leg == "AB":
            circuits.append(build.double(f"load{index}", current_a, (5, 7), pf))
        else:
            circuits.append(build.single(f"load{index}", current_a, {"A": 1, "B": 3}[leg], pf))
    installation = build.installation(*circuits)
    readings = PanelCurrents(installation, connected_scenarios(installation)).currents(installation.as_found)
    for ours, quantity in ((readings.leg_a, "IA"), (readings.leg_b, "IB"), (readings.neutral, "IN")):
        assert ours[0] == pytest.approx(case[quantity]["mag"], abs=2e-6)


class TestKerstingExample:
    """Kersting, Distribution System Modeling and Analysis, ch. 11, Example 11.1: 50 kVA, interlaced.

    The file carries the printed figures and those that two independent solutions give with more digits.
    """

    LOADS = NominalLoads(
        leg_a_phasor_a=120 / (1.4 + 0.5j), leg_b_phasor_a=120 / (0.9 + 0.4j), line_phasor_a=240 / (2 + 1.2j)
    )

    @cached_property
    def found(self) -> ServiceVoltages:
        common_ohm, half_ohm = centre_tapped_ohm(50, 0.011 + 0.018j)
        service = ServiceImpedances(common_ohm=common_ohm, leg_ohm=half_ohm)
        return solve_three_wire(service, {LoadModel.IMPEDANCE: self.LOADS})

    @cached_property
    def example(self) -> dict[str, dict[str, str]]:
        with (DATA / "transformer_checks.csv").open(encoding="utf-8") as file:
            return {row["quantity"]: row for row in csv.DictReader(file)}

    @pytest.mark.parametrize(
        ("quantity", "of"),
        [
            ("V1N", lambda found: found.leg_a_phasor_v),
            ("V2N", lambda found: found.leg_b_phasor_v),
            ("V12", lambda found: found.leg_a_phasor_v + found.leg_b_phasor_v),
            ("I1", lambda found: found.leg_a_phasor_a),
            ("I2 (out of hot 2)", lambda found: -found.leg_b_phasor_a),
            ("neutral -(I1+I2)", lambda found: found.leg_b_phasor_a - found.leg_a_phasor_a),
            ("primary current", lambda found: (found.leg_a_phasor_a + found.leg_b_phasor_a) / 60),
        ],
    )
    def test_phasors(self, quantity, of):
        magnitude, angle_deg = map(float, self.example[quantity]["recomputed_here"].split(" @ "))
        phasor = of(self.found)
        assert abs(phasor) == pytest.approx(magnitude, abs=6e-5 * (10 if quantity.startswith("I") else 1))
        assert math.degrees(cmath.phase(phasor)) == pytest.approx(angle_deg, abs=6e-5)

    @pytest.mark.parametrize(
        ("quantity", "of"),
        [
            ("V1N", lambda found: found.leg_a_v),
            ("V2N", lambda found: found.leg_b_v),
            ("I1", lambda found: abs(found.leg_a_phasor_a)),
            ("I2 (out of hot 2)", lambda found: abs(found.leg_b_phasor_a)),
            ("neutral -(I1+I2)", lambda found: found.neutral_a),
        ],
    )
    def test_printed_magnitudes(self, quantity, of):
        printed = float(re.match(r"[\d.]+", self.example[quantity]["published"])[0])
        assert of(self.found) == pytest.approx(printed, abs=0.05)

    def test_energy(self):
        power_w = (
            self.found.leg_a_phasor_v * self.found.leg_a_phasor_a.conjugate()
            + self.found.leg_b_phasor_v * self.found.leg_b_phasor_a.conjugate()
        ).real
        assert power_w == pytest.approx(float(self.example["hourly energy"]["published"].split()[0]), abs=0.1)


CURRENTS = st.builds(
    lambda amps, pf: amps * PowerFactor(pf).unit_phasor, st.floats(0.1, 60), st.sampled_from([1.0, 0.9, 0.7])
)


@pytest.mark.parametrize("model", list(LoadModel))
@given(leg_a=CURRENTS, leg_b=CURRENTS, line=CURRENTS)
def test_solution_keeps_energy_and_the_laws_of_the_network(model, leg_a, leg_b, line):
    service = power_flow_service()
    loads = NominalLoads(leg_a_phasor_a=leg_a, leg_b_phasor_a=leg_b, line_phasor_a=line)
    found = solve_three_wire(service, {model: loads})
    a, b = found.leg_a_phasor_a, found.leg_b_phasor_a
    delivered = found.leg_a_phasor_v * a.conjugate() + found.leg_b_phasor_v * b.conjugate()
    assert delivered.real + found.total_loss_w == pytest.approx((120 * (a + b).conjugate()).real, rel=1e-9)
    assert found.neutral_shift_phasor_v == pytest.approx(service.neutral_ohm * (a - b), abs=1e-8)


@given(leg_a=CURRENTS, leg_b=CURRENTS)
def test_swapping_the_legs_swaps_the_voltages(leg_a, leg_b):
    one, other = solve_three_wire(FEEDER, amps(leg_a, leg_b)), solve_three_wire(FEEDER, amps(leg_b, leg_a))
    assert (one.leg_a_v, one.leg_b_v, one.total_loss_w) == pytest.approx(
        (other.leg_b_v, other.leg_a_v, other.total_loss_w)
    )


def test_a_service_that_cannot_carry_its_load_is_refused():
    weak = ServiceImpedances(leg_ohm=5, neutral_ohm=5)
    loads = {LoadModel.POWER: NominalLoads(leg_a_phasor_a=100, leg_b_phasor_a=100)}
    with pytest.raises(InfeasibleError, match="no steady voltage"):
        solve_three_wire(weak, loads)
