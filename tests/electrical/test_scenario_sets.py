import itertools
from dataclasses import replace

import numpy as np
import pytest

from balancer.electrical.profiles import HOUR_COLUMNS, HOURS, Season, profiles_from_rows, shipped_profiles
from balancer.electrical.scenario_sets import (
    MAX_CONNECTED_CHOICES,
    choose_scenarios,
    connected_scenarios,
    profile_scenarios,
    share_scenarios,
)
from balancer.electrical.scenarios import ScenarioKind, averages_only
from balancer.panel import Pole, Role


def columns_of(scenarios, name: str) -> list[float]:
    """Line-to-neutral amps of the scenario with this name."""
    return scenarios.neutral_a[list(scenarios.names).index(name)].tolist()


class TestConnected:
    def test_everything_is_on(self, build):
        installation = build.installation(build.single("a", 7), build.double("heater", 20), build.single("b", 4))
        scenarios = connected_scenarios(installation)
        assert scenarios.kind is ScenarioKind.CONNECTED
        assert scenarios.names == ("all on",)
        assert scenarios.neutral_a.tolist() == [[7, 0, 4]]
        assert scenarios.line_a.tolist() == [[0, 20, 0]]
        assert any("planning assumption" in note for note in scenarios.notes)

    @pytest.mark.parametrize("role", [Role.SPARE, Role.BACKFED, Role.INTERLOCK, Role.SURGE])
    def test_spares_and_devices_carry_nothing(self, build, role):
        scenarios = connected_scenarios(build.installation(build.single("x", 9, role=role), build.single("a", 7)))
        assert scenarios.neutral_a.tolist() == [[0, 7]]

    def test_a_feeder_counts_as_a_load(self, build):
        scenarios = connected_scenarios(build.installation(build.double("sub", 30, role=Role.FEEDER)))
        assert scenarios.line_a.tolist() == [[30]]

    def test_loads_that_never_run_together_take_turns(self, build):
        installation = build.installation(
            build.single("a", 7),
            build.single("heat", 12, not_with="Season"),
            build.single("cool", 9, not_with="season"),
            build.single("fan", 3, not_with="season"),
        )
        scenarios = connected_scenarios(installation)
        assert scenarios.names == (
            "all on, without cool, fan",
            "all on, without heat, fan",
            "all on, without heat, cool",
        )
        assert scenarios.neutral_a.tolist() == [[7, 12, 0, 0], [7, 0, 9, 0], [7, 0, 0, 3]]

    def test_two_groups_give_every_combination(self, build):
        groups = {"a": "x", "b": "x", "c": "y", "d": "y"}
        circuits = [build.single(label, 1, not_with=group) for label, group in groups.items()]
        scenarios = connected_scenarios(build.installation(*circuits))
        on = [[label for label, amps in zip(groups, row, strict=True) if amps] for row in scenarios.neutral_a]
        assert on == [["a", "c"], ["a", "d"], ["b", "c"], ["b", "d"]]

    def test_a_label_of_one_load_holds_nothing_back(self, build):
        assert connected_scenarios(build.installation(build.single("heat", 12, not_with="x"))).names == ("all on",)

    def test_a_partner_without_load_does_not_take_a_turn(self, build):
        installation = build.installation(
            build.single("heat", 12, not_with="x"), build.single("old", 5, not_with="x", role=Role.SPARE)
        )
        assert connected_scenarios(installation).neutral_a.tolist() == [[12, 0]]

    def test_beyond_the_limit_the_largest_of_a_group_runs_and_a_note_says_so(self, build):
        circuits = [
            build.single(f"{size}-{group}", amps, not_with=f"group {group}")
            for group in range(10)
            for size, amps in (("small", 2), ("large", 8))
        ]
        scenarios = connected_scenarios(build.installation(*circuits))
        assert len(scenarios) == MAX_CONNECTED_CHOICES == 2**8
        assert (scenarios.neutral_a[:, 17] == 8).all()
        assert (scenarios.neutral_a[:, 16] == 0).all()
        assert [note for note in scenarios.notes if "group 8" in note]
        assert [note for note in scenarios.notes if "group 9" in note]
        assert not [note for note in scenarios.notes if "group 7" in note]


class TestProfiles:
    def test_an_hour_is_the_shares_of_the_full_loads(self, build):
        installation = build.installation(build.single("lamp", 10, use="lighting"), build.single("x", 8))
        scenarios = profile_scenarios(installation)
        shares = [shipped_profiles().share(use, Season.WINTER, 18) for use in ("lighting", "general")]
        assert scenarios.kind is ScenarioKind.PROFILES
        assert columns_of(scenarios, "winter 18:00") == pytest.approx([10 * shares[0], 8 * shares[1]])

    def test_every_hour_also_has_each_circuit_at_full_load(self, build):
        installation = build.installation(
            build.single("lamp", 10, use="lighting"), build.single("oven", 8, use="cooking")
        )
        scenarios = profile_scenarios(installation)
        lamp, oven = (shipped_profiles().share(use, Season.WINTER, 18) for use in ("lighting", "cooking"))
        assert columns_of(scenarios, "winter 18:00, lamp at full load") == pytest.approx([10, 8 * oven])
        assert columns_of(scenarios, "winter 18:00, oven at full load") == pytest.approx([10 * lamp, 8])

    def test_a_circuit_that_rests_in_an_hour_has_no_scenario_then(self, build):
        scenarios = profile_scenarios(build.installation(build.single("heat", 10, use="heating"), build.single("x", 1)))
        singles = [name for name in scenarios.names if name.endswith("heat at full load")]
        assert singles
        assert all(name.startswith("winter") for name in singles)

    def test_both_parts_take_the_same_share(self, build):
        oven = replace(build.mixed("range", 30, 6, (5, 7), Pole.FIRST), use="cooking")
        scenarios = profile_scenarios(build.installation(oven))
        assert scenarios.neutral_a * 5 == pytest.approx(scenarios.line_a)
        assert scenarios.line_a.max() == 30

    def test_loads_that_never_run_together_take_turns_in_every_row(self, build):
        installation = build.installation(
            build.single("heat", 12, use="heating", not_with="x"),
            build.single("car", 9, use="EV charging", not_with="x"),
            build.single("lamp", 3, use="lighting"),
        )
        scenarios = profile_scenarios(installation)
        assert not ((scenarios.neutral_a[:, 0] > 0) & (scenarios.neutral_a[:, 1] > 0)).any()
        for circuit in ("heat", "car"):
            assert any(name == f"winter 18:00, without {circuit}" for name in scenarios.names)
        assert "summer 18:00" in scenarios.names
        assert "winter 18:00, without heat, car at full load" in scenarios.names
        assert "winter 18:00, without heat, heat at full load" not in scenarios.names

    def test_no_row_repeats(self, build):
        installation = build.installation(
            *(build.single(f"c{i}", 5 + i, use=use) for i, use in enumerate(["lighting", "motor", "cooking", ""])),
            build.single("spare", 0, role=Role.SPARE),
        )
        scenarios = profile_scenarios(installation)
        rows = np.hstack([scenarios.neutral_a, scenarios.line_a])
        assert len(np.unique(rows, axis=0)) == len(scenarios)
        assert len(dict.fromkeys(scenarios.names)) == len(scenarios)

    def test_hours_are_averages_and_single_circuits_are_moments(self, build):
        scenarios = profile_scenarios(
            build.installation(build.single("lamp", 10, use="lighting"), build.single("x", 8))
        )
        hours = averages_only(scenarios)
        assert not scenarios.are_averages
        assert hours.are_averages
        possible = {f"{season} {hour:02d}:00" for season, hour in itertools.product(Season, HOURS)}
        assert set(hours.names) <= possible
        assert not [name for name in scenarios.names if name in possible and name not in hours.names]
        assert hours.neutral_a.max() < scenarios.neutral_a.max() == 10
        assert any("planning assumptions" in note for note in scenarios.notes)

    def test_own_profiles_replace_the_shipped_ones(self, build):
        cells = {"use": "lighting", "season": "winter"} | dict.fromkeys(HOUR_COLUMNS, "0.125")
        profiles = profiles_from_rows([(2, cells)], "mine.csv")
        scenarios = profile_scenarios(build.installation(build.single("lamp", 8, use="lighting")), profiles)
        assert scenarios.neutral_a[list(scenarios.names).index("winter 00:00")].tolist() == [1]

    def test_row_order_permutes_columns_and_keeps_the_scenarios(self, build):
        circuits = [
            build.single("heat", 12, use="heating", not_with="x"),
            build.single("lamp", 3, use="lighting"),
            build.single("cool", 9, use="cooling", not_with="x"),
        ]
        forward = profile_scenarios(build.installation(*circuits)).neutral_a
        backward = profile_scenarios(build.installation(*reversed(circuits))).neutral_a[:, ::-1]
        assert sorted(forward.tolist()) == sorted(backward.tolist())


class TestShares:
    def test_full_loads_are_scaled(self, build):
        installation = build.installation(
            build.single("a", 10),
            build.mixed("range", 30, 6, (5, 7), Pole.FIRST),
            build.single("s", 4, role=Role.SPARE),
        )
        scenarios = share_scenarios(installation, ["breakfast", "night"], np.array([[0.5, 1.0, 1.0], [0, 0.25, 1]]))
        assert scenarios.kind is ScenarioKind.SCENARIOS
        assert scenarios.names == ("breakfast", "night")
        assert scenarios.neutral_a.tolist() == [[5, 6, 0], [0, 1.5, 0]]
        assert scenarios.line_a.tolist() == [[0, 30, 0], [0, 7.5, 0]]

    def test_they_are_no_averages(self, build):
        scenarios = share_scenarios(build.installation(build.single("a", 10)), ["s"], np.array([[0.5]]))
        assert averages_only(scenarios) is None


class TestChoice:
    def test_any_use_brings_the_profiles(self, build):
        installation = build.installation(build.single("a", 10), build.single("b", 5, use="lighting"))
        assert choose_scenarios(installation).kind is ScenarioKind.PROFILES

    def test_no_use_means_everything_on(self, build):
        assert choose_scenarios(build.installation(build.single("a", 10))).kind is ScenarioKind.CONNECTED

    def test_the_use_of_a_spare_does_not_count(self, build):
        installation = build.installation(build.single("a", 10), build.single("b", 0, use="lighting", role=Role.SPARE))
        assert choose_scenarios(installation).kind is ScenarioKind.CONNECTED


def test_a_subset_keeps_rows_in_the_order_asked(build):
    installation = build.installation(build.single("a", 10))
    scenarios = share_scenarios(installation, ["one", "two", "three"], np.array([[0.1], [0.2], [0.3]]))
    kept = scenarios.subset([2, 0])
    assert kept.names == ("three", "one")
    assert kept.neutral_a.ravel() == pytest.approx([3, 1])
    assert averages_only(replace(kept, are_averages=True)).names == ("three", "one")
