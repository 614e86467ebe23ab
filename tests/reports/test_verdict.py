from collections.abc import Callable
from dataclasses import replace

import pytest

from balancer.arrange.results import Aim, ObjectiveName, Options, Plan, Stop, Tradeoff
from balancer.reports.answers import PlanAnswer
from balancer.reports.verdict import flat_text, proof_notes, proof_table, tradeoff_notes, verdict

Render = Callable[..., str]


def test_verdict_says_from_what_to_what_and_that_it_is_proven(plan: Plan) -> None:
    assert verdict(plan) == (
        "Peak neutral falls from 31.0 A to 9.0 A with 3 landings changed and 1 new circuit placed. "
        "No arrangement of this panel does better than 9.0 A (proven)."
    )


def test_verdict_says_what_was_given_up_to_save_landings(plan: Plan) -> None:
    best = replace(plan.objectives[0], value=8.8, bound=8.8)
    text = verdict(replace(plan, objectives=(best, *plan.objectives[1:])))
    assert "does better than 8.8 A (proven). 0.20 A is given up to save landings (--within 0.25)." in text


def test_verdict_without_proof_gives_the_gap_and_claims_nothing(plan: Plan) -> None:
    open_objective = replace(plan.objectives[0], bound=7.5, is_proven=False)
    text = verdict(replace(plan, objectives=(open_objective,), stop=Stop.INTERRUPTED))
    assert "at most 1.5 A above the best possible" in text
    assert "(proven)" not in text
    assert "Interrupted: this is the best found so far." in text


def test_verdict_of_a_new_layout_compares_with_nothing(plan: Plan) -> None:
    text = verdict(replace(plan, peaks_as_found=None, as_found={}, landings_changed=0))
    assert text.startswith("New layout: peak neutral 9.0 A.")


def test_verdict_of_a_panel_that_is_right_already(plan: Plan) -> None:
    same = replace(plan, as_left=plan.as_found, landings_changed=0, peaks_as_left=plan.peaks_as_found)
    assert verdict(same).startswith("No landing needs to change: peak neutral 31.0 A.")


def test_verdict_names_the_cap_on_landings(plan: Plan) -> None:
    text = verdict(replace(plan, options=Options(max_landings=1)))
    assert "No arrangement of this panel with at most 1 landing does better" in text


def test_verdict_puts_the_legs_first_where_they_come_first(plan: Plan) -> None:
    legs = replace(plan.objectives[1], value=61.0, bound=61.0, is_proven=True)
    text = verdict(replace(plan, options=Options(aim=Aim.LEGS), objectives=(legs,)))
    assert text.startswith("Peak heavy leg falls from 70.0 A to 61.0 A")
    assert "does better than 61.0 A (proven)." in text


def test_proof_table_tells_proven_from_bounded(plan: Plan, render: Render) -> None:
    rows = {line.split("  ")[0]: line for line in render(proof_table(plan.objectives)).splitlines()}
    assert rows["peak neutral"].rstrip().endswith("proven")
    assert "at most 1.5 A above the best" in rows["peak heavy leg"]
    assert rows["effort, in landings"].split()[-3:] == ["3", "3", "proven"]
    assert ObjectiveName.MEAN_NEUTRAL not in rows


@pytest.mark.parametrize(
    ("flat_from", "words"),
    [(None, "still falls"), (0, "Flat from the start"), (4, "Flat from 4 landings on")],
)
def test_flat_part_of_the_curve_is_named(flat_from: int | None, words: str) -> None:
    assert words in flat_text(Tradeoff(points=(), flat_from=flat_from))


def test_a_curve_that_was_cut_off_is_said_neither_to_fall_nor_to_be_flat() -> None:
    text = flat_text(Tradeoff(points=(), flat_from=None, stop=Stop.TIME_LIMIT))
    assert text == "Where the curve goes flat is not known: not all of it is proven."


def test_verdict_of_a_first_figure_that_stays_names_what_changes(plan: Plan) -> None:
    assert plan.peaks_as_found is not None
    same = replace(plan.peaks_as_left, neutral=plan.peaks_as_found.neutral)
    text = verdict(replace(plan, peaks_as_left=same))
    assert text.startswith("Peak neutral stays at 31.0 A and the peak heavy leg falls from 70.0 A to 61.0 A with")


def test_verdict_of_averages_calls_them_so(plan: Plan) -> None:
    averages = replace(plan.scenarios, are_averages=True)
    assert "averages over an interval" in verdict(replace(plan, scenarios=averages))
    assert "averages" not in verdict(plan)


def test_proof_is_said_to_hold_for_the_loads_and_before_anything_was_given_up(plan: Plan) -> None:
    text = " ".join(proof_notes(plan))
    assert "For the loads given" in text
    assert "before up to 0.25 A of each was given up to save landings" in text
    exact = " ".join(proof_notes(replace(plan, options=Options(within_a=0.0, max_landings=1))))
    assert "given up" not in exact
    assert "with at most 1 landing." in exact


def test_tradeoff_says_which_landings_buy_nothing(answer: PlanAnswer) -> None:
    assert answer.fewer is not None
    (point,) = answer.fewer.points
    figures = {1: 21.0, 2: 15.0, 3: 15.0, 4: 9.0}
    points = tuple(replace(point, landings=cap, peak_neutral_a=value) for cap, value in figures.items())
    notes = " ".join(tradeoff_notes(Tradeoff(points=points, flat_from=None), Aim.NEUTRAL, ()))
    assert "3 landings buy nothing beyond 2." in notes
    assert "imbalance and heavy leg are the lowest that go with it" in notes


@pytest.mark.parametrize(
    ("is_cured", "reason"),
    [(True, "curing breaker-above-conductor (hall) takes more"), (False, "at most 1 landings may change")],
)
def test_tradeoff_says_with_how_many_landings_nothing_fits(answer: PlanAnswer, is_cured: bool, reason: str) -> None:
    curve = Tradeoff(points=(), flat_from=None, refused=(0, 1), refusal="at most 1 landings may change")
    notes = tradeoff_notes(curve, Aim.NEUTRAL, answer.cured if is_cured else ())
    assert notes == [f"With 0 or 1 landings no arrangement fits: {reason}."]
