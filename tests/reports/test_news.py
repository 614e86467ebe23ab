from balancer.arrange.results import ObjectiveName, Progress
from balancer.reports.news import planning_news, reading_news


def test_reading_counts_rows() -> None:
    assert reading_news(525_600) == "Reading the log: 525,600 rows"


def test_planning_tells_best_bound_and_gap() -> None:
    text = planning_news(Progress(ObjectiveName.NEUTRAL, 22.2, 21.0))
    assert text == "peak neutral: best so far 22.2, no less than 21.0, gap 1.2 (Ctrl-C: stop and show)"
    assert len(text) <= 90


def test_planning_on_readings_tells_the_rows_that_matter() -> None:
    text = planning_news(Progress(ObjectiveName.NEUTRAL, 22.2, 21.9, 34_743, 2264))
    assert "; 2,264 of 34,743 rows matter " in text


def test_effort_is_counted_in_landings() -> None:
    assert "best so far 6.5, no less than 6, gap 0.5 " in planning_news(Progress(ObjectiveName.EFFORT, 6.5, 6.0))
