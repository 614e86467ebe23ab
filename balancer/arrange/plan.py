"""From an inventory to a proven plan: build the problem, close the objectives, check the answer without the solver."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from balancer.arrange.canonical import with_circuits_in_order, with_rows_in_order
from balancer.arrange.choices import Answer, Counter
from balancer.arrange.clock import Clock
from balancer.arrange.conflict import explain_no_seats
from balancer.arrange.incumbent import Heuristic
from balancer.arrange.leg_model import LegModel
from balancer.arrange.legs import build_leg_problem
from balancer.arrange.placements import Unit, landing_effort
from balancer.arrange.results import Aim, ObjectiveName, ObjectiveResult, Options, Plan, ProgressListener
from balancer.arrange.search import Cap
from balancer.arrange.seating import Seater, Seating
from balancer.arrange.seats import build_units
from balancer.arrange.solve import SolveStatus
from balancer.arrange.stages import READINGS_TOLERANCE_A, SCENARIO_TOLERANCE_A, Stages
from balancer.arrange.thin import FEW, Thinned
from balancer.arrange.verify import verify_plan
from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenarios import ScenarioKind, Scenarios
from balancer.errors import InfeasibleError, NoAnswerInTime
from balancer.panel import Arrangement, Installation

_FIRST_ANSWER_WORK_S = 60.0

_CUT_SHARE = 0.75
"""Scenarios are left out that cannot carry this share of the peak neutral of a first good arrangement."""

_ORDER = {
    Aim.NEUTRAL: (ObjectiveName.NEUTRAL, ObjectiveName.IMBALANCE, ObjectiveName.HEAVY_LEG),
    Aim.LEGS: (ObjectiveName.HEAVY_LEG, ObjectiveName.NEUTRAL, ObjectiveName.IMBALANCE),
}


def plan_arrangement(
    installation: Installation,
    scenarios: Scenarios,
    options: Options,
    progress: ProgressListener | None = None,
    on_interrupt: Callable[[], None] | None = None,
) -> Plan:
    """Find the arrangement with the lowest peaks, and prove how good it is.

    Parameters
    ----------
    installation
        Panel and circuits as found; circuits without a place are given one.
    scenarios
        What runs together; the peaks are over all of them.
    options
        Which objective comes first, what may be given up for fewer landings, and what may be touched.
    progress
        Told of every improvement.
    on_interrupt
        Called at the first Ctrl-C, which ends planning with the best so far.

    Returns
    -------
    Plan
        Re-checked without the solver.

    Raises
    ------
    InfeasibleError
        When no arrangement keeps every constraint; names those that conflict.
    NoAnswerInTime
        When the clock or Ctrl-C came before any arrangement was found.
    SelfCheckError
        When the re-check disagrees.
    """
    clock = Clock(options.time_limit_s, on_interrupt)
    with clock.listening():
        planner = Planner(installation, scenarios, options, clock, progress)
        plan = planner.plan()
    verify_plan(plan)
    return plan


@dataclass
class Planner:
    """Plans one installation under one set of options."""

    installation: Installation
    scenarios: Scenarios
    options: Options
    clock: Clock
    listener: ProgressListener | None = None
    start: Arrangement | None = None
    """An arrangement to begin from, such as the best one with fewer landings."""

    def __post_init__(self) -> None:
        self._currents = PanelCurrents(self.installation, self.scenarios)
        self._ordered, scenarios = with_circuits_in_order(self.installation, self.scenarios)
        units = build_units(self._ordered, self.options, idle=self._idle())
        if any(not unit.placements and not unit.is_optional for unit in units):
            raise explain_no_seats(self._ordered, self.options, self.clock)
        units = tuple(unit for unit in units if unit.placements)
        self._seater = Seater(self.installation.panel, units, self.options.max_landings, self.clock)
        self._thinned = Thinned(self._ordered, scenarios, units) if len(scenarios) > FEW else None
        if self._thinned is None:
            self._weigh(scenarios, units)
        else:
            self._weigh(self._thinned.heaviest(), units)
            self._cut(_CUT_SHARE * self._first_peak())

    def _weigh(self, scenarios: Scenarios, units: tuple[Unit, ...]) -> None:
        """Set up the leg problem over some of the scenarios."""
        self.problem = build_leg_problem(self._ordered, with_rows_in_order(scenarios), units)
        self._counters = self._all_counters()
        self._caps, self._notes = self._leg_limit()

    def _first_peak(self) -> float:
        """Peak neutral [A] over all scenarios of a first good arrangement, which planning then begins from."""
        stages = self.stages()
        heuristic = Heuristic(self.problem, self.problem.neutral, stages.caps, stages.counters)
        for answer in heuristic.first_answers(self.clock):
            if stages.seating(answer) is not None:
                stages.answer = answer
                break
        self.start = self.settled(stages).arrangement
        return self._currents.peaks(self.start).neutral.value_a

    def _cut(self, level_a: float) -> None:
        """Weigh only the scenarios whose neutral or imbalance can be above a level, or that can set the heavy leg's."""
        assert self._thinned is not None, "only very many scenarios are cut"
        self._thinned.cut_a = level_a
        self._weigh(self._thinned.weighed(), self._thinned.units)

    def _idle(self) -> frozenset[str]:
        """Labels of circuits without line-to-neutral current in any scenario."""
        carrying = np.any(self.scenarios.neutral_a != 0.0, axis=0)
        return frozenset(c.label for c, on in zip(self.installation.circuits, carrying, strict=True) if not on)

    def _all_counters(self) -> list[Counter]:
        counters = list(self.problem.counters)
        if self.options.max_landings is not None:
            counters.append(replace(self.problem.landings, cap=self.options.max_landings))
        return counters

    def _leg_limit(self) -> tuple[list[Cap], list[str]]:
        """Keep the legs below the main, except with everything on: no main is sized for that, so it is only said."""
        main_a = self.installation.panel.main_a
        if main_a is None:
            return [], []
        if self.scenarios.kind is not ScenarioKind.CONNECTED:
            return [Cap(self.problem.heavy_leg, main_a)], []
        note = f"Everything on at once is no state that the {main_a:g} A main must carry: its rating set no limit here."
        return [], [note]

    def stages(self) -> Stages:
        """Give the state to close objectives from: a first answer that keeps everything."""
        tolerance = READINGS_TOLERANCE_A if self.scenarios.kind is ScenarioKind.READINGS else SCENARIO_TOLERANCE_A
        return Stages(
            problem=self.problem,
            seater=self._seater,
            clock=self.clock,
            tolerance_a=tolerance,
            answer=self._first_answer(),
            caps=list(self._caps),
            counters=list(self._counters),
            listener=self.listener,
            scenario_count=len(self.scenarios),
            thinned=self._thinned,
        )

    def _first_answer(self) -> Answer:
        for answer in self._easy_answers():
            if self._is_valid(answer):
                return answer
        heuristic = Heuristic(self.problem, self.problem.neutral, self._caps, self._counters)
        for answer in heuristic.first_answers(self.clock):
            if self._is_valid(answer):
                return answer
        return self._solved_answer()

    def _easy_answers(self) -> list[Answer]:
        reference = np.zeros(len(self.problem.choices), dtype=np.int8)
        if self.start is None:
            return [reference]
        start = self.start.items()
        signs = []
        for unit in self.problem.units:
            matching = (placement.signs for placement in unit.placements if start >= set(placement.landings))
            signs.append(next(matching, unit.placements[0].signs))
        return [self.problem.answer_of(signs), reference]

    def _is_valid(self, answer: Answer) -> bool:
        return (
            all(counter.value(answer) <= counter.cap for counter in self._counters)
            and all(cap.is_kept(answer) for cap in self._caps)
            and self._seater.least_effort(self.problem.signs(answer)) is not None
        )

    def _solved_answer(self) -> Answer:
        """Ask the solver for any arrangement; explain why there is none."""
        model = LegModel(self.problem, self._counters, self.clock)
        model.seat(self.options.max_landings)
        for cap in self._caps:
            model.limit(cap.rows, cap.limit_a)
        decision = model.decide(_FIRST_ANSWER_WORK_S)
        while decision.answer is not None:
            if self._is_valid(decision.answer):
                return decision.answer
            # Above a limit by less than the model's rounding.
            model.forbid(decision.answer)
            decision = model.decide(_FIRST_ANSWER_WORK_S)
        if decision.status is SolveStatus.INFEASIBLE and not self._seater.has_given_up:
            raise self._reason()
        message = "no arrangement was found before the limit, and none was ruled out"
        raise NoAnswerInTime(message)

    def _reason(self) -> InfeasibleError:
        """Tell a leg limit, alone or with the cap on landings, from a lack of seats."""
        most = self.options.max_landings
        if not self._caps or not self._has_answer(most, keeps_main=False):
            return explain_no_seats(self._ordered, self.options, self.clock)
        main_a = self.installation.panel.main_a or 0.0
        above = f"some scenario puts more than the {main_a:g} A main on a leg"
        if most is not None and self._has_answer(None, keeps_main=True):
            return InfeasibleError(
                [f"at most {most} landings may change, and in every arrangement that leaves {above}"],
                ["allow more with --landings"],
            )
        remedy = "check the scenarios and the loads, or move load off this panel"
        return InfeasibleError([f"in every arrangement {above}"], [remedy])

    def _has_answer(self, max_landings: int | None, *, keeps_main: bool) -> bool:
        """Whether the solver finds an arrangement under part of the constraints."""
        model = LegModel(self.problem, self.problem.counters, self.clock)
        model.seat(max_landings)
        for cap in self._caps if keeps_main else ():
            model.limit(cap.rows, cap.limit_a)
        return model.decide(_FIRST_ANSWER_WORK_S).answer is not None

    def plan(self) -> Plan:
        """Close every objective in turn and settle the seats."""
        stages, objectives = self.closed()
        objectives += [stages.close_effort(), stages.close_mean()]
        neutral = objectives[0] if self.options.aim is Aim.NEUTRAL else self.free_neutral(stages)
        return self._plan(stages, objectives, neutral)

    def closed(self) -> tuple[Stages, list[ObjectiveResult]]:
        """Close the amps objectives; where one falls below the cut, weigh the scenarios below it as well.

        A scenario left out carries at most the cut, whatever the arrangement: above the cut it sets no peak.
        """
        while True:
            stages = self.stages()
            objectives = self._close_peaks(stages)
            lowest = min((o.value for o in objectives if o.name is not ObjectiveName.HEAVY_LEG), default=0.0)
            if self._thinned is None or lowest >= self._thinned.cut_a:
                return stages, objectives
            if self.clock.is_stopped:
                return stages, [self._with_left_out(result) for result in objectives]
            self.start = self.settled(stages).arrangement
            self._cut(_CUT_SHARE * lowest)

    def _with_left_out(self, result: ObjectiveResult) -> ObjectiveResult:
        """Say of a peak only what holds with the scenarios that were left out: they carry at most the cut."""
        if self._thinned is None or result.name is ObjectiveName.HEAVY_LEG or result.value >= self._thinned.cut_a:
            return result
        is_proven = self._thinned.cut_a - result.bound <= READINGS_TOLERANCE_A
        return replace(result, value=self._thinned.cut_a, is_proven=is_proven)

    def _close_peaks(self, stages: Stages) -> list[ObjectiveResult]:
        """Close the amps objectives in the order of the aim, each held while the next is lowered."""
        objectives: list[ObjectiveResult] = []
        for name in _ORDER[self.options.aim]:
            if name is ObjectiveName.IMBALANCE and self.problem.does_imbalance_repeat_neutral:
                continue
            result = stages.close_peak(name)
            objectives.append(result)
            stages.hold(name, result.value + self.options.within_a)
        return objectives

    def free_neutral(self, stages: Stages) -> ObjectiveResult:
        """Lowest peak neutral with nothing else asked: what the report's bound speaks of when the legs come first."""
        alone = replace(stages, caps=list(self._caps), counters=list(self._counters))
        result = alone.close_peak(ObjectiveName.NEUTRAL)
        while self._thinned is not None and result.value < self._thinned.cut_a and not self.clock.is_stopped:
            self._cut(_CUT_SHARE * result.value)
            result = self.stages().close_peak(ObjectiveName.NEUTRAL)
        return self._with_left_out(result)

    def _plan(self, stages: Stages, objectives: list[ObjectiveResult], neutral: ObjectiveResult) -> Plan:
        seating = self.settled(stages)
        as_left = seating.arrangement
        as_found = self.installation.as_found
        by_label = self.installation.by_label
        return Plan(
            installation=self.installation,
            scenarios=self.scenarios,
            options=self.options,
            as_found=as_found,
            as_left=as_left,
            peaks_as_found=self._currents.peaks(as_found) if as_found else None,
            peaks_as_left=self._currents.peaks(as_left),
            objectives=tuple(objectives),
            optimum_peak_neutral_a=neutral.value,
            bound_peak_neutral_a=neutral.bound,
            is_proven=neutral.is_proven,
            landings_changed=seating.landings_changed,
            effort=sum(landing_effort(by_label[label], landing) for label, landing in as_left.items()),
            removed_spares=seating.removed,
            stop=self.clock.stop,
            notes=tuple(self._notes),
            search_rows=None if self._thinned is None else len(self.problem.cases[0].total),
        )

    def settled(self, stages: Stages) -> Seating:
        """Give the canonical seats of the best answer."""
        seating = stages.seating(stages.answer)
        assert seating is not None, "the best answer always has seats"
        return self._seater.canonical(self.problem.signs(stages.answer), seating)
