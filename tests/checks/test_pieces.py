"""Durations of many pieces are exact, whether their instants are shared or not."""

from fractions import Fraction

from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.checks.pieces import durations_s

instants = st.lists(st.fractions(0, 2000, max_denominator=10**9), min_size=2, max_size=2)


@settings(deadline=None)
@given(ramps=st.lists(st.tuples(instants, st.integers(1, 3)), max_size=5), share=st.booleans())
def test_each_duration_is_rounded_once(make, ramps, share):
    part = Fraction(1, 10) if share else Fraction(1)
    pieces = []
    for (one, other), outputs in ramps:
        start, end = min(one, other), max(one, other) + 1
        pieces += [make.piece("a", start, end, 0.0, 1.0) for _ in range(outputs)]
    assert durations_s(pieces, part) == [float((p.end_s - p.start_s) * part) for p in pieces]
