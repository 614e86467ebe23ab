import json
from dataclasses import replace

from balancer.arrange.results import Plan, Stop
from balancer.errors import Problem
from balancer.reports.answers import AsFoundAnswer, PlanAnswer
from balancer.reports.document import (
    as_found_document,
    check_document,
    error_document,
    plan_document,
    tradeoff_document,
)

PEAK_KEYS = {
    "peak_leg_a",
    "peak_leg_b",
    "peak_heavy_leg",
    "peak_imbalance",
    "peak_neutral",
    "mean_neutral",
    "largest_possible_neutral",
}
COMMON_KEYS = {
    "schema",
    "supply",
    "scenarios",
    "as_found",
    "as_left",
    "bound",
    "landings_changed",
    "effort",
    "steps",
    "circuits",
    "findings",
    "complete",
}


def test_plan_document_has_the_common_part(answer: PlanAnswer) -> None:
    document = plan_document(answer)
    assert document.keys() >= COMMON_KEYS
    assert (document["schema"], document["supply"]) == (1, "120/240")
    assert document["scenarios"].items() >= {"kind": "connected", "count": 1}.items()
    assert document["as_found"].keys() == document["as_left"].keys() == PEAK_KEYS
    assert document["bound"].keys() == {"peak_neutral", "optimum_peak_neutral", "proven"}
    assert document["landings_changed"] == 3
    assert document["complete"] is True


def test_plan_document_gives_the_currents_of_the_panel(answer: PlanAnswer) -> None:
    document = plan_document(answer)
    # As found A: range 20 + 3, kitchen 10, bath 12, hall 9, heater 15, porch 1; B: 20, 15, lights 2, pump 1, desk 1.
    assert document["as_found"]["peak_leg_a"] == 70.0
    assert document["as_found"]["peak_leg_b"] == 39.0
    assert document["as_found"]["peak_neutral"] == 31.0
    # As left A: 20 + 15 + bath 12, hall 9, porch 1, new 4; B: 20 + 3 + 15 + 2 + 1 + 1 + kitchen 10.
    assert document["as_left"]["peak_leg_a"] == 61.0
    assert document["as_left"]["peak_leg_b"] == 52.0
    assert document["as_left"]["peak_neutral"] == 9.0


def test_steps_circuits_and_findings_have_their_keys(answer: PlanAnswer) -> None:
    document = plan_document(answer)
    (step,) = document["steps"]
    assert (step["circuit"], step["from"], step["to"], step["how"]) == ("kitchen", "5", "7", "move breaker")
    places = {each["circuit"]: (each["space"], each["leg"]) for each in document["circuits"]}
    assert places["kitchen"] == ("7", "B")
    assert places["range"] == ("3-1", "AB")
    assert places["heater"] == ("8b-10a", "AB")
    assert document["findings"][0].keys() >= {"rule", "severity", "circuits", "message"}
    assert document["findings"][0]["severity"] == "notice"


def test_amps_are_rounded_to_a_milliampere(answer: PlanAnswer, plan: Plan) -> None:
    rough = replace(answer, plan=replace(plan, bound_peak_neutral_a=-0.00001, optimum_peak_neutral_a=1.23456))
    bound = plan_document(rough)["bound"]
    assert str(bound["peak_neutral"]) == "0.0"
    assert bound["optimum_peak_neutral"] == 1.235


def test_a_plan_cut_off_is_not_complete(answer: PlanAnswer, plan: Plan) -> None:
    assert plan_document(replace(answer, plan=replace(plan, stop=Stop.TIME_LIMIT)))["complete"] is False


def test_new_layout_has_nothing_as_found(answer: PlanAnswer, plan: Plan) -> None:
    document = plan_document(replace(answer, plan=replace(plan, peaks_as_found=None)))
    assert document["as_found"] is None


def test_as_found_document_leaves_the_plan_empty(before: AsFoundAnswer) -> None:
    document = as_found_document(before)
    assert document.keys() >= COMMON_KEYS
    assert (document["as_left"], document["bound"], document["steps"]) == (None, None, [])
    places = {each["circuit"]: (each["space"], each["leg"]) for each in document["circuits"]}
    assert places["kitchen"] == ("5", "A")
    assert places["new"] == (None, None)


def test_check_document_has_findings_and_figures(before: AsFoundAnswer) -> None:
    document = check_document(before)
    assert [finding["severity"] for finding in document["findings"]] == ["error", "notice"]
    assert document["as_found"].keys() == PEAK_KEYS


def test_tradeoff_document_has_a_point_a_cap(answer: PlanAnswer) -> None:
    assert answer.fewer is not None
    document = tradeoff_document(answer.plan.installation, answer.plan.scenarios, answer.fewer)
    assert document["points"] == [
        {
            "landings": 1,
            "landings_changed": 1,
            "peak_neutral": 21.0,
            "peak_imbalance": 20.0,
            "peak_heavy_leg": 60.0,
            "bound": 20.98,
            "proven": True,
        }
    ]


def test_documents_name_the_landings_under_which_nothing_fits(answer: PlanAnswer) -> None:
    assert answer.fewer is not None
    fewer = replace(answer.fewer, refused=(0, 1), refusal="at most 1 landings may change")
    expected = {"landings": [0, 1], "reason": "at most 1 landings may change"}
    assert tradeoff_document(answer.plan.installation, answer.plan.scenarios, fewer)["refused"] == expected
    assert plan_document(replace(answer, fewer=fewer))["fewer_refused"] == expected
    assert plan_document(replace(answer, fewer=None))["fewer_refused"] == {"landings": [], "reason": ""}


def test_the_neutral_test_is_told_once(answer: PlanAnswer) -> None:
    document = plan_document(answer)
    assert "clamp its hot" in document["pre_move_test"]
    assert [test["circuit"] for test in document["pre_move_tests"]] == ["kitchen"]


def test_error_document_has_its_keys_in_order() -> None:
    problem = Problem("house.csv", "is not a voltage.", "Write 120.", 3, "volts", "121")
    document = error_document("The input cannot be used", [problem])
    assert json.dumps(document) == (
        '{"schema": 1, "error": "The input cannot be used", "problems": [{"file": "house.csv", "line": 3, '
        '"column": "volts", "value": "121", "problem": "is not a voltage.", "remedy": "Write 120."}]}'
    )
