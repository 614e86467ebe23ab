import datetime as dt
import json
import re
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from rich.console import Group

from balancer.arrange.results import ObjectiveName, ObjectiveResult, Plan
from balancer.electrical.days import Coverage, HighTimes, Run
from balancer.electrical.durations import Distribution, HoldOut, JudgedPart, Spread
from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenario_sets import connected_scenarios
from balancer.electrical.scenarios import ScenarioKind, Scenarios
from balancer.panel import Arrangement, Installation, Supply, Wire
from balancer.reports.answers import AsFoundAnswer, PlanAnswer, as_found_answer, plan_answer
from balancer.reports.document import as_found_document, plan_document
from balancer.reports.figures import basis_lines
from balancer.reports.readings import (
    bound_text,
    date_text,
    high_times_text,
    holdout_text,
    loss_text,
    readings_sections,
)
from balancer.reports.readings_answer import (
    NeutralLoss,
    ReadingsAnswer,
    ReadingsProof,
    found_readings,
    planned_readings,
    readings_answer,
)
from balancer.reports.readings_document import readings_document
from balancer.reports.terminal import as_found_report, plan_report

Render = Callable[..., str]

QUARTER_S = 900.0
DAYS = 28


@pytest.fixture
def readings(installation: Installation) -> Scenarios:
    """Four weeks of the connected load, every circuit rising and falling on its own, highest on the 20th day."""
    full = connected_scenarios(installation)
    rows = DAYS * 96
    shares = np.random.default_rng(4).random((rows, len(installation.circuits))).astype(np.float32) * 0.5
    shares[19 * 96 + 73] = 1
    return Scenarios(
        kind=ScenarioKind.READINGS,
        names=range(rows),
        neutral_a=full.neutral_a * shares,
        line_a=full.line_a * shares,
        are_averages=True,
        times=np.datetime64("2023-01-02T00:00:00") + np.arange(rows) * np.timedelta64(900, "s"),
        interval_s=QUARTER_S,
    )


@pytest.fixture
def log(installation: Installation, readings: Scenarios, as_left: Arrangement) -> ReadingsAnswer:
    currents = PanelCurrents(installation, readings)
    found, left = currents.currents(installation.as_found), currents.currents(as_left)
    answer = readings_answer(installation, readings, found, left)
    assert answer is not None
    return answer


def flat(level_a: float) -> Distribution:
    spread = Spread(median_a=level_a / 4, p95_a=level_a / 2, p99_a=level_a * 0.75, peak_a=level_a)
    return Distribution(neutral=spread, imbalance=spread, heavy_leg=spread)


def part(label: str, found_a: float | None, left_a: float) -> JudgedPart:
    return JudgedPart(
        label=label, intervals=1344, as_found=None if found_a is None else flat(found_a), as_left=flat(left_a)
    )


def held_out(found_a: float | None, left_a: float) -> HoldOut:
    found_before_a = None if found_a is None else 33.0
    return HoldOut(
        before=part("before 2023-01-16", found_before_a, 14.0), after=part("from 2023-01-16 on", found_a, left_a)
    )


def shown(render: Render, answer: ReadingsAnswer, width: int = 80) -> str:
    return render(Group(*readings_sections(answer)), width)


def words(text: str) -> str:
    return " ".join(text.split())


def section_of(text: str, title: str) -> str:
    return text[text.index(title) :].split("\n\n")[0]


def test_sections_come_in_order(log: ReadingsAnswer, render: Render) -> None:
    text = shown(render, replace(log, holdout=held_out(40, 16)))
    titles = ("HOW LONG IT CARRIES WHAT", "HOURS A YEAR ABOVE", "THE DAY, HOUR BY HOUR", "DOES IT HOLD?")
    assert [text.index(title) for title in titles] == sorted(text.index(title) for title in titles)


def test_no_line_is_wider_than_the_screen(log: ReadingsAnswer, render: Render) -> None:
    text = shown(render, replace(log, holdout=held_out(140, 116)))
    assert max(len(line) for line in text.splitlines()) <= 80
    assert "from 2023-01-16 on" in text


def test_spreads_stand_as_found_above_as_left(log: ReadingsAnswer, render: Render) -> None:
    answer = replace(log, as_found=flat(40), as_left=flat(20))
    lines = section_of(shown(render, answer), "HOW LONG").splitlines()
    figures = [line.split()[-6:] for line in lines if "as found " in line or "as left " in line][:2]
    assert figures == [["as", "found", "10.0", "20.0", "30.0", "40.0"], ["as", "left", "5.0", "10.0", "15.0", "20.0"]]


def test_figures_are_those_of_the_log(
    log: ReadingsAnswer, installation: Installation, readings: Scenarios, as_left: Arrangement
) -> None:
    currents = PanelCurrents(installation, readings)
    peaks, left = currents.peaks(installation.as_found), currents.currents(as_left)
    assert log.as_found is not None
    assert log.as_left is not None
    assert log.as_found.neutral.peak_a == pytest.approx(peaks.neutral.value_a)
    assert log.as_left.heavy_leg.peak_a == pytest.approx(float(left.heavy_leg.max()))
    highest = [level for level in log.levels if level.quantity == "neutral"][-1]
    assert highest.level_a < peaks.neutral.value_a
    share = np.mean(left.neutral > highest.level_a)
    assert highest.as_left_h == pytest.approx(8760 * share)


def test_hours_say_how_they_were_scaled(log: ReadingsAnswer, render: Render) -> None:
    text = section_of(shown(render, log), "HOURS A YEAR ABOVE")
    assert "Counted in 672 hours of readings and scaled to the 8,760 hours of a year" in words(text)
    assert "as found, h" in text
    assert "as left, h" in text


def test_the_days_are_named_with_their_dates(log: ReadingsAnswer, render: Render) -> None:
    text = shown(render, log)
    assert "The worst day, Saturday 2023-01-21" in text
    assert re.search(r"An ordinary day, [A-Z][a-z]+day 2023-01-\d\d", text)


def test_as_found_alone_shows_no_column_as_left(
    installation: Installation, readings: Scenarios, render: Render
) -> None:
    found = PanelCurrents(installation, readings).currents(installation.as_found)
    answer = readings_answer(installation, readings, found, None)
    assert answer is not None
    text = shown(render, answer)
    assert "as found" in text
    assert "as left" not in text
    assert "Energy lost" not in text


def test_a_new_layout_shows_no_column_as_found(
    installation: Installation, readings: Scenarios, as_left: Arrangement, render: Render
) -> None:
    left = PanelCurrents(installation, readings).currents(as_left)
    answer = readings_answer(installation, readings, None, left)
    assert answer is not None
    assert answer.levels
    text = shown(render, replace(answer, holdout=held_out(None, 16)))
    assert "as left" in text
    assert "as found" not in text


def test_scenarios_that_are_no_readings_have_no_statistics(installation: Installation) -> None:
    scenarios = connected_scenarios(installation)
    found = PanelCurrents(installation, scenarios).currents(installation.as_found)
    assert readings_answer(installation, scenarios, found, None) is None


def test_a_panel_with_nothing_landed_has_no_statistics_as_found(
    installation: Installation, readings: Scenarios
) -> None:
    unlanded = replace(installation, circuits=tuple(replace(c, landing=()) for c in installation.circuits))
    assert found_readings(unlanded, readings) is None
    stands = found_readings(installation, readings)
    assert stands is not None
    assert stands.as_left is None


def test_a_plan_made_on_readings_has_both_columns_and_its_proof(plan: Plan, readings: Scenarios) -> None:
    assert planned_readings(plan) is None
    answer = planned_readings(replace(plan, scenarios=readings, holdout=held_out(40, 16), search_rows=17))
    assert answer is not None
    assert None not in (answer.as_found, answer.as_left, answer.holdout)
    assert answer.proof == ReadingsProof(first=plan.objectives[0], rows=17)


def test_energy_is_in_kilowatt_hours_where_the_service_is_known(
    installation: Installation, readings: Scenarios, as_left: Arrangement
) -> None:
    supply = Supply(service_wire=Wire("2/0", "cu"), neutral_wire=Wire("2", "cu"), length_ft=100)
    known = replace(installation, panel=replace(installation.panel, supply=supply))
    currents = PanelCurrents(known, readings)
    found, left = currents.currents(known.as_found), currents.currents(as_left)
    answer = readings_answer(known, readings, found, left)
    assert answer is not None
    loss = answer.neutral_loss
    assert loss.as_found_kwh is not None
    assert loss.as_left_kwh is not None
    # 2 AWG copper, uncoated, direct current: 0.194 ohm per 1000 ft (NEC Chapter 9 Table 8).
    expected_kwh = 0.0194 * float(np.mean(found.neutral**2)) * 8.76
    assert loss.as_found_kwh == pytest.approx(expected_kwh, rel=0.05)
    assert loss.ratio == pytest.approx(loss.as_left_kwh / loss.as_found_kwh)


@pytest.mark.parametrize(
    ("loss", "expected"),
    [
        pytest.param(
            (0.34, None, None), "Energy lost in the neutral: as left 34 % of as found.", id="no service known"
        ),
        pytest.param(
            (0.25, 12.04, 3.01),
            "Energy lost in the neutral: as left 25 % of as found. In the service's neutral conductor that is 12 kWh "
            "as found and 3.01 kWh as left a year.",
            id="service known",
        ),
        pytest.param(
            (None, 12.04, None),
            "In the service's neutral conductor that is 12 kWh as found a year.",
            id="as found alone",
        ),
        pytest.param((None, None, None), "", id="nothing known"),
    ],
)
def test_loss_is_told_as_far_as_it_is_known(loss, expected) -> None:
    ratio, found_kwh, left_kwh = loss
    assert loss_text(NeutralLoss(ratio=ratio, as_found_kwh=found_kwh, as_left_kwh=left_kwh)) == expected


def test_a_neutral_that_never_carried_anything_gives_no_ratio(installation: Installation, readings: Scenarios) -> None:
    nothing = replace(readings, neutral_a=readings.neutral_a * 0, line_a=readings.line_a * 0)
    currents = PanelCurrents(installation, nothing).currents(installation.as_found)
    answer = readings_answer(installation, nothing, currents, currents)
    assert answer is not None
    assert answer.neutral_loss.ratio is None
    assert answer.levels == ()


def covered(log: ReadingsAnswer, days: float) -> ReadingsAnswer:
    first = dt.datetime(2023, 1, 2)
    coverage = Coverage(
        first=first, last=first + dt.timedelta(days=days), intervals=round(days * 96), interval_s=QUARTER_S
    )
    return replace(log, coverage=coverage)


@pytest.mark.parametrize(
    ("days", "expected"),
    [
        pytest.param(0.75, "18 hours are covered, fewer than two weeks", id="hours"),
        pytest.param(13.9, "14 days are covered, fewer than two weeks", id="just under two weeks"),
        pytest.param(14, "14 days are covered, less than half a year", id="two weeks"),
        pytest.param(182, "182 days are covered, less than half a year", id="just under half a year"),
    ],
)
def test_a_short_log_is_warned_of(log: ReadingsAnswer, render: Render, days, expected) -> None:
    short = covered(log, days)
    assert len(short.warnings) == 1
    assert expected in short.warnings[0]
    assert expected in words(shown(render, short))


def test_half_a_year_or_readings_to_judge_on_need_no_warning(log: ReadingsAnswer) -> None:
    assert covered(log, 183).warnings == ()
    assert replace(covered(log, 5), holdout=held_out(40, 16)).warnings == ()


@pytest.mark.parametrize(
    ("found_a", "left_a", "expected"),
    [
        pytest.param(40, 16, "peaks at 16.0 A as left and 40.0 A as found: it holds", id="better than as found"),
        pytest.param(16, 40, "peaks at 40.0 A as left and 16.0 A as found: it does not hold", id="worse"),
        pytest.param(16, 16.04, "it gains nothing there", id="the same"),
        pytest.param(None, 16, "the neutral peaks at 16.0 A (14.0 A before 2023-01-16).", id="nothing was landed"),
    ],
)
def test_a_plan_is_judged_on_readings_it_never_saw(found_a, left_a, expected) -> None:
    text = holdout_text(held_out(found_a, left_a))
    assert expected in text
    assert "14.0 A before 2023-01-16" in text


def test_both_parts_are_shown_as_found_and_as_left(log: ReadingsAnswer, render: Render) -> None:
    text = section_of(shown(render, replace(log, holdout=held_out(40, 16))), "DOES IT HOLD?")
    peaks = [line.split()[-3] for line in text.splitlines() if "as found  " in line or "as left  " in line]
    assert peaks == ["33.0", "14.0", "40.0", "16.0"]
    assert "1,344 intervals before 2023-01-16; 1,344 intervals from 2023-01-16 on" in words(text)


def test_a_day_is_told_with_its_day_of_the_week() -> None:
    # 1 January 2023 was a Sunday.
    assert date_text(dt.date(2023, 1, 1)) == "Sunday 2023-01-01"


@pytest.mark.parametrize(
    ("hours", "months", "expected"),
    [
        pytest.param(Run(first=17, share=0.62), None, "fall 62 % between 17:00 and 20:00.", id="evening"),
        pytest.param(Run(first=22, share=0.5), None, "fall 50 % between 22:00 and 01:00.", id="across midnight"),
        pytest.param(Run(first=5, share=0.3), None, "are spread over the day.", id="no hour stands out"),
        pytest.param(
            Run(first=6, share=0.7),
            Run(first=12, share=0.8),
            "between 06:00 and 09:00, 80 % from December to February.",
            id="across new year",
        ),
        pytest.param(
            Run(first=6, share=0.7), Run(first=10, share=0.5), "50 % from October to December.", id="to the year's end"
        ),
        pytest.param(Run(first=6, share=0.7), Run(first=6, share=0.4), "and 09:00.", id="no month stands out"),
    ],
)
def test_high_readings_are_told_by_hour_and_month(hours, months, expected) -> None:
    text = high_times_text(HighTimes(intervals=5256, hours=hours, months=months))
    assert text.startswith("The highest 1 % of the neutral's readings (5,256 intervals) ")
    assert text.endswith(expected)


def proof(*, is_proven: bool = True, by: str = "search", rows: int | None = 2264) -> ReadingsProof:
    first = ObjectiveResult(
        name=ObjectiveName.NEUTRAL, value=21.93, bound=21.92, is_proven=is_proven, proved_by=by if is_proven else ""
    )
    return ReadingsProof(first=first, rows=rows)


def test_the_bound_says_what_proved_it_and_on_which_intervals_it_rests() -> None:
    text = bound_text(proof(), 34_743)
    assert "a lower peak neutral than 21.9 A (proven by a complete search)" in text
    assert "Of 34,743 intervals 2,264 could exceed that" in text
    assert "proven by the solver" in bound_text(proof(by="solver"), 34_743)


def test_a_bound_that_was_not_reached_names_no_prover_and_uncounted_rows_are_not_told() -> None:
    text = bound_text(proof(is_proven=False, rows=None), 34_743)
    assert text == "No allowed arrangement has a lower peak neutral than 21.9 A (proven)."


def test_document_holds_the_same_as_plain_numbers(log: ReadingsAnswer) -> None:
    document = readings_document(replace(log, holdout=held_out(40, 16), proof=proof()))
    assert json.loads(json.dumps(document, allow_nan=False)) == document
    assert document["first"] == "2023-01-02T00:00:00"
    assert document["interval_s"] == 900
    assert document["hours_covered"] == 672
    assert log.as_found is not None
    assert document["as_found"]["neutral"]["peak"] == pytest.approx(log.as_found.neutral.peak_a, abs=0.0005)
    assert document["days"]["worst"]["date"] == "2023-01-21"
    assert len(document["days"]["worst"]["as_left"]["leg_b"]) == 24
    assert document["hold_out"]["after"]["as_left"]["neutral"]["peak"] == 16
    assert document["proof"] == {"proved_by": "search", "rows_that_matter": 2264}
    assert {row["quantity"] for row in document["hours_a_year_above"]} == {"neutral", "imbalance", "heavy_leg"}


def test_document_has_null_for_what_is_not_known(installation: Installation, readings: Scenarios) -> None:
    late = readings.part(slice(4, 90))
    found = PanelCurrents(installation, late).currents(installation.as_found)
    answer = readings_answer(installation, late, found, None)
    assert answer is not None
    document = readings_document(answer)
    assert document["as_left"] is document["hold_out"] is document["proof"] is document["high_times"] is None
    assert "ordinary" not in document["days"]
    assert document["days"]["worst"]["as_left"] is None
    assert document["days"]["worst"]["as_found"]["neutral"][0] is None
    assert document["neutral_loss"] == {"ratio": None, "as_found_kwh": None, "as_left_kwh": None}


def test_reports_and_documents_show_a_log_only_where_there_is_one(
    answer: PlanAnswer, before: AsFoundAnswer, log: ReadingsAnswer, render: Render
) -> None:
    with_log = replace(answer, readings=replace(log, proof=proof()))
    text = render(plan_report(with_log))
    assert text.index("WHAT MAKES THE PEAK") < text.index("THE DAY, HOUR BY HOUR") < text.index("WHAT THE FIGURES REST")
    assert "proven by a complete search" in words(text[text.index("HOW GOOD IT IS") :])
    assert "THE DAY" not in render(plan_report(answer))
    assert "THE DAY" in render(as_found_report(replace(before, readings=log)))
    assert plan_document(with_log)["readings"]["intervals"] == DAYS * 96
    assert plan_document(answer)["readings"] is None
    assert as_found_document(replace(before, readings=log))["readings"]["intervals"] == DAYS * 96


def test_answers_gather_the_log(plan: Plan, installation: Installation, readings: Scenarios) -> None:
    found = as_found_answer(installation, readings).readings
    planned = plan_answer(replace(plan, scenarios=readings)).readings
    assert found is not None
    assert planned is not None
    assert found.as_found == planned.as_found
    assert planned.as_left is not None
    assert as_found_answer(installation, connected_scenarios(installation)).readings is None


def test_scenarios_of_a_log_are_called_intervals(installation: Installation, readings: Scenarios) -> None:
    assert "readings, measured; 2688 intervals." in " ".join(basis_lines(installation, readings))
    assert "1 scenario." in " ".join(basis_lines(installation, connected_scenarios(installation)))
