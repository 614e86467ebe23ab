"""The JSON document of every answer: amps as numbers rounded to 1 mA, keys only ever added."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import asdict
from typing import Any

from balancer.arrange.clamp import ClampReading
from balancer.arrange.explain import PeakExplanation
from balancer.arrange.results import ObjectiveResult, Plan, Tradeoff
from balancer.arrange.work import PRE_MOVE_TEST, Step, Work
from balancer.electrical.phasors import Peaks
from balancer.electrical.scenarios import Scenarios
from balancer.errors import Problem
from balancer.panel import Arrangement, Circuit, Installation, Landing, format_landing
from balancer.reports.answers import AsFoundAnswer, PlanAnswer
from balancer.reports.readings_document import readings_document
from balancer.reports.voltages import PanelVoltages
from balancer.rules import Finding

SCHEMA = 1

Document = dict[str, Any]


def plan_document(answer: PlanAnswer) -> Document:
    """Build the document of ``plan``."""
    plan = answer.plan
    return {
        **_head(plan.installation, plan.scenarios),
        "as_found": _peaks(plan.peaks_as_found),
        "as_left": _peaks(plan.peaks_as_left),
        "bound": _bound(plan),
        "landings_changed": plan.landings_changed,
        "effort": _rounded(plan.effort),
        "steps": [_step(step) for step in answer.work.steps],
        "circuits": _circuits(plan.installation, plan.as_left),
        "findings": _findings(answer.findings),
        "complete": plan.is_complete,
        "cured": _findings(answer.cured),
        "objectives": [_objective(objective) for objective in plan.objectives],
        "peak": _explanation(answer.explanation) | {"held_up_by": answer.explanation.sentence},
        "voltages": {"as_found": _voltages(answer.before.voltages), "as_left": _voltages(answer.voltages)},
        "fewer_landings": [] if answer.fewer is None else _points(answer.fewer),
        "fewer_refused": _refused(answer.fewer) if answer.fewer else {"landings": [], "reason": ""},
        "clamp_check": [_clamp(reading) for reading in answer.clamp_readings],
        **_work(answer.work),
        "removed_spares": list(plan.removed_spares),
        "notes": [*plan.notes, *_notes(plan.installation, plan.scenarios)],
        "readings": None if answer.readings is None else readings_document(answer.readings),
    }


def as_found_document(answer: AsFoundAnswer) -> Document:
    """Build the document of ``asfound``."""
    return {
        **_head(answer.installation, answer.scenarios),
        "as_found": _peaks(answer.peaks),
        "as_left": None,
        "bound": None,
        "landings_changed": 0,
        "effort": 0,
        "steps": [],
        "circuits": _circuits(answer.installation, answer.installation.as_found),
        "findings": _findings(answer.findings),
        "complete": True,
        "peak": None if answer.explanation is None else _explanation(answer.explanation),
        "voltages": {"as_found": _voltages(answer.voltages), "as_left": None},
        "notes": _notes(answer.installation, answer.scenarios),
        "readings": None if answer.readings is None else readings_document(answer.readings),
    }


def check_document(answer: AsFoundAnswer) -> Document:
    """Build the document of ``check``."""
    return {
        **_head(answer.installation, answer.scenarios),
        "as_found": _peaks(answer.peaks),
        "findings": _findings(answer.findings),
        "notes": _notes(answer.installation, answer.scenarios),
    }


def tradeoff_document(installation: Installation, scenarios: Scenarios, tradeoff: Tradeoff) -> Document:
    """Build the document of ``tradeoff``."""
    return {
        **_head(installation, scenarios),
        "points": _points(tradeoff),
        "flat_from": tradeoff.flat_from,
        "refused": _refused(tradeoff),
        "complete": not tradeoff.stop,
        "notes": _notes(installation, scenarios),
    }


def error_document(error: str, problems: Sequence[Problem]) -> Document:
    """Build the document that stands in for an answer that there is not."""
    order = ("file", "line", "column", "value", "problem", "remedy")
    listed = [asdict(problem) for problem in problems]
    return {"schema": SCHEMA, "error": error, "problems": [{key: each[key] for key in order} for each in listed]}


def _head(installation: Installation, scenarios: Scenarios) -> Document:
    return {
        "schema": SCHEMA,
        "supply": str(installation.panel.supply.system),
        "scenarios": {
            "kind": str(scenarios.kind),
            "count": len(scenarios),
            "averages": scenarios.are_averages,
        },
    }


def _rounded(value: float) -> float:
    # Adding zero turns -0.0 into 0.0.
    return round(float(value), 3) + 0.0


def _peaks(peaks: Peaks | None) -> Document | None:
    if peaks is None:
        return None
    return {
        "peak_leg_a": _rounded(peaks.leg_a.value_a),
        "peak_leg_b": _rounded(peaks.leg_b.value_a),
        "peak_heavy_leg": _rounded(peaks.heavy_leg.value_a),
        "peak_imbalance": _rounded(peaks.imbalance.value_a),
        "peak_neutral": _rounded(peaks.neutral.value_a),
        "mean_neutral": _rounded(peaks.mean_neutral_a),
        "largest_possible_neutral": _rounded(peaks.largest_possible_neutral_a),
    }


def _bound(plan: Plan) -> Document:
    return {
        "peak_neutral": _rounded(plan.bound_peak_neutral_a),
        "optimum_peak_neutral": _rounded(plan.optimum_peak_neutral_a),
        "proven": plan.is_proven,
    }


def _step(step: Step) -> Document:
    return {
        "circuit": step.circuit,
        "from": step.from_text,
        "to": step.to_text,
        "how": step.how.document_word,
        "action": step.action,
        "goes_along": [*step.goes_along, *filter(None, [step.splice_text])],
    }


def _circuits(installation: Installation, arrangement: Arrangement) -> list[Document]:
    return [_circuit(installation, circuit, arrangement.get(circuit.label, ())) for circuit in installation.circuits]


def _circuit(installation: Installation, circuit: Circuit, landing: Landing) -> Document:
    legs = sorted({installation.panel.leg(terminal.space) for terminal in landing})
    return {
        "circuit": circuit.label,
        "space": format_landing(landing) or None,
        "leg": "".join(legs) or None,
    }


def _findings(findings: Iterable[Finding]) -> list[Document]:
    return [
        {
            "rule": finding.rule,
            "severity": str(finding.severity),
            "circuits": list(finding.circuits),
            "message": finding.message,
            "citation": finding.citation,
        }
        for finding in findings
    ]


def _objective(objective: ObjectiveResult) -> Document:
    return {
        "name": str(objective.name),
        "value": _rounded(objective.value),
        "bound": _rounded(objective.bound),
        "proven": objective.is_proven,
    }


def _explanation(explanation: PeakExplanation) -> Document:
    listed = (*explanation.leg_a, *explanation.leg_b)
    return {
        "scenario": explanation.scenario_name,
        "peak_neutral": _rounded(explanation.neutral_a),
        "circuits": [{"circuit": c.circuit, "leg": str(c.leg), "amps": _rounded(c.current_a)} for c in listed],
    }


def _voltages(voltages: PanelVoltages | None) -> Document | None:
    if voltages is None or voltages.service is None:
        return None
    return {
        "leg_a_v": _rounded(voltages.service.leg_a_v),
        "leg_b_v": _rounded(voltages.service.leg_b_v),
        "neutral_shift_v": _rounded(voltages.service.neutral_shift_v),
        "neutral_loss_w": _rounded(voltages.service.neutral_loss_w),
        "lost_neutral_highest_v": None if voltages.lost is None else _rounded(voltages.lost.highest_on_load_v),
    }


def _points(tradeoff: Tradeoff) -> list[Document]:
    return [
        {
            "landings": point.landings,
            "landings_changed": point.landings_changed,
            "peak_neutral": _rounded(point.peak_neutral_a),
            "peak_imbalance": _rounded(point.peak_imbalance_a),
            "peak_heavy_leg": _rounded(point.peak_heavy_leg_a),
            "bound": _rounded(point.bound_a),
            "proven": point.is_proven,
        }
        for point in tradeoff.points
    ]


def _refused(tradeoff: Tradeoff) -> Document:
    return {"landings": list(tradeoff.refused), "reason": tradeoff.refusal}


def _clamp(reading: ClampReading) -> Document:
    return {
        "switch_on": reading.switch_on,
        "circuits_on": list(reading.circuits_on),
        "leg_a": _rounded(reading.leg_a_a),
        "leg_b": _rounded(reading.leg_b_a),
        "neutral": _rounded(reading.neutral_a),
        "tolerance": _rounded(reading.tolerance_a),
        "assumed": reading.is_assumed,
    }


def _work(work: Work) -> Document:
    return {
        "parts": [
            {"part": str(part.kind), "quantity": part.quantity, "circuits": list(part.circuits), "text": part.text}
            for part in work.parts
        ],
        "pre_move_test": PRE_MOVE_TEST if work.pre_moves else "",
        "pre_move_tests": [
            {"circuit": test.circuit, "space": format_landing(test.landing), "text": test.text}
            for test in work.pre_moves
        ],
    }


def _notes(installation: Installation, scenarios: Scenarios) -> list[str]:
    return [*scenarios.notes, *installation.notices]
