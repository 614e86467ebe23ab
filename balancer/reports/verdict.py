"""The answer in a sentence, how good it is proven to be, and what each landing buys."""

from __future__ import annotations

from rich.table import Table

from balancer.arrange.results import Aim, ObjectiveName, ObjectiveResult, Plan, Stop, Tradeoff
from balancer.electrical.phasors import Peaks
from balancer.reports.text import count_of, figures_table, format_amps

NOTHING_GIVEN_A = 0.05
"""Less than this is the tolerance of the proof, not something given up [A]."""

_FIRST_FIGURE = {Aim.NEUTRAL: "Peak neutral", Aim.LEGS: "Peak heavy leg"}

_STOPPED = {
    Stop.TIME_LIMIT: "The time limit cut the search off: another run may end elsewhere.",
    Stop.INTERRUPTED: "Interrupted: this is the best found so far.",
}


def verdict(plan: Plan) -> str:
    """Put the whole answer into a few plain sentences."""
    sentences = [_change(plan), _how_good(plan)]
    if plan.stop in _STOPPED:
        sentences.append(_STOPPED[plan.stop])
    return " ".join(sentences)


def _change(plan: Plan) -> str:
    what, after_a = _FIRST_FIGURE[plan.options.aim], _first_figure_a(plan, plan.peaks_as_left)
    if plan.peaks_as_found is None:
        return f"New layout: {what.lower()} {format_amps(after_a)}."
    placed = len(plan.as_left.keys() - plan.as_found.keys())
    with_new = f" and {count_of(placed, 'new circuit')} placed" if placed else ""
    if plan.landings_changed == 0:
        return f"No landing needs to change{with_new}: {what.lower()} {format_amps(after_a)}."
    before_a = _first_figure_a(plan, plan.peaks_as_found)
    verb = "falls" if format_amps(after_a) != format_amps(before_a) and after_a < before_a else "goes"
    return (
        f"{what} {verb} from {format_amps(before_a)} to {format_amps(after_a)} with "
        f"{count_of(plan.landings_changed, 'landing')} changed{with_new}."
    )


def _how_good(plan: Plan) -> str:
    first = plan.objectives[0]
    capped = (
        "" if plan.options.max_landings is None else f" with at most {count_of(plan.options.max_landings, 'landing')}"
    )
    if not first.is_proven:
        return f"Not proven: at most {format_amps(first.gap)} above the best possible{capped}."
    sentence = f"No arrangement of this panel{capped} does better than {format_amps(first.value)} (proven)."
    given_a = _first_figure_a(plan, plan.peaks_as_left) - first.value
    if given_a > NOTHING_GIVEN_A:
        sentence += f" {format_amps(given_a)} is given up to save landings (--within {plan.options.within_a:g})."
    return sentence


def _first_figure_a(plan: Plan, peaks: Peaks) -> float:
    return peaks.heavy_leg.value_a if plan.options.aim is Aim.LEGS else peaks.neutral.value_a


def proof_table(objectives: tuple[ObjectiveResult, ...]) -> Table:
    """Show how far each objective is proven, in the order in which they were closed."""
    table = figures_table("in this order", "reached", "no less than")
    table.add_column("proof", overflow="fold")
    for objective in objectives:
        is_effort = objective.name is ObjectiveName.EFFORT
        value, bound, gap = (
            f"{figure:g}" if is_effort else format_amps(figure)
            for figure in (objective.value, objective.bound, objective.gap)
        )
        proof = "proven" if objective.is_proven else f"at most {gap} above the best"
        name = f"{objective.name}, in landings" if is_effort else str(objective.name)
        table.add_row(name, value, bound, proof)
    return table


def tradeoff_table(tradeoff: Tradeoff, aim: Aim) -> Table:
    """Show what each number of landings buys, with the bound on what comes first."""
    table = figures_table(
        "landings", "peak neutral", "imbalance", "heavy leg", f"{_FIRST_FIGURE[aim].lower()} no less than", names=0
    )
    for point in tradeoff.points:
        proof = "" if point.is_proven else " (not proven)"
        table.add_row(
            str(point.landings),
            format_amps(point.peak_neutral_a),
            format_amps(point.peak_imbalance_a),
            format_amps(point.peak_heavy_leg_a),
            format_amps(point.bound_a) + proof,
        )
    return table


def flat_text(tradeoff: Tradeoff) -> str:
    """Say where further landings stop paying."""
    if tradeoff.flat_from is None:
        return "The curve still falls at its end: further landings may buy more (--upto)."
    if tradeoff.flat_from == 0:
        return "Flat from the start: no landing buys 0.05 A or more."
    return f"Flat from {count_of(tradeoff.flat_from, 'landing')} on: further ones buy less than 0.05 A."
