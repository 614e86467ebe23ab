"""With everything at unity power factor and no lack of spaces, balancing two legs is two-way number partitioning."""

import csv
from pathlib import Path

import numpy as np
import prtpy
import pytest

from balancer.arrange.plan import plan_arrangement
from balancer.arrange.results import Options, Plan
from balancer.electrical.scenario_sets import connected_scenarios
from balancer.panel import Circuit, Installation, Leg, Load, Panel, Volts, ordinary_spaces

# Every row of the table names its source.
PUBLISHED = list(
    csv.DictReader((Path(__file__).parents[1] / "data" / "partition_checks.csv").read_text("utf-8").splitlines())
)


def plan_of(amps: list[float]) -> Plan:
    """Plan a new layout of these 120 V circuits in a panel where any split fits."""
    circuits = tuple(
        Circuit(label=f"c{index}", volts=Volts.V120, load=Load(neutral_a=each)) for index, each in enumerate(amps)
    )
    # Two columns: a row holds two spaces of one leg, hence as many spaces on each leg as there are circuits.
    installation = Installation(panel=Panel(spaces=ordinary_spaces(2 * len(amps) + 2)), circuits=circuits)
    return plan_arrangement(installation, connected_scenarios(installation), Options(within_a=0.0))


def leg_sums(plan: Plan) -> list[float]:
    sums = dict.fromkeys(Leg, 0.0)
    for circuit in plan.installation.circuits:
        sums[plan.installation.panel.leg(plan.as_left[circuit.label][0].space)] += circuit.load.neutral_a
    return sorted(sums.values(), reverse=True)


@pytest.mark.parametrize("row", PUBLISHED, ids=[row["name"] for row in PUBLISHED])
def test_published_sets_split_as_published(row: dict[str, str]) -> None:
    plan = plan_of([float(each) for each in row["amps"].split()])
    assert plan.is_proven
    assert plan.peaks_as_left.neutral.value_a == pytest.approx(float(row["optimal_difference"]), abs=1e-9)
    assert leg_sums(plan) == [float(each) for each in row["optimal_leg_sums"].split("/")]


def test_published_sets_hold_one_that_largest_first_misses() -> None:
    missed = {
        row["name"]: row for row in PUBLISHED if row["optimal_difference"] != row["greedy_largest_first_difference"]
    }
    assert missed["Karmarkar-Karp textbook set"]["greedy_largest_first_difference"] == "4"
    for row in missed.values():
        amps = [int(each) for each in row["amps"].split()]
        one, other = prtpy.partition(
            algorithm=prtpy.partitioning.greedy, numbins=2, items=amps, outputtype=prtpy.out.Sums
        )
        assert abs(one - other) == int(row["greedy_largest_first_difference"])


@pytest.mark.parametrize("seed", range(12))
def test_difference_is_that_of_an_optimal_partition(seed: int) -> None:
    rng = np.random.default_rng(seed)
    tenths = rng.integers(5, 200, size=int(rng.integers(4, 13))).tolist()
    one, other = prtpy.partition(
        algorithm=prtpy.partitioning.complete_karmarkar_karp, numbins=2, items=tenths, outputtype=prtpy.out.Sums
    )
    plan = plan_of([each / 10 for each in tenths])
    assert plan.is_proven
    assert plan.peaks_as_left.neutral.value_a == pytest.approx(abs(one - other) / 10, abs=1e-6)
