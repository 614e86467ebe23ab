"""The reports as the terminal shows them, put together from their parts."""

from __future__ import annotations

from collections.abc import Iterator

from rich.console import Group, RenderableType
from rich.text import Text

from balancer.arrange.results import Aim, Plan, Tradeoff
from balancer.electrical.scenarios import Scenarios
from balancer.panel import Installation
from balancer.reports.answers import AsFoundAnswer, PlanAnswer
from balancer.reports.cautions import AFTER, BEFORE
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
from balancer.reports.text import bullets, format_amps, numbered, paragraph, section, visible
from balancer.reports.verdict import flat_text, proof_table, tradeoff_table, verdict
from balancer.reports.work import clamp_table, part_list, pre_move_list, step_list
from balancer.rules import errors_of

CLAMP_INTRO = "Everything else off. Switch these on one after the other; the meter must read, in amps:"


def plan_report(answer: PlanAnswer) -> Group:
    """Show a plan: the answer first, then why, then the work, then the panel as it will hang."""
    plan = answer.plan
    blocks: list[RenderableType] = [_title(plan.installation), paragraph(verdict(plan), style="bold")]
    blocks += [paragraph(note) for note in (*_remaining_errors(answer), *plan.notes)]
    blocks += _figures(answer)
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
    peaks = answer.peaks
    blocks.append(
        paragraph(
            f"As found the neutral peaks at {format_amps(peaks.neutral.value_a)} and the heavy leg at "
            f"{format_amps(peaks.heavy_leg.value_a)}.",
            style="bold",
        )
    )
    blocks += [
        section(
            "Figures",
            peaks_table([PeaksColumn("as found", peaks, answer.averages_peak_a)]),
            Text(""),
            *_explained(answer),
        ),
        section("What the figures rest on", bullets(basis_lines(installation, answer.scenarios))),
        section("The panel as found", PanelFace(installation, installation.as_found), *_face_legend("")),
        section("Findings", paragraph(f"{findings_count(answer.findings)}; balancer check shows them in full.")),
    ]
    return Group(*blocks)


def check_report(answer: AsFoundAnswer) -> Group:
    """Show what is wrong with the panel as it stands."""
    blocks: list[RenderableType] = [
        _title(answer.installation),
        paragraph(f"{findings_count(answer.findings)}.".capitalize(), style="bold"),
    ]
    if answer.findings:
        blocks += [Text(""), findings_list(answer.findings)]
    blocks += [Text(""), bullets(answer.installation.notices)] if answer.installation.notices else []
    blocks += [Text(""), paragraph(AFTER[-1])]
    return Group(*blocks)


def tradeoff_report(installation: Installation, scenarios: Scenarios, tradeoff: Tradeoff, aim: Aim) -> Group:
    """Show what each further landing buys."""
    blocks: list[RenderableType] = [_title(installation), paragraph(flat_text(tradeoff), style="bold"), Text("")]
    blocks.append(tradeoff_table(tradeoff, aim))
    if tradeoff.stop:
        blocks.append(paragraph(f"Cut off by the {tradeoff.stop}: the figures are the best found so far."))
    blocks.append(section("What the figures rest on", bullets(basis_lines(installation, scenarios))))
    return Group(*blocks)


def _title(installation: Installation) -> Text:
    return Text(visible(installation.panel.name or installation.inventory_file or "Panel"), overflow="fold")


def _remaining_errors(answer: PlanAnswer) -> list[str]:
    if not answer.has_errors:
        return []
    rules = ", ".join(dict.fromkeys(finding.rule for finding in errors_of(answer.findings)))
    return [f"Errors remain that no re-landing cures ({rules}): see the findings. Mend them first."]


def _figures(answer: PlanAnswer) -> Iterator[RenderableType]:
    plan = answer.plan
    columns = [PeaksColumn("as left", plan.peaks_as_left, answer.averages_peak_a)]
    if plan.peaks_as_found is not None:
        columns.insert(0, PeaksColumn("as found", plan.peaks_as_found, answer.before.averages_peak_a))
    yield section(
        "As found and as left",
        peaks_table(columns),
        Text(""),
        paragraph(largest_possible_text(plan.installation)),
    )
    lines = [] if plan.peaks_as_found is None else when_lines(plan.scenarios, "As found", plan.peaks_as_found)
    lines += when_lines(plan.scenarios, "As left", plan.peaks_as_left)
    yield section(
        "What makes the peak",
        bullets(lines),
        Text(""),
        paragraph(f"As left, in {answer.explanation.scenario_name}:"),
        contributions_table(answer.explanation),
        paragraph(f"What holds it up: {answer.explanation.sentence}"),
    )
    yield section("How good it is", proof_table(plan.objectives))
    if answer.fewer is not None and answer.fewer.points:
        yield section("What fewer landings would give", tradeoff_table(answer.fewer, plan.options.aim))
    yield section("What the figures rest on", bullets(basis_lines(plan.installation, plan.scenarios)))


def _work(answer: PlanAnswer) -> Iterator[RenderableType]:
    work = answer.work
    if not work.steps:
        return
    if work.pre_moves:
        intro = (
            "While the panel is still live. A reading other than 0 A: the neutral is shared or crossed, do not move."
        )
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
        yield section("Clamp check", paragraph(CLAMP_INTRO), clamp_table(answer.clamp_readings))
    yield section(
        "Directory",
        directory_table(plan.installation, plan.as_left),
        paragraph(directory_legend(plan.installation)),
    )
    if answer.cured:
        yield section("Cured by this plan", findings_list(answer.cured))
    if answer.findings:
        yield section("Findings as left", findings_list(answer.findings))
    yield section("Afterwards", bullets(AFTER))


def _explained(answer: AsFoundAnswer) -> Iterator[RenderableType]:
    if answer.explanation is None or answer.peaks is None:
        return
    yield paragraph(largest_possible_text(answer.installation))
    yield bullets(when_lines(answer.scenarios, "As found", answer.peaks))
    yield Text("")
    yield paragraph(f"The neutral's peak, in {answer.explanation.scenario_name}:")
    yield contributions_table(answer.explanation)
