import pytest
from hypothesis import given
from hypothesis import strategies as st

from balancer.panel import Terminal, format_landing, parse_landing


@pytest.mark.parametrize(
    ("text", "landing"),
    [
        ("7", (Terminal(7),)),
        ("5-7", (Terminal(5), Terminal(7))),
        ("7-5", (Terminal(7), Terminal(5))),
        ("12a", (Terminal(12, "a"),)),
        ("12B-14A", (Terminal(12, "b"), Terminal(14, "a"))),
        (" 5 - 7 ", (Terminal(5), Terminal(7))),
        ("5\u20137", (Terminal(5), Terminal(7))),
        ("5/7", (Terminal(5), Terminal(7))),
        ("5,7", (Terminal(5), Terminal(7))),
    ],
)
def test_a_landing_is_read_as_it_is_written(text, landing):
    assert parse_landing(text) == landing


@pytest.mark.parametrize("text", ["", "0", "-7", "5-", "5-7-9", "12c", "12ab", "1.5", "May-7", "\u0667", "07", "1000"])
def test_what_is_no_space_is_refused(text):
    with pytest.raises(ValueError, match="is not a space: write 7, 5-7"):
        parse_landing(text)


TERMINALS = st.builds(Terminal, st.integers(1, 84), st.sampled_from(["", "a", "b"]))


@given(st.lists(TERMINALS, min_size=1, max_size=2).map(tuple))
def test_a_printed_landing_reads_back(landing):
    assert parse_landing(format_landing(landing)) == landing


def test_no_landing_prints_as_nothing():
    assert format_landing(()) == ""


def test_a_full_width_breaker_fills_both_halves():
    assert Terminal(12).parts == ((12, "a"), (12, "b"))
    assert Terminal(12, "b").parts == ((12, "b"),)


def test_terminals_sort_by_space_then_half():
    assert sorted([Terminal(12, "b"), Terminal(2), Terminal(12, "a")]) == [
        Terminal(2),
        Terminal(12, "a"),
        Terminal(12, "b"),
    ]
