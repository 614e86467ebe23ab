from collections.abc import Callable

import numpy as np
import pytest

from balancer.electrical.days import DayCurve
from balancer.reports.day_chart import CHART_LEGEND, ROWS, day_chart

Render = Callable[..., str]


def curve(leg_a=0.0, leg_b=0.0, neutral=0.0) -> DayCurve:
    return DayCurve(
        leg_a=np.full(24, float(leg_a)), leg_b=np.full(24, float(leg_b)), neutral=np.full(24, float(neutral))
    )


def marks_at(text: str, hour: int) -> str:
    """Marks of an hour of the first plot, from the lowest height up."""
    rows = [line.split("|")[1].ljust(24) for line in text.splitlines() if "|" in line]
    return "".join(row[hour] for row in reversed(rows))


@pytest.mark.parametrize(
    ("readings_a", "expected"),
    [
        pytest.param((9, 4, 5), "::::BN   A", id="all apart"),
        pytest.param((9, 5, 5), ":::::b   A", id="leg B at the neutral's height"),
        pytest.param((9, 0, 9), "B::::::::a", id="leg A alone makes the neutral"),
        pytest.param((9, 9, 0), "N        =", id="both legs at one height"),
        pytest.param((9, 9, 9), ":::::::::*", id="all three, two legs of a wye"),
        pytest.param((4, 5, 9), "::::AB:::N", id="the neutral above both legs, legs in phase"),
        pytest.param((8.6, 0.4, 7.4), "B::::::N A", id="to the nearest height"),
    ],
)
def test_each_reading_has_its_mark_at_its_height(render: Render, readings_a, expected) -> None:
    everyday = curve(*readings_a)
    everyday.leg_a[23] = 9
    assert marks_at(render(day_chart([("as found", everyday)])), 0) == expected


def test_hours_stand_in_their_columns(render: Render) -> None:
    day = curve()
    day.leg_a[6], day.leg_b[18] = 9, 9
    text = render(day_chart([("as found", day)]))
    assert marks_at(text, 6)[-1] == "A"
    assert marks_at(text, 18)[-1] == "B"
    axis, highest = text.splitlines()[-1], text.splitlines()[1]
    assert axis.index("6") == highest.index("A")
    assert axis.index("18") == highest.index("B")


def test_both_plots_share_one_scale(render: Render) -> None:
    text = render(day_chart([("as found", curve(90, 0, 90)), ("as left", curve(50, 40, 10))]))
    lines = text.splitlines()
    heading, middle, highest = lines[0], lines[-7], lines[1]
    assert heading.split() == ["as", "found", "as", "left"]
    assert "a" * 24 in highest
    assert "A" * 24 in middle
    assert lines[-8].split("|")[0].strip() == "60"


def test_amps_axis_counts_from_zero_in_round_steps(render: Render) -> None:
    labels = [line.split("|")[0].strip() for line in render(day_chart([("", curve(33))])).splitlines() if "|" in line]
    assert list(filter(None, reversed(labels))) == ["0", "8", "16", "24", "32"]


@pytest.mark.parametrize("highest_a", [0.0, 0.004, 0.3, 0.9, 1.0, 7.3, 9.0, 44.9, 45.1, 90.0, 99.9, 199.99, 1000.0])
def test_the_highest_reading_stands_in_the_upper_part_of_the_chart(render: Render, highest_a) -> None:
    marks = marks_at(render(day_chart([("as found", curve(highest_a))])), 5)
    assert len(marks) == ROWS + 1
    assert marks.rstrip()[-1] in "A*"
    if highest_a:
        assert len(marks.rstrip()) >= 7


def test_hours_that_were_not_read_stay_empty(render: Render) -> None:
    day = curve(9, 3, 6)
    for values in (day.leg_a, day.leg_b, day.neutral):
        values[4] = np.nan
    text = render(day_chart([("as found", day)]))
    assert marks_at(text, 4).strip() == ""
    assert marks_at(text, 5).strip() != ""


def test_a_chart_is_ascii_fits_eighty_columns_and_has_no_colour(render: Render) -> None:
    chart = day_chart([("as found", curve(9, 3, 6)), ("as left", curve(7, 5, 2))])
    text = render(chart)
    assert text.isascii()
    assert max(len(line) for line in text.splitlines()) <= 66
    assert chart.spans == []


def test_legend_names_every_mark() -> None:
    for mark in ("A, B", "N over colons", "=:", "a, b:", "*:"):
        assert mark in CHART_LEGEND
