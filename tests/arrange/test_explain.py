import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from balancer.arrange.explain import HeldBy, explain_peak
from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenarios import ScenarioKind, Scenarios
from balancer.panel import (
    Circuit,
    Installation,
    Leg,
    Load,
    Panel,
    Pole,
    PowerFactor,
    Volts,
    ordinary_spaces,
    parse_landing,
)


def explain(installation, *rows, names=None):
    """Explain the panel as found; a row is the 120 V amps of every circuit."""
    amps = np.array(rows, dtype=float)
    names = names or [f"S{number}" for number in range(1, len(rows) + 1)]
    scenarios = Scenarios(kind=ScenarioKind.SCENARIOS, names=names, neutral_a=amps, line_a=np.zeros_like(amps))
    return explain_peak(PanelCurrents(installation, scenarios), installation.as_found)


def test_the_governing_scenario_and_its_circuits_largest_first(installation, circuit):
    wall = installation(circuit("K", "1"), circuit("L", "5"), circuit("M", "3"))
    found = explain(wall, [1, 1, 1], [3, 8, 4], names=["night", "evening"])
    assert (found.scenario, found.scenario_name) == (1, "evening")
    assert found.neutral_a == pytest.approx(7.0)
    assert [(c.circuit, c.leg, c.current_a, c.along_neutral_a) for c in found.leg_a] == [
        ("L", Leg.A, pytest.approx(8.0), pytest.approx(8.0)),
        ("K", Leg.A, pytest.approx(3.0), pytest.approx(3.0)),
    ]
    assert [(c.circuit, c.along_neutral_a) for c in found.leg_b] == [("M", pytest.approx(-4.0))]


def test_small_loads_are_summed_once_nine_tenths_are_named(installation, circuit):
    wall = installation(circuit("K", "1"), circuit("L", "5"), circuit("M", "9"), circuit("N", "2"))
    found = explain(wall, [10, 8.5, 1.2, 0.3])
    assert [c.circuit for c in found.leg_a] == ["K", "L"]
    assert (found.rest_count_a, found.rest_a_a) == (2, pytest.approx(1.5))
    assert (found.leg_b, found.rest_count_b, found.rest_b_a) == ((), 0, 0)


def test_contributions_are_projected_on_the_neutral(installation, circuit):
    lagging = Load(neutral_a=10.0, neutral_pf=PowerFactor(0.8))
    wall = installation(circuit("K", "1", amps=10.0), circuit("L", "3", load=lagging))
    found = explain(wall, [10, 10])
    # Derived: 10 A at unity power factor against 10 A at 0.8 lagging leaves 6.3246 A.
    assert found.neutral_a == pytest.approx(6.3246, abs=5e-5)
    assert sum(c.along_neutral_a for c in (*found.leg_a, *found.leg_b)) == pytest.approx(found.neutral_a)


def test_one_load_alone_has_nothing_set_against_it(installation, circuit):
    wall = installation(circuit("H", "1", description="heater"), circuit("L", "3"))
    found = explain(wall, [12.5, 0])
    assert found.held_by is HeldBy.ONE_LOAD
    assert found.sentence == "H (heater) alone draws 12.5 A with nothing running on the other leg to set against it."


def test_one_load_larger_than_all_the_others_leaves_the_rest_of_itself(installation, circuit):
    wall = installation(circuit("H", "1"), circuit("L", "3"), circuit("M", "7"))
    found = explain(wall, [12.5, 2, 1])
    assert found.held_by is HeldBy.ONE_LOAD
    assert "at least 9.5 A is left" in found.sentence


def test_a_large_load_explains_nothing_while_its_leg_carries_more(installation, circuit):
    wall = installation(circuit("H", "1"), circuit("L", "5"), circuit("M", "9"))
    assert explain(wall, [12.5, 2, 1]).held_by is HeldBy.CONSTRAINTS


def test_a_pair_counts_as_the_difference_that_its_shared_neutral_carries(installation, circuit):
    pair = [circuit("P", "1", shared_neutral="n"), circuit("Q", "3", shared_neutral="n")]
    wall = installation(*pair, circuit("L", "5"), circuit("M", "9"))
    # The pair leaves 1 A of its 10 and 9 A, so that it is no floor for the 5 A of the others.
    assert explain(wall, [10, 9, 2, 2]).held_by is not HeldBy.ONE_LOAD


def test_no_split_comes_closer(installation, circuit):
    # 8, 7, 6, 5, 5 split into 16 and 15: the sum is odd, so 1 A is left at best.
    wall = installation(*(circuit(f"c{n}", space) for n, space in enumerate(["1", "2", "3", "4", "7"])))
    found = explain(wall, [8, 8, 7, 5, 5])
    assert (found.held_by, found.neutral_a) == (HeldBy.NO_CLOSER_SPLIT, pytest.approx(1.0))
    assert found.sentence == "No split of the 5 loads running then comes closer."


def test_what_helps_here_raises_another_scenario(installation, circuit):
    wall = installation(circuit("X", "1"), circuit("Y", "5"), circuit("Z", "3"))
    found = explain(wall, [3, 6, 5], [9, 0, 9], names=["morning", "evening"])
    assert found.held_by is HeldBy.OTHER_SCENARIO
    assert found.sentence == ("Moving X to the other leg would bring it to 2.0 A here, but raise evening to 18.0 A.")


def test_a_move_that_lowers_everything_is_put_down_to_the_constraints(installation, circuit):
    wall = installation(circuit("X", "1"), circuit("Y", "5"))
    found = explain(wall, [5, 4])
    assert found.held_by is HeldBy.CONSTRAINTS
    assert "would bring the peak to 1.0 A" in found.sentence


def test_several_moves_may_do_what_none_does_alone(installation, circuit):
    # 8 and 5 against 6 and 4 leave 3 A; 8 and 4 against 6 and 5 leave 1 A.
    wall = installation(*(circuit(label, space) for label, space in zip("KLMN", ["1", "2", "3", "4"], strict=True)))
    found = explain(wall, [8, 5, 6, 4])
    assert found.held_by is HeldBy.SEVERAL_MOVES
    assert "would leave 1.0 A here" in found.sentence


def test_a_pair_is_turned_over_and_not_moved(installation, circuit):
    pair = [circuit("P", "1", shared_neutral="n"), circuit("Q", "3", shared_neutral="n")]
    found = explain(installation(*pair, circuit("L", "5")), [6, 2, 3])
    assert found.sentence.startswith("Turning P and Q over would bring the peak to 1.0 A")


def test_a_fixed_circuit_is_no_move(installation, circuit):
    wall = installation(circuit("X", "1", is_fixed=True), circuit("Y", "5", is_fixed=True))
    assert explain(wall, [5, 5]).held_by is HeldBy.NO_CLOSER_SPLIT


def test_nothing_is_left_to_explain_where_the_legs_cancel(installation, circuit):
    found = explain(installation(circuit("X", "1"), circuit("Y", "3")), [15, 15])
    assert (found.held_by, found.neutral_a) == (HeldBy.NOTHING, pytest.approx(0.0))
    assert [c.along_neutral_a for c in (*found.leg_a, *found.leg_b)] == [0.0, 0.0]


def test_legs_in_phase_add_up_wherever_circuits_are_landed(installation, circuit):
    wall = installation(circuit("X", "1"), circuit("Y", "3"), system="120")
    found = explain(wall, [12, 9])
    assert (found.held_by, found.neutral_a) == (HeldBy.LEGS_IN_PHASE, pytest.approx(21.0))


def test_a_part_whose_pole_is_not_known_counts_on_the_worse_leg(installation, circuit):
    wall = installation(circuit("X", "1"), circuit("R", "5-7", "120/240", load=Load(line_a=20.0, neutral_a=2.0)))
    found = explain(wall, [6, 2])
    assert found.neutral_a == pytest.approx(8.0)
    assert [c.circuit for c in found.leg_a] == ["X", "R"]


@st.composite
def walls(draw):
    """Up to six single circuits and a range, with two scenarios of whole amps."""
    system_pf = st.sampled_from([PowerFactor(), PowerFactor(0.8)])
    spaces = draw(st.permutations(range(1, 9)))[: draw(st.integers(1, 6))]
    circuits = [
        Circuit(
            label=f"c{space}",
            landing=parse_landing(str(space)),
            volts=Volts.V120,
            load=Load(neutral_a=5.0, neutral_pf=draw(system_pf)),
            is_fixed=draw(st.integers(0, 4)) == 0,
        )
        for space in spaces
    ]
    pole = draw(st.sampled_from([Pole.FIRST, None]))
    load = Load(line_a=20.0, neutral_a=2.0, neutral_pole=pole)
    circuits.append(Circuit(label="range", landing=parse_landing("9-11"), volts=Volts.V120_240, load=load))
    amps = st.lists(st.integers(0, 12), min_size=len(circuits), max_size=len(circuits))
    return Installation(panel=Panel(spaces=ordinary_spaces(12)), circuits=tuple(circuits)), draw(amps), draw(amps)


@given(walls())
@settings(max_examples=60)
def test_contributions_add_up_to_the_neutral_and_the_reason_holds(wall):
    installation, *rows = wall
    found = explain(installation, *rows)
    shown = [*found.leg_a, *found.leg_b]
    if not found.rest_count_a and not found.rest_count_b and found.neutral_a:
        assert sum(c.along_neutral_a for c in shown) == pytest.approx(found.neutral_a)
    lowest_here, lowest_peak = _best_by_trying(installation, rows, found.scenario)
    if found.held_by is HeldBy.NO_CLOSER_SPLIT:
        assert lowest_here > found.neutral_a - 0.051
    if found.held_by is HeldBy.CONSTRAINTS:
        assert lowest_peak < found.neutral_a - 0.049
    if found.held_by is HeldBy.ONE_LOAD:
        assert lowest_here >= 0.9 * found.neutral_a - 1e-9


def _best_by_trying(installation, rows, scenario):
    """Lowest neutral of one scenario, and lowest peak, over all legs of the free single circuits."""
    free = [c for c in installation.circuits if c.poles == 1 and not c.is_fixed]
    here, peak = [], []
    for legs in np.ndindex(*(2,) * len(free)):
        sides = {circuit.label: 1 - 2 * leg for circuit, leg in zip(free, legs, strict=True)}
        values = [max(_neutral(installation, row, sides, unknown) for unknown in (1, -1)) for row in rows]
        here.append(values[scenario])
        peak.append(max(values))
    return min(here), min(peak)


def _neutral(installation, row, sides, unknown):
    total = 0j
    for circuit, amps in zip(installation.circuits, row, strict=True):
        found_side = 1 if installation.panel.leg(circuit.landing[0].space) is Leg.A else -1
        if circuit.poles == 2 and circuit.load.neutral_pole is None:
            found_side = unknown
        pf = circuit.load.neutral_pf.value
        total += sides.get(circuit.label, found_side) * amps * complex(pf, -((1 - pf * pf) ** 0.5))
    return abs(total)
