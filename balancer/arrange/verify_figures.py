"""Re-check of a plan's figures: what the legs and the neutral carry, what was counted, and what is called proven."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from balancer.arrange.proposal import Proposal
from balancer.arrange.results import Aim, ObjectiveName, ObjectiveResult, Plan
from balancer.electrical.phasors import PanelCurrents, Peaks
from balancer.electrical.scenarios import ScenarioKind
from balancer.panel import Arrangement

_SAME_A = 1e-6
_SAME_EFFORT = 1e-3
_SAME_BOUND = 1e-9
_PROVEN_A = 0.05
_PROVEN_FROM_READINGS_A = 0.01

_PEAKS = ("leg_a", "leg_b", "heavy_leg", "imbalance", "neutral")
_SINGLE_FIGURES = ("mean_neutral_a", "imbalance_pct", "largest_possible_neutral_a")

_GIVES_AWAY = (ObjectiveName.NEUTRAL, ObjectiveName.IMBALANCE, ObjectiveName.HEAVY_LEG)
"""Objectives of which `within_a` may be given up to save landings."""


@dataclass(frozen=True, eq=False)
class Figures:
    """A plan, and its figures worked out anew."""

    plan: Plan
    proposal: Proposal

    @cached_property
    def currents(self) -> PanelCurrents:
        """Phasor sums under the plan's scenarios."""
        return PanelCurrents(self.plan.installation, self.plan.scenarios)

    @cached_property
    def peaks_as_left(self) -> Peaks:
        """What the legs and the neutral carry as left."""
        return self.currents.peaks(self.plan.as_left)

    @cached_property
    def projected_imbalance_a(self) -> float:
        """Legs' difference projected on the direction of their sum, at its highest [A]: what the solver minimises.

        Notes
        -----
        max over scenarios of |Re(D conj S)| / |S|, with S and D the sum and the difference of the legs' phasors. It is
        never below the true difference of the legs' magnitudes, since |I_A|^2 - |I_B|^2 = Re(D conj S) and
        |I_A| + |I_B| >= |S|.
        """
        worst_a = 0.0
        for case in self.currents.cases(self.plan.as_left):
            size = np.abs(case.sum_phasor_a)
            across = np.abs((case.difference_phasor_a * np.conj(case.sum_phasor_a)).real)
            projected = np.divide(across, size, out=np.zeros_like(across), where=size > _SAME_BOUND)
            worst_a = max(worst_a, float(projected.max()))
        return worst_a

    def of(self, name: ObjectiveName) -> float:
        """Figure of an objective as left: amperes [A], or landings."""
        figures = {
            ObjectiveName.NEUTRAL: self.peaks_as_left.neutral.value_a,
            ObjectiveName.IMBALANCE: self.projected_imbalance_a,
            ObjectiveName.HEAVY_LEG: self.peaks_as_left.heavy_leg.value_a,
            ObjectiveName.EFFORT: self.proposal.effort,
            ObjectiveName.MEAN_NEUTRAL: self.peaks_as_left.mean_neutral_a,
        }
        return figures[name]


def _is_above(value: float, limit: float, tolerance: float) -> bool:
    # Written so that what is no number counts as above.
    return not value <= limit + tolerance


def _differ(one: float, other: float, tolerance: float) -> bool:
    return not abs(one - other) <= tolerance


def _as_found(figures: Figures) -> Iterator[str]:
    plan = figures.plan
    if plan.as_found != plan.installation.as_found:
        yield "the landings as found are not those of the inventory"
    elif (plan.peaks_as_found is None) != (not plan.as_found):
        yield "figures as found are given exactly where something was landed, and here they are not"
    elif plan.peaks_as_found is not None:
        yield from _wrong_peaks(figures, plan.as_found, plan.peaks_as_found, "as found")


def _as_left(figures: Figures) -> Iterator[str]:
    return _wrong_peaks(figures, figures.plan.as_left, figures.plan.peaks_as_left, "as left")


def _wrong_peaks(figures: Figures, arrangement: Arrangement, told: Peaks, when: str) -> Iterator[str]:
    currents, true = figures.currents.currents(arrangement), figures.currents.peaks(arrangement)
    for name in _PEAKS:
        true_a, peak = getattr(true, name).value_a, getattr(told, name)
        if _differ(peak.value_a, true_a, _SAME_A):
            yield f"peak {_words(name)} {when}: {peak.value_a:.6f} A is told, {true_a:.6f} A is right"
        elif _differ(getattr(currents, name)[peak.scenario], true_a, _SAME_A):
            yield f"peak {_words(name)} {when}: it does not happen in the scenario that is told"
    for name in _SINGLE_FIGURES:
        if _differ(getattr(told, name), getattr(true, name), _SAME_A):
            yield f"{_words(name)} {when}: {getattr(told, name):.6f} is told, {getattr(true, name):.6f} is right"


def _words(name: str) -> str:
    return name.removesuffix("_a").replace("_", " ") if name not in ("leg_a", "leg_b") else f"leg {name[-1].upper()}"


def _counts(figures: Figures) -> Iterator[str]:
    plan, proposal = figures.plan, figures.proposal
    if plan.landings_changed != proposal.landings_changed:
        yield f"{plan.landings_changed} landings changed are told, {proposal.landings_changed} is right"
    if _differ(plan.effort, proposal.effort, _SAME_EFFORT):
        yield f"an effort of {plan.effort:g} is told, {proposal.effort:g} is right"


def _objectives(figures: Figures) -> Iterator[str]:
    for objective in figures.plan.objectives:
        yield from _not_as_told(figures, objective)
        if _is_above(objective.bound, objective.value, _SAME_BOUND):
            yield f"{objective.name}: the bound {objective.bound:g} is above the value {objective.value:g}"
        gap = objective.value - objective.bound
        if objective.is_proven and _is_above(gap, _tolerance_a(figures.plan), _SAME_BOUND):
            yield f"{objective.name}: it is called proven and its bound is {gap:g} away"


def _not_as_told(figures: Figures, objective: ObjectiveResult) -> Iterator[str]:
    """Hold the arrangement against a value that was reached on the way to it, and against the bound.

    Up to `within_a` of a peak may have been given away since. The mean neutral comes last, so that its value is the
    arrangement's own.
    """
    name, figure = objective.name, figures.of(objective.name)
    given_away = figures.plan.options.within_a if name in _GIVES_AWAY else 0.0
    tolerance = _SAME_EFFORT if name is ObjectiveName.EFFORT else _SAME_A
    if _is_above(figure, objective.value + given_away, tolerance):
        yield f"{name}: {objective.value:.6f} is told and {figure:.6f} is left"
    # The solver's effort counts spare breakers too, which cost no landing.
    if name is not ObjectiveName.EFFORT and _is_above(objective.bound, figure, _SAME_A):
        yield f"{name}: {figure:.6f} is left, which is below the bound {objective.bound:.6f}"
    if name is ObjectiveName.MEAN_NEUTRAL and _is_above(objective.value, figure, _SAME_A):
        yield f"{name}: {objective.value:.6f} is told and {figure:.6f} is left"


def _tolerance_a(plan: Plan) -> float:
    return _PROVEN_FROM_READINGS_A if plan.scenarios.kind is ScenarioKind.READINGS else _PROVEN_A


def _neutral_bound(figures: Figures) -> Iterator[str]:
    plan, neutral_a = figures.plan, figures.peaks_as_left.neutral.value_a
    bound_a, optimum_a, within_a = plan.bound_peak_neutral_a, plan.optimum_peak_neutral_a, plan.options.within_a
    if _is_above(bound_a, optimum_a, _SAME_BOUND):
        yield f"the bound of the peak neutral, {bound_a:g} A, is above the optimum, {optimum_a:g} A"
    if _is_above(bound_a, neutral_a, _SAME_A):
        yield f"the peak neutral as left, {neutral_a:g} A, is below its bound, {bound_a:g} A"
    if plan.options.aim is Aim.NEUTRAL and _is_above(neutral_a, optimum_a + within_a, _SAME_A):
        yield f"the peak neutral as left, {neutral_a:g} A, is over {within_a:g} A above the optimum, {optimum_a:g} A"
    if plan.is_proven and _is_above(optimum_a - bound_a, _tolerance_a(plan), _SAME_BOUND):
        yield f"the plan is called proven and its bound is {optimum_a - bound_a:g} A below the optimum"


def _above_main(figures: Figures) -> Iterator[str]:
    """Hold the legs against the main; everything on at once is no state that a panel is ever in."""
    main_a, heavy_a = figures.plan.installation.panel.main_a, figures.peaks_as_left.heavy_leg.value_a
    if main_a is None or figures.plan.scenarios.kind is ScenarioKind.CONNECTED:
        return
    if _is_above(heavy_a, main_a, _SAME_A):
        yield f"the heavy leg carries {heavy_a:g} A behind a main of {main_a:g} A"


FIGURE_CHECKS: tuple[Callable[[Figures], Iterator[str]], ...] = (
    _as_found,
    _as_left,
    _counts,
    _objectives,
    _neutral_bound,
    _above_main,
)
"""Whether every number that a plan tells is right."""
