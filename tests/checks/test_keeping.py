"""Which readings are kept: nothing that blocks is lost, and the least pass of each group."""

import math

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.base.finding import Limit, Reading, Verdict, at_least, at_most
from wellseq.checks.keeping import figures, numbered, telling, worst

values = st.floats(-10, 10) | st.sampled_from([math.nan, math.inf, -math.inf])
rows = st.lists(st.tuples(values, values, st.integers(0, 2), st.integers(0, 2)), max_size=30)


@settings(deadline=None)
@given(rows=rows, bounds=st.lists(values, min_size=30, max_size=30), side=st.booleans())
def test_telling_judges_as_the_judge_does(rows, bounds, side):
    side = "at least" if side else "at most"
    low, high, groups, steps = zip(*rows, strict=True) if rows else ((), (), (), ())
    bounds = bounds[: len(rows)]
    kept = telling(Limit(side, 0.0), low, high, groups, steps, bounds)
    assert kept == sorted(set(kept))
    verdicts = [
        Limit(side, bound).judge_between(*ends[:2])
        for bound, ends in zip(bounds, rows, strict=True)
    ]
    margins = [
        Limit(side, bound).margin(ends[1] if side == "at most" else ends[0])
        for bound, ends in zip(bounds, rows, strict=True)
    ]
    for index, verdict in enumerate(verdicts):
        same = [
            other
            for other in kept
            if verdicts[other] is verdict
            and groups[other] == groups[index]
            and (verdict is Verdict.PASS or steps[other] == steps[index])
        ]
        assert len(same) == 1
        if verdict is not Verdict.UNSURE:
            assert margins[same[0]] <= margins[index]


def test_the_first_of_equals_is_kept_and_nothing_gives_nothing():
    assert telling(at_most(1.0), [0.5] * 3, [0.5] * 3, [0] * 3, [0, 1, 2]) == [0]
    assert telling(at_most(1.0), [2.0] * 3, [2.0] * 3, [0] * 3, [0, 1, 1]) == [0, 1]
    assert telling(at_most(1.0), [], [], [], []) == []


def test_an_unsure_one_does_not_hide_a_failing_one_of_its_step():
    kept = telling(at_most(1.0), [math.nan, 2.0, 0.5], [math.nan, 2.0, 2.0], [0] * 3, [0] * 3)
    assert kept == [0, 1]


def test_worst_keeps_what_blocks_and_the_least_pass_per_subject_and_block(make):
    def reading(value, subject="a", block="run", **more):
        return Reading(
            value, at_least(1.0), "", make.origin(0), subject=subject, block=block, **more
        )

    blocking = [reading(0.0), reading(math.nan), reading(1.0, uncertainty=0.1)]
    passing = [reading(3.0), reading(2.0), reading(9.0, "b"), reading(4.0, block="arrival")]
    near = reading(9.0, between=(1.5, 20.0))
    kept = list(worst([*passing, *blocking, near]))
    assert kept[:1] + kept[2:3] == [blocking[0], blocking[2]]
    assert math.isnan(kept[1].value)
    assert kept[3:] == [near, passing[2], passing[3]]


def test_numbered_counts_as_they_come():
    assert numbered(["b", "a", "b", ("a", 1)]) == [0, 1, 0, 2]


@settings(deadline=None)
@given(st.floats(1e-150, 1e150), st.sampled_from([1.0, -1.0]))
def test_figures_move_a_value_by_less_than_half_a_unit_of_the_twelfth(value, sign):
    rounded = float(figures(sign * value))
    assert abs(rounded - sign * value) <= 5.1e-12 * value
    assert float(figures(rounded)) == rounded


def test_figures_take_the_dust_off_a_division_and_leave_a_real_step():
    assert 8.4 / 7e-7 != 1.2e7
    assert float(figures(8.4 / 7e-7)) == 1.2e7
    assert float(figures(1.2e7 * (1 + 1e-11))) > 1.2e7
    odd = [math.nan, math.inf, -math.inf, 0.0, 5e-324]
    assert np.array_equal(figures(odd), odd, equal_nan=True)
