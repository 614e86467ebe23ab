import pytest
from hypothesis import given
from hypothesis import strategies as st

from balancer.units import to_a, to_ma


@pytest.mark.parametrize(("amps", "milliamperes"), [(0, 0), (12.5, 12500), (0.0004, 0), (0.0006, 1), (-3.2, -3200)])
def test_amps_round_to_the_nearest_milliampere(amps, milliamperes):
    assert to_ma(amps) == milliamperes


@given(st.integers(-(10**9), 10**9))
def test_milliamperes_survive_the_way_there_and_back(milliamperes):
    assert to_ma(to_a(milliamperes)) == milliamperes
