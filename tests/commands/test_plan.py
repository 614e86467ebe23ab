"""The plan and tradeoff commands around a stand-in planner; the planner itself is tested where it lives."""

import json
from collections.abc import Callable, Sequence
from dataclasses import replace
from pathlib import Path

import pytest
from click.testing import Result

from balancer.arrange.results import Aim, ObjectiveName, ObjectiveResult, Options, Plan, Stop, Tradeoff, TradeoffPoint
from balancer.commands.plan import fewer_landings
from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenarios import Scenarios
from balancer.errors import InfeasibleError, NoAnswerInTime
from balancer.panel import Installation, parse_landing

Run = Callable[..., Result]


class StandInPlanner:
    """Moves one circuit, or fails as told, and remembers what it was asked."""

    def __init__(self, stop: Stop = Stop.NONE, error: BaseException | None = None, moves: Sequence[str] = ()) -> None:
        self.stop, self.error, self.moves = stop, error, dict(move.split("->") for move in moves)
        self.asked: list[Options] = []
        self.caps: tuple[int, ...] = ()
        self.press_ctrl_c = stop is Stop.INTERRUPTED

    def plan(
        self,
        installation: Installation,
        scenarios: Scenarios,
        options: Options,
        progress: object,
        on_interrupt: Callable[[], None],
    ) -> Plan:
        self.asked.append(options)
        if self.press_ctrl_c:
            on_interrupt()
        if self.error is not None:
            raise self.error
        as_left = installation.as_found | {label: parse_landing(place) for label, place in self.moves.items()}
        currents = PanelCurrents(installation, scenarios)
        peaks = currents.peaks(as_left)
        best_a = peaks.neutral.value_a
        proof = ObjectiveResult(
            name=ObjectiveName.NEUTRAL, value=best_a, bound=best_a, is_proven=not self.stop, proved_by="search"
        )
        return Plan(
            installation=installation,
            scenarios=scenarios,
            options=options,
            as_found=installation.as_found,
            as_left=as_left,
            peaks_as_found=currents.peaks(installation.as_found),
            peaks_as_left=peaks,
            objectives=(proof,),
            optimum_peak_neutral_a=best_a,
            bound_peak_neutral_a=best_a,
            is_proven=not self.stop,
            landings_changed=len(self.moves),
            effort=float(len(self.moves)),
            stop=self.stop,
        )

    def trade(
        self,
        installation: Installation,
        scenarios: Scenarios,
        options: Options,
        landings: Sequence[int],
        progress: object,
        on_interrupt: Callable[[], None],
    ) -> Tradeoff:
        if self.press_ctrl_c:
            on_interrupt()
        self.asked.append(options)
        self.caps = tuple(landings)
        peaks = PanelCurrents(installation, scenarios).peaks(installation.as_found)
        point = TradeoffPoint(
            landings=0,
            landings_changed=0,
            peak_neutral_a=peaks.neutral.value_a,
            peak_imbalance_a=peaks.imbalance.value_a,
            peak_heavy_leg_a=peaks.heavy_leg.value_a,
            bound_a=peaks.neutral.value_a,
            is_proven=True,
            arrangement=installation.as_found,
        )
        return Tradeoff(points=tuple(replace(point, landings=cap) for cap in self.caps), flat_from=0, stop=self.stop)


def stand_in(monkeypatch: pytest.MonkeyPatch, planner: StandInPlanner) -> StandInPlanner:
    monkeypatch.setattr("balancer.arrange.plan.plan_arrangement", planner.plan)
    monkeypatch.setattr("balancer.arrange.tradeoff.trade_landings", planner.trade)
    return planner


MOVES = ("kitchen->4", "desk->2")


def test_plan_shows_the_answer_and_ends_with_zero(run: Run, house: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    stand_in(monkeypatch, StandInPlanner(moves=MOVES))
    result = run("plan", house)
    assert result.exit_code == 0
    # Everything on: leg A 10 + 9 + 8 + 3 against 2 on leg B; then 9 + 8 + 3 + 2 against 10.
    assert "Peak neutral falls from 28.0 A to 12.0 A with 2 landings changed." in " ".join(result.stdout.split())
    assert result.stderr == ""


def test_plan_json_is_one_document(run: Run, house: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    stand_in(monkeypatch, StandInPlanner(moves=MOVES))
    document = json.loads(run("plan", house, "--json").stdout)
    assert document["as_left"]["peak_neutral"] == 12.0
    assert {step["circuit"] for step in document["steps"]} == {"kitchen", "desk"}
    assert {step["how"] for step in document["steps"]} <= {"exchange", "move breaker", "turn", "new"}


def test_options_reach_the_planner(run: Run, house: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    planner = stand_in(monkeypatch, StandInPlanner())
    wishes = ("--aim", "legs", "--within", "0", "--landings", "3", "--turn-240", "--splice", "--time-limit", "9")
    run("plan", house, *wishes)
    assert planner.asked == [
        Options(aim=Aim.LEGS, within_a=0.0, max_landings=3, turn_240=True, splice=True, time_limit_s=9.0)
    ]


@pytest.mark.parametrize(("source", "aim"), [("utility", Aim.NEUTRAL), ("inverter", Aim.LEGS), ("generator", Aim.LEGS)])
def test_a_source_that_trips_per_leg_puts_the_legs_first(
    run: Run, house: Path, monkeypatch: pytest.MonkeyPatch, source: str, aim: Aim
) -> None:
    planner = stand_in(monkeypatch, StandInPlanner())
    panel = house.with_name("panel.toml")
    panel.write_text(f'[panel]\nspaces = 12\n[supply]\nsource = "{source}"\n', encoding="utf-8")
    assert run("plan", house, "--panel", panel).exit_code == 0
    assert run("plan", house, "--panel", panel, "--aim", "neutral").exit_code == 0
    assert [options.aim for options in planner.asked] == [aim, Aim.NEUTRAL]


def test_an_error_that_the_plan_cannot_cure_ends_with_one_but_is_shown(
    run: Run, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    stand_in(monkeypatch, StandInPlanner())
    path = tmp_path / "wire.csv"
    path.write_text(
        "circuit,space,volts,load_a,breaker_a,wire,shared_neutral\nthin,1,120,8,30,14 cu,none\n", encoding="utf-8"
    )
    result = run("plan", path)
    assert result.exit_code == 1
    assert "No landing needs to change" in result.stdout
    assert "Errors remain that no re-landing cures" in result.stdout


def test_a_cured_error_does_not_fail_the_plan(run: Run, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    stand_in(monkeypatch, StandInPlanner(moves=("right->3",)))
    path = tmp_path / "pair.csv"
    path.write_text(
        "circuit,space,volts,load_a,breaker_a,shared_neutral\nleft,1,120,8,20,p\nright,2,120,7,20,p\n"
        "far,4,120,1,15,none\n",
        encoding="utf-8",
    )
    result = run("plan", path)
    assert "CURED BY THIS PLAN\nERROR  shared-neutral-one-leg" in result.stdout
    assert result.exit_code == 0


def test_an_interrupted_plan_is_shown_unproven_and_ends_with_130(
    run: Run, house: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    planner = stand_in(monkeypatch, StandInPlanner(stop=Stop.INTERRUPTED, moves=MOVES))
    result = run("plan", house)
    assert result.exit_code == 130
    assert "Interrupted: this is the best found so far." in " ".join(result.stdout.split())
    assert "(proven)" not in result.stdout
    assert planner.caps == ()
    assert json.loads(run("plan", house, "--json").stdout)["complete"] is False


def test_a_plan_cut_off_by_the_clock_is_still_an_answer(run: Run, house: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    stand_in(monkeypatch, StandInPlanner(stop=Stop.TIME_LIMIT, moves=MOVES))
    result = run("plan", house, "--time-limit", "1")
    assert result.exit_code == 0
    assert "The time limit cut the search off" in " ".join(result.stdout.split())


@pytest.mark.parametrize(
    ("error", "exit_code"),
    [
        (InfeasibleError(["14 poles need a place and the panel has 12 spaces"]), 1),
        (NoAnswerInTime("nothing found in 1 s"), 3),
        (KeyboardInterrupt(), 130),
    ],
)
def test_no_plan_is_said_with_its_code_and_saves_nothing(
    run: Run, house: Path, monkeypatch: pytest.MonkeyPatch, error: BaseException, exit_code: int
) -> None:
    stand_in(monkeypatch, StandInPlanner(error=error))
    saved = house.with_name("left.csv")
    result = run("plan", house, "--save", saved)
    assert result.exit_code == exit_code
    assert result.stdout == ""
    assert not saved.exists()


def test_saved_inventory_is_read_back_as_left(run: Run, house: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    stand_in(monkeypatch, StandInPlanner(moves=MOVES))
    saved = house.with_name("left.csv")
    left = json.loads(run("plan", house, "--json", "--save", saved).stdout)["as_left"]
    assert json.loads(run("asfound", saved, "--json").stdout)["as_found"] == left


def test_save_touches_neither_inputs_nor_what_exists(run: Run, house: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    planner = stand_in(monkeypatch, StandInPlanner(moves=MOVES))
    original = house.read_bytes()
    other = house.with_name("other.csv")
    other.write_text("mine", encoding="utf-8")
    for arguments in (("--save", house, "--force"), ("--save", other)):
        assert run("plan", house, *arguments).exit_code == 2
    assert planner.asked == []
    assert house.read_bytes() == original
    assert other.read_text(encoding="utf-8") == "mine"
    assert run("plan", house, "--save", other, "--force").exit_code == 0
    assert other.read_text(encoding="utf-8") != "mine"


def test_a_finished_plan_is_shown_when_what_follows_is_interrupted(
    run: Run, house: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    planner = stand_in(monkeypatch, StandInPlanner(moves=MOVES))
    monkeypatch.setattr(
        "balancer.arrange.tradeoff.trade_landings",
        lambda *_, **__: Tradeoff(points=(), flat_from=None, stop=Stop.INTERRUPTED),
    )
    result = run("plan", house)
    assert len(planner.asked) == 1
    assert result.exit_code == 130
    assert "(proven)" in result.stdout


def test_a_plan_is_shown_where_fewer_landings_do_not_fit(
    run: Run, house: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    stand_in(monkeypatch, StandInPlanner(moves=MOVES))

    def refuse(*_: object, **__: object) -> Tradeoff:
        raise InfeasibleError(["at most 1 landings may change"])

    monkeypatch.setattr("balancer.arrange.tradeoff.trade_landings", refuse)
    result = run("plan", house)
    assert result.exit_code == 0
    assert "With 1 landing no arrangement fits: at most 1 landings may change." in " ".join(result.stdout.split())


@pytest.mark.parametrize(
    ("landings", "caps"), [(0, ()), (1, ()), (2, (1,)), (3, (1, 2)), (4, (1, 2, 3)), (10, (2, 5, 7))]
)
def test_caps_for_fewer_landings_lie_between_none_and_all(landings: int, caps: tuple[int, ...]) -> None:
    assert fewer_landings(landings) == caps


def test_tradeoff_asks_for_every_cap(run: Run, house: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    planner = stand_in(monkeypatch, StandInPlanner())
    document = json.loads(run("tradeoff", house, "--upto", "2", "--json").stdout)
    assert [point["landings"] for point in document["points"]] == [0, 1, 2]
    assert run("tradeoff", house).exit_code == 0
    assert planner.caps == tuple(range(11))


def test_an_interrupted_tradeoff_ends_with_130(run: Run, house: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    stand_in(monkeypatch, StandInPlanner(stop=Stop.INTERRUPTED))
    result = run("tradeoff", house)
    assert result.exit_code == 130
    assert "Cut off" in result.stdout
