from collections.abc import Callable
from dataclasses import replace

import pytest
from rich.cells import cell_len

from balancer.arrange.results import Aim, Plan
from balancer.arrange.work import Work
from balancer.panel import Installation
from balancer.reports.answers import AsFoundAnswer, PlanAnswer
from balancer.reports.terminal import as_found_report, check_report, plan_report, tradeoff_report
from balancer.rules import Finding

Render = Callable[..., str]

ORDER = (
    "Peak neutral falls from",
    "AS FOUND AND AS LEFT",
    "WHAT MAKES THE PEAK",
    "HOW GOOD IT IS",
    "WHAT FEWER LANDINGS WOULD GIVE",
    "WHAT THE FIGURES REST ON",
    "TESTS BEFORE SHUTTING OFF",
    "BEFORE THE FIRST STEP",
    "STEPS",
    "PARTS TO BRING",
    "THE PANEL AS FOUND",
    "THE PANEL AS LEFT",
    "CLAMP CHECK",
    "DIRECTORY",
    "CURED BY THIS PLAN",
    "FINDINGS AS LEFT",
    "AFTERWARDS",
)


def rename(installation: Installation, old: str, new: str) -> Installation:
    circuits = tuple(
        replace(circuit, label=new, description=new) if circuit.label == old else circuit
        for circuit in installation.circuits
    )
    return replace(installation, circuits=circuits)


def hostile_plan(plan: Plan, name: str) -> Plan:
    return replace(
        plan,
        installation=rename(plan.installation, "kitchen", name),
        as_found={name if label == "kitchen" else label: place for label, place in plan.as_found.items()},
        as_left={name if label == "kitchen" else label: place for label, place in plan.as_left.items()},
    )


def test_plan_report_tells_the_answer_first_and_cautions_before_the_steps(answer: PlanAnswer, render: Render) -> None:
    text = render(plan_report(answer))
    places = [text.index(part) for part in ORDER]
    assert places == sorted(places)
    assert text.index("lock out every source") < text.index("Move the 20 A breaker")


@pytest.mark.parametrize("width", [80, 100])
def test_no_line_of_a_report_is_wider_than_the_screen(answer: PlanAnswer, render: Render, width: int) -> None:
    reports = (plan_report(answer), as_found_report(answer.before), check_report(answer.before))
    for report in reports:
        assert max(cell_len(line) for line in render(report, width).splitlines()) <= width


def test_hostile_names_are_shown_as_text_within_the_width(
    answer: PlanAnswer, hostile_name: str, render: Render
) -> None:
    named = replace(answer, plan=hostile_plan(answer.plan, hostile_name))
    text = render(plan_report(named))
    assert "\x1b" not in text
    assert "\u202e" not in text
    joined = "".join(text.split())
    assert "k\\x1b[31m1" in joined
    assert "[/boldred]" in joined
    assert max(cell_len(line) for line in text.splitlines()) <= 80


def test_long_names_are_cropped_on_the_face_only(answer: PlanAnswer, hostile_name: str, render: Render) -> None:
    text = render(plan_report(replace(answer, plan=hostile_plan(answer.plan, hostile_name))))
    directory = "".join(text[text.index("DIRECTORY") :].split())
    face = text[text.index("THE PANEL AS LEFT") : text.index("CLAMP CHECK")]
    assert directory.count("x") >= 300
    assert face.count("xxx") == 0


def test_moved_circuits_carry_a_sign_before_and_after(answer: PlanAnswer, render: Render) -> None:
    text = render(plan_report(answer))
    assert "A *   5   kitchen" in text
    assert "B *   7   kitchen" in text
    assert "* to be moved" in text
    assert "* moved or new" in text


def test_remaining_errors_are_said_beside_the_verdict(
    answer: PlanAnswer, error_finding: Finding, render: Render
) -> None:
    text = " ".join(render(plan_report(replace(answer, findings=(error_finding,)))).split())
    assert "Errors remain that no re-landing cures (breaker-above-conductor)" in text
    assert "Errors remain" not in render(plan_report(answer))


def test_an_error_on_fixed_circuits_says_what_stands_in_the_way(
    answer: PlanAnswer, error_finding: Finding, render: Render
) -> None:
    installation = answer.plan.installation
    circuits = tuple(replace(c, is_fixed=c.label == "hall") for c in installation.circuits)
    plan = replace(answer.plan, installation=replace(installation, circuits=circuits))
    text = " ".join(render(plan_report(replace(answer, plan=plan, findings=(error_finding,)))).split())
    assert "that this plan cannot cure (breaker-above-conductor)" in text
    assert "Marked fixed: hall; release what may move." in text


def test_the_clamp_meter_comes_with_its_cautions(answer: PlanAnswer, render: Render) -> None:
    text = " ".join(render(plan_report(answer)).split())
    assert text.count("The panel is live and open: only a qualified person") == 2
    assert "A partner that is idle does not show." in text
    assert "the circuit is on the wrong leg: shut off and lock out again" in text


def test_a_plan_without_work_asks_for_no_torque(answer: PlanAnswer, render: Render) -> None:
    idle = replace(answer, work=Work(steps=(), parts=(), pre_moves=(), max_loose=0))
    assert "Torque" in render(plan_report(answer))
    assert "Torque" not in render(plan_report(idle))
    assert "licensed electrician decide" in " ".join(render(plan_report(idle)).split())


def test_cured_findings_stand_apart_from_those_that_remain(answer: PlanAnswer, render: Render) -> None:
    text = render(plan_report(answer))
    assert text.index("CURED") < text.index("ERROR  breaker-above-conductor") < text.index("FINDINGS AS LEFT")


def test_largest_possible_neutral_stands_beside_the_main(answer: PlanAnswer, render: Render) -> None:
    assert "Largest possible neutral (main: 100 A)" in render(plan_report(answer))


def test_assumed_loads_are_marked(answer: PlanAnswer, render: Render) -> None:
    installation = answer.plan.installation
    circuits = tuple(replace(c, load=replace(c.load, is_assumed=c.label == "hall")) for c in installation.circuits)
    plan = replace(answer.plan, installation=replace(installation, circuits=circuits))
    text = render(plan_report(replace(answer, plan=plan)))
    assert "~9.0" in text
    assert "~ marks an assumed load" in text
    assert "~" not in render(plan_report(answer))


def test_averages_are_called_averages(answer: PlanAnswer, render: Render) -> None:
    scenarios = replace(answer.plan.scenarios, are_averages=True)
    text = render(plan_report(replace(answer, plan=replace(answer.plan, scenarios=scenarios))))
    assert "All figures are averages" in " ".join(text.split())
    assert "All figures are averages" not in render(plan_report(answer))


def test_scenario_kind_is_called_a_planning_assumption(answer: PlanAnswer, render: Render) -> None:
    assert "connected loads, everything on (planning assumptions)" in render(plan_report(answer))


def test_check_report_shows_every_finding_in_full(before: AsFoundAnswer, render: Render) -> None:
    text = render(check_report(before))
    assert "1 error, 1 notice." in text
    assert "ERROR  breaker-above-conductor (hall)" in text
    assert "The breaker is too large." in text
    assert "NEC 2023, 240.4(D)" in text


def test_findings_come_with_who_decides(answer: PlanAnswer, before: AsFoundAnswer, render: Render) -> None:
    for report in (check_report(before), plan_report(answer)):
        assert "what is marked as from memory was not read in print" in " ".join(render(report).split())
    none = replace(answer, findings=(), cured=())
    assert "from memory was not read" not in " ".join(render(plan_report(none)).split())


def test_as_found_report_of_an_empty_panel_says_so(before: AsFoundAnswer, render: Render) -> None:
    empty = replace(before, peaks=None, explanation=None)
    assert "No circuit is landed yet" in render(as_found_report(empty))


def test_tradeoff_report_says_whether_the_curve_still_falls(answer: PlanAnswer, render: Render) -> None:
    assert answer.fewer is not None
    plan = answer.plan
    text = render(tradeoff_report(plan.installation, plan.scenarios, answer.fewer, Aim.NEUTRAL))
    assert "still falls" in text
    assert "21.0 A" in text
