"""Common grids of clocks."""

from fractions import Fraction as F

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.timeline.clocks import coarsest, finest, nearest_multiple, next_multiple

clocks = st.lists(
    st.builds(F, st.integers(1, 10**6), st.integers(1, 10**9)), min_size=1, max_size=5
)


@given(clocks)
def test_every_clock_is_a_whole_multiple_of_the_finest(some):
    assert all((clock / finest(some)).denominator == 1 for clock in some)


@given(clocks)
def test_the_coarsest_is_a_whole_multiple_of_every_clock(some):
    assert all((coarsest(some) / clock).denominator == 1 for clock in some)


def test_known_grids():
    some = [F(2, 10**6), F(3, 10**6), F(10, 10**9)]
    assert finest(some) == F(10, 10**9)
    assert coarsest(some) == F(6, 10**6)
    assert finest([F(4, 10**6), F(6, 10**6)]) == F(2, 10**6)
    assert finest([]) == coarsest([]) == 1


@pytest.mark.parametrize(("time", "near", "after"), [("1/2", 1, 1), ("5/4", 1, 2), ("-1/2", 0, 0)])
def test_rounding(time, near, after):
    assert nearest_multiple(F(time), F(1)) == near
    assert next_multiple(F(time), F(1)) == after
