"""`require`: claims of the author, with bounds of the right kind."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.model.effects import Claimed
from wellseq.model.steps.require import Require


def test_a_depth_has_a_floor_a_ceiling_or_both(drawn):
    depth = "require depth of bunch"
    assert drawn(f"{depth} above 40 V") == [("note", Claimed("depth", "bunch", 40.0, None))]
    assert drawn(f"{depth} below 90 V") == [("note", Claimed("depth", "bunch", None, 90.0))]
    assert drawn(f"{depth} between 40 V and wall") == [
        ("note", Claimed("depth", "bunch", 40.0, 90.0))
    ]


def test_throughout_asks_since_the_last_label(drawn):
    assert drawn("require depth of bunch above 40 V throughout") == [
        ("note", Claimed("depth", "bunch", 40.0, None, throughout=True))
    ]


def test_a_separation_is_of_two_clouds(drawn):
    assert drawn("require separation of bunch from plus above 3 cm") == [
        ("note", Claimed("separation", "bunch", 0.03, None, other="plus"))
    ]


def test_a_time_is_after_a_label_before_it(bench, pen):
    steps = '"start" hold for 1 s; hold for 2 s; require time after "start" below 4 s'
    bench.items(steps)[-1].step.draw(pen)
    assert pen.calls == [("note", Claimed("time", "", None, 4.0, label="start"))]


def test_a_label_that_comes_later_is_not_known_yet(bench):
    ((name, _, message),) = bench.refused('require time after "end" below 4 s; "end" hold for 1 s')
    assert (name, message) == ("unknown-name", 'no step before this one is labelled "end"')


@pytest.mark.parametrize("word", ["temperature", "number", "radius", "density"])
def test_what_needs_the_forecast_is_refused(bench, word):
    ((name, at, message),) = bench.refused(f"require {word} of bunch above 5 K")
    assert (name, at) == ("unknown-name", word)
    assert message.startswith("only depth, separation and time can be required yet")


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        (
            "require depth of bunch above 3 K",
            ("unit-mismatch", "3 K", "`above` needs a voltage (V), and this is 3 K"),
        ),
        (
            "require depth of bunch",
            ("syntax", "require", "`require` needs one of `above`, `below` and `between … and …`"),
        ),
        (
            "require depth of bunch above 1 V below 2 V",
            ("syntax", "require", "`require` needs one of `above`, `below` and `between … and …`"),
        ),
        (
            "require depth of bunch between 2 V and 2 V",
            ("syntax", "require", "after `between` the lower bound comes first"),
        ),
        (
            "require depth of bunch above -1 V",
            ("unit-mismatch", "-1 V", "`above` cannot be below zero, and this is -1 V"),
        ),
        ("require depth above 1 V", ("syntax", "require", "`require depth` needs `of`")),
        (
            "require separation of bunch above 1 cm",
            ("syntax", "require", "`require separation` needs `from`"),
        ),
        (
            "require separation of bunch from bunch above 1 cm",
            ("syntax", "require", "'bunch' has no separation from itself"),
        ),
        (
            '"a" hold for 1 s; require time of bunch after "a" below 1 s',
            ("syntax", "require", "`require time` does not take `of`"),
        ),
        (
            '"a" hold for 1 s; require time after "a" below 1 s throughout',
            ("syntax", "require", "`require time` does not take `throughout`"),
        ),
        (
            "require dept of bunch above 1 V",
            ("unknown-name", "dept", "'dept' is no quantity that can be named here"),
        ),
        ("require of bunch above 1 V", ("syntax", "require", "`require` needs a quantity")),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]


@given(st.floats(0, 1e6), st.floats(0, 1e6))
def test_of_two_bounds_the_lower_comes_first_or_nothing_is_made(first, second):
    words = {"quantity": "depth", "of": "bunch", "between": first, "and_": second}
    if first < second:
        step = Require.model_validate(words)
        assert (step.between, step.and_) == (first, second)
    else:
        with pytest.raises(ValueError, match="the lower bound comes first"):
            Require.model_validate(words)
