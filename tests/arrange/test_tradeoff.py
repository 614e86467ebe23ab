import signal
from dataclasses import replace

import pytest

from balancer.arrange import tradeoff
from balancer.arrange.results import Options, Stop
from balancer.arrange.tradeoff import trade_landings
from balancer.electrical.scenario_sets import connected_scenarios
from balancer.errors import InfeasibleError


@pytest.fixture
def pair_on_one_leg(installation, circuit):
    # Curing it takes one landing at least.
    pair = [circuit("P", "1", amps=9.0, shared_neutral="n"), circuit("Q", "5", amps=8.0, shared_neutral="n")]
    return installation(*pair, circuit("X", "9", amps=7.0))


def test_caps_under_which_nothing_fits_are_told(pair_on_one_leg):
    curve = trade_landings(pair_on_one_leg, connected_scenarios(pair_on_one_leg), Options(), [0, 1, 2])
    assert curve.refused == (0,)
    assert "0 landings" in curve.refusal
    assert [point.landings for point in curve.points] == [1, 2]


def test_a_curve_without_refusals_says_so(installation, circuit):
    wall = installation(circuit("X", "1"), circuit("Y", "5"))
    curve = trade_landings(wall, connected_scenarios(wall), Options(), [0, 1])
    assert (curve.refused, curve.refusal) == ((), "")
    assert [point.peak_neutral_a for point in curve.points] == pytest.approx([10.0, 0.0])


def test_nothing_fits_under_any_cap(pair_on_one_leg):
    with pytest.raises(InfeasibleError):
        trade_landings(pair_on_one_leg, connected_scenarios(pair_on_one_leg), Options(), [0])


def test_what_was_cut_off_is_not_said_to_be_impossible(pair_on_one_leg):
    def caps():
        yield 0
        signal.raise_signal(signal.SIGINT)
        yield 1

    curve = trade_landings(pair_on_one_leg, connected_scenarios(pair_on_one_leg), Options(), caps())
    assert (curve.points, curve.refused, curve.stop) == ((), (0,), Stop.INTERRUPTED)


@pytest.mark.parametrize(("is_proven", "flat_from"), [(True, 0), (False, None)])
def test_a_curve_is_called_flat_only_where_that_is_proven(installation, circuit, monkeypatch, is_proven, flat_from):
    wall = installation(circuit("X", "1"), circuit("Y", "3"))
    point = tradeoff._point
    monkeypatch.setattr(
        tradeoff, "_point", lambda planner, cap: replace(point(planner, cap), is_proven=is_proven or cap == 0)
    )
    assert trade_landings(wall, connected_scenarios(wall), Options(), [0, 1]).flat_from == flat_from
