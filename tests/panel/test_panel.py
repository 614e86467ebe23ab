import pytest
from hypothesis import given
from hypothesis import strategies as st

from balancer.panel import Circuit, Installation, Leg, Panel, Space, Terminal, Volts, ordinary_spaces

TWELVE = Panel(spaces=ordinary_spaces(12))


class TestOrdinaryPanel:
    """Common practice, from memory: odd left, even right, a row on one leg, rows in turn."""

    def test_spaces_1_to_12_are_on_these_legs(self):
        assert "".join(TWELVE.leg(number) for number in range(1, 13)) == "AABBAABBAABB"

    def test_the_leg_is_a_where_half_the_number_rounded_up_is_odd(self):
        panel = Panel(spaces=ordinary_spaces(84))
        assert all((panel.leg(n) is Leg.A) == (-(-n // 2) % 2 == 1) for n in range(1, 85))

    def test_odd_numbers_are_left_and_1_and_2_are_in_the_top_row(self):
        assert TWELVE.at(0, 1) == Space(1, 0, 1, Leg.A)
        assert TWELVE.at(1, 1) == Space(2, 1, 1, Leg.A)
        assert TWELVE.at(0, 6) == Space(11, 0, 6, Leg.B)
        assert (TWELVE.rows, TWELVE.columns) == (6, (0, 1))

    def test_two_poles_take_neighbours_of_one_column(self):
        pairs = ((1, 3), (2, 4), (3, 5), (4, 6), (5, 7), (6, 8), (7, 9), (8, 10), (9, 11), (10, 12))
        assert TWELVE.two_pole_seats == pairs

    def test_an_odd_count_leaves_the_right_column_short(self):
        panel = Panel(spaces=ordinary_spaces(5))
        assert panel.at(1, 3) is None
        assert panel.two_pole_seats == ((1, 3), (2, 4), (3, 5))


def test_numbers_may_run_down_the_columns():
    panel = Panel(spaces=ordinary_spaces(12, numbered_down=True))
    assert [panel.at(0, row).number for row in range(1, 7)] == [1, 2, 3, 4, 5, 6]
    assert [panel.at(1, row).number for row in range(1, 7)] == [7, 8, 9, 10, 11, 12]
    assert "".join(panel.leg(number) for number in range(1, 13)) == "ABABABABABAB"
    assert panel.two_pole_seats == ((1, 2), (2, 3), (3, 4), (4, 5), (5, 6), (7, 8), (8, 9), (9, 10), (10, 11), (11, 12))


def test_rows_may_follow_another_order_of_legs():
    panel = Panel(spaces=ordinary_spaces(12, "ABBA"))
    assert "".join(panel.leg(number) for number in range(1, 13)) == "AABBBBAAAABB"
    # Rows 2 and 3, and rows 4 and 5, are on one leg: no two-pole breaker straddles them.
    assert panel.two_pole_seats == ((1, 3), (2, 4), (5, 7), (6, 8), (9, 11), (10, 12))


def test_row_legs_may_be_written_small():
    assert ordinary_spaces(4, "ba") == ordinary_spaces(4, "BA")


def test_a_map_of_our_own_is_taken_as_it_is():
    spaces = (Space(1, 0, 1, Leg.B), Space(2, 0, 2, Leg.A), Space(3, 1, 2, Leg.A), Space(4, 1, 4, Leg.B))
    panel = Panel(spaces=spaces)
    assert panel.by_number[3] is spaces[2]
    assert panel.two_pole_seats == ((1, 2),)
    assert panel.below(3) is None
    assert panel.at(1, 1) is None
    assert panel.rows == 4


class TestReach:
    @pytest.mark.parametrize(
        ("here", "there", "inches"),
        [
            pytest.param(1, 1, 0, id="same space"),
            pytest.param(1, 3, 1, id="next row"),
            pytest.param(1, 11, 5, id="five rows down"),
            pytest.param(1, 2, 12, id="across"),
            pytest.param(1, 12, 17, id="across and down"),
        ],
    )
    def test_one_inch_a_row_and_twelve_to_cross(self, here, there, inches):
        assert TWELVE.reach_in(here, there) == inches
        assert TWELVE.reach_in(there, here) == inches

    def test_the_crossing_is_the_panels_own(self):
        assert Panel(spaces=ordinary_spaces(12), crossing_in=7.5).reach_in(1, 4) == 8.5

    @given(st.tuples(*[st.integers(1, 12)] * 3))
    def test_a_detour_is_never_shorter(self, spaces):
        here, via, there = spaces
        assert TWELVE.reach_in(here, there) <= TWELVE.reach_in(here, via) + TWELVE.reach_in(via, there)


@given(st.integers(2, 84), st.sampled_from(["", "AB", "BA", "ABBA", "AAB"]), st.booleans())
def test_every_two_pole_seat_is_on_both_legs_and_in_one_column(count, row_legs, numbered_down):
    panel = Panel(spaces=ordinary_spaces(count, row_legs, numbered_down=numbered_down))
    assert [space.number for space in panel.spaces] == list(range(1, count + 1))
    for upper, lower in panel.two_pole_seats:
        assert panel.leg(upper) is panel.leg(lower).other
        assert panel.below(upper) is panel.by_number[lower]


def test_the_arrangement_as_found_holds_landed_circuits_only():
    landed = Circuit(label="landed", volts=Volts.V240, landing=(Terminal(7), Terminal(5)))
    new = Circuit(label="new", volts=Volts.V120)
    installation = Installation(panel=TWELVE, circuits=(landed, new))
    assert installation.as_found == {"landed": (Terminal(7), Terminal(5))}
    assert installation.by_label["new"] is new
