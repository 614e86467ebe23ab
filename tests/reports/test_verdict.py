from collections.abc import Callable
from dataclasses import replace

import pytest

from balancer.arrange.results import Aim, ObjectiveName, Options, Plan, Stop, Tradeoff
from balancer.reports.verdict import flat_text, proof_table, verdict

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
