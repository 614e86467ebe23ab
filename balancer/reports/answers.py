"""What the commands answer, gathered once for the terminal report and for the JSON document."""

from __future__ import annotations

from dataclasses import dataclass, replace

from balancer.arrange.clamp import ClampReading, clamp_check
from balancer.arrange.explain import PeakExplanation, explain_peak
from balancer.arrange.results import Plan, Tradeoff
from balancer.arrange.steps import build_work
from balancer.arrange.work import Work
from balancer.electrical.phasors import PanelCurrents, Peaks
from balancer.electrical.scenarios import Scenarios, averages_only
from balancer.panel import Arrangement, Installation
from balancer.reports.readings_answer import ReadingsAnswer, found_readings, planned_readings
from balancer.reports.voltages import PanelVoltages, panel_voltages
from balancer.rules import Finding, check_installation, errors_of, new_errors


@dataclass(frozen=True, kw_only=True, eq=False)
class AsFoundAnswer:
    """The panel as it stands. `peaks` and `explanation` are None where nothing is landed."""

    installation: Installation
    scenarios: Scenarios
    peaks: Peaks | None
    explanation: PeakExplanation | None
    findings: tuple[Finding, ...]
    averages_peak_a: float | None = None
    """Peak neutral [A] of the hourly or interval averages alone; None where there are none beside other scenarios."""
    voltages: PanelVoltages | None = None
    """When the neutral peaks; None where the panel file gives no impedances."""
    readings: ReadingsAnswer | None = None
    """What a log tells beyond the peaks; None where the scenarios are no readings."""

    @property
    def has_errors(self) -> bool:
        """Whether anything found is wrong or dangerous."""
        return bool(errors_of(self.findings))


@dataclass(frozen=True, kw_only=True, eq=False)
class PlanAnswer:
    """A plan with all that goes with it; `findings` are those as left, `cured` the errors that are gone."""

    plan: Plan
    work: Work
    clamp_readings: tuple[ClampReading, ...]
    before: AsFoundAnswer
    explanation: PeakExplanation
    findings: tuple[Finding, ...]
    cured: tuple[Finding, ...]
    fewer: Tradeoff | None
    """What fewer landings would give; None where that was not asked or there are no fewer."""
    averages_peak_a: float | None = None
    """As left, see `AsFoundAnswer`."""
    voltages: PanelVoltages | None = None
    """As left, see `AsFoundAnswer`."""
    readings: ReadingsAnswer | None = None
    """What a log tells beyond the peaks, as found and as left; None where the scenarios are no readings."""

    @property
    def has_errors(self) -> bool:
        """Whether an error-level finding remains that the plan cannot cure."""
        return bool(errors_of(self.findings))


def as_found_answer(installation: Installation, scenarios: Scenarios) -> AsFoundAnswer:
    """Work out what the legs and the neutral carry today."""
    return replace(_peaks_as_found(installation, scenarios), readings=found_readings(installation, scenarios))


def _peaks_as_found(installation: Installation, scenarios: Scenarios) -> AsFoundAnswer:
    findings = check_installation(installation)
    found = installation.as_found
    if not found:
        return AsFoundAnswer(
            installation=installation, scenarios=scenarios, peaks=None, explanation=None, findings=findings
        )
    currents = PanelCurrents(installation, scenarios)
    explanation = explain_peak(currents, found)
    return AsFoundAnswer(
        installation=installation,
        scenarios=scenarios,
        peaks=currents.peaks(found),
        explanation=explanation,
        findings=findings,
        averages_peak_a=_averages_peak_a(installation, scenarios, found),
        voltages=panel_voltages(installation, scenarios, found, explanation.scenario),
    )


def plan_answer(plan: Plan, fewer: Tradeoff | None = None) -> PlanAnswer:
    """Gather the work, the clamp check and the findings of a plan."""
    before = _peaks_as_found(plan.installation, plan.scenarios)
    findings = check_installation(plan.installation, plan.as_left)
    explanation = explain_peak(PanelCurrents(plan.installation, plan.scenarios), plan.as_left, plan.options)
    return PlanAnswer(
        plan=plan,
        work=build_work(plan.installation, plan.as_left, plan.removed_spares),
        clamp_readings=clamp_check(plan.installation, plan.as_left),
        before=before,
        explanation=explanation,
        findings=findings,
        cured=new_errors(findings, before.findings),
        fewer=fewer,
        averages_peak_a=_averages_peak_a(plan.installation, plan.scenarios, plan.as_left),
        voltages=panel_voltages(plan.installation, plan.scenarios, plan.as_left, explanation.scenario),
        readings=planned_readings(plan),
    )


def _averages_peak_a(installation: Installation, scenarios: Scenarios, arrangement: Arrangement) -> float | None:
    averages = averages_only(scenarios)
    if averages is None or averages is scenarios:
        return None
    return float(PanelCurrents(installation, averages).currents(arrangement).neutral.max())
