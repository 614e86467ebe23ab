"""Leg amps and neutral current against published figures, an independent phasor sum and the laws they must keep."""

import cmath
import itertools
import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from balancer.electrical.phasors import PanelCurrents, largest_possible_neutral
from balancer.electrical.scenario_sets import connected_scenarios, share_scenarios
from balancer.panel import (
    Circuit,
    Installation,
    Leg,
    Load,
    Pole,
    PowerFactor,
    Role,
    Supply,
    SupplySystem,
    Terminal,
    Volts,
)

SPLIT = Supply()
WYE = Supply(system=SupplySystem.WYE, leading_leg=Leg.A)
IN_PHASE = Supply(system=SupplySystem.IN_PHASE)
SUPPLIES = [
    pytest.param(SPLIT, id="180 degrees"),
    pytest.param(WYE, id="120 degrees, A leads"),
    pytest.param(replace(WYE, leading_leg=Leg.B), id="120 degrees, B leads"),
    pytest.param(IN_PHASE, id="in phase"),
]


def all_on(installation: Installation):
    """Peaks of the installation as found with everything on."""
    return PanelCurrents(installation, connected_scenarios(installation)).peaks(installation.as_found)


def neutral_of(installation: Installation) -> float:
    return all_on(installation).neutral.value_a


class TestPublishedFigures:
    """Sources stand in `tests/data/physics_checks.csv`, row by row."""

    def test_two_equal_loads_leave_the_neutral_empty(self, build, published):
        hot, neutral = published("P1")
        peaks = all_on(build.legs([10_000 / 120], [10_000 / 120]))
        assert peaks.leg_a.value_a == pytest.approx(hot, abs=0.005)
        assert peaks.neutral.value_a == pytest.approx(neutral, abs=1e-9)

    def test_two_loads_on_one_pair_add(self, build, published):
        (line,) = published("P2")
        assert all_on(build.legs([10_000 / 120] * 2, [])).leg_a.value_a == pytest.approx(line, abs=0.01)

    def test_two_legs_of_a_wye_load_the_neutral_like_a_hot(self, build, published):
        (neutral,) = published("P4")
        assert neutral_of(build.legs([10_000 / 120], [10_000 / 120], WYE)) == pytest.approx(neutral, abs=0.005)

    def test_three_legs_of_a_wye_leave_the_neutral_empty(self, build, published):
        # The third leg is the negative of what the two legs send back: equal in size means that all three cancel.
        (neutral,) = published("P5")
        two_legs = neutral_of(build.legs([83.33], [83.33], WYE))
        assert two_legs - 83.33 == pytest.approx(neutral, abs=1e-9)

    def test_thirty_kilowatts_split_evenly(self, build, published):
        (hot,) = published("P6")
        assert all_on(build.legs([15_000 / 120], [15_000 / 120])).leg_b.value_a == pytest.approx(hot)

    @pytest.mark.parametrize(
        ("row", "leg_a", "leg_b"),
        [
            pytest.param("P15.1", (10, 1.0), (10, 1.0), id="equal, unity"),
            pytest.param("P15.2", (10, 1.0), (10, 0.8), id="equal magnitudes, other power factor"),
            pytest.param("P15.3", (10, 0.9), (10, 0.9), id="equal, both lagging"),
            pytest.param("P15.4", (15, 1.0), (10, 0.7), id="unequal, other power factor"),
        ],
    )
    def test_neutral_is_the_phasor_difference(self, build, published, row, leg_a, leg_b):
        installation = build.installation(
            build.single("a", leg_a[0], build.leg_a, leg_a[1]), build.single("b", leg_b[0], build.leg_b, leg_b[1])
        )
        assert neutral_of(installation) == pytest.approx(published(row)[0], abs=5e-5)

    def test_two_legs_of_a_wye_at_five_amps(self, build, published):
        (neutral,) = published("P16b")
        assert neutral_of(build.legs([5], [5], WYE)) == pytest.approx(neutral)

    def test_moving_one_four_amp_load_empties_the_neutral(self, build, published):
        heavy, light, before = published("P25")
        peaks = all_on(build.legs([6, 6, 4], [4, 4]))
        assert (peaks.leg_a.value_a, peaks.leg_b.value_a) == pytest.approx((heavy, light))
        assert peaks.neutral.value_a == pytest.approx(before)
        *legs, after = published("P26")
        peaks = all_on(build.legs([6, 6], [4, 4, 4]))
        assert [peaks.leg_a.value_a, peaks.leg_b.value_a] == pytest.approx(legs)
        assert peaks.neutral.value_a == pytest.approx(after, abs=1e-9)

    def test_unequal_resistances(self, build, published):
        leg_a, leg_b, neutral = published("P27")
        peaks = all_on(build.legs([110 / 11], [110 / 22]))
        assert [peaks.leg_a.value_a, peaks.leg_b.value_a] == pytest.approx([leg_a, leg_b])
        assert peaks.neutral.value_a == pytest.approx(neutral)

    def test_legs_in_phase_add_in_the_neutral(self, build, published):
        (neutral,) = published("P28")
        assert neutral_of(build.legs([12], [9], IN_PHASE)) == pytest.approx(neutral)


class TestCommonPractice:
    """Trade facts without a source."""

    @pytest.mark.parametrize(("leg_a", "leg_b", "neutral"), [(15, 15, 0), (15, 5, 10), (5, 15, 10)])
    def test_the_neutral_carries_the_difference(self, build, leg_a, leg_b, neutral):
        assert neutral_of(build.legs([leg_a], [leg_b])) == pytest.approx(neutral, abs=1e-9)

    def test_on_two_legs_of_a_wye_fifteen_and_five_leave_thirteen(self, build):
        # sqrt(A^2 + B^2 - AB)
        assert neutral_of(build.legs([15], [5], WYE)) == pytest.approx(13.2288, abs=5e-5)

    @pytest.mark.parametrize("supply", SUPPLIES)
    @pytest.mark.parametrize("pf", [1.0, 0.7, -0.8])
    def test_a_240_volt_load_leaves_the_neutral_alone(self, build, supply, pf):
        lights = (build.single("a", 7, 1, 0.9), build.single("b", 4, 3))
        without = build.installation(*lights, supply=supply)
        with_it = build.installation(*lights, build.double("range", 40, (5, 7), pf), supply=supply)
        assert neutral_of(with_it) == pytest.approx(neutral_of(without))

    def test_a_240_volt_load_is_on_both_legs(self, build):
        peaks = all_on(build.installation(build.double("heater", 20, (5, 7), 0.9)))
        assert (peaks.leg_a.value_a, peaks.leg_b.value_a) == pytest.approx((20, 20))

    def test_measured_pole_amps_come_back(self, build):
        """A feeder measured at 30 and 22 A reads 30 and 22 A, 8 A on the neutral, whichever pole is the larger."""
        for pole, legs in ((Pole.FIRST, (30, 22)), (Pole.SECOND, (22, 30))):
            peaks = all_on(build.installation(build.mixed("feeder", 22, 8, (5, 7), pole)))
            assert (peaks.leg_a.value_a, peaks.leg_b.value_a) == pytest.approx(legs)
            assert peaks.neutral.value_a == pytest.approx(8)

    def test_a_turned_circuit_loads_the_other_leg(self, build):
        peaks = all_on(build.installation(build.mixed("range", 20, 5, (7, 5), Pole.FIRST)))
        assert (peaks.leg_a.value_a, peaks.leg_b.value_a) == pytest.approx((20, 25))

    def test_of_an_unknown_pole_the_worse_counts(self, build):
        lights = build.single("a", 9, build.leg_a)
        peaks = all_on(build.installation(lights, build.mixed("range", 20, 5, (5, 7), None)))
        assert peaks.neutral.value_a == pytest.approx(14)
        assert peaks.leg_a.value_a == pytest.approx(34)
        assert peaks.leg_b.value_a == pytest.approx(25)

    def test_imbalance_in_percent_of_the_mean(self, build):
        peaks = all_on(build.legs([30], [10]))
        assert peaks.imbalance.value_a == pytest.approx(20)
        assert peaks.imbalance_pct == pytest.approx(100)

    def test_an_empty_panel_carries_nothing(self, build):
        peaks = all_on(build.legs([], []))
        assert (peaks.neutral.value_a, peaks.imbalance_pct, peaks.largest_possible_neutral_a) == (0, 0, 0)

    def test_a_circuit_that_is_not_landed_carries_nothing(self, build):
        assert neutral_of(build.installation(build.single("new", 12), build.double("oven", 30))) == 0


AMPS = st.integers(1, 400).map(lambda tenths: tenths / 10)
POWER_FACTORS = st.sampled_from([1.0, 0.98, 0.9, 0.8, 0.5, -0.95, -0.6])


@st.composite
def circuits(draw, most: int = 7, poles_known: bool = True) -> tuple[Circuit, ...]:
    """Landed circuits of all kinds, at most `most`, on neighbouring rows."""
    found = []
    for index in range(draw(st.integers(1, most))):
        row = draw(st.integers(0, 9)) * 4 + 1
        kind = draw(st.sampled_from(["120 A", "120 B", "240", "120/240"]))
        turned = draw(st.booleans())
        pf = [draw(POWER_FACTORS) for _ in range(2)]
        factors = [PowerFactor(abs(value), is_leading=value < 0) for value in pf]
        pair = (Terminal(row + 2), Terminal(row)) if turned else (Terminal(row), Terminal(row + 2))
        if kind.startswith("120 "):
            load, landing, volts = Load(neutral_a=draw(AMPS), neutral_pf=factors[0]), pair[:1], Volts.V120
        elif kind == "240":
            load, landing, volts = Load(line_a=draw(AMPS), line_pf=factors[1]), pair, Volts.V240
        else:
            pole = draw(st.sampled_from([Pole.FIRST, Pole.SECOND] if poles_known else [Pole.FIRST, None]))
            neutral_pf = factors[0] if pole else PowerFactor()
            load = Load(
                neutral_a=draw(AMPS), neutral_pf=neutral_pf, neutral_pole=pole, line_a=draw(AMPS), line_pf=factors[1]
            )
            landing, volts = pair, Volts.V120_240
        found.append(Circuit(label=f"c{index}", volts=volts, load=load, landing=landing))
    return tuple(found)


LAG_OF_B_DEG = {"A": 120.0, "B": -120.0}


def leg_voltages(supply: Supply) -> dict[Leg, complex]:
    """Unit voltage phasors of the two legs, leg A at 0 degrees."""
    lag_deg = {SupplySystem.SPLIT: 180.0, SupplySystem.IN_PHASE: 0.0}.get(supply.system)
    if lag_deg is None:
        assert supply.leading_leg is not None
        lag_deg = LAG_OF_B_DEG[supply.leading_leg]
    return {Leg.A: 1 + 0j, Leg.B: cmath.rect(1.0, -math.radians(lag_deg))}


def summed_by_hand(installation: Installation, on_poles: dict[str, Pole]) -> tuple[float, float, float]:
    """Leg A, leg B and neutral from one common reference, load by load: another way to the same readings."""
    volts = leg_voltages(installation.panel.supply)
    current = {Leg.A: 0j, Leg.B: 0j}
    for circuit in installation.circuits:
        legs = [installation.panel.leg(terminal.space) for terminal in circuit.landing]
        load = circuit.load
        at = legs[0] if circuit.poles == 1 or on_poles[circuit.label] is Pole.FIRST else legs[1]
        current[at] += load.neutral_a * load.neutral_pf.unit_phasor * volts[at]
        across = volts[Leg.A] - volts[Leg.B]
        if load.line_a and abs(across) > 1e-9:
            flow = load.line_a * load.line_pf.unit_phasor * across / abs(across)
            current[Leg.A] += flow
            current[Leg.B] -= flow
    return abs(current[Leg.A]), abs(current[Leg.B]), abs(current[Leg.A] + current[Leg.B])


@pytest.mark.parametrize("supply", SUPPLIES)
@given(found=circuits(poles_known=False))
@settings(max_examples=40, deadline=None)
def test_readings_equal_a_sum_in_one_common_reference(build, supply, found):
    installation = build.installation(*found, supply=supply)
    poles = [[c.load.neutral_pole] if c.load.neutral_pole or c.poles == 1 else list(Pole) for c in found]
    outcomes = [
        summed_by_hand(installation, dict(zip([c.label for c in found], choice, strict=True)))
        for choice in itertools.product(*poles)
    ]
    peaks = all_on(installation)
    assert peaks.leg_a.value_a == pytest.approx(max(each[0] for each in outcomes), abs=1e-9)
    assert peaks.leg_b.value_a == pytest.approx(max(each[1] for each in outcomes), abs=1e-9)
    assert peaks.neutral.value_a == pytest.approx(max(each[2] for each in outcomes), abs=1e-9)
    assert peaks.heavy_leg.value_a == pytest.approx(max(max(each[:2]) for each in outcomes), abs=1e-9)


@given(found=circuits())
@settings(max_examples=25, deadline=None)
def test_of_an_unknown_rotation_the_worse_counts(build, found):
    def peaks_of(leading: Leg | None):
        return all_on(build.installation(*found, supply=replace(WYE, leading_leg=leading)))

    unknown, a_leads, b_leads = peaks_of(None), peaks_of(Leg.A), peaks_of(Leg.B)
    for name in ("leg_a", "leg_b", "heavy_leg", "imbalance", "neutral"):
        worse = max(getattr(a_leads, name).value_a, getattr(b_leads, name).value_a)
        assert getattr(unknown, name).value_a == pytest.approx(worse, abs=1e-9)


@pytest.mark.parametrize("supply", SUPPLIES)
@given(found=circuits(most=8, poles_known=False))
@settings(max_examples=30, deadline=None)
def test_largest_possible_neutral_is_the_worst_subset(build, supply, found):
    installation = build.installation(*found, supply=supply)
    volts = leg_voltages(supply)
    options = []
    for circuit in found:
        legs = [installation.panel.leg(terminal.space) for terminal in circuit.landing]
        pole = circuit.load.neutral_pole
        if circuit.poles == 2 and pole is not None:
            legs = [legs[0 if pole is Pole.FIRST else 1]]
        phasor = circuit.load.neutral_a * circuit.load.neutral_pf.unit_phasor
        options.append([0j, *(phasor * volts[leg] for leg in legs)])
    worst = max(abs(sum(choice)) for choice in itertools.product(*options))
    assert largest_possible_neutral(installation, installation.as_found) == pytest.approx(worst, abs=1e-9)


def test_largest_possible_neutral_leaves_out_devices(build):
    solar = build.single("solar", 20, 1, role=Role.BACKFED)
    installation = build.installation(solar, build.single("b", 4, 3))
    assert largest_possible_neutral(installation, installation.as_found) == pytest.approx(4)


SHARES = st.lists(st.floats(0, 1), min_size=7, max_size=7)


@given(found=circuits(), rows=st.lists(SHARES, min_size=1, max_size=5))
@settings(max_examples=30, deadline=None)
def test_many_scenarios_at_once_equal_one_by_one(build, found, rows):
    installation = build.installation(*found)
    shares = np.array(rows)[:, : len(found)]
    names = [str(row) for row in range(len(rows))]
    together = PanelCurrents(installation, share_scenarios(installation, names, shares)).currents(installation.as_found)
    for row in range(len(rows)):
        single = share_scenarios(installation, names[:1], shares[row : row + 1])
        alone = PanelCurrents(installation, single).currents(installation.as_found)
        for name in ("leg_a", "leg_b", "neutral"):
            assert getattr(alone, name)[0] == pytest.approx(getattr(together, name)[row], abs=1e-9)


def readings_of(installation: Installation) -> list[float]:
    peaks = all_on(installation)
    quantities = (peaks.leg_a, peaks.leg_b, peaks.heavy_leg, peaks.imbalance, peaks.neutral)
    return [*(each.value_a for each in quantities), peaks.largest_possible_neutral_a]


@pytest.mark.parametrize("supply", SUPPLIES)
@given(found=circuits(), random=st.randoms(use_true_random=False))
@settings(max_examples=20, deadline=None)
def test_row_order_changes_nothing(build, supply, found, random):
    shuffled = random.sample(found, len(found))
    before = readings_of(build.installation(*found, supply=supply))
    assert readings_of(build.installation(*shuffled, supply=supply)) == pytest.approx(before, abs=1e-9)


@pytest.mark.parametrize("supply", SUPPLIES)
@given(found=circuits())
@settings(max_examples=20, deadline=None)
def test_renaming_the_legs_swaps_them_and_nothing_else(build, supply, found):
    leading = supply.leading_leg.other if supply.leading_leg else None
    swapped = build.installation(*found, supply=replace(supply, leading_leg=leading), row_legs="BA")
    leg_a, leg_b, *rest = readings_of(build.installation(*found, supply=supply))
    assert readings_of(swapped) == pytest.approx([leg_b, leg_a, *rest], abs=1e-9)


def mirrored(circuit: Circuit) -> Circuit:
    """The circuit with leading for lagging."""

    def turn(pf: PowerFactor) -> PowerFactor:
        return replace(pf, is_leading=not pf.is_leading)

    load = circuit.load
    return replace(circuit, load=replace(load, neutral_pf=turn(load.neutral_pf), line_pf=turn(load.line_pf)))


@pytest.mark.parametrize("supply", SUPPLIES)
@given(found=circuits())
@settings(max_examples=20, deadline=None)
def test_leading_for_lagging_is_a_mirror(build, supply, found):
    """On a wye the mirror also turns the rotation round."""
    leading = supply.leading_leg.other if supply.leading_leg else None
    mirror = build.installation(*map(mirrored, found), supply=replace(supply, leading_leg=leading))
    assert readings_of(mirror) == pytest.approx(readings_of(build.installation(*found, supply=supply)), abs=1e-9)


@pytest.mark.parametrize("supply", SUPPLIES)
@given(found=circuits(), factor=st.floats(0.1, 10))
@settings(max_examples=20, deadline=None)
def test_scaling_every_load_scales_every_reading(build, supply, found, factor):
    def scaled(circuit: Circuit) -> Circuit:
        load = circuit.load
        larger = replace(load, neutral_a=factor * load.neutral_a, line_a=factor * load.line_a)
        return replace(circuit, load=larger)

    expected = [factor * value for value in readings_of(build.installation(*found, supply=supply))]
    scaled_up = build.installation(*map(scaled, found), supply=supply)
    assert readings_of(scaled_up) == pytest.approx(expected, rel=1e-9, abs=1e-9)


@given(found=circuits())
@settings(max_examples=40, deadline=None)
def test_bounds_that_hold_whatever_the_loads(build, found):
    leg_a, leg_b, heavy, imbalance, neutral, largest = readings_of(build.installation(*found))
    assert heavy == max(leg_a, leg_b)
    assert imbalance <= neutral + 1e-9
    assert neutral <= min(leg_a + leg_b, largest) + 1e-9
