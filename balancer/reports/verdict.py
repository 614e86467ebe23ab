"""The answer in a sentence, how good it is proven to be, and what each landing buys."""

from __future__ import annotations

import itertools
from collections.abc import Iterator, Sequence

from rich.table import Table

from balancer.arrange.results import Aim, ObjectiveName, ObjectiveResult, Plan, Stop, Tradeoff, TradeoffPoint
from balancer.electrical.phasors import Peaks
from balancer.reports.text import count_of, figures_table, format_amps, list_of
from balancer.rules import Finding

NOTHING_GIVEN_A = 0.05
"""Less than this is the tolerance of the proof, not something given up [A]."""

_FIRST_FIGURE = {Aim.NEUTRAL: "Peak neutral", Aim.LEGS: "Peak heavy leg"}

_TABLE_ORDER = {
    Aim.NEUTRAL: ("peak neutral", "imbalance and heavy leg"),
    Aim.LEGS: ("heavy leg", "neutral and imbalance"),
}

_STOPPED = {
    Stop.TIME_LIMIT: "The time limit cut the search off: another run may end elsewhere.",
    Stop.INTERRUPTED: "Interrupted: this is the best found so far.",
}


def verdict(plan: Plan) -> str:
    """Put the whole answer into a few plain sentences."""
    sentences = [_change(plan), _how_good(plan)]
    if plan.scenarios.are_averages:
        sentences.append("All of these are averages over an interval, not moments.")
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
    change = _from_to(what, _first_figure_a(plan, plan.peaks_as_found), after_a)
    if "stays" in change:
        change += _second_change(plan.options.aim, plan.peaks_as_found, plan.peaks_as_left)
    return f"{change} with {count_of(plan.landings_changed, 'landing')} changed{with_new}."


def _from_to(what: str, before_a: float, after_a: float) -> str:
    before, after = format_amps(before_a), format_amps(after_a)
    if before == after:
        return f"{what} stays at {after}"
    return f"{what} {'falls' if after_a < before_a else 'rises'} from {before} to {after}"


def _second_change(aim: Aim, before: Peaks, after: Peaks) -> str:
    """Say what the landings are for where the first figure stays, as the neutral does on legs in phase."""
    if aim is Aim.LEGS:
        return f" and {_from_to('the peak neutral', before.neutral.value_a, after.neutral.value_a)}"
    return f" and {_from_to('the peak heavy leg', before.heavy_leg.value_a, after.heavy_leg.value_a)}"


def _how_good(plan: Plan) -> str:
    first = plan.objectives[0]
    capped = "" if plan.options.max_landings is None else f" with at most {_landings(plan.options.max_landings)}"
    if not first.is_proven:
        return f"Not proven: at most {format_amps(first.gap)} above the best possible{capped}."
    sentence = f"No arrangement of this panel{capped} does better than {format_amps(first.value)} (proven)."
    given_a = _first_figure_a(plan, plan.peaks_as_left) - first.value
    if given_a > NOTHING_GIVEN_A:
        sentence += f" {format_amps(given_a)} is given up to save landings (--within {plan.options.within_a:g})."
    return sentence


def _landings(number: int) -> str:
    return count_of(number, "landing")


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


def proof_notes(plan: Plan) -> list[str]:
    """Say what the figures of the proof speak of, and what they do not."""
    capped = "" if plan.options.max_landings is None else f", with at most {_landings(plan.options.max_landings)}"
    notes = [f"For the loads given, over every arrangement that the panel, the list and the options allow{capped}."]
    if plan.options.within_a > 0:
        notes.append(
            f"Amps are the best found before up to {plan.options.within_a:g} A of each was given up to save landings "
            "(--within): the figures as left may be that much higher."
        )
    names = [objective.name for objective in plan.objectives]
    if ObjectiveName.IMBALANCE in names:
        notes.append("Imbalance here is an upper limit that can be proven; the true difference stands further up.")
    if ObjectiveName.EFFORT in names:
        notes.append("Effort: a landing counts 1 or its effort in the list, and 0.5 more with a GFCI or AFCI neutral.")
    return notes


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


def tradeoff_notes(tradeoff: Tradeoff, aim: Aim, cured: Sequence[Finding]) -> list[str]:
    """Say what the lines of the table mean, which add nothing, and which landings are too few.

    `cured` are the errors that the fewest landings cure.
    """
    notes = []
    if tradeoff.points:
        first, others = _TABLE_ORDER[aim]
        notes.append(f"Each line has the lowest {first}; {others} are the lowest that go with it.")
    return [*notes, *_useless_text(tradeoff, aim), *_refused_text(tradeoff, cured)]


def _useless_text(tradeoff: Tradeoff, aim: Aim) -> Iterator[str]:
    """Name the caps that buy nothing beyond the one before; where the curve is flat that is said already."""
    repeats = [
        (point.landings, before.landings)
        for before, point in itertools.pairwise(tradeoff.points)
        if _figure_a(before, aim) - _figure_a(point, aim) < NOTHING_GIVEN_A
        and (tradeoff.flat_from is None or point.landings <= tradeoff.flat_from)
    ]
    if repeats:
        yield f"{', '.join(f'{more} landings buy nothing beyond {less}' for more, less in repeats)}."


def _figure_a(point: TradeoffPoint, aim: Aim) -> float:
    return point.peak_heavy_leg_a if aim is Aim.LEGS else point.peak_neutral_a


def _refused_text(tradeoff: Tradeoff, cured: Sequence[Finding]) -> Iterator[str]:
    if not tradeoff.refused:
        return
    rules = [f"{finding.rule} ({list_of(finding.circuits)})" for finding in cured]
    why = f"curing {', '.join(rules)} takes more" if rules else tradeoff.refusal
    caps = [str(cap) for cap in tradeoff.refused]
    noun = "landing" if tradeoff.refused == (1,) else "landings"
    yield f"With {' or '.join(filter(None, [', '.join(caps[:-1]), caps[-1]]))} {noun} no arrangement fits: {why}."


def flat_text(tradeoff: Tradeoff) -> str:
    """Say where further landings stop paying."""
    if tradeoff.flat_from is None and (tradeoff.stop or not all(point.is_proven for point in tradeoff.points)):
        return "Where the curve goes flat is not known: not all of it is proven."
    if tradeoff.flat_from is None:
        return "The curve still falls at its end: further landings may buy more (--upto)."
    if tradeoff.flat_from == 0:
        return "Flat from the start: no landing buys 0.05 A or more."
    return f"Flat from {count_of(tradeoff.flat_from, 'landing')} on: further ones buy less than 0.05 A."
