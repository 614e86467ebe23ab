"""The reports as the terminal shows them, put together from their parts."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from rich.console import Group, RenderableType
from rich.text import Text

from balancer.arrange.explain import PeakExplanation
from balancer.arrange.results import Aim, Plan, Tradeoff
from balancer.arrange.work import PRE_MOVE_TEST
from balancer.electrical.scenarios import Scenarios
from balancer.panel import Installation
from balancer.reports.answers import AsFoundAnswer, PlanAnswer
from balancer.reports.cautions import AFTER, AFTER_NO_WORK, BEFORE, LIVE_WORK
from balancer.reports.directory import directory_legend, directory_table
from balancer.reports.face import MARK, PanelFace
from balancer.reports.figures import (
    PeaksColumn,
    basis_lines,
    contributions_table,
    largest_possible_text,
    peaks_table,
    when_lines,
)
from balancer.reports.findings import findings_count, findings_list
from balancer.reports.readings import bound_text, readings_sections
from balancer.reports.readings_answer import ReadingsAnswer
from balancer.reports.text import bullets, format_amps, list_of, numbered, paragraph, section, visible
from balancer.reports.verdict import flat_text, proof_notes, proof_table, tradeoff_notes, tradeoff_table, verdict
from balancer.reports.voltages import PanelVoltages, voltages_block
from balancer.reports.work import clamp_table, part_list, pre_move_list, step_list
from balancer.rules import CODE_NOTE, Finding, check_installation, errors_of, new_errors

CLAMP_INTRO = f"{LIVE_WORK} Everything else off. Switch these on one after the other; the meter must read, in amps:"

CLAMP_NOTES = (
    "Each line may be off by its last figure, on every reading. An outlet circuit carries its amps only with that much "
    "plugged in, a heater or motor only while it runs; with another load the same leg must rise.",
    "Where the other leg rises, the circuit is on the wrong leg: shut off and lock out again before you touch it.",
)


def plan_report(answer: PlanAnswer) -> Group:
    """Show a plan: the answer first, then why, then the work, then the panel as it will hang."""
    plan = answer.plan
    blocks: list[RenderableType] = [_title(plan.installation), paragraph(verdict(plan), style="bold")]
    blocks += [paragraph(note) for note in (*_remaining_errors(answer), *plan.notes)]
    blocks += _reasons(answer)
    blocks += _work(answer)
    blocks += _panel(plan)
    blocks += _after(answer)
    return Group(*blocks)


def as_found_report(answer: AsFoundAnswer) -> Group:
    """Show what the legs and the neutral carry today, and when."""
    installation = answer.installation
    blocks: list[RenderableType] = [_title(installation)]
    if answer.peaks is None or answer.explanation is None:
        blocks.append(paragraph("No circuit is landed yet, so nothing flows. Plan a new layout with: balancer plan"))
        return Group(*blocks)
    neutral_a, heavy_a = answer.peaks.neutral.value_a, answer.peaks.heavy_leg.value_a
    blocks += [
        paragraph(
            f"As found the neutral peaks at {format_amps(neutral_a)} and the heavy leg at {format_amps(heavy_a)}.",
            style="bold",
        ),
        *_figures("Figures", [PeaksColumn("as found", answer.peaks, answer.averages_peak_a)], installation),
        *_peak(when_lines(answer.scenarios, "As found", answer.peaks), answer.explanation),
        *_voltages([("as found", answer.voltages)]),
        *_readings(answer.readings),
        section("What the figures rest on", bullets(basis_lines(installation, answer.scenarios))),
        section("The panel as found", PanelFace(installation, installation.as_found), *_face_legend("")),
        section("Findings", paragraph(f"{findings_count(answer.findings).capitalize()}.{_see_check(answer)}")),
    ]
    return Group(*blocks)


def _see_check(answer: AsFoundAnswer) -> str:
    return " See them in full with: balancer check" if answer.findings else ""


def check_report(answer: AsFoundAnswer) -> Group:
    """Show what is wrong with the panel as it stands."""
    blocks: list[RenderableType] = [
        _title(answer.installation),
        paragraph(f"{findings_count(answer.findings)}.".capitalize(), style="bold"),
    ]
    if answer.findings:
        blocks += [Text(""), findings_list(answer.findings)]
    blocks += [Text(""), bullets(answer.installation.notices)] if answer.installation.notices else []
    blocks += [Text(""), paragraph(CODE_NOTE)]
    return Group(*blocks)


def tradeoff_report(installation: Installation, scenarios: Scenarios, tradeoff: Tradeoff, aim: Aim) -> Group:
    """Show what each further landing buys."""
    blocks: list[RenderableType] = [_title(installation), paragraph(flat_text(tradeoff), style="bold"), Text("")]
    blocks.append(_tradeoff(tradeoff, aim, _cured_by(installation, tradeoff)))
    if tradeoff.stop:
        blocks.append(paragraph(f"Cut off by the {tradeoff.stop}: the figures are the best found so far."))
    blocks.append(section("What the figures rest on", bullets(basis_lines(installation, scenarios))))
    return Group(*blocks)


def _tradeoff(tradeoff: Tradeoff, aim: Aim, cured: Sequence[Finding]) -> Group:
    table: list[RenderableType] = [tradeoff_table(tradeoff, aim), Text("")] if tradeoff.points else []
    return Group(*table, bullets(tradeoff_notes(tradeoff, aim, cured)))


def _cured_by(installation: Installation, tradeoff: Tradeoff) -> tuple[Finding, ...]:
    if not (tradeoff.points and tradeoff.refused):
        return ()
    fewest = check_installation(installation, tradeoff.points[0].arrangement)
    return new_errors(fewest, check_installation(installation))


def _title(installation: Installation) -> Text:
    return Text(visible(installation.panel.name or installation.inventory_file or "Panel"), overflow="fold")


def _remaining_errors(answer: PlanAnswer) -> list[str]:
    if not answer.has_errors:
        return []
    errors = errors_of(answer.findings)
    rules = ", ".join(dict.fromkeys(finding.rule for finding in errors))
    circuits = answer.plan.installation.by_label
    named = [label for finding in errors for label in finding.circuits if circuits[label].is_fixed]
    which = "that no re-landing cures"
    fixed = ""
    if named:
        which = "that this plan cannot cure"
        fixed = f" Marked fixed: {list_of(list(dict.fromkeys(named)))}; release what may move."
    return [f"Errors remain {which} ({rules}): see the findings. Mend them first.{fixed}"]


def _figures(title: str, columns: Sequence[PeaksColumn], installation: Installation) -> Iterator[RenderableType]:
    yield section(title, peaks_table(columns), Text(""), paragraph(largest_possible_text(installation)))


def _peak(when: Sequence[str], explanation: PeakExplanation, *more: RenderableType) -> Iterator[RenderableType]:
    yield section(
        "What makes the peak",
        bullets(when),
        Text(""),
        paragraph(f"{format_amps(explanation.neutral_a)} in the neutral, in {explanation.scenario_name}:"),
        contributions_table(explanation),
        *more,
    )


def _voltages(columns: Sequence[tuple[str, PanelVoltages | None]]) -> Iterator[RenderableType]:
    block = voltages_block(columns)
    if block is not None:
        yield section("Voltages when the neutral peaks", block)


def _reasons(answer: PlanAnswer) -> Iterator[RenderableType]:
    plan, before = answer.plan, answer.before
    columns = [PeaksColumn("as left", plan.peaks_as_left, answer.averages_peak_a)]
    when = when_lines(plan.scenarios, "As left", plan.peaks_as_left)
    if plan.peaks_as_found is not None:
        columns.insert(0, PeaksColumn("as found", plan.peaks_as_found, before.averages_peak_a))
        when = when_lines(plan.scenarios, "As found", plan.peaks_as_found) + when
    yield from _figures("As found and as left" if len(columns) > 1 else "As left", columns, plan.installation)
    held_up = paragraph(f"What holds it up: {answer.explanation.sentence}")
    yield from _peak(when, answer.explanation, held_up)
    yield section("How good it is", proof_table(plan.objectives), Text(""), bullets(_proof_notes(answer)))
    if answer.fewer is not None and (answer.fewer.points or answer.fewer.refused):
        yield section("What fewer landings would give", _tradeoff(answer.fewer, plan.options.aim, answer.cured))
    yield from _voltages([("as found", before.voltages), ("as left", answer.voltages)])
    yield from _readings(answer.readings)
    yield section("What the figures rest on", bullets(basis_lines(plan.installation, plan.scenarios)))


def _readings(readings: ReadingsAnswer | None) -> Iterator[RenderableType]:
    if readings is not None:
        yield from readings_sections(readings)


def _proof_notes(answer: PlanAnswer) -> list[str]:
    proof = None if answer.readings is None else answer.readings.proof
    on_which_rows = [] if proof is None else [bound_text(proof, len(answer.plan.scenarios))]
    return [*on_which_rows, *proof_notes(answer.plan)]


def _work(answer: PlanAnswer) -> Iterator[RenderableType]:
    work = answer.work
    if not work.steps:
        return
    if work.pre_moves:
        intro = f"{LIVE_WORK} {PRE_MOVE_TEST}"
        yield section("Tests before shutting off", paragraph(intro), pre_move_list(work.pre_moves))
    yield section("Before the first step", numbered(paragraph(caution) for caution in BEFORE))
    yield section("Steps", step_list(work))
    if work.parts:
        yield section("Parts to bring", part_list(work.parts))


def _panel(plan: Plan) -> Iterator[RenderableType]:
    installation = plan.installation
    changed = [c.label for c in installation.circuits if plan.as_left.get(c.label) != plan.as_found.get(c.label)]
    if plan.as_found and changed:
        face = PanelFace(installation, plan.as_found, changed)
        yield section("The panel as found", face, *_face_legend("to be moved"))
    face = PanelFace(installation, plan.as_left, changed)
    yield section("The panel as left", face, *_face_legend("moved or new" if changed else ""))


def _face_legend(marked: str) -> list[Text]:
    mark = f"{MARK} {marked}   " if marked else ""
    return [Text(f"{mark}left: leg and space   right: breaker amps   \u250c\u2514 one two-pole", overflow="fold")]


def _after(answer: PlanAnswer) -> Iterator[RenderableType]:
    plan = answer.plan
    if answer.clamp_readings:
        notes = bullets(CLAMP_NOTES)
        yield section("Clamp check", paragraph(CLAMP_INTRO), clamp_table(answer.clamp_readings), Text(""), notes)
    yield section(
        "Directory",
        directory_table(plan.installation, plan.as_left),
        paragraph(directory_legend(plan.installation)),
    )
    if answer.cured:
        yield section("Cured by this plan", findings_list(answer.cured))
    if answer.findings:
        yield section("Findings as left", findings_list(answer.findings))
    if answer.cured or answer.findings:
        yield from (Text(""), paragraph(CODE_NOTE))
    yield section("Afterwards", bullets(AFTER if answer.work.steps else AFTER_NO_WORK))
