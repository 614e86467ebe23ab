import pytest
from hypothesis import given
from hypothesis import strategies as st
from rich.cells import cell_len

from balancer.reports.text import count_of, crop, format_amps, format_number, list_of, visible


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        pytest.param("Kitchen [bold]", "Kitchen [bold]", id="markup stays text"),
        pytest.param("\x1b[31mred", "\\x1b[31mred", id="ANSI colour becomes an escape"),
        pytest.param("a\nb\tc\r", "a\\nb\\tc\\r", id="line breaks stay in their line"),
        pytest.param("\x9b31m", "\\x9b31m", id="eight-bit control sequence introducer"),
        pytest.param("ab\u202edc", "ab\\u202edc", id="right-to-left override"),
        pytest.param("\ud800", "\\ud800", id="lone surrogate"),
        pytest.param("\u2028", "\\u2028", id="line separator"),
        pytest.param("caf\u00e9 \u6f22\u5b57 \U0001f525", "caf\u00e9 \u6f22\u5b57 \U0001f525", id="letters and emoji"),
    ],
)
def test_visible_escapes_what_a_terminal_would_obey(text: str, shown: str) -> None:
    assert visible(text) == shown


@given(st.text())
def test_visible_text_can_always_be_written_on_one_line(text: str) -> None:
    shown = visible(text)
    shown.encode("utf-8")
    assert len(shown.splitlines()) <= 1
    assert visible(shown) == shown


@given(st.text().map(visible), st.integers(2, 40))
def test_crop_gives_exactly_the_width_asked_for(text: str, width: int) -> None:
    assert cell_len(crop(text, width)) == width


def test_crop_marks_what_it_cut() -> None:
    assert crop("Kitchen counter", 8) == "Kitchen\u2026"
    assert crop("Bath", 8) == "Bath    "


@pytest.mark.parametrize(
    ("value", "shown"),
    [(31.25, "31.2"), (4.0, "4.0"), (0.254, "0.25"), (0.999, "1.00"), (0.0, "0.0"), (-0.0, "0.0"), (0.004, "0.0")],
)
def test_numbers_have_one_decimal_and_two_below_one(value: float, shown: str) -> None:
    assert format_number(value) == shown
    assert format_amps(value) == f"{shown} A"


def test_counts_agree_with_their_nouns() -> None:
    assert (count_of(1, "landing"), count_of(0, "landing")) == ("1 landing", "0 landings")


def test_long_lists_of_names_are_counted() -> None:
    assert list_of(["a"]) == "a"
    assert list_of(["a", "b", "c"]) == "a, b and c"
    assert list_of(list("abcdefgh"), most=4) == "a, b, c and 5 more"
    assert list_of([]) == ""
