"""What one scenario proves by arithmetic, against every split tried out."""

import itertools

from hypothesis import given
from hypothesis import strategies as st

from balancer.arrange.subset_sums import nearest_to_zero

options = st.lists(st.lists(st.integers(-60, 60), min_size=1, max_size=3), max_size=7)


@given(st.integers(-200, 200), options)
def test_nearest_to_zero_is_what_trying_every_sum_finds(offset: int, each: list[list[int]]) -> None:
    sums = [offset + sum(chosen) for chosen in itertools.product(*each)]
    assert nearest_to_zero(offset, each) == min(abs(value) for value in sums)


def test_half_amperes_of_an_odd_number_leave_half_an_ampere() -> None:
    loads_ma = [500, 1000, 1500, 2500, 4000]
    assert sum(loads_ma) // 500 % 2 == 1
    assert nearest_to_zero(-sum(loads_ma), [[0, 2 * load] for load in loads_ma]) == 500


def test_textbook_set_splits_evenly() -> None:
    # Karmarkar-Karp textbook set {8, 7, 6, 5, 4}: optimum 0 (seen, article on the largest-differencing method).
    loads = [8, 7, 6, 5, 4]
    assert nearest_to_zero(-sum(loads), [[0, 2 * load] for load in loads]) == 0


def test_sums_too_large_to_list_prove_nothing() -> None:
    assert nearest_to_zero(0, [[3_000_000, 9_000_000]]) == 0
